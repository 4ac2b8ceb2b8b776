// Whether the browser promised not to throw this phone's storage away when space runs short.
import type { StorageProtection } from '../types.ts';
import { Observable } from './observable.ts';
import type { Watchable } from './observable.ts';

const state = new Observable<StorageProtection>('unknown');
export const storageProtection: Watchable<StorageProtection> = state;

/** Asked at every start until the browser says yes; it decides by itself, mostly in favour of installed pages. */
export async function askForProtection(): Promise<void> {
  const storage = navigator.storage as StorageManager | undefined;
  if (!storage?.persist) return;
  try {
    const kept = (await storage.persisted()) || (await storage.persist());
    state.set(kept ? 'protected' : 'not protected');
  } catch {
    state.set('unknown');
  }
}
