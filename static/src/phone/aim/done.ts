// Which of the steps "aim" and "figures" are done for a mount.
import { quantitiesOf } from '../../draw/drawn.ts';
import type { Antenna, LoggedEntry, PlannedMount } from '../../types.ts';
import { saidOf } from '../log.ts';

/** The antennas that have a direction to aim: not rods, whose azimuth means nothing. */
export function aimedOf(mount: PlannedMount): Antenna[] {
  return mount.sheet.near.antennas.filter((antenna) => antenna.azimuth && quantitiesOf(mount.sheet, antenna).includes('azimuth'));
}

/**
 * Something of the step was done for every antenna that is aimed: a sight or compass check, or a peak kept, since its
 * bolt was last turned; or the path was looked after, which is the mount's. An azimuth that was merely read is none of these.
 */
export function aimDone(log: readonly LoggedEntry[], mount: PlannedMount): boolean {
  const gone = new Set(saidOf(log, 'reading.withdrawn').map(({ entry }) => entry.body.withdraws));
  if (saidOf(log, 'obstacle.noted').some(({ entry }) => entry.mount === mount.id && !gone.has(entry.id))) return true;
  // A sight by sun or landmark is kept with the reading that it gave, next in the device's chain: with that taken back it
  // counts no more. A compass check gives no reading.
  const takenBack = new Set(saidOf(log, 'reading.taken').filter(({ entry }) => gone.has(entry.id)).map(({ entry }) => `${entry.device} ${entry.device_seq}`));
  return aimedOf(mount).every(({ id }) => {
    let aimed = false;
    for (const { entry, whereabouts } of log) {
      if (entry.mount !== mount.id || whereabouts === 'needs person' || gone.has(entry.id)) continue;
      if (entry.kind === 'bolt.moved' && entry.body.antenna === id && entry.body.quantity === 'azimuth') aimed = false;
      if (entry.kind === 'peak.fitted' && entry.body.antenna === id) aimed = true;
      if (entry.kind !== 'sight.taken' || entry.body.antenna !== id) continue;
      if (entry.body.reference === 'compass' || !takenBack.has(`${entry.device} ${entry.device_seq + 1}`)) aimed = true;
    }
    return aimed;
  });
}

/** The page of the radio on this mast was read. */
export function figuresDone(log: readonly LoggedEntry[], mount: PlannedMount): boolean {
  const gone = new Set(saidOf(log, 'reading.withdrawn').map(({ entry }) => entry.body.withdraws));
  return saidOf(log, 'figures.read').some(({ entry }) => entry.mount === mount.id && entry.body.end === 'near' && !gone.has(entry.id));
}
