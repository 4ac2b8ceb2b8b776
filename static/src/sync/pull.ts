// Brings the crew's jobs to this phone: the list, then each job that moved on since it was last brought.
import type { Entry } from '../types.ts';
import { changed } from '../store/database.ts';
import { sha256 } from '../store/hash.ts';
import { forgetJobs, heldSummaries, keepPulled, keepSummary } from '../store/jobs.ts';
import type { PulledEntry } from '../store/jobs.ts';
import { localTime } from '../store/time.ts';
import { ask } from './server.ts';
import { isJobList, isJobPage } from './shapes.ts';

export async function pull(): Promise<void> {
  const { jobs } = await ask('GET', '/api/jobs', undefined, isJobList);
  const held = await heldSummaries();
  let news = false;
  for (const summary of jobs) {
    const before = held.get(summary.id);
    if (before?.head_seq === summary.head_seq) {
      if (JSON.stringify(before) !== JSON.stringify(summary)) {
        await keepSummary(summary);
        news = true;
      }
      continue;
    }
    const page = await ask('GET', `/api/jobs/${encodeURIComponent(summary.id)}`, undefined, isJobPage);
    const entries: PulledEntry[] = [];
    for (const one of page.entries) {
      const entry = JSON.parse(one.raw) as Entry;
      entries.push({
        id: entry.id,
        device: entry.device,
        device_seq: entry.device_seq,
        seq: one.seq,
        raw: one.raw,
        hash: await sha256(one.raw), // of the text that came, not what somebody says of it
        author_name: one.author_name ?? null,
        received_at: one.received_at ?? null,
      });
    }
    await keepPulled(page.job, page.plan, entries, localTime(new Date()));
    news = true;
  }
  if (await forgetJobs(new Set(jobs.map((summary) => summary.id)))) news = true;
  if (news) changed();
}
