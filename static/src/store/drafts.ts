// What is being typed. A draft is written at each change of a field, so that a page killed in mid-entry (by the system,
// while the camera is open, by an empty battery) comes back with it. It is no entry: nobody but this phone sees it.
import { withDatabase } from './database.ts';

export function getDraft<T>(key: string): Promise<T | undefined> {
  return withDatabase(async (db) => (await db.get('drafts', key)) as T | undefined);
}

export function setDraft(key: string, value: unknown): Promise<void> {
  return withDatabase(async (db) => {
    const tx = db.transaction('drafts', 'readwrite', { durability: 'strict' });
    void tx.store.put(value, key);
    await tx.done;
  });
}

export function dropDraft(key: string): Promise<void> {
  return withDatabase((db) => db.delete('drafts', key));
}
