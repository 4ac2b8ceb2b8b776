// What every page of aiming starts from: the job, the mount with its log folded over it, and how calc is asked here.
import { reckon } from '../../calc/client.ts';
import { type Ask, type Reckoned, useReckoned } from '../../aim/useReckoned.ts';
import type { PathAnswer, Target } from '../../aim/answers.ts';
import { pathQuestion, targetQuestion } from '../../aim/questions.ts';
import type { Entry, LoggedEntry, PhoneJob, PlannedMount, Problem, Sheet } from '../../types.ts';
import { forFold } from '../log.ts';
import { useJob } from '../useJob.ts';

export const ask: Ask = (op, input) => reckon(op, input);

/** Which mount of which job a page is about. */
export interface Address {
  job: string;
  mount: string;
}

export interface AimOpen {
  job: PhoneJob;
  log: LoggedEntry[];
  entries: Entry[];
  mount: PlannedMount;
  /** With readings, figures and obstacles; the plan until that is worked out, or where it cannot be. */
  sheet: Sheet;
  folded: boolean;
  problem: Problem | null;
}

export function useAim(jobId: string, mountId: string): AimOpen | null | undefined {
  const open = useJob(jobId);
  const mount = open?.job.plan.mounts.find((m) => m.id === mountId);
  const folded = useReckoned<{ sheet: Sheet }>(ask, 'mount.fold', mount && open ? { sheet: mount.sheet, entries: forFold(open.log, mount.id) } : null);
  if (!open || !mount) return open === undefined ? undefined : null;
  return {
    job: open.job,
    log: open.log,
    entries: open.log.filter((logged) => logged.whereabouts !== 'needs person').map((logged) => logged.entry),
    mount,
    sheet: folded.answer?.sheet ?? mount.sheet,
    folded: folded.answer !== null,
    problem: folded.problem,
  };
}

export function useTarget(sheet: Sheet | undefined): Reckoned<Target> {
  return useReckoned<Target>(ask, 'aim.target', sheet ? targetQuestion(sheet) : null);
}

export function usePath(sheet: Sheet | undefined, distance_m: number | null): Reckoned<PathAnswer> {
  return useReckoned<PathAnswer>(ask, 'aim.path', sheet ? pathQuestion(sheet, distance_m) : null);
}
