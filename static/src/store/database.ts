// IndexedDB of this phone: opening, upgrading, losing it, and telling who watches that something changed.
import { openDB } from 'idb';
import type { DBSchema, IDBPDatabase, IDBPTransaction, StoreNames } from 'idb';
import type { JobSummary, Plan, Session, Whereabouts } from '../types.ts';
import { Observable } from './observable.ts';
import type { Watchable } from './observable.ts';

export interface EntryRow {
  id: string;
  device: string;
  device_seq: number;
  /** "" stands for no job: IndexedDB has no null keys. */
  job: string;
  raw: string;
  hash: string;
  own: 0 | 1;
  whereabouts: Whereabouts;
  seq: number | null;
  reason: string | null;
  author_name: string | null;
  received_at: string | null;
}

export interface JobRow {
  id: string;
  summary: JobSummary;
  plan: Plan;
  pulled_at: string;
}

export interface DeviceRow {
  id: string;
  /** device_seq that the next entry gets. */
  next_seq: number;
  /** Hash of the last entry, "" before the first. */
  head: string;
}

/** What the server said last. A new epoch, or less of this device than before: it was restored and may have lost what we sent. */
export interface ServerRow {
  instance: string | null;
  epoch: number | null;
  head_seq: number | null;
  head_hash: string | null;
  /** Up to which number of this device the server once said to have everything. */
  contiguous: number;
}

export interface Settings {
  device: DeviceRow;
  session: Session;
  server: ServerRow;
  [other: string]: unknown;
}

export interface Schema extends DBSchema {
  entries: {
    key: string;
    value: EntryRow;
    indexes: { 'by job': string; 'by whereabouts': [number, string]; 'by device': [string, number] };
  };
  /** Own entries that the server has not answered for, in the order in which they were made. */
  outbox: { key: number; value: { device_seq: number; id: string } };
  jobs: { key: string; value: JobRow };
  drafts: { key: string; value: unknown };
  settings: { key: string; value: unknown };
}

export type Database = IDBPDatabase<Schema>;
type Transaction = IDBPTransaction<Schema, StoreNames<Schema>[], 'versionchange'>;

/**
 * One step a version, each only adding: an older page's data stays readable, and no step drops what waits to go up.
 * A step is never edited after it shipped; a new one is put behind it.
 */
const steps: ((db: Database, tx: Transaction) => void)[] = [
  function first(db) {
    const entries = db.createObjectStore('entries', { keyPath: 'id' });
    entries.createIndex('by job', 'job');
    entries.createIndex('by whereabouts', ['own', 'whereabouts']);
    entries.createIndex('by device', ['device', 'device_seq'], { unique: true });
    db.createObjectStore('outbox', { keyPath: 'device_seq' });
    db.createObjectStore('jobs', { keyPath: 'id' });
    db.createObjectStore('drafts');
    db.createObjectStore('settings');
  },
];

export const NAME = 'crossplumb';

export type StoreHealth =
  | { state: 'ok' }
  /** Another window holds an older version open: close the other windows. */
  | { state: 'blocked' }
  /** A newer page upgraded the store: this one has to be reloaded. */
  | { state: 'outdated' }
  /** Storage cannot be opened or was lost: nothing is being saved. */
  | { state: 'failed'; why: string };

const health = new Observable<StoreHealth>({ state: 'ok' });
export const storeHealth: Watchable<StoreHealth> = health;

let opening: Promise<Database> | null = null;

/** The database, opened once; after the browser has lost it, opened again at the next call. */
export function database(): Promise<Database> {
  opening ??= open().catch((error: unknown) => {
    opening = null;
    health.set({ state: 'failed', why: String(error) });
    throw error;
  });
  return opening;
}

async function open(): Promise<Database> {
  const db = await openDB<Schema>(NAME, steps.length, {
    upgrade(upgraded, from, _to, tx) {
      for (const step of steps.slice(from)) step(upgraded, tx as unknown as Transaction);
    },
    blocked() {
      health.set({ state: 'blocked' });
    },
    blocking(_current, _wanted, event) {
      // A newer page waits for this one; holding on would hang it.
      (event.target as IDBDatabase).close();
      opening = Promise.reject(new Error('a newer version of the page took over the store: reload'));
      opening.catch(() => undefined);
      health.set({ state: 'outdated' });
    },
    terminated() {
      opening = null;
      health.set({ state: 'failed', why: 'the browser closed the storage' });
    },
  });
  health.set({ state: 'ok' });
  return db;
}

/** Runs against the database; when the connection turns out to be gone (seen on iOS), once more against a new one. */
export async function withDatabase<T>(run: (db: Database) => Promise<T>): Promise<T> {
  try {
    return await run(await database());
  } catch (error) {
    const lost = error instanceof DOMException && (error.name === 'InvalidStateError' || error.name === 'UnknownError');
    if (!lost || health.value.state === 'outdated') throw error;
    opening = null;
    return run(await database());
  }
}

/**
 * One transaction that is either wholly on disk when this resolves, or has left nothing behind. Strict: the answer comes
 * after the disk has it, not only the system's cache. Without the abort, what was put before an exception would stay.
 * `run` must await nothing but this transaction: anything else ends it.
 */
export function write<Names extends StoreNames<Schema>[], T>(
  stores: Names,
  run: (tx: IDBPTransaction<Schema, Names, 'readwrite'>) => Promise<T>,
): Promise<T> {
  return withDatabase(async (db) => {
    const tx = db.transaction(stores, 'readwrite', { durability: 'strict' });
    const done = tx.done;
    done.catch(() => undefined); // told below
    try {
      const result = await run(tx);
      await done;
      return result;
    } catch (error) {
      try {
        tx.abort();
      } catch {
        // it had ended by itself
      }
      await done.catch(() => undefined);
      throw error;
    }
  });
}

// ---- Telling of changes ------------------------------------------------------------------------------------------

const listeners = new Set<() => void>();
/** Other windows of the same phone. */
const others = typeof BroadcastChannel === 'undefined' ? null : new BroadcastChannel('crossplumb store');
if (others) {
  others.onmessage = () => tell();
  (others as { unref?: () => void }).unref?.(); // under Node an open channel keeps the process alive
}

/** Calls back after each change that is on disk, from this window or another one. */
export function onChange(listener: () => void): () => void {
  listeners.add(listener);
  return () => listeners.delete(listener);
}

/** For store modules: to be called after a transaction is complete, never before. */
export function changed(): void {
  tell();
  others?.postMessage('changed');
}

function tell(): void {
  for (const listener of [...listeners]) listener();
}

/** For tests: lets go of the connection. */
export async function closeDatabase(): Promise<void> {
  const held = opening;
  opening = null;
  if (held) (await held.catch(() => null))?.close();
}
