// The verdict on a mount as one step of the visit sees it, worked out anew at each change of the log: mount.fold lays
// the readings over the sheet, mount.verdict judges what came out. Both are calc's; nothing is judged here.
import { useEffect, useState } from 'preact/hooks';
import { CalcProblem, reckon } from '../calc/client.ts';
import { quantities, readingsIn, statesOf } from '../draw/drawn.ts';
import type { Antenna, LoggedEntry, PlannedMount, Quantity, Reading, Sheet, States, Verdict } from '../types.ts';
import { forFold, lastTurn } from './log.ts';
import type { MountStep } from './route.ts';

export interface Judged {
  /** Folded, and cut to what the step looks at. Null until the first answer. */
  sheet: Sheet | null;
  verdict: Verdict | null;
  problem: CalcProblem | null;
  /** An answer to a newer question is on its way. */
  thinking: boolean;
}

const none: Judged = { sheet: null, verdict: null, problem: null, thinking: true };

/** null as step: the whole, as the desk will judge it. */
export async function judge(mount: PlannedMount, log: readonly LoggedEntry[], step: MountStep | null, replaces?: string): Promise<{ sheet: Sheet; verdict: Verdict }> {
  const options = replaces === undefined ? undefined : { replaces };
  const folded = await reckon<{ sheet: Sheet }>('mount.fold', { sheet: mount.sheet, entries: forFold(log, mount.id) }, options && { replaces: `fold ${options.replaces}` });
  const sheet = step === null ? folded.sheet : cutTo(folded.sheet, log, mount.id, step);
  const verdict = await reckon<Verdict>('mount.verdict', sheet, options);
  return { sheet, verdict };
}

/**
 * As found: without readings as left, so that the word stays that of the state in which the mount was met. Adjusting:
 * as it stands, that is, a reading as found goes on counting where the bolt was not turned since and nothing newer was
 * read. As left: strictly what was read as left.
 */
function cutTo(sheet: Sheet, log: readonly LoggedEntry[], mount: string, step: MountStep): Sheet {
  if (step === 'as-left') return sheet;
  const change = step === 'as-found' ? withoutLeft : (states: States<Reading>, antenna: string, quantity: Quantity) => asItStands(states, lastTurn(log, mount, antenna, quantity) !== null);
  const antennas = sheet.near.antennas.map((antenna): Antenna => {
    const next: Record<string, unknown> = { ...antenna };
    for (const quantity of quantities) {
      const states = statesOf(antenna, quantity) as States<Reading> | null | undefined;
      if (states) next[quantity === 'position' ? 'position_mm' : quantity] = change(states, antenna.id, quantity);
    }
    return next as unknown as Antenna;
  });
  return { ...sheet, near: { ...sheet.near, antennas } };
}

function withoutLeft(states: States<Reading>): States<Reading> {
  return { ...states, as_left: null };
}

function asItStands(states: States<Reading>, turned: boolean): States<Reading> {
  if (turned || readingsIn(states, 'as_left').length > 0) return states;
  return { ...states, as_left: states.as_found ?? null };
}

export function useJudged(mount: PlannedMount | undefined, log: readonly LoggedEntry[] | undefined, step: MountStep): Judged {
  const [judged, setJudged] = useState<Judged>(none);
  useEffect(() => {
    if (!mount || !log) return;
    let live = true;
    setJudged((before) => ({ ...before, thinking: true }));
    judge(mount, log, step, `${mount.id} ${step}`).then(
      ({ sheet, verdict }) => live && setJudged({ sheet, verdict, problem: null, thinking: false }),
      (error: unknown) => {
        if (!live || (error instanceof CalcProblem && error.code === 'replaced')) return;
        const problem = error instanceof CalcProblem ? error : new CalcProblem('internal', '', String(error));
        setJudged({ sheet: null, verdict: null, problem, thinking: false });
      },
    );
    return () => {
      live = false;
    };
  }, [mount, log, step]);
  return judged;
}
