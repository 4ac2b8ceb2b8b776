// The head and foot of each printed sheet: which job, and the head of the log that it was printed from.

import type { JobSummary } from '../types';
import type { LogState } from './api';
import { deskTime } from './format';
import { crewName, whatOf } from './names';
import { t } from './words';

let sheet: CSSStyleSheet | null = null;

/** A CSS string of any text: quotes, backslashes and line breaks cannot leave it. */
function quoted(text: string): string {
  return `"${text.replace(/[\u0000-\u001f]/g, ' ').replace(/["\\]/g, (c) => `\\${c}`)}"`;
}

// Margin boxes of @page take their text from a style rule only, and the page's policy allows no inline style: a
// constructed sheet is neither.
export function setPaperHead(job: JobSummary, log: LogState | null): void {
  if (sheet === null) {
    sheet = new CSSStyleSheet();
    document.adoptedStyleSheets = [...document.adoptedStyleSheets, sheet];
  }
  const head = `${job.site} · ${whatOf(job)} · ${crewName(job.crew)}`;
  const foot = log === null ? t('desk.paper.job', { id: job.id })
      : t('desk.paper.log', { seq: log.head.seq, hash: log.head.hash });
  const printed = t('desk.paper.printed', { when: deskTime(new Date().toISOString()) });
  sheet.replaceSync(`@page {
    @top-left { content: ${quoted(head)}; }
    @top-right { content: ${quoted(printed)}; }
    @bottom-left { content: ${quoted(foot)}; }
    @bottom-right { content: counter(page) ${quoted(t('desk.paper.of'))} counter(pages); }
  }`);
}
