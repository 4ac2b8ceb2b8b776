// What the header of the phone says about coverage and about what waits.
import type { SyncState, SyncStatus } from '../types.ts';
import { Observable } from '../store/observable.ts';
import type { Watchable } from '../store/observable.ts';

const observed = new Observable<SyncStatus>({ state: 'starting', waiting: 0, lastAnswerAt: null, signedIn: false });

export const status: Watchable<SyncStatus> = observed;

export function note(part: Partial<SyncStatus>): void {
  const before = observed.value;
  const next = { ...before, ...part };
  const same = (Object.keys(next) as (keyof SyncStatus)[]).every((key) => Object.is(next[key], before[key]));
  if (!same) observed.set(next);
}

export function noteState(state: SyncState): void {
  note({ state });
}
