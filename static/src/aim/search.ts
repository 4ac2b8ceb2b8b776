// What a log says of peak searches, sights and figures: only sorted, nothing computed. Phone and desk read it alike.
import type { Entry, EntryOf, Kind } from '../types.ts';
import type { Axis } from './questions.ts';

export interface Search {
  antenna: string;
  axis: Axis;
  number: number;
  steps: EntryOf<'level.stepped'>[];
  /** The answer that was kept, if one was, and whether steps came after it. */
  kept: EntryOf<'peak.fitted'> | null;
}

/** Entries of one kind and mount that nobody took back. */
export function standingOf<K extends Kind>(entries: readonly Entry[], mount: string, kind: K): EntryOf<K>[] {
  const gone = new Set(entries.filter((e): e is EntryOf<'reading.withdrawn'> => e.kind === 'reading.withdrawn').map((e) => e.body.withdraws));
  return entries.filter((e): e is Extract<Entry, EntryOf<K>> => e.kind === kind && e.mount === mount && !gone.has(e.id)) as unknown as EntryOf<K>[];
}

/** Every search of a mount, in the order in which they began. */
export function searchesOf(entries: readonly Entry[], mount: string): Search[] {
  const searches: Search[] = [];
  const find = (antenna: string, axis: Axis, number: number) => searches.find((s) => s.antenna === antenna && s.axis === axis && s.number === number);
  for (const step of standingOf(entries, mount, 'level.stepped')) {
    const { antenna, axis, search } = step.body;
    let there = find(antenna, axis, search);
    if (!there) {
      there = { antenna, axis, number: search, steps: [], kept: null };
      searches.push(there);
    }
    there.steps.push(step);
  }
  for (const peak of standingOf(entries, mount, 'peak.fitted')) {
    const there = find(peak.body.antenna, peak.body.axis, peak.body.search);
    if (there) there.kept = peak;
  }
  return searches;
}

/** The search that is under way for an axis, or the number that a first one gets. */
export function latestSearch(searches: readonly Search[], antenna: string, axis: Axis): Search | null {
  return searches.filter((s) => s.antenna === antenna && s.axis === axis).sort((a, b) => b.number - a.number)[0] ?? null;
}

export function controlOff(entries: readonly Entry[], mount: string): EntryOf<'power_control.confirmed'> | null {
  return standingOf(entries, mount, 'power_control.confirmed').pop() ?? null;
}
