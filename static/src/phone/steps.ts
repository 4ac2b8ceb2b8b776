// How far a visit is: which readings a state still wants, which steps of the path are done, what is open at hand-in.
import { quantitiesOf } from '../draw/drawn.ts';
import type { LoggedEntry, Phase, PhoneJob, PlannedMount, Quantity, Sheet } from '../types.ts';
import { cautions, type Caution } from '../words/cautions.ts';
import { lastTurn, saidOf, standing } from './log.ts';
import { hrefOf, type MountStep, mountSteps } from './route.ts';
import { aimDone, aimedOf, figuresDone } from './aim/done.ts';

export interface Wanted {
  antenna: string;
  quantity: Quantity;
}

/** Every reading that a complete state of this mount has, antenna by antenna. */
export function wantedOf(sheet: Sheet): Wanted[] {
  return sheet.near.antennas.flatMap((antenna) => quantitiesOf(sheet, antenna).map((quantity) => ({ antenna: antenna.id, quantity })));
}

export function unread(log: readonly LoggedEntry[], mount: PlannedMount, phase: Phase): Wanted[] {
  return wantedOf(mount.sheet).filter(({ antenna, quantity }) => standing(log, mount.id, phase, antenna, quantity).length === 0);
}

/** Bolts that were turned and whose place has not been read since. */
export function turnedUnread(log: readonly LoggedEntry[], mount: PlannedMount): Wanted[] {
  return wantedOf(mount.sheet).filter(
    ({ antenna, quantity }) =>
      lastTurn(log, mount.id, antenna, quantity) !== null && standing(log, mount.id, 'as_left', antenna, quantity).length === 0,
  );
}

export function unconfirmed(log: readonly LoggedEntry[]): Caution[] {
  const done = new Set(saidOf(log, 'caution.confirmed').map(({ entry }) => entry.body.caution));
  return cautions.filter((caution) => !done.has(caution));
}

function stepDone(log: readonly LoggedEntry[], mount: PlannedMount, step: MountStep): boolean {
  const leftDone = unread(log, mount, 'as_left').length === 0;
  switch (step) {
    case 'as-found':
      return unread(log, mount, 'as_found').length === 0;
    case 'as-left':
      return leftDone;
    case 'adjust': {
      const turned = saidOf(log, 'bolt.moved').some(({ entry }) => entry.mount === mount.id);
      return leftDone || (turned && turnedUnread(log, mount).length === 0);
    }
  }
}

export interface Step {
  key: 'before' | MountStep | 'aim' | 'figures' | 'hand-in';
  href: string;
  done: boolean;
  /** There is nothing to do in it. */
  needless?: boolean;
}

/** The path, for one mount or (null) for the whole job: then a step leads to the first mount where it is open. */
export function stepsOf(job: PhoneJob, log: readonly LoggedEntry[], mountId: string | null): Step[] {
  const { mounts } = job.plan;
  const id = job.summary.id;
  const steps: Step[] = [{ key: 'before', href: hrefOf({ page: 'before', job: id }), done: unconfirmed(log).length === 0 }];
  for (const step of mountSteps) {
    const asked = mountId === null ? mounts : mounts.filter((m) => m.id === mountId);
    const open = asked.find((m) => !stepDone(log, m, step));
    const target = open ?? asked[0];
    if (!target) continue;
    steps.push({ key: step, href: hrefOf({ page: 'mount', job: id, mount: target.id, step }), done: open === undefined });
    if (step !== 'adjust') continue;
    const aimed = asked.filter((m) => aimedOf(m).length > 0);
    for (const [page, isDone, wanting] of [['aim', aimDone, aimed], ['figures', figuresDone, asked]] as const) {
      const undone = wanting.find((m) => !isDone(log, m));
      const needless = wanting.length === 0;
      steps.push({ key: page, href: hrefOf({ page, job: id, mount: (undone ?? target).id }), done: undone === undefined && !needless, needless });
    }
  }
  const handedIn = job.stage === 'handed in' || job.stage === 'signed off';
  steps.push({ key: 'hand-in', href: hrefOf({ page: 'hand-in', job: id }), done: handedIn });
  return steps;
}

/** Where work on a mount goes on: the first step that is not done. */
export function nextStep(log: readonly LoggedEntry[], mount: PlannedMount): MountStep {
  const turned = saidOf(log, 'bolt.moved').some(({ entry }) => entry.mount === mount.id);
  const left = wantedOf(mount.sheet).some(({ antenna, quantity }) => standing(log, mount.id, 'as_left', antenna, quantity).length > 0);
  if (turned && turnedUnread(log, mount).length > 0) return 'adjust';
  if (left) return 'as-left';
  return 'as-found';
}
