// The list of jobs, kept fresh while somebody looks at it.

import { useCallback, useEffect, useRef, useState } from 'preact/hooks';
import type { JobSummary } from '../types';
import { ApiProblem, jobs as fetchJobs } from './api';
import { tabOf, type Tab } from './route';

export const pollMs = 15_000;

export interface Queue {
  jobs: JobSummary[] | null;
  /** When the server last answered, null before the first answer. */
  answeredAt: Date | null;
  /** Why the last try brought nothing, else null. What is on screen is then older than it looks. */
  trouble: 'unreachable' | 'problem' | null;
  refresh: () => void;
}

/** `on` is false while nobody is signed in. */
export function useQueue(on: boolean): Queue {
  const [jobs, setJobs] = useState<JobSummary[] | null>(null);
  const [answeredAt, setAnsweredAt] = useState<Date | null>(null);
  const [trouble, setTrouble] = useState<Queue['trouble']>(null);
  const busy = useRef(false);

  const refresh = useCallback(() => {
    if (busy.current) return;
    busy.current = true;
    fetchJobs()
      .then(
        (list) => {
          setJobs(list);
          setAnsweredAt(new Date());
          setTrouble(null);
        },
        (err: unknown) => setTrouble(err instanceof ApiProblem ? 'problem' : 'unreachable'),
      )
      .finally(() => {
        busy.current = false;
      });
  }, []);

  useEffect(() => {
    if (!on) return;
    const look = () => {
      if (document.visibilityState === 'visible') refresh();
    };
    look();
    const timer = setInterval(look, pollMs);
    document.addEventListener('visibilitychange', look);
    return () => {
      clearInterval(timer);
      document.removeEventListener('visibilitychange', look);
    };
  }, [on, refresh]);

  return { jobs, answeredAt, trouble, refresh };
}

/** What the list of a tab is ordered by: the moment that the job came to stand there, as far as it is known. */
export function standsSince(job: JobSummary): string {
  if (job.stage === 'handed in' && job.handed_in_at !== null) return job.handed_in_at;
  return job.visit_on ?? '';
}

/** Jobs of a tab, oldest first; the newest decision first where everything is done. */
export function inTab(jobs: JobSummary[], tab: Tab): JobSummary[] {
  const list = jobs.filter((j) => tabOf(j.stage) === tab);
  if (tab === 'signed-off') return list.sort((a, b) => b.stage_seq - a.stage_seq);
  if (tab === 'handed-in') {
    const moment = (j: JobSummary) => (j.handed_in_at === null ? 0 : Date.parse(j.handed_in_at));
    return list.sort((a, b) => moment(a) - moment(b) || a.stage_seq - b.stage_seq);
  }
  return list.sort((a, b) => standsSince(a).localeCompare(standsSince(b)) || a.stage_seq - b.stage_seq);
}

/** Every word typed is found somewhere in site, title, crew, mounts, verdict words or remark. */
export function matches(job: JobSummary, search: string): boolean {
  const text = [
    job.site,
    job.title,
    job.crew,
    job.stage,
    job.visit_on ?? '',
    job.remark ?? '',
    ...job.mounts.map((m) => m.name),
    ...Object.values(job.words),
  ]
    .join(' ')
    .toLocaleLowerCase();
  return search
    .toLocaleLowerCase()
    .split(/\s+/)
    .every((word) => text.includes(word));
}
