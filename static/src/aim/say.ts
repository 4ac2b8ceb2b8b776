// Figures of aim as both pages write them.
import { decimalsFor, figure, shortest } from '../words/figures.ts';
import { say } from '../words/aim.ts';

/** "71.9° ± 0.4°": one standard uncertainty, as on every page; the doubt alone decides the decimals. */
export function bearing(deg: number, u: number | null): string {
  if (u === null || !(u > 0)) return `${figure(turned(deg), 1)}°`;
  const decimals = Math.min(2, decimalsFor(u));
  return `${figure(turned(deg), decimals)}° ± ${figure(u, decimals)}°`;
}

/** Round the circle, 0 to 360. */
export function turned(deg: number): number {
  return ((deg % 360) + 360) % 360;
}

/** The short way from one bearing to another, −180 to 180, right positive. */
export function offBy(deg: number, from: number): number {
  return turned(deg - from + 180) - 180;
}

/** "0.3° right", "on it". */
export function besides(deg: number, from: number): string {
  const off = offBy(deg, from);
  if (Math.abs(off) < 0.05) return say('off.none');
  return say(off > 0 ? 'off.right' : 'off.left', { amount: `${figure(Math.abs(off), Math.abs(off) < 10 ? 1 : 0)}°` });
}

/** "0.4° down" */
export function upDown(deg: number): string {
  const amount = `${figure(Math.abs(deg), 2)}°`;
  if (Math.abs(deg) < 0.005) return say('off.level');
  return say(deg > 0 ? 'off.up' : 'off.down', { amount });
}

/** "−52 dBm ± 4 dB" */
export function level(dbm: number, u: number | null): string {
  if (u === null || !(u > 0)) return `${figure(dbm, 1)} dBm`;
  return `${figure(dbm, 0)} dBm ± ${figure(u, u < 2 ? 1 : 0)} dB`;
}

export function decibels(db: number, decimals = 1): string {
  return `${shortest(db, decimals)} dB`;
}
