// The log on this phone. An entry is made once, as one JSON text; that text is kept, hashed and sent byte for byte.
import { uuidv7 } from 'uuidv7';
import type { Bodies, Counts, Entry, EntryOf, Kind, LoggedEntry, Session } from '../types.ts';
import { changed, withDatabase, write } from './database.ts';
import type { Database, DeviceRow, EntryRow } from './database.ts';
import { sha256 } from './hash.ts';
import { getSetting } from './settings.ts';
import { localTime } from './time.ts';

export class NotSignedIn extends Error {
  constructor() {
    super('nobody has signed in on this phone yet, so an entry would have no author');
    this.name = 'NotSignedIn';
  }
}

export interface AddOptions {
  /** A draft that this entry makes needless: it goes in the same transaction. */
  dropsDraft?: string;
}

/** Another window may write between our look at the head and our transaction; then the entry is made anew. */
const ATTEMPTS = 20;

let last: Promise<unknown> = Promise.resolve();

/**
 * Makes an entry. Resolves when it is on disk: only then may "saved" be shown. Entries of one page keep the order of
 * the calls.
 */
export function addEntry<K extends Kind>(
  kind: K,
  job: string | null,
  mount: string | null,
  body: Bodies[K],
  options: AddOptions = {},
): Promise<EntryOf<K>> {
  const now = new Date();
  const mono = Math.round(performance.now());
  const made = last.then(() => make(kind, job, mount, body, options, now, mono));
  last = made.catch(() => undefined); // one failure must not hold up the next entry
  return made;
}

async function make<K extends Kind>(
  kind: K,
  job: string | null,
  mount: string | null,
  body: Bodies[K],
  options: AddOptions,
  now: Date,
  mono: number,
): Promise<EntryOf<K>> {
  for (let attempt = 0; attempt < ATTEMPTS; attempt++) {
    const session = await getSetting('session');
    if (!session) throw new NotSignedIn();
    const device = await thisDevice();
    const entry: EntryOf<K> = {
      id: uuidv7(),
      device: device.id,
      device_seq: device.next_seq,
      prev: device.head,
      job,
      mount,
      kind,
      schema: 1,
      at: localTime(now),
      mono_ms: mono,
      author: session.user.id,
      app: release(),
      body,
    };
    const raw = JSON.stringify(entry);
    // Awaiting the hash would end an open transaction, so it is made before, and the transaction checks that the head
    // is still the one that it was made for.
    const hash = await sha256(raw);
    if (await append(device, entry, session.user.name, raw, hash, options)) {
      changed();
      return entry;
    }
  }
  throw new Error('other windows kept writing; the entry could not be placed');
}

/** Entry, outbox and head of the device in one transaction. False: another window was first. */
function append(
  seen: DeviceRow,
  entry: { id: string; job: string | null },
  author: string,
  raw: string,
  hash: string,
  options: AddOptions,
): Promise<boolean> {
  return write(['entries', 'outbox', 'settings', 'drafts'], async (tx) => {
    // A connection that was lost in the moment of committing is tried once more: what is there is not made twice.
    if (await tx.objectStore('entries').get(entry.id)) return true;
    const device = (await tx.objectStore('settings').get('device')) as DeviceRow;
    if (device.id !== seen.id || device.next_seq !== seen.next_seq || device.head !== seen.head) return false;
    await tx.objectStore('entries').add({
      id: entry.id,
      device: device.id,
      device_seq: device.next_seq,
      job: entry.job ?? '',
      raw,
      hash,
      own: 1,
      whereabouts: 'waiting',
      seq: null,
      reason: null,
      author_name: author, // until the server says it: somebody else may look before
      received_at: null,
    });
    await tx.objectStore('outbox').add({ device_seq: device.next_seq, id: entry.id });
    await tx.objectStore('settings').put({ ...device, next_seq: device.next_seq + 1, head: hash }, 'device');
    if (options.dropsDraft !== undefined) await tx.objectStore('drafts').delete(options.dropsDraft);
    return true;
  });
}

/** This browser's identity in the log, made at its first entry. Two windows at once: one wins, both see the same. */
function thisDevice(): Promise<DeviceRow> {
  return write(['settings'], async (tx) => {
    const settings = tx.objectStore('settings');
    const held = (await settings.get('device')) as DeviceRow | undefined;
    if (held) return held;
    const device = { id: crypto.randomUUID(), next_seq: 1, head: '' };
    await settings.put(device, 'device');
    return device;
  });
}

/** Which build of the page wrote the entry; mkstatic puts it into the page. */
function release(): string {
  return (typeof document !== 'undefined' && document.documentElement.dataset['release']) || 'unbuilt';
}

/**
 * The entries of a job on this phone, own and others': first what the server has, in its order, then what waits here;
 * but each device's entries by their own numbers, as the server reads them too. Else an entry that went up late (it had
 * been set apart, or the server was restored) would make a bolt move after the reading that followed it.
 */
export async function entriesOf(job: string): Promise<LoggedEntry[]> {
  const [rows, me] = await rowsAndMe((db) => db.getAllFromIndex('entries', 'by job', job));
  return inDeviceOrder(rows.sort(inOrder)).map((row) => logged(row, me));
}

/** Every device keeps the places that its entries have in the list, and fills them by its own numbers. */
function inDeviceOrder(rows: readonly EntryRow[]): EntryRow[] {
  const devices = new Map<string, EntryRow[]>();
  for (const row of rows) {
    const own = devices.get(row.device);
    if (own) own.push(row);
    else devices.set(row.device, [row]);
  }
  for (const own of devices.values()) own.sort((a, b) => b.device_seq - a.device_seq);
  return rows.map((row) => devices.get(row.device)?.pop() ?? row);
}

/** Every entry that was made on this phone, in order: for the person's own look, and for export. */
export async function ownEntries(): Promise<LoggedEntry[]> {
  const [rows, me] = await rowsAndMe(async (db) => {
    const device = (await db.get('settings', 'device')) as DeviceRow | undefined;
    if (!device) return [];
    return db.getAllFromIndex('entries', 'by device', IDBKeyRange.bound([device.id, 0], [device.id, Infinity]));
  });
  return rows.map((row) => logged(row, me));
}

/** Rows, and the id of who is signed in: on a phone that two people share, the other's readings are not "yours". */
function rowsAndMe(find: (db: Database) => Promise<EntryRow[]>): Promise<[EntryRow[], string | undefined]> {
  return withDatabase(async (db) => {
    const session = (await db.get('settings', 'session')) as Session | undefined;
    return [await find(db), session?.user.id];
  });
}

function inOrder(a: EntryRow, b: EntryRow): number {
  if (a.seq !== null && b.seq !== null) return a.seq - b.seq;
  if (a.seq !== null) return -1;
  if (b.seq !== null) return 1;
  return a.device_seq - b.device_seq;
}

function logged(row: EntryRow, me: string | undefined): LoggedEntry {
  const entry = JSON.parse(row.raw) as Entry;
  return {
    entry,
    raw: row.raw,
    hash: row.hash,
    own: row.own === 1 && entry.author === me,
    whereabouts: row.whereabouts,
    seq: row.seq,
    reason: row.reason,
    author_name: row.author_name,
    received_at: row.received_at,
  };
}

/** How many own entries wait, are safe on the server, need a person. */
export function counts(): Promise<Counts> {
  return withDatabase(async (db) => {
    const index = db.transaction('entries').store.index('by whereabouts');
    const [waiting, safe, needsPerson] = await Promise.all([
      index.count([1, 'waiting']),
      index.count([1, 'safe']),
      index.count([1, 'needs person']),
    ]);
    return { waiting, safe, needsPerson };
  });
}

/** Own entries that the server set apart, with its reasons. */
export async function needingPerson(): Promise<LoggedEntry[]> {
  const [rows, me] = await rowsAndMe((db) => db.getAllFromIndex('entries', 'by whereabouts', [1, 'needs person']));
  return rows.map((row) => logged(row, me));
}
