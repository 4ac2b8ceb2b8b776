// What this phone remembers of its own sensor: which sign it gives gravity, and the error that two faces showed last.
import { getSetting, setSetting } from '../store/index.ts';

/** The poses by which a quantity is read, as tilt.face names them. */
export type Axis = 'tilt_by_edge' | 'skew';

export interface Calibration {
  /** 1 or −1, from the phone lying face up. */
  up_sign: number;
  /** The last error in degrees, by pose, with the time. */
  bias: Partial<Record<Axis, { deg: number; at: string }>>;
}

const name = 'motion sensor';

/** A phone's error does not move by more between two days unless it was dropped, or laid on otherwise; common practice. */
const JUMP_DEG = 0.5;

/** Two faces belong together only while nothing has moved in between. */
export const APART_MS = 120_000;

export async function calibration(): Promise<Calibration | null> {
  const kept = (await getSetting(name)) as Partial<Calibration> | undefined;
  if (kept?.up_sign !== 1 && kept?.up_sign !== -1) return null;
  return { up_sign: kept.up_sign, bias: kept.bias ?? {} };
}

export function keepCalibration(now: Calibration): Promise<void> {
  return setSetting(name, now);
}

/** Whether the error has moved so far from the last one that somebody should look. */
export function jumped(last: number | undefined, now: number): boolean {
  return last !== undefined && Math.abs(now - last) > JUMP_DEG;
}
