// How each limit is named, scaled and written: shared by phone, desk and paper.
import type { LimitName, LimitOutcome } from '../types.ts';
import { decimalsFor, figure, shortest, withDoubt } from '../words/figures.ts';
import { t } from '../words/words.ts';

interface Manner {
  /** Sign after the number, with its space. */
  unit: string;
  /** Shown = value × factor. */
  factor: number;
  /** Decimals when there is no doubt to tell them. */
  decimals: number;
  /** Natural ends of the line, as shown; null = found from the values. */
  from: number;
  to: number | null;
}

const manners: Record<LimitName, Manner> = {
  effective_streams: { unit: '', factor: 1, decimals: 2, from: 1, to: null },
  rate_share: { unit: ' %', factor: 100, decimals: 0, from: 0, to: 100 },
  envelope_correlation: { unit: '', factor: 1, decimals: 2, from: 0, to: 1 },
  pointing_loss_db: { unit: ' dB', factor: 1, decimals: 1, from: 0, to: null },
  crosstalk_db: { unit: ' dB', factor: 1, decimals: 0, from: 0, to: null },
  chain_imbalance_db: { unit: ' dB', factor: 1, decimals: 1, from: 0, to: null },
  pair_angle_error_deg: { unit: '°', factor: 1, decimals: 1, from: 0, to: null },
  skew_deviation_deg: { unit: '°', factor: 1, decimals: 1, from: 0, to: null },
  tilt_deviation_deg: { unit: '°', factor: 1, decimals: 1, from: 0, to: null },
  azimuth_deviation_deg: { unit: '°', factor: 1, decimals: 1, from: 0, to: null },
  position_deviation_mm: { unit: ' mm', factor: 1, decimals: 0, from: 0, to: null },
};

const plain: Manner = { unit: '', factor: 1, decimals: 2, from: 0, to: null };

function mannerOf(name: string): Manner {
  return (manners as Record<string, Manner>)[name] ?? plain;
}

export function limitTitle(name: LimitName): string {
  return t(`limit.${name}`);
}

/** A value of this limit with its unit: "31 dB". */
export function limitValue(name: LimitName, value: number, u?: number | null): string {
  const manner = mannerOf(name);
  if (u && u > 0) return figure(value * manner.factor, decimalsFor(u * manner.factor)) + manner.unit;
  return shortest(value * manner.factor, manner.decimals) + manner.unit;
}

/** A value with its doubt and unit: "19 ± 2 dB". */
export function limitDoubted(name: LimitName, value: number, u: number | null): string {
  const manner = mannerOf(name);
  return withDoubt(value * manner.factor, u ? u * manner.factor : null, manner.decimals) + manner.unit;
}

/** Three ways a limit can stand, by the guard band that the verdict itself uses (0.95 and 0.05; JCGM 106:2012). */
export type Standing = 'met' | 'missed' | 'unsure';

export function standingOf(outcome: LimitOutcome): Standing {
  const p = outcome.probability;
  if (p === null) return 'unsure';
  if (p >= 0.95) return 'met';
  if (p <= 0.05) return 'missed';
  return 'unsure';
}

export interface LimitScale {
  from: number;
  to: number;
  fromText: string;
  toText: string;
  /** Place on the line, 0 to 1, of a value as calc gives it. */
  at: (value: number) => number;
}

/** A line long enough for value, doubt and limit, with ends that are round numbers. */
export function limitScale(outcome: LimitOutcome): LimitScale {
  const manner = mannerOf(outcome.name);
  const shown = [outcome.value, outcome.low, outcome.high, outcome.limit]
    .filter((v): v is number => v !== null && Number.isFinite(v))
    .map((v) => v * manner.factor);
  const least = Math.min(...shown);
  const most = Math.max(...shown);
  // What cannot be negative has no line below nought, whatever its doubt says; cross-talk can.
  const from = outcome.name === 'crosstalk_db' && least < 0 ? -roundUp(-least) : manner.from;
  let to = manner.to ?? roundUp(Math.max(most + (most - from) * 0.12, manner.from + (outcome.limit * manner.factor - manner.from) * 1.3));
  if (to < most) to = roundUp(most);
  if (!(to > from)) to = from + 1;
  const ends = to - from < 5 ? 1 : 0;
  return {
    from,
    to,
    fromText: shortest(from, ends),
    toText: shortest(to, ends),
    at: (value) => Math.min(1, Math.max(0, (value * manner.factor - from) / (to - from))),
  };
}

/** The next number of the kind 1, 1.5, 2, 2.5, 3, 4, 5, 6, 8 × 10ⁿ. */
function roundUp(value: number): number {
  if (!(value > 0)) return 0;
  const decade = 10 ** Math.floor(Math.log10(value));
  for (const step of [1, 1.5, 2, 2.5, 3, 4, 5, 6, 8, 10]) {
    if (step * decade >= value - 1e-9) return step * decade;
  }
  return 10 * decade;
}
