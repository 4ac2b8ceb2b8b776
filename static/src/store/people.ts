// Who works on this phone. Kept here, so that a phone out of coverage knows its author for weeks; the server's own
// session is a cookie that the page cannot read.
import type { Session } from '../types.ts';
import { changed, withDatabase, write } from './database.ts';

export function keptSession(): Promise<Session | null> {
  return withDatabase(async (db) => ((await db.get('settings', 'session')) as Session | undefined) ?? null);
}

export async function keepSession(session: Session): Promise<void> {
  await write(['settings'], (tx) => tx.objectStore('settings').put(session, 'session'));
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
