// One mount of the job: what it came to, three drawings, limits, remedies, what it was judged with, its readings.

import { AimSection } from './AimSection.tsx';
import { WordMark } from '../parts/WordMark';
import type { JobPage } from '../types';
import { percent } from './format';
import { JudgedWith } from './JudgedWith';
import { LimitsTable } from './LimitsTable';
import { ReadingsTable } from './ReadingsTable';
import type { JobRecord } from './record';
import { Remedies } from './Remedies';
import { StateDrawings } from './StateDrawings';
import { t } from './words';

interface Props {
  mount: JobPage['mounts'][number];
  page: JobPage;
  record: JobRecord;
  shown: boolean;
}

export function MountSection({ mount, page, record, shown }: Props) {
  const { verdict, problem, sheet } = mount;
  return (
    // The mounts not looked at are kept for paper: a print holds the whole job.
    <section class="mount" data-shown={shown} aria-labelledby={`mount-${mount.id}`}>
      <h2 id={`mount-${mount.id}`}>{t('desk.mount', { name: mount.name })}</h2>
      {verdict !== null && verdict.judged === 'planned' && (
        <div class="verdict" data-word="none">
          <p class="verdict-reason">{t('desk.verdict.planned')}</p>
        </div>
      )}
      {verdict !== null && verdict.judged !== 'planned' && (
        <div class="verdict" data-word={verdict.word}>
          <WordMark word={verdict.word} size={30} />
          <p class="verdict-reason">{verdict.reason.text}</p>
          <p class="verdict-odds">
            {t('desk.verdict.odds', { percent: percent(verdict.probability), state: t(`desk.state.${verdict.judged}`) })}
          </p>
        </div>
      )}
      {verdict === null && (
        <div class="verdict" data-word="none">
          <p class="verdict-reason">
            <strong>{t('desk.verdict.none')}</strong> {problem?.field && <code>{problem.field}: </code>}
            {problem?.message ?? t('desk.verdict.none-yet')}
          </p>
        </div>
      )}
      {verdict !== null && (
        <>
          <StateDrawings sheet={sheet} verdict={verdict} moves={record.moves.filter((m) => m.mount === mount.id)} />
          <LimitsTable sheet={sheet} verdict={verdict} />
          {verdict.judged !== 'planned' && <Remedies verdict={verdict} />}
          <JudgedWith sheet={sheet} verdict={verdict} />
        </>
      )}
      <ReadingsTable mount={mount.id} sheet={sheet} record={record} />
      <AimSection mount={mount} page={page} record={record} />
    </section>
  );
}
