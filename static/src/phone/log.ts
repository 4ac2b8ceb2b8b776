// What the log of one job says, as far as the views ask: confirmed cautions, readings, turned bolts, notes.
import type { EntryOf, Kind, LoggedEntry, Phase, Quantity } from '../types.ts';

export interface Said<K extends Kind> {
  entry: EntryOf<K>;
  logged: LoggedEntry;
}

/** Entries of one kind, oldest first; not those that the server set apart, which count for nobody. */
export function saidOf<K extends Kind>(log: readonly LoggedEntry[], kind: K): Said<K>[] {
  return log
    .filter((logged) => logged.entry.kind === kind && logged.whereabouts !== 'needs person')
    .map((logged) => ({ entry: logged.entry as EntryOf<K>, logged }));
}

const folded: ReadonlySet<Kind> = new Set<Kind>([
  'reading.taken',
  'reading.withdrawn',
  'bolt.moved',
  'figures.read',
  'power_control.confirmed',
  'obstacle.noted',
]);

/** What mount.fold takes of the log of one mount. */
export function forFold(log: readonly LoggedEntry[], mount: string) {
  return log
    .filter(({ entry, whereabouts }) => entry.mount === mount && whereabouts !== 'needs person')
    .filter(({ entry }) => folded.has(entry.kind))
    .map(({ entry }) => ({ id: entry.id, kind: entry.kind, mount: entry.mount, body: entry.body }));
}

/** Readings of one quantity that still stand: not withdrawn, and as left only since the bolt was last turned. */
export function standing(log: readonly LoggedEntry[], mount: string, phase: Phase, antenna: string, quantity: Quantity): Said<'reading.taken'>[] {
  const gone = new Set(saidOf(log, 'reading.withdrawn').map(({ entry }) => entry.body.withdraws));
  let kept: Said<'reading.taken'>[] = [];
  for (const logged of log) {
    const { entry } = logged;
    if (entry.mount !== mount || logged.whereabouts === 'needs person') continue;
    if (entry.kind === 'reading.taken' && entry.body.antenna === antenna && entry.body.quantity === quantity && entry.body.phase === phase) {
      if (!gone.has(entry.id)) kept.push({ entry, logged });
    }
    if (phase === 'as_left' && entry.kind === 'bolt.moved' && entry.body.antenna === antenna && entry.body.quantity === quantity) kept = [];
  }
  return kept;
}

/** When this bolt was last turned, null if never in this job. */
export function lastTurn(log: readonly LoggedEntry[], mount: string, antenna: string, quantity: Quantity): string | null {
  let at: string | null = null;
  for (const { entry } of saidOf(log, 'bolt.moved')) {
    if (entry.mount === mount && entry.body.antenna === antenna && entry.body.quantity === quantity) at = entry.at;
  }
  return at;
}
