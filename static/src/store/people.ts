// Who works on this phone. Kept here, so that a phone out of coverage knows its author for weeks; the server's own
// session is a cookie that the page cannot read.
import type { Entry, Session } from '../types.ts';
import { changed, withDatabase, write } from './database.ts';

export function keptSession(): Promise<Session | null> {
  return withDatabase(async (db) => ((await db.get('settings', 'session')) as Session | undefined) ?? null);
}

/**
 * Keeps who signed in, and offers once more what of theirs the server had set apart: while somebody of another crew was
 * signed in on this phone, their entries belonged to a job that this person may not see.
 */
export async function keepSession(session: Session): Promise<void> {
  await write(['settings', 'entries', 'outbox'], async (tx) => {
    await tx.objectStore('settings').put(session, 'session');
    for (const row of await tx.objectStore('entries').index('by whereabouts').getAll([1, 'needs person'])) {
      if ((JSON.parse(row.raw) as Entry).author !== session.user.id) continue;
      await tx.objectStore('entries').put({ ...row, whereabouts: 'waiting', reason: null });
      await tx.objectStore('outbox').put({ device_seq: row.device_seq, id: row.id });
    }
  });
  changed();
}

/**
 * After signing out: the jobs, others' entries and drafts leave the phone; entries that were made here stay, with
 * device and chain. (ASVS 5.0.0 14.3.1 asks to clear everything; what was taken on a mast is the written exception.)
 */
export async function clearAfterSignOut(): Promise<void> {
  await write(['settings', 'jobs', 'drafts', 'entries'], async (tx) => {
    await tx.objectStore('settings').delete('session');
    await tx.objectStore('jobs').clear();
    await tx.objectStore('drafts').clear();
    let cursor = await tx.objectStore('entries').openCursor();
    while (cursor) {
      if (cursor.value.own === 0) await cursor.delete();
      cursor = await cursor.continue();
    }
  });
  changed();
}
