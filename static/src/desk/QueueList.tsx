// The list on the left: jobs of one tab, oldest first, each with what its mounts came to.

import { Button } from '../parts/Button';
import { WordMark } from '../parts/WordMark';
import type { JobSummary } from '../types';
import { day, shortWhen } from './format';
import { crewName, whatOf } from './names';
import { inTab, matches, type Queue } from './queue';
import { hrefOf, tabs, type Tab } from './route';
import { t } from './words';

interface Props {
  queue: Queue;
  tab: Tab;
  open: string | null;
  search: string;
  onSearch: (text: string) => void;
}

export function QueueList({ queue, tab, open, search, onSearch }: Props) {
  if (queue.jobs === null) {
    return (
      <section class="queue">
        <p role="status" class="empty">
          {t(queue.trouble === null ? 'desk.loading' : 'desk.unreachable')}
        </p>
      </section>
    );
  }
  const all = inTab(queue.jobs, tab);
  const list = search.trim() === '' ? all : all.filter((j) => matches(j, search.trim()));
  return (
    <section class="queue" aria-label={t(`desk.tab.${tab}`)}>
      {/* Beside an open job its site is the heading of the page; without one the list is the page. */}
      {open === null ? <h1 class="spoken">{t(`desk.tab.${tab}`)}</h1> : <h2 class="spoken">{t(`desk.tab.${tab}`)}</h2>}
      <p class="queue-order">
        {t(tab === 'signed-off' ? 'desk.newest-first' : 'desk.oldest-first')}
        {queue.trouble !== null && queue.answeredAt !== null && (
          <strong role="status">
            {' '}
            {t('desk.list-old', { when: shortWhen(queue.answeredAt.toISOString(), new Date(), '') })}
          </strong>
        )}
      </p>
      {list.length === 0 && search.trim() === '' && <p class="empty">{t(`desk.empty.${tab}`)}</p>}
      {list.length === 0 && search.trim() !== '' && <p class="empty">{t('desk.search.none', { text: search.trim() })}</p>}
      <ul>
        {list.map((job) => (
          <li key={job.id}>
            <a
              href={hrefOf({ page: 'queue', tab, job: job.id, mount: null })}
              aria-current={job.id === open ? 'true' : undefined}
            >
              <span class="queue-site">{job.site}</span>
              <span class="queue-when">{when(job, tab)}</span>
              <span class="queue-what">
                {whatOf(job)} · {crewName(job.crew)}
                {job.stage === 'sent back' && <> · {t('desk.stage.sent back')}</>}
              </span>
              <span class="queue-words" hidden={tab === 'issued'}>
                {job.mounts.map((m) => {
                  const word = job.words[m.id];
                  return (
                    <span class="queue-word" key={m.id}>
                      {word === undefined ? t('desk.no-word') : <WordMark word={word} />}
                      {job.mounts.length > 1 && <span class="queue-mount">{m.name}</span>}
                    </span>
                  );
                })}
              </span>
            </a>
          </li>
        ))}
      </ul>
      {search.trim() !== '' && <Elsewhere queue={queue.jobs} tab={tab} search={search.trim()} />}
      {search.trim() !== '' && (
        <p class="queue-elsewhere">
          <Button kind="quiet" onPress={() => onSearch('')}>
            {t('desk.search.clear')}
          </Button>
        </p>
      )}
    </section>
  );
}

/** What the same search would show in the other lists. */
function Elsewhere({ queue, tab, search }: { queue: JobSummary[]; tab: Tab; search: string }) {
  const found = tabs
    .filter((other) => other !== tab)
    .map((other) => ({ other, n: inTab(queue, other).filter((j) => matches(j, search)).length }))
    .filter((f) => f.n > 0);
  if (found.length === 0) return null;
  return (
    <p class="queue-elsewhere">
      {t('desk.search.elsewhere')}{' '}
      {found.map(({ other, n }) => (
        <a key={other} href={hrefOf({ page: 'queue', tab: other, job: null, mount: null })}>
          {t(`desk.tab.${other}`)} {n}
        </a>
      ))}
    </p>
  );
}

function when(job: JobSummary, tab: Tab): string {
  if (tab === 'handed-in' && job.handed_in_at !== null) {
    return shortWhen(job.handed_in_at, new Date(), t('desk.yesterday'));
  }
  return job.visit_on === null ? '' : day(job.visit_on);
}
