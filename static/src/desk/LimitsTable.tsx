// Every limit of the mount: planned, as found, as left, the doubt, all on one line with the limit, and how surely met.

import { limitValue, standingOf } from '../draw/limit';
import { LimitLine } from '../draw/LimitLine';
import type { LimitName, LimitOutcome, Sheet, Verdict } from '../types';
import { percent } from './format';
import { t } from './words';

interface Props {
  sheet: Sheet;
  verdict: Verdict;
}

export function LimitsTable({ sheet, verdict }: Props) {
  const { states } = verdict;
  const planned = new Map(states.planned.values.map((v) => [v.name, v.value]));
  const of = (state: 'as_found' | 'as_left', name: LimitName) =>
    states[state]?.limits.find((l) => l.name === name) ?? null;
  // Before the first reading there is nothing to doubt: the plan alone stands beside the limits.
  const read = verdict.judged !== 'planned';
  const listed = new Set(verdict.limits.map((l) => l.name));
  const aside = verdict.not_judged.filter((n) => !listed.has(n.limit));
  return (
    <table class={read ? 'limits' : 'limits short'}>
      <caption>
        {read ? t('desk.limits.caption', { state: t(`desk.state.${verdict.judged}`) }) : t('desk.limits.caption-planned')}
      </caption>
      <thead>
        <tr>
          <th scope="col">{t('desk.limits.limit')}</th>
          <th scope="col" class="number">
            {t('desk.state.planned')}
          </th>
          {read && (
            <>
              <th scope="col" class="number">
                {t('desk.state.as_found')}
              </th>
              <th scope="col" class="number">
                {t('desk.state.as_left')}
              </th>
              <th scope="col" class="number">
                {t('desk.limits.doubt')}
              </th>
              <th scope="col">{t('desk.limits.line')}</th>
              <th scope="col" class="number">
                {t('desk.limits.met')}
              </th>
            </>
          )}
        </tr>
      </thead>
      <tbody>
        {verdict.limits.map((limit) => (
          <tr key={limit.name}>
            <th scope="row">
              {t(`limit.${limit.name}`)}
              <span class="limit-asks">
                {t(`desk.limits.${limit.sense}`, { limit: limitValue(limit.name, limit.limit) })}
              </span>
              <Reason sheet={sheet} name={limit.name} />
            </th>
            {limit.applicable && limit.value !== null ? (
              <>
                <Value label={t('desk.state.planned')} name={limit.name} value={planned.get(limit.name) ?? null} limit={limit} />
                {read && <Judged limit={limit} found={of('as_found', limit.name)} left={of('as_left', limit.name)} />}
              </>
            ) : (
              <NotJudged why={limit.why_not ?? verdict.not_judged.find((n) => n.limit === limit.name)?.why ?? ''} />
            )}
          </tr>
        ))}
        {aside.map((n) => (
          <tr key={n.limit}>
            <th scope="row">
              {t(`limit.${n.limit}`)}
              <Reason sheet={sheet} name={n.limit} />
            </th>
            <NotJudged why={n.why} />
          </tr>
        ))}
      </tbody>
    </table>
  );
}

/** Why this limit: the plan says it, and a limit without a reason says that. */
function Reason({ sheet, name }: { sheet: Sheet; name: LimitName }) {
  const reason = sheet.limits.find((l) => l.name === name)?.reason;
  return <span class="limit-reason">{reason || t('desk.limits.no-reason')}</span>;
}

/** Digits that say nothing, as in 0.000, are left out. */
function valueOf(name: LimitName, value: number, u: number | null | undefined): string {
  const text = limitValue(name, value, u);
  return /[1-9]/.test(text) ? text : limitValue(name, 0);
}

/** A doubt too small for the figures shown is said to be below the last of them. */
function doubtOf(name: LimitName, u: number): string {
  const text = limitValue(name, u, u);
  if (u === 0 || /[1-9]/.test(text)) return `±\u00a0${text}`;
  return `<\u00a0${text.replace(/0(?=\D*$)/, '1')}`;
}

function NotJudged({ why }: { why: string }) {
  return (
    <td colSpan={6} class="aside">
      {t('desk.limits.not-judged', { why })}
    </td>
  );
}

/** As found, as left, and for the state that was judged: doubt, line and probability. */
function Judged({ limit, found, left }: { limit: LimitOutcome; found: LimitOutcome | null; left: LimitOutcome | null }) {
  return (
    <>
      <Outcome label={t('desk.state.as_found')} name={limit.name} outcome={found} />
      <Outcome label={t('desk.state.as_left')} name={limit.name} outcome={left} />
      <td class="number" data-label={t('desk.limits.doubt')}>
        {limit.u === null ? '' : doubtOf(limit.name, limit.u)}
      </td>
      <td class="line" data-label={t('desk.limits.line')}>
        <LimitLine outcome={limit} bare />
      </td>
      <td class="number met" data-standing={standingOf(limit)} data-label={t('desk.limits.met')}>
        {limit.probability === null ? '' : percent(limit.probability)}
        <span class="standing">{t(`standing.${standingOf(limit)}`)}</span>
      </td>
    </>
  );
}

interface ValueProps {
  label: string;
  name: LimitName;
  value: number | null;
  u?: number | null;
  limit?: LimitOutcome;
}

/** A value, and in words whether its best estimate misses the limit. */
function Value({ label, name, value, u, limit }: ValueProps) {
  const missed =
    limit !== undefined &&
    value !== null &&
    (limit.sense === 'at least' ? value < limit.limit : value > limit.limit);
  return (
    <td class="number" data-label={label} data-missed={missed}>
      {value === null ? t('desk.limits.nothing') : valueOf(name, value, u)}
      {missed && <span class="missed">{t('desk.limits.missed')}</span>}
    </td>
  );
}

function Outcome({ label, name, outcome }: { label: string; name: LimitName; outcome: LimitOutcome | null }) {
  return outcome === null ? (
    <Value label={label} name={name} value={null} />
  ) : (
    <Value label={label} name={name} value={outcome.value} u={outcome.u} limit={outcome} />
  );
}
