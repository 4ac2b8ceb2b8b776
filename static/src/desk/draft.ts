// The job being planned, kept in this browser while it is typed: a closed tab does not lose an hour's work. It is no
// part of the record until it is issued.

import { uuidv7 } from 'uuidv7';
import { sheetFrom, sheetText } from './sheets';

export interface MountDraft {
  id: string;
  name: string;
  /** The mount sheet as text: the form and the text field are two views of it. */
  text: string;
}

export interface JobDraft {
  /** The job's id, kept over a retry: the server makes one job of it. */
  id: string;
  site: string;
  title: string;
  crew: string;
  visit_on: string;
  access: string;
  emergency: string;
  lat: string;
  lon: string;
  mounts: MountDraft[];
}

const key = 'crossplumb.desk.plan';

export function newDraft(): JobDraft {
  return {
    id: uuidv7(),
    site: '',
    title: '',
    crew: '',
    visit_on: '',
    access: '',
    emergency: '',
    lat: '',
    lon: '',
    mounts: [newMount([])],
  };
}

export function newMount(others: MountDraft[]): MountDraft {
  let n = 1;
  while (others.some((m) => m.id === `m${n}`)) n += 1;
  return { id: `m${n}`, name: '', text: sheetText(sheetFrom('crossed pair')) };
}

export function keptDraft(): JobDraft | null {
  try {
    const kept = JSON.parse(localStorage.getItem(key) ?? 'null') as JobDraft | null;
    return kept !== null && typeof kept.id === 'string' && Array.isArray(kept.mounts) && kept.mounts.length > 0
      ? kept
      : null;
  } catch {
    return null;
  }
}

export function keepDraft(draft: JobDraft): void {
  try {
    localStorage.setItem(key, JSON.stringify(draft));
  } catch {
    // No room or no storage: the draft then lives as long as the tab.
  }
}

export function dropDraft(): void {
  try {
    localStorage.removeItem(key);
  } catch {
    // As above.
  }
}
