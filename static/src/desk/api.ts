// The desk's one way to the server. Views call these functions; nothing else in desk/ fetches.

import type { JobPage, JobSummary, Person, Plan, QuarantinedEntry, Role, Session, Sheet, Verdict } from '../types';

/** The server answered, and the answer is no: problem+json with what to change. */
export class ApiProblem extends Error {
  constructor(
    readonly status: number,
    readonly code: string,
    readonly field: string,
    readonly detail: string,
    readonly requestId: string,
  ) {
    super(detail);
    this.name = 'ApiProblem';
  }
}

/** No answer that can be believed: no network, a proxy's page, JSON cut short. Nothing is known about what was sent. */
export class Unreachable extends Error {
  constructor(cause: string) {
    super(cause);
    this.name = 'Unreachable';
  }
}

/** The signed head of the log, as every sync answer carries it. */
export interface LogState {
  instance: string;
  epoch: number;
  head: { seq: number; hash: string };
}

export interface JobToIssue extends Plan {
  id: string;
}

export interface Decision {
  /** Made once per decision, kept over a retry: the server stores it once. */
  id: string;
  decision: 'sign off' | 'send back';
  remark: string | null;
  base_seq: number;
}

export interface Invitation {
  link: string;
  until?: string | null;
}

/** The server words its details as half a sentence; on the page they stand alone. */
function sentence(text: string): string {
  const begun = text.charAt(0).toLocaleUpperCase() + text.slice(1);
  return /[.!?…]$/.test(begun) ? begun : `${begun}.`;
}

let signedOut: () => void = () => {};

/** Who is told when the server no longer knows this session. Sign-in itself answers its own 401. */
export function onSignedOut(listener: () => void): void {
  signedOut = listener;
}

const patienceMs = 20_000;

async function call<T>(method: 'GET' | 'POST' | 'DELETE', path: string, body?: unknown): Promise<T> {
  const headers: Record<string, string> = { Accept: 'application/json' };
  const init: RequestInit = { method, headers, credentials: 'same-origin', cache: 'no-store' };
  if (method !== 'GET') {
    // The header that a form of a strange page cannot send, and the type that the server insists on.
    headers['X-Crossplumb'] = '1';
    headers['Content-Type'] = 'application/json';
    init.body = JSON.stringify(body ?? {});
  }
  const stop = new AbortController();
  const timer = setTimeout(() => stop.abort(), patienceMs);
  let answer: Response;
  let text: string;
  try {
    answer = await fetch(path, { ...init, signal: stop.signal });
    text = await answer.text();
  } catch (err) {
    throw new Unreachable(err instanceof Error ? err.message : String(err));
  } finally {
    clearTimeout(timer);
  }
  if (answer.status === 204) return undefined as T;
  const type = answer.headers.get('Content-Type') ?? '';
  let parsed: unknown;
  try {
    // A captive portal answers 200 with a page of its own: not an answer of ours.
    if (!/\bjson\b/.test(type)) throw new Error(`status ${answer.status}, ${type || 'no content type'}`);
    parsed = JSON.parse(text);
  } catch (err) {
    throw new Unreachable(err instanceof Error ? err.message : String(err));
  }
  if (answer.ok) return parsed as T;
  const p = parsed as { code?: string; field?: string; detail?: string; title?: string; request_id?: string };
  if (answer.status === 401 && !path.startsWith('/api/session')) signedOut();
  throw new ApiProblem(
    answer.status,
    p.code ?? '',
    p.field ?? '',
    sentence(p.detail || p.title || `status ${answer.status}`),
    p.request_id ?? '',
  );
}

/** Who is signed in here, or null. */
export async function session(): Promise<Session | null> {
  try {
    return await call<Session>('GET', '/api/session');
  } catch (err) {
    if (err instanceof ApiProblem && err.status === 401) return null;
    throw err;
  }
}

export function signIn(name: string, passphrase: string): Promise<Session> {
  return call('POST', '/api/session', { name, passphrase });
}

export function acceptInvitation(invitation: string, name: string, passphrase: string): Promise<Session> {
  return call('POST', '/api/session', { invitation, name, passphrase });
}

export function signOut(): Promise<void> {
  return call('DELETE', '/api/session');
}

/** Every job of every stage: the tabs count them, so they are fetched together. */
export async function jobs(): Promise<JobSummary[]> {
  return (await call<{ jobs: JobSummary[] | null }>('GET', '/api/jobs')).jobs ?? [];
}

export function job(id: string): Promise<JobPage> {
  return call('GET', `/api/jobs/${encodeURIComponent(id)}`);
}

export function issue(job: JobToIssue): Promise<unknown> {
  return call('POST', '/api/jobs', job);
}

export function decide(job: string, decision: Decision): Promise<unknown> {
  return call('POST', `/api/jobs/${encodeURIComponent(job)}/decision`, decision);
}

export function logState(): Promise<LogState> {
  return call('GET', '/api/state');
}

/** Entries that the server set apart, with the reason, of every job. */
export async function quarantine(): Promise<QuarantinedEntry[]> {
  const answer = await call<{ entries?: QuarantinedEntry[] | null; quarantine?: QuarantinedEntry[] | null }>(
    'GET',
    '/api/quarantine',
  );
  return answer.entries ?? answer.quarantine ?? [];
}

export async function people(): Promise<Person[]> {
  return (await call<{ people: Person[] | null }>('GET', '/api/people')).people ?? [];
}

export function invite(role: Role, crew: string | null): Promise<Invitation> {
  return call('POST', '/api/people/invitations', { role, crew });
}

/** One operation of calc. Throws ApiProblem with the field that is wrong. */
export function reckon<T>(op: string, input: unknown): Promise<T> {
  return call('POST', `/api/calc/${encodeURIComponent(op)}`, input);
}

/** The verdict on a sheet as it stands. Throws ApiProblem with the field that is wrong. */
export function judge(sheet: Sheet): Promise<Verdict> {
  return call('POST', '/api/calc/mount.verdict', sheet);
}
