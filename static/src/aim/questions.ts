// What is asked of calc about pointing a mount, made from its sheet. Nothing is computed here: a question only carries
// the sheet's figures to the operation that knows the formula.
import type { Antenna, Place, RadioFigures, Reading, Sheet, States } from '../types.ts';
import type { PathAnswer } from './answers.ts';

export type Axis = 'azimuth' | 'tilt';
export const searchAxes: readonly Axis[] = ['azimuth', 'tilt'];

function end(place: Place) {
  return { lat_deg: place.lat_deg, lon_deg: place.lon_deg, height_m: place.height_m, u_m: place.u_m ?? null };
}

/** null where the plan has no coordinates of both ends. */
export function targetQuestion(sheet: Sheet): Record<string, unknown> | null {
  const { near_at, far_at, height_datum, k_factor } = sheet.path;
  if (!near_at || !far_at || !height_datum) return null;
  return { from: end(near_at), to: end(far_at), height_datum, k_factor: k_factor ?? null };
}

/** Where a known point lies from the near mount. */
export function bearingQuestion(sheet: Sheet, to: Place): Record<string, unknown> | null {
  const { near_at, height_datum, k_factor } = sheet.path;
  if (!near_at || !height_datum) return null;
  return { from: end(near_at), to: end(to), height_datum, k_factor: k_factor ?? null };
}

/** A sheet may give one power for all chains; calc is asked for each. */
function powersOf(sheet: Sheet): number[] | null {
  const { tx_power_dbm } = sheet.radio;
  if (!tx_power_dbm || tx_power_dbm.length === 0) return null;
  if (tx_power_dbm.length > 1) return tx_power_dbm;
  return portsOf(sheet.near.antennas).map(() => tx_power_dbm[0] ?? 0);
}

export function portsOf(antennas: readonly Antenna[]): string[] {
  return antennas.flatMap((antenna) => antenna.elements.map((element) => element.port));
}

/** The path with its obstacles, and the level that each chain should give where gains and powers are known. */
export function pathQuestion(sheet: Sheet, distance_m: number | null): Record<string, unknown> {
  const { near_at, far_at, k_factor, obstacles } = sheet.path;
  const heights = near_at && far_at;
  const shared = sheet.radio.power === 'shared' ? (sheet.radio.tx_power_dbm?.[0] ?? null) : null;
  return {
    frequency_mhz: sheet.radio.frequency_mhz,
    distance_m: distance_m ?? sheet.path.distance_m,
    near_height_m: heights ? near_at.height_m : 0,
    far_height_m: heights ? far_at.height_m : 0,
    k_factor: k_factor ?? null,
    // Without the heights of the ends the tops of obstacles say nothing.
    obstacles: heights ? (obstacles ?? []) : [],
    near_gain_dbi: sheet.near.antennas[0]?.pattern.gain_dbi ?? null,
    far_gain_dbi: sheet.far.antennas[0]?.pattern.gain_dbi ?? null,
    ...(shared === null ? { tx_powers_dbm: powersOf(sheet) } : { tx_power_shared_dbm: shared, chains: portsOf(sheet.near.antennas).length }),
  };
}

export function sunQuestion(at: { lat_deg: number; lon_deg: number; height_m: number }, time: string): Record<string, unknown> {
  return { ...at, time };
}

/** Where the near mount stands: its own place, else the job's with no height. */
export function standOf(sheet: Sheet, plan: { lat_deg: number | null; lon_deg: number | null }) {
  const { near_at } = sheet.path;
  if (near_at) return { lat_deg: near_at.lat_deg, lon_deg: near_at.lon_deg, height_m: near_at.height_m };
  if (plan.lat_deg === null || plan.lon_deg === null) return null;
  return { lat_deg: plan.lat_deg, lon_deg: plan.lon_deg, height_m: 0 };
}

export function compassQuestion(at: { lat_deg: number; lon_deg: number; height_m: number }, date: string, readings: number[]): Record<string, unknown> {
  return { ...at, date, compass_deg: readings.length > 0 ? readings : null };
}

/** The last reading of an angle that is known: as left, else as found, else the plan. */
export function lastAngle(states: States<Reading<number>> | null | undefined): Reading<number> | null {
  if (!states) return null;
  for (const list of [states.as_left, states.as_found]) {
    if (!list) continue;
    if (!Array.isArray(list)) return list;
    const last = list[list.length - 1];
    if (last) return last;
  }
  return states.planned;
}

export function beamwidthOf(antenna: Antenna, axis: Axis): number | null {
  const { pattern } = antenna;
  return (axis === 'azimuth' ? pattern.beamwidth_az_deg : (pattern.beamwidth_el_deg ?? pattern.beamwidth_az_deg)) ?? null;
}

/** The ground that an antenna covers; null where its beamwidth or height is not known. Electrical tilt counts as tilt does, up positive. */
export function sectorQuestion(antenna: Antenna, height_m: number | null): Record<string, unknown> | null {
  const width = antenna.pattern.beamwidth_el_deg ?? null;
  const tilt = lastAngle(antenna.tilt);
  if (width === null || tilt === null || height_m === null) return null;
  return { height_m, tilt_deg: tilt.value + (antenna.electrical_tilt_deg ?? 0), beamwidth_deg: width };
}

export interface Step {
  angle_deg: number;
  level_dbm: number;
}

export function peakQuestion(antenna: Antenna, axis: Axis, steps: readonly Step[], controlOff: boolean, path: PathAnswer | null, port: number): Record<string, unknown> {
  const expected = path?.expected_levels_dbm?.[port] ?? null;
  return {
    angles_deg: steps.map((step) => step.angle_deg),
    levels_dbm: steps.map((step) => step.level_dbm),
    beamwidth_deg: beamwidthOf(antenna, axis),
    expected_level_dbm: expected,
    expected_u_db: expected === null ? null : (path?.u_db ?? null),
    ...(controlOff ? { power_control_off: true } : {}),
  };
}

/** Figures with the level that the path should give: over an obstacle the sheet's distance alone would expect too much. */
export function faultQuestion(sheet: Sheet, path: PathAnswer | null): Sheet | null {
  const figures = sheet.radio_figures;
  if (!figures || (!figures.near && !figures.far)) return null;
  const levels = path?.expected_levels_dbm ?? null;
  const stated = figures.expected_level_dbm !== null && figures.expected_level_dbm !== undefined;
  if (stated || !path || !levels || path.u_db === null || !(path.diffraction_loss_db > 0)) return sheet;
  const mean = levels.reduce((sum, level) => sum + level, 0) / levels.length;
  const expected: RadioFigures = { ...figures, expected_level_dbm: mean, expected_u_db: path.u_db };
  return { ...sheet, radio_figures: expected };
}
