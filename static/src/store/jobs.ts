// The jobs that this phone took along, and the stage of each with its own waiting entries counted in.
import type { Entry, JobSummary, Kind, PhoneJob, Plan, Stage } from '../types.ts';
import { withDatabase, write } from './database.ts';
import type { EntryRow, JobRow } from './database.ts';

/** The jobs on this phone: those of today and later first, then by site. */
export async function jobs(): Promise<PhoneJob[]> {
  const [rows, waiting] = await withDatabase(async (db) => {
    const tx = db.transaction(['jobs', 'entries']);
    return Promise.all([
      tx.objectStore('jobs').getAll(),
      tx.objectStore('entries').index('by whereabouts').getAll([1, 'waiting']),
    ]);
  });
  return rows.map((row) => phoneJob(row, waiting)).sort(byVisit);
}

export async function job(id: string): Promise<PhoneJob | null> {
  const [row, waiting] = await withDatabase(async (db) => {
    const tx = db.transaction(['jobs', 'entries']);
    return Promise.all([
      tx.objectStore('jobs').get(id),
      tx.objectStore('entries').index('by whereabouts').getAll([1, 'waiting']),
    ]);
  });
  return row ? phoneJob(row, waiting) : null;
}

function phoneJob(row: JobRow, allWaiting: EntryRow[]): PhoneJob {
  const waiting = allWaiting.filter((entry) => entry.job === row.id).sort((a, b) => a.device_seq - b.device_seq);
  return {
    summary: row.summary,
    plan: row.plan,
    stage: stageAfter(
      row.summary.stage,
      waiting.map((entry) => (JSON.parse(entry.raw) as Entry).kind),
    ),
    remark: row.summary.remark,
    waiting: waiting.length,
    pulledAt: row.pulled_at,
  };
}

/** The stage that follows from the server's by entries that it has not seen yet. The desk's decisions come from it only. */
export function stageAfter(stage: Stage, kinds: readonly Kind[]): Stage {
  for (const kind of kinds) {
    if (stage === 'signed off') break; // what comes later is set apart by the server, and a person looks at it
    if (kind === 'job.handed_in') stage = 'handed in';
    else if (work.has(kind) && (stage === 'issued' || stage === 'sent back')) stage = 'under way';
  }
  return stage;
}

const work: ReadonlySet<Kind> = new Set<Kind>(['caution.confirmed', 'reading.taken', 'bolt.moved', 'level.stepped', 'figures.read']);

function byVisit(a: PhoneJob, b: PhoneJob): number {
  const day = (job: PhoneJob) => job.summary.visit_on ?? '9999';
  return day(a).localeCompare(day(b)) || a.summary.site.localeCompare(b.summary.site) || a.summary.id.localeCompare(b.summary.id);
}

/** What the phone holds of each job, to ask the server only for those that moved on. */
export async function heldSummaries(): Promise<Map<string, JobSummary>> {
  const rows = await withDatabase((db) => db.getAll('jobs'));
  return new Map(rows.map((row) => [row.id, row.summary]));
}

/** The server's line about a job, where nothing but the line is new: it judges a mount after it took the entries. */
export async function keepSummary(summary: JobSummary): Promise<void> {
  await write(['jobs'], async (tx) => {
    const row = await tx.objectStore('jobs').get(summary.id);
    if (row) await tx.objectStore('jobs').put({ ...row, summary });
  });
}

/** A server that was restored may have other entries under the numbers that this phone knows: all jobs are asked for anew. */
export async function doubtHeads(): Promise<void> {
  await write(['jobs'], async (tx) => {
    for (const row of await tx.objectStore('jobs').getAll()) {
      await tx.objectStore('jobs').put({ ...row, summary: { ...row.summary, head_seq: -1 } });
    }
  });
}

export interface PulledEntry {
  id: string;
  device: string;
  device_seq: number;
  seq: number;
  raw: string;
  hash: string;
  author_name: string | null;
  received_at: string | null;
}

/**
 * Puts a job as the server has it beside what was made here. Own entries that come back are thereby safe; one that was
 * called safe and does not come back is lost there (a disk that lied, a file that was copied back) and goes up again.
 * Others' entries that the server does not have any more are not kept.
 */
export async function keepPulled(summary: JobSummary, plan: Plan, entries: PulledEntry[], now: string): Promise<void> {
  await write(['jobs', 'entries', 'outbox'], async (tx) => {
    const all = tx.objectStore('entries');
    await tx.objectStore('jobs').put({ id: summary.id, summary, plan, pulled_at: now });
    const there = new Set(entries.map((pulled) => pulled.id));
    for (const row of await all.index('by job').getAll(summary.id)) {
      if (there.has(row.id)) continue;
      if (row.own === 0) await all.delete(row.id);
      else if (row.whereabouts === 'safe') {
        await all.put({ ...row, whereabouts: 'waiting', seq: null });
        await tx.objectStore('outbox').put({ device_seq: row.device_seq, id: row.id });
      }
    }
    for (const pulled of entries) {
      const held = await all.get(pulled.id);
      // Two texts under one id, or two entries under one number of a device: the server shows it to a person; ours stays.
      if (held?.own === 1 && held.hash !== pulled.hash) continue;
      const numbered = await all.index('by device').get([pulled.device, pulled.device_seq]);
      if (numbered && numbered.id !== pulled.id) {
        if (numbered.own === 1) continue;
        await all.delete(numbered.id);
      }
      await all.put({
        id: pulled.id,
        device: pulled.device,
        device_seq: pulled.device_seq,
        job: summary.id,
        raw: pulled.raw,
        hash: pulled.hash,
        own: held?.own ?? 0,
        whereabouts: 'safe',
        seq: pulled.seq,
        reason: null,
        author_name: pulled.author_name,
        received_at: pulled.received_at,
      });
      if (held?.own === 1) await tx.objectStore('outbox').delete(held.device_seq);
    }
  });
}

/** A job that is no longer the crew's leaves the phone with others' entries; those made here stay, whatever the server says. */
export async function forgetJobs(kept: ReadonlySet<string>): Promise<boolean> {
  return write(['jobs', 'entries'], async (tx) => {
    const waiting = new Set((await tx.objectStore('entries').index('by whereabouts').getAll([1, 'waiting'])).map((e) => e.job));
    let gone = false;
    for (const id of await tx.objectStore('jobs').getAllKeys()) {
      if (kept.has(id) || waiting.has(id)) continue;
      await tx.objectStore('jobs').delete(id);
      for (const row of await tx.objectStore('entries').index('by job').getAll(id)) {
        if (row.own === 0) await tx.objectStore('entries').delete(row.id);
      }
      gone = true;
    }
    return gone;
  });
}
