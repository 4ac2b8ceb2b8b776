// Which of the steps "aim" and "figures" are done for a mount.
import type { LoggedEntry, PlannedMount } from '../../types.ts';
import { lastTurn, saidOf, standing } from '../log.ts';

/** Every antenna that has an azimuth has one that counts and was not read by compass alone. Rods have nothing to aim. */
export function aimDone(log: readonly LoggedEntry[], mount: PlannedMount): boolean {
  return mount.sheet.near.antennas
    .filter((antenna) => antenna.azimuth)
    .every((antenna) => {
      const left = standing(log, mount.id, 'as_left', antenna.id, 'azimuth');
      const found = lastTurn(log, mount.id, antenna.id, 'azimuth') === null ? standing(log, mount.id, 'as_found', antenna.id, 'azimuth') : [];
      return [...left, ...found].some(({ entry }) => entry.body.reading.method !== 'compass');
    });
}

/** The page of the radio on this mast was read. */
export function figuresDone(log: readonly LoggedEntry[], mount: PlannedMount): boolean {
  const gone = new Set(saidOf(log, 'reading.withdrawn').map(({ entry }) => entry.body.withdraws));
  return saidOf(log, 'figures.read').some(({ entry }) => entry.mount === mount.id && entry.body.end === 'near' && !gone.has(entry.id));
}
