// What to do next on a mount: the first is the one big button of the page, a second may stand beside it.
import type { LoggedEntry, PlannedMount, Quantity, Verdict } from '../types.ts';
import type { MountStep } from './route.ts';
import { helpful } from './sentence.ts';
import { turnedUnread, unread, type Wanted } from './steps.ts';

export type Action =
  | { do: 'measure'; antenna: string; quantity: Quantity; again: boolean }
  | { do: 'turned'; antenna: string; quantity: Quantity }
  | { do: 'go'; to: MountStep | 'hand-in' };

const to = (step: MountStep | 'hand-in'): Action => ({ do: 'go', to: step });

export function nextActions(step: MountStep, log: readonly LoggedEntry[], mount: PlannedMount, verdict: Verdict | null): Action[] {
  const open = openReading(step, log, mount);
  if (open) return [{ do: 'measure', antenna: open.antenna, quantity: open.quantity, again: false }];
  if (!verdict) return [];
  const deciding = verdict.word === 'measure again' ? verdict.deciding : null;
  const again: Action[] = deciding ? [{ do: 'measure', antenna: deciding.antenna, quantity: deciding.quantity, again: true }] : [];
  switch (step) {
    case 'as-found':
      if (verdict.word === 'go') return [to('hand-in')];
      return [...again, to('adjust')];
    case 'adjust': {
      if (verdict.word === 'go') return [to('as-left')];
      const best = helpful(verdict);
      if (best) return [{ do: 'turned', antenna: best.antenna, quantity: best.quantity }, ...again];
      const missing = verdict.missing[0];
      if (missing) return [{ do: 'measure', antenna: missing.antenna, quantity: missing.quantity, again: false }];
      return [...again, to('as-left')];
    }
    case 'as-left':
      if (verdict.word === 'go') return [to('hand-in')];
      return verdict.word === 'no-go' ? [to('adjust'), to('hand-in')] : [...again, to('hand-in')];
  }
}

/** While adjusting only what was turned wants reading; before and after it, everything. */
function openReading(step: MountStep, log: readonly LoggedEntry[], mount: PlannedMount): Wanted | undefined {
  switch (step) {
    case 'as-found':
      return unread(log, mount, 'as_found')[0];
    case 'adjust':
      return turnedUnread(log, mount)[0];
    case 'as-left':
      return unread(log, mount, 'as_left')[0];
  }
}
