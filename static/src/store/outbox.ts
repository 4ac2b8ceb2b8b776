// What waits to go up. An entry leaves the outbox only by an answer of the server about that very entry.
import type { Whereabouts } from '../types.ts';
import { changed, withDatabase, write } from './database.ts';
import type { DeviceRow, ServerRow } from './database.ts';

export interface Outgoing {
  id: string;
  device_seq: number;
  raw: string;
  hash: string;
}

/** How many entries a request could take now. */
export function outgoing(): Promise<number> {
  return withDatabase((db) => db.count('outbox'));
}

/**
 * At each start: every own entry that waits must be in the outbox. They are written together, so one outside of it means
 * that something is broken (a restored profile, a fault of ours); it goes up all the same. Returns how many there were.
 */
export function mendOutbox(): Promise<number> {
  return write(['outbox', 'entries'], async (tx) => {
    const out = new Set((await tx.objectStore('outbox').getAll()).map((one) => one.id));
    let mended = 0;
    for (const row of await tx.objectStore('entries').index('by whereabouts').getAll([1, 'waiting'])) {
      if (out.has(row.id)) continue;
      await tx.objectStore('outbox').put({ device_seq: row.device_seq, id: row.id });
      mended++;
    }
    return mended;
  });
}

/** The oldest waiting entries, as many as fit into one request. */
export function nextBatch(most: number, mostBytes: number): Promise<Outgoing[]> {
  return withDatabase(async (db) => {
    const tx = db.transaction(['outbox', 'entries']);
    const batch: Outgoing[] = [];
    let bytes = 0;
    let cursor = await tx.objectStore('outbox').openCursor();
    while (cursor && batch.length < most) {
      const row = await tx.objectStore('entries').get(cursor.value.id);
      if (row) {
        // As it travels: the text is a JSON string inside JSON, so its quotes are escaped.
        const size = new TextEncoder().encode(JSON.stringify(row.raw)).length + row.hash.length + 32;
        if (batch.length > 0 && bytes + size > mostBytes) break;
        bytes += size;
        batch.push({ id: row.id, device_seq: row.device_seq, raw: row.raw, hash: row.hash });
      }
      cursor = await cursor.continue();
    }
    return batch;
  });
}

export interface Settled {
  id: string;
  whereabouts: Exclude<Whereabouts, 'waiting'>;
  seq: number | null;
  reason: string | null;
}

/** Takes answered entries out of the outbox and notes what became of them, in one transaction. */
export async function settle(settled: Settled[]): Promise<void> {
  if (settled.length === 0) return;
  await write(['outbox', 'entries'], async (tx) => {
    for (const one of settled) {
      const row = await tx.objectStore('entries').get(one.id);
      if (!row) continue;
      await tx.objectStore('entries').put({ ...row, whereabouts: one.whereabouts, seq: one.seq ?? row.seq, reason: one.reason });
      await tx.objectStore('outbox').delete(row.device_seq);
    }
  });
  changed();
}

/** Puts an entry that needed a person back into the outbox, as it was: sent again, once more answered. */
export async function sendAgain(id: string): Promise<void> {
  await write(['outbox', 'entries'], async (tx) => {
    const row = await tx.objectStore('entries').get(id);
    if (row && row.own === 1 && row.whereabouts === 'needs person') {
      await tx.objectStore('entries').put({ ...row, whereabouts: 'waiting', reason: null });
      await tx.objectStore('outbox').put({ device_seq: row.device_seq, id: row.id });
    }
  });
  changed();
}

/**
 * After the server was restored from a backup it may know less of this device than it once acknowledged: everything
 * behind what it still has goes up again. The server tells repeated entries by their id.
 */
export async function sendAgainAfter(contiguous: number): Promise<number> {
  const count = await write(['outbox', 'entries', 'settings'], async (tx) => {
    const device = (await tx.objectStore('settings').get('device')) as DeviceRow | undefined;
    let again = 0;
    if (device) {
      const range = IDBKeyRange.bound([device.id, contiguous], [device.id, Infinity], true);
      for (const row of await tx.objectStore('entries').index('by device').getAll(range)) {
        if (row.whereabouts === 'waiting') continue;
        await tx.objectStore('entries').put({ ...row, whereabouts: 'waiting', seq: null, reason: null });
        await tx.objectStore('outbox').put({ device_seq: row.device_seq, id: row.id });
        again++;
      }
    }
    return again;
  });
  if (count > 0) changed();
  return count;
}

export function knownServer(): Promise<ServerRow> {
  return withDatabase(async (db) => {
    const row = (await db.get('settings', 'server')) as ServerRow | undefined;
    return row ?? { instance: null, epoch: null, head_seq: null, head_hash: null, contiguous: 0 };
  });
}

/** Keeps the head of the server's chain: the phone is a witness of what was acknowledged. */
export async function noteServer(server: ServerRow): Promise<void> {
  await write(['settings'], (tx) => tx.objectStore('settings').put(server, 'server'));
}

export function deviceId(): Promise<string | null> {
  return withDatabase(async (db) => ((await db.get('settings', 'device')) as DeviceRow | undefined)?.id ?? null);
}
