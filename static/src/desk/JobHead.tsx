// The head of a job: site, what kind of visit, by whom, how much came in, which mount is looked at, where it stands.

import type { RefObject } from 'preact';
import { WordMark } from '../parts/WordMark';
import type { JobPage } from '../types';
import { day, deskTime, placeTime } from './format';
import { crewName, whatOf } from './names';
import type { JobRecord } from './record';
import { hrefOf, type Tab } from './route';
import { t } from './words';

interface Props {
  heading: RefObject<HTMLHeadingElement | null>;
  page: JobPage;
  record: JobRecord;
  shown: string | null;
  tab: Tab;
}

export function JobHead({ heading, page, record, shown, tab }: Props) {
  const { job } = page;
  const facts = [
    ...(page.mounts.length === 1 ? page.mounts.map((m) => t('desk.mount', { name: m.name })) : []),
    job.visit_on === null ? t('desk.no-visit') : t('desk.visit', { day: day(job.visit_on) }),
    crewName(job.crew),
    ...(record.phones.length > 0 ? [t('desk.phones', { n: record.phones.length })] : []),
    t('desk.entries', { n: job.entries }),
  ];
  return (
    <header class="job-head">
      <div class="job-title">
        <h1 tabIndex={-1} ref={heading}>
          {job.site}
        </h1>
        <p class="job-what">{whatOf(job)}</p>
        <p class="stage" data-stage={job.stage}>
          {t(`desk.stage.${job.stage}`)}
          {job.stage === 'handed in' && job.handed_in_at !== null && <> {placeTime(job.handed_in_at)}</>}
        </p>
      </div>
      <p class="job-facts">{facts.join(' · ')}</p>
      {record.signedOff !== null && (
        <p class="decided" data-decision="sign off">
          <strong>
            {t('desk.signed-by', { name: record.signedOff.by, when: deskTime(record.signedOff.at) })}
          </strong>{' '}
          {record.signedOff.body.remark && <span class="remark">{record.signedOff.body.remark}</span>}
        </p>
      )}
      {job.stage === 'sent back' && job.remark !== null && (
        <p class="decided" data-decision="send back">
          <strong>{t('desk.sent-back-why')}</strong> <span class="remark">{job.remark}</span>
        </p>
      )}
      {page.mounts.length > 1 && (
        <nav class="mounts" aria-label={t('desk.mounts')}>
          {page.mounts.map((m) => (
            <a
              key={m.id}
              href={hrefOf({ page: 'queue', tab, job: job.id, mount: m.id })}
              aria-current={m.id === shown ? 'true' : undefined}
            >
              {m.name} {m.verdict !== null && m.verdict.judged !== 'planned' && <WordMark word={m.verdict.word} />}
            </a>
          ))}
        </nav>
      )}
    </header>
  );
}
