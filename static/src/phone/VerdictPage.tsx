// The verdict opened: value, doubt and limit of each limit on its line, what helps, what decides, what each means, and
// under which conditions all this holds.
import { LimitLine } from '../draw/LimitLine.tsx';
import { limitTitle } from '../draw/limit.ts';
import { Square, toneOf } from '../draw/Square.tsx';
import { turnSentence } from '../draw/turn.ts';
import { Message } from '../parts/Message.tsx';
import type { LimitName, Sheet } from '../types.ts';
import { percent } from '../words/figures.ts';
import { t } from '../words/words.ts';
import { Gone } from './Gone.tsx';
import { useJudged } from './judge.ts';
import { Page } from './Page.tsx';
import { hrefOf, type MountStep, phaseOf } from './route.ts';
import { doubt, mirrorFact, reasonOf, remedyGain, unitSign } from './sentence.ts';
import { useJob } from './useJob.ts';

export function VerdictPage({ job: id, mount: mountId, step }: { job: string; mount: string; step: MountStep }) {
  const open = useJob(id);
  const mount = open?.job.plan.mounts.find((m) => m.id === mountId);
  const { verdict, sheet, problem, thinking } = useJudged(mount, open?.log, step);
  if (!open || !mount) return <Gone looking={open === undefined} />;
  const back = hrefOf({ page: 'mount', job: id, mount: mountId, step });
  const under = `${open.job.plan.site}, ${mount.name}, ${t(`phase.${phaseOf(step)}`)}`;
  if (problem || !verdict || !sheet) {
    return (
      <Page title={t('verdict.title')} under={under} backHref={back}>
        {problem ? <Message tone="wrong">{t('strip.cannot', { why: problem.message })}</Message> : <p>{t('strip.thinking')}</p>}
      </Page>
    );
  }
  const { deciding } = verdict;
  const mirror = mirrorFact(sheet);
  return (
    <Page
      title={t('verdict.title')}
      under={under}
      backHref={back}
      head={
        <section class={`strip opened ${toneOf(verdict.word)}`} aria-label={t('verdict.title')} aria-busy={thinking} data-word={verdict.word}>
          <span class="strip-head">
            <Square word={verdict.word} size={44} />
            <strong class="strip-word">{t(`word.${verdict.word}`)}</strong>
          </span>
          <span class="reason">{reasonOf(verdict, sheet)}</span>
          <span>{t(`phase.${verdict.judged}`)}</span>
        </section>
      }
    >
      <section class="section stack" aria-labelledby="limits-title">
        <h2 id="limits-title">{t('verdict.limits')}</h2>
        {verdict.limits.map((outcome) => (
          <LimitLine key={outcome.name} outcome={outcome} />
        ))}
        <p class="quiet">{t('verdict.legend')}</p>
        <p class="figure">{t('verdict.chance', { percent: percent(verdict.probability) })}</p>
      </section>

      {verdict.word !== 'go' && (
        <section class="section stack" aria-labelledby="turns-title">
          <h2 id="turns-title">{t('verdict.turns')}</h2>
          {verdict.remedies.length === 0 && <p>{t('verdict.no-turns')}</p>}
          <ol class="turns">
            {verdict.remedies.map((remedy) => (
              <li key={`${remedy.antenna} ${remedy.quantity} ${remedy.direction}`}>
                <strong>{turnSentence(remedy)}</strong>
                <span class="figure">{remedyGain(remedy)}</span>
              </li>
            ))}
          </ol>
        </section>
      )}

      {deciding && verdict.word === 'measure again' && (
        <section class="section" aria-labelledby="deciding-title">
          <h2 id="deciding-title">{t('verdict.deciding')}</h2>
          <p class="figure">
            {t('verdict.deciding-text', { u: doubt(deciding.u) + unitSign(deciding.unit), antenna: deciding.antenna, quantity: t(`quantity.${deciding.quantity}`) })}{' '}
            {deciding.u_needed === null ? t('verdict.deciding-never') : t('verdict.deciding-needed', { needed: doubt(deciding.u_needed) + unitSign(deciding.unit) })}
          </p>
        </section>
      )}

      {verdict.missing.length > 0 && (
        <section class="section" aria-labelledby="missing-title">
          <h2 id="missing-title">{t('verdict.missing')}</h2>
          <p>{verdict.missing.map((m) => `${m.antenna} ${t(`quantity.${m.quantity}`)}`).join(', ')}</p>
        </section>
      )}

      <section class="section stack" aria-labelledby="means-title">
        <h2 id="means-title">{t('verdict.means')}</h2>
        <dl class="meanings">
          {verdict.limits.map(({ name }) => (
            <div key={name}>
              <dt>{limitTitle(name)}</dt>
              <dd>
                {t(`means.${name}`)}
                {reasonOfLimit(sheet, name)}
              </dd>
            </div>
          ))}
        </dl>
      </section>

      <section class="section" aria-labelledby="conditions-title">
        <h2 id="conditions-title">{t('verdict.conditions')}</h2>
        <ul class="plain-list">
          <li>{t(verdict.surroundings.sight ? 'mount.sight' : 'mount.no-sight')}</li>
          <li>{t(verdict.far_from_plan ? 'mount.far-plan' : 'mount.far-read')}</li>
          {mirror && <li>{mirror}</li>}
          {step === 'adjust' && <li>{t('mount.stands')}</li>}
          {verdict.not_judged.map(({ limit, why }) => (
            <li key={limit}>
              {t('verdict.not-judged')}: {t('verdict.not-judged-line', { limit: limitTitle(limit), why })}
            </li>
          ))}
          <li class="quiet">{t('verdict.method', { version: verdict.method.version })}</li>
        </ul>
      </section>
    </Page>
  );
}

/** Why this job has this limit, in the planner's words. */
function reasonOfLimit(sheet: Sheet, name: LimitName) {
  const reason = sheet.limits.find((limit) => limit.name === name)?.reason;
  return reason ? <p class="quiet">{t('verdict.why-limit', { reason: reason.replace(/\.$/, '') })}</p> : null;
}
