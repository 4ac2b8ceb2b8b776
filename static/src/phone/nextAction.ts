// The one thing to do next on a mount: what the first button of the page says.
import type { LoggedEntry, PlannedMount, Quantity, Verdict } from '../types';
import type { MountStep } from './route';
import { turnedUnread, unread } from './steps';

export type Action =
  | { do: 'measure'; antenna: string; quantity: Quantity; again: boolean }
  | { do: 'turned'; antenna: string; quantity: Quantity }
  | { do: 'go'; to: MountStep | 'hand-in' };

export function nextAction(step: MountStep, log: readonly LoggedEntry[], mount: PlannedMount, verdict: Verdict | null): Action | null {
  const first = (list: { antenna: string; quantity: Quantity }[]): Action | null => (list[0] ? { do: 'measure', ...list[0], again: false } : null);
  const decides = (): Action | null =>
    verdict?.word === 'measure again' && verdict.deciding ? { do: 'measure', antenna: verdict.deciding.antenna, quantity: verdict.deciding.quantity, again: true } : null;
  switch (step) {
    case 'as-found': {
      const open = first(unread(log, mount, 'as_found'));
      if (open || !verdict) return open;
      if (verdict.word === 'go') return { do: 'go', to: 'hand-in' };
      return verdict.word === 'no-go' ? { do: 'go', to: 'adjust' } : (decides() ?? { do: 'go', to: 'adjust' });
    }
    case 'adjust': {
      const open = first(turnedUnread(log, mount));
      if (open || !verdict) return open;
      if (verdict.word === 'go') return { do: 'go', to: 'as-left' };
      const best = verdict.remedies[0];
      if (verdict.word === 'no-go' && best) return { do: 'turned', antenna: best.antenna, quantity: best.quantity };
      return first(verdict.missing) ?? decides() ?? { do: 'go', to: 'as-left' };
    }
    case 'as-left': {
      const open = first(unread(log, mount, 'as_left'));
      if (open || !verdict) return open;
      if (verdict.word === 'go') return { do: 'go', to: 'hand-in' };
      return verdict.word === 'no-go' ? { do: 'go', to: 'adjust' } : (decides() ?? { do: 'go', to: 'hand-in' });
    }
  }
}
