// How crews and jobs are called on the page, without saying a word twice.

import type { JobSummary } from '../types';
import { t } from './words';

/** "crew Tern"; a crew that is called "North crew" already says what it is. */
export function crewName(crew: string): string {
  return /\bcrew\b/i.test(crew) ? crew : t('desk.crew', { crew });
}

/** What is done there, without the site's name where the title begins with it. */
export function whatOf(job: JobSummary): string {
  if (!job.title.toLocaleLowerCase().startsWith(job.site.toLocaleLowerCase())) return job.title;
  const rest = job.title.slice(job.site.length).replace(/^[\s,:;·–-]+/, '');
  return rest === '' ? job.title : rest;
}

/** The crew as it is already written elsewhere, where only capitals or spaces differ: a job goes to the phones of exactly this name. */
export function crewAsKnown(typed: string, known: readonly string[]): string {
  const same = (name: string) => name.trim().replace(/\s+/g, ' ').toLocaleLowerCase();
  return known.find((crew) => same(crew) === same(typed)) ?? typed.trim().replace(/\s+/g, ' ');
}
