// One request to the server, and what counts as its answer. A captive portal says 200 to everything: status, content
// type and shape must be right, or there was no answer.

/** The server answered, and the answer is no. */
export class ServerProblem extends Error {
  readonly status: number;
  readonly code: string;
  readonly field: string;
  /** Seconds that the server asks to wait, from Retry-After. */
  readonly retryAfter: number | null;

  constructor(status: number, code: string, field: string, detail: string, retryAfter: number | null) {
    super(detail);
    this.name = 'ServerProblem';
    this.status = status;
    this.code = code;
    this.field = field;
    this.retryAfter = retryAfter;
  }
}

/** No answer that can be believed. Whether the request arrived is unknown; it may be sent again. */
export class NoAnswer extends Error {
  constructor(why: string) {
    super(why);
    this.name = 'NoAnswer';
  }
}

/** Thirty seconds: a full batch is 256 KiB, and a cell at the edge of coverage gives some 100 kbit/s. */
const PATIENCE_MS = 30_000;

/** `right` looks at the shape: only if it says yes is the answer one. */
export async function ask<T>(
  method: 'GET' | 'POST' | 'DELETE',
  path: string,
  body: unknown,
  right: (answer: unknown) => answer is T,
): Promise<T> {
  const headers: Record<string, string> = { Accept: 'application/json' };
  const init: RequestInit = { method, headers, credentials: 'same-origin', cache: 'no-store', redirect: 'error' };
  if (method !== 'GET') {
    headers['X-Crossplumb'] = '1'; // a form on a strange page cannot set it
    headers['Content-Type'] = 'application/json';
    init.body = JSON.stringify(body ?? {});
  }
  const patience = new AbortController();
  const timer = setTimeout(() => patience.abort(), PATIENCE_MS);
  let response: Response;
  let text: string;
  try {
    response = await fetch(path, { ...init, signal: patience.signal });
    text = await response.text();
  } catch (error) {
    throw new NoAnswer(String(error));
  } finally {
    clearTimeout(timer);
  }
  const type = (response.headers.get('Content-Type') ?? '').split(';')[0]?.trim();
  let answer: unknown = null;
  if (response.status !== 204) {
    if (type !== 'application/json' && type !== 'application/problem+json') {
      throw new NoAnswer(`status ${response.status} with ${type || 'no content type'}: not our server`);
    }
    try {
      answer = JSON.parse(text);
    } catch {
      throw new NoAnswer(`status ${response.status} with JSON cut short`);
    }
  }
  if (!response.ok) {
    const problem = answer as { code?: unknown; field?: unknown; detail?: unknown; title?: unknown } | null;
    const word = (value: unknown) => (typeof value === 'string' ? value : '');
    const after = Number(response.headers.get('Retry-After'));
    throw new ServerProblem(
      response.status,
      word(problem?.code),
      word(problem?.field),
      word(problem?.detail) || word(problem?.title) || `status ${response.status}`,
      Number.isFinite(after) && after > 0 ? after : null,
    );
  }
  if (type === 'application/problem+json' || !right(answer)) throw new NoAnswer('an answer of another shape: not our server');
  return answer;
}

export function isObject(value: unknown): value is Record<string, unknown> {
  return typeof value === 'object' && value !== null && !Array.isArray(value);
}
