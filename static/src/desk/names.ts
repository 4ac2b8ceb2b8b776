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
