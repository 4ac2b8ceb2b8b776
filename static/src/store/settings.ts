// Small things by name: theme, language, who signed in last.
import { changed, withDatabase, write } from './database.ts';
import type { Settings } from './database.ts';

export function getSetting<K extends keyof Settings>(name: K): Promise<Settings[K] | undefined> {
  return withDatabase(async (db) => (await db.get('settings', name as string)) as Settings[K] | undefined);
}

export async function setSetting<K extends keyof Settings>(name: K, value: Settings[K]): Promise<void> {
  await write(['settings'], (tx) => tx.objectStore('settings').put(value, name as string));
  changed();
}

export async function dropSetting(name: string): Promise<void> {
  await write(['settings'], (tx) => tx.objectStore('settings').delete(name));
  changed();
}
