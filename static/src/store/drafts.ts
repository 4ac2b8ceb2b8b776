// What is being typed. A draft is written at each change of a field, so that a page killed in mid-entry (by the system,
// while the camera is open, by an empty battery) comes back with it. It is no entry: nobody but this phone sees it.
import { withDatabase, write } from './database.ts';

export function getDraft<T>(key: string): Promise<T | undefined> {
  return withDatabase(async (db) => (await db.get('drafts', key)) as T | undefined);
}

export async function setDraft(key: string, value: unknown): Promise<void> {
  await write(['drafts'], (tx) => tx.objectStore('drafts').put(value, key));
}

export function dropDraft(key: string): Promise<void> {
  return write(['drafts'], (tx) => tx.objectStore('drafts').delete(key));
}
