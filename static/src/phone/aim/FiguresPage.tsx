// Radio figures of both ends: what was typed of each radio's page, predicted beside measured, and what may be wrong.
import type { FaultRanking, PredictedFigure } from '../../aim/answers.ts';
import { Candidates, FiguresTable } from '../../aim/FiguresView.tsx';
import { ExpectedLevels } from '../../aim/PathView.tsx';
import { faultQuestion } from '../../aim/questions.ts';
import { controlOff, standingOf } from '../../aim/search.ts';
import { useReckoned } from '../../aim/useReckoned.ts';
import { Button } from '../../parts/Button.tsx';
import { Message } from '../../parts/Message.tsx';
import { say } from '../../words/aim.ts';
import { when } from '../../words/when.ts';
import { Gone } from '../Gone.tsx';
import { Page } from '../Page.tsx';
import { hrefOf } from '../route.ts';
import { Visit } from '../Visit.tsx';
import { PowerControl } from './PeakPage.tsx';
import { type Address, ask, type AimOpen, useAim, usePath, useTarget } from './useAim.ts';

export function FiguresPage(props: Address) {
  const open = useAim(props.job, props.mount);
  if (!open) return <Gone looking={open === undefined} />;
  return <Figures {...props} open={open} />;
}

function Figures({ open, job: jobId, mount: mountId }: Address & { open: AimOpen }) {
  const { job, log, mount, sheet, entries } = open;
  const target = useTarget(sheet);
  const path = usePath(sheet, target.answer?.distance_m ?? null);
  const waits = sheet.path.near_at && path.asking;
  const question = open.folded && !waits ? faultQuestion(sheet, path.answer) : null;
  const ranking = useReckoned<FaultRanking>(ask, 'fault.rank', question);
  const read = standingOf(entries, mountId, 'figures.read');
  const place = { job: jobId, mount: mountId };
  const predicted = ranking.answer?.expected ?? [];
  return (
    <Page
      title={say('figures.title')}
      under={mount.name}
      backHref={hrefOf({ page: 'mount', ...place, step: 'adjust' })}
      head={<Visit job={job} log={log} mount={mountId} here="figures" />}
      dock={
        <div class="actions">
          {(['near', 'far'] as const).map((end, i) => (
            <Button key={end} kind={i === 0 ? 'first' : 'plain'} extra="grow" href={hrefOf({ page: `radio-${end}`, ...place })}>
              {say(`figures.type.${end}`)}
            </Button>
          ))}
        </div>
      }
    >
      {open.problem && <Message tone="wrong">{open.problem.message}</Message>}
      <PowerControl job={jobId} mount={mountId} off={controlOff(entries, mountId)} />
      <p>{say('figures.what')}</p>
      {read.length === 0 && path.answer && (
        <section class="section stack" aria-labelledby="expected-title">
          <h2 id="expected-title">{say('path.levels')}</h2>
          <ExpectedLevels sheet={sheet} path={path.answer} />
        </section>
      )}
      {ranking.problem && (
        <Message tone="wrong">
          <p>{ranking.problem.message}</p>
          {/^radio\./.test(ranking.problem.field) && <p>{say('figures.desk-mends')}</p>}
        </Message>
      )}
      {ranking.answer && (
        <section class="section stack" aria-labelledby="wrong-title">
          <h2 id="wrong-title">{say('fault.title')}</h2>
          <Candidates ranking={ranking.answer} />
        </section>
      )}
      {(['near', 'far'] as const).map((end) => {
        const last = read.filter((r) => r.body.end === end).pop();
        const of: PredictedFigure[] = predicted.filter((p) => p.end === end);
        return (
          <section class="section stack" key={end} aria-labelledby={`end-${end}`}>
            <h2 id={`end-${end}`}>{say(`figures.end.${end}`)}</h2>
            {!last && <p>{say(`figures.unread.${end}`)}</p>}
            {last && <p class="quiet">{say('figures.read-at', { when: when(last.at) })}</p>}
            {of.length > 0 && <FiguresTable predicted={of} caption={say('figures.beside')} />}
          </section>
        );
      })}
    </Page>
  );
}
