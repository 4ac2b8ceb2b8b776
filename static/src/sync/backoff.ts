// How long to wait before the next try. Many phones come back into coverage at once: without chance in it they would
// all knock at the same moment.

const FIRST_MS = 2_000;
const MOST_MS = 5 * 60_000;

/**
 * Half of the doubled step is certain, half is chance:
 *
 *     step = min(5 min, 2 s · 2^failures),  wait = step/2 + random · step/2
 *
 * never shorter than what the server asked for.
 */
export function waitAfter(failures: number, retryAfterS: number | null, random: number): number {
  const step = Math.min(MOST_MS, FIRST_MS * 2 ** Math.min(failures, 20));
  return Math.max(step / 2 + random * (step / 2), (retryAfterS ?? 0) * 1000);
}
