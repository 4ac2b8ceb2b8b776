// The one way to calc in the page: questions wait in a queue, the Worker gets one at a time, and a Worker that died or
// hangs is replaced. Views call reckon and nothing else.
import type { Problem } from '../types.ts';
import type { Question, Reply } from './worker.ts';

declare const CALC_WORKER: string; // filled in by mkstatic: the hashed name

/** Why there is no answer. Codes beyond calc's own: "timeout", "replaced", "unavailable". */
export class CalcProblem extends Error implements Problem {
  readonly code: string;
  readonly field: string;

  constructor(code: string, field: string, message: string) {
    super(message);
    this.name = 'CalcProblem';
    this.code = code;
    this.field = field;
  }
}

export interface ReckonOptions {
  /** A later question with the same key takes the place of one that still waits; that one fails as "replaced". */
  replaces?: string;
  timeoutMs?: number;
}

interface Waiting {
  op: string;
  json: string;
  replaces: string | undefined;
  timeoutMs: number;
  tries: number;
  resolve(answer: unknown): void;
  reject(problem: CalcProblem): void;
}

/** What the client needs of a Worker; tests hand in their own. */
export interface WorkerLike {
  onmessage: ((event: MessageEvent<Reply>) => void) | null;
  onerror: ((event: ErrorEvent) => void) | null;
  postMessage(question: Question): void;
  terminate(): void;
}

/** The slowest operation takes well under a second on a phone; the first one waits for the wasm to come and compile. */
const TIMEOUT_MS = 20_000;
/** wasm memory only grows: an instance that nobody asks is let go. */
const IDLE_MS = 10 * 60_000;
/** A question that killed two instances is not given to a third. */
const TRIES = 2;

export class CalcClient {
  private worker: WorkerLike | null = null;
  private readonly queue: Waiting[] = [];
  private current: (Waiting & { id: number }) | null = null;
  private nextId = 1;
  private timer: ReturnType<typeof setTimeout> | undefined;
  private idle: ReturnType<typeof setTimeout> | undefined;
  private readonly makeWorker: () => WorkerLike;

  /** Milliseconds that the last answer took inside the Worker. */
  lastMs: number | null = null;

  constructor(makeWorker: () => WorkerLike) {
    this.makeWorker = makeWorker;
  }

  reckon<T>(op: string, input: unknown, options: ReckonOptions = {}): Promise<T> {
    return new Promise<T>((resolve, reject) => {
      const asked: Waiting = {
        op,
        json: JSON.stringify(input),
        replaces: options.replaces,
        timeoutMs: options.timeoutMs ?? TIMEOUT_MS,
        tries: 0,
        resolve: resolve as (answer: unknown) => void,
        reject,
      };
      if (asked.replaces !== undefined) {
        const at = this.queue.findIndex((waiting) => waiting.replaces === asked.replaces);
        if (at >= 0) {
          const [old] = this.queue.splice(at, 1);
          old?.reject(new CalcProblem('replaced', '', 'a later question took its place'));
        }
      }
      this.queue.push(asked);
      this.next();
    });
  }

  /** Ends the Worker; the next question starts a new one. */
  stop(): void {
    clearTimeout(this.timer);
    clearTimeout(this.idle);
    if (this.worker) {
      this.worker.onmessage = null;
      this.worker.onerror = null;
      this.worker.terminate();
    }
    this.worker = null;
  }

  private next(): void {
    if (this.current) return;
    const asked = this.queue.shift();
    clearTimeout(this.idle);
    if (!asked) {
      this.idle = setTimeout(() => this.stop(), IDLE_MS);
      return;
    }
    const id = this.nextId++;
    this.current = { ...asked, id, tries: asked.tries + 1 };
    this.timer = setTimeout(() => this.giveUp('timeout', `no answer within ${asked.timeoutMs / 1000} s`), asked.timeoutMs);
    try {
      this.worker ??= this.start();
      this.worker.postMessage({ id, op: asked.op, json: asked.json });
    } catch (error) {
      this.giveUp('unavailable', `the calculation cannot start here: ${error}`);
    }
  }

  private start(): WorkerLike {
    const worker = this.makeWorker();
    worker.onmessage = ({ data }) => this.take(data);
    worker.onerror = (event) => this.died(event.message || 'the calculation failed to load');
    return worker;
  }

  private take(reply: Reply): void {
    if ('dead' in reply) {
      this.died(reply.dead);
      return;
    }
    const asked = this.current;
    if (!asked || asked.id !== reply.id) return;
    clearTimeout(this.timer);
    this.current = null;
    this.lastMs = reply.ms;
    if ('answer' in reply) {
      try {
        asked.resolve(JSON.parse(reply.answer));
      } catch {
        asked.reject(new CalcProblem('internal', '', 'the answer is no JSON'));
      }
    } else {
      asked.reject(new CalcProblem(reply.problem.code, reply.problem.field, reply.problem.message));
    }
    this.next();
  }

  /** The instance is gone: a new one gets the question again, but not for ever. */
  private died(why: string): void {
    const asked = this.current;
    this.stop();
    this.current = null;
    if (asked) {
      if (asked.tries < TRIES) this.queue.unshift(asked);
      else asked.reject(new CalcProblem('unavailable', '', why));
    }
    this.next();
  }

  /** A hanging question is not asked again: it would hang again, and the ones behind it wait. */
  private giveUp(code: string, message: string): void {
    const asked = this.current;
    this.stop();
    this.current = null;
    asked?.reject(new CalcProblem(code, '', message));
    this.next();
  }
}

const client = new CalcClient(() => new Worker(CALC_WORKER) as unknown as WorkerLike);

/** Asks calc; rejects with CalcProblem. The input and the answer are those of the named operation. */
export function reckon<T>(op: string, input: unknown, options?: ReckonOptions): Promise<T> {
  return client.reckon<T>(op, input, options);
}

/** Starts wasm early, so that the first reading does not wait for it. */
export function warmUp(): void {
  // An operation that does not exist makes the shortest answer; that it is a problem does not matter here.
  client.reckon('warm.up', {}).catch(() => undefined);
}

/** Milliseconds that the last answer took inside the Worker, null before the first. */
export function lastReckonMs(): number | null {
  return client.lastMs;
}
