// Signing in and out. The server's session is a cookie; the phone keeps who it was for, and works on without coverage.
import type { Session } from '../types.ts';
import { onChange } from '../store/database.ts';
import { counts } from '../store/entries.ts';
import { clearAfterSignOut, keepSession, keptSession } from '../store/people.ts';
import { Observable } from '../store/observable.ts';
import type { Watchable } from '../store/observable.ts';
import { ask, ServerProblem } from './server.ts';
import { isNothing, isSession } from './shapes.ts';
import { note } from './status.ts';

/** undefined: not read from the store yet. null: nobody has signed in on this phone. */
const observed = new Observable<Session | null | undefined>(undefined);
export const session: Watchable<Session | null | undefined> = observed;

export class EntriesWait extends Error {
  readonly waiting: number;

  constructor(waiting: number) {
    super(`${waiting} entries of this phone are not on the server yet`);
    this.name = 'EntriesWait';
    this.waiting = waiting;
  }
}

let follows = false;

/** Reads who signed in, now and after each change of the store: another window may have signed somebody else in, and entries bear that name. */
export async function readSession(): Promise<void> {
  if (!follows) {
    follows = true;
    onChange(() => void readSession().catch(() => undefined)); // that the store is gone is said by storeHealth
  }
  let kept: Session | null;
  try {
    kept = await keptSession();
  } catch (error) {
    // With a store that cannot be read nobody is known: the page then says what is wrong with it, rather than open for ever.
    if (observed.value === undefined) observed.set(null);
    throw error;
  }
  if (JSON.stringify(kept) !== JSON.stringify(observed.value)) observed.set(kept);
}

/** Rejects with ServerProblem (wrong name or passphrase: 401) or NoAnswer. */
export async function signIn(name: string, passphrase: string): Promise<Session> {
  return open(await ask('POST', '/api/session', { name, passphrase }, isSession));
}

export async function acceptInvitation(invitation: string, name: string, passphrase: string): Promise<Session> {
  return open(await ask('POST', '/api/session', { invitation, name, passphrase }, isSession));
}

async function open(opened: Session): Promise<Session> {
  await keepSession(opened);
  observed.set(opened);
  note({ signedIn: true });
  return opened;
}

/** Refuses with EntriesWait while something waits: after signing out nobody would send it. */
export async function signOut(): Promise<void> {
  const { waiting } = await counts();
  if (waiting > 0) throw new EntriesWait(waiting);
  try {
    await ask('DELETE', '/api/session', undefined, isNothing);
  } catch (error) {
    if (!(error instanceof ServerProblem && error.status === 401)) throw error; // it had ended by itself
  }
  await clearAfterSignOut();
  observed.set(null);
  note({ signedIn: false });
}
