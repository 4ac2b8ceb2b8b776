// Every limit of the mount: planned, as found, as left, the doubt, all on one line with the limit, and how surely met.

import { limitValue, standingOf } from '../draw/limit';
import { LimitLine } from '../draw/LimitLine';
import type { LimitName, LimitOutcome, Sheet, Verdict } from '../types';
import { t } from './words';
import { percent } from './format';

interface Props {
  sheet: Sheet;
  verdict: Verdict;
}

export function LimitsTable({ sheet, verdict }: Props) {
  const { states } = verdict;
  const planned = new Map(states.planned.values.map((v) => [v.name, v.value]));
  const of = (state: 'as_found' | 'as_left', name: LimitName) =>
    states[state]?.limits.find((l) => l.name === name) ?? null;
  const listed = new Set(verdict.limits.map((l) => l.name));
  const aside = verdict.not_judged.filter((n) => !listed.has(n.limit));
  return (
    <table class="limits">
      <caption>{t('desk.limits.caption', { state: t(`desk.state.${verdict.judged}`) })}</caption>
      <thead>
        <tr>
          <th scope="col">{t('desk.limits.limit')}</th>
          <th scope="col" class="number">
            {t('desk.state.planned')}
          </th>
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
            <Value label={t('desk.state.planned')} name={limit.name} value={planned.get(limit.name) ?? null} />
            <Outcome label={t('desk.state.as_found')} name={limit.name} outcome={of('as_found', limit.name)} />
            <Outcome label={t('desk.state.as_left')} name={limit.name} outcome={of('as_left', limit.name)} />
            {limit.applicable && limit.value !== null ? (
              <>
                <td class="number" data-label={t('desk.limits.doubt')}>
                  {limit.u === null ? '' : `±\u00a0${limitValue(limit.name, limit.u, limit.u)}`}
                </td>
                <td class="line" data-label={t('desk.limits.line')}>
                  <LimitLine outcome={limit} bare />
                </td>
                <td class="number met" data-standing={standingOf(limit)} data-label={t('desk.limits.met')}>
                  {limit.probability === null ? '' : percent(limit.probability)}
                  <span class="standing">{t(`standing.${standingOf(limit)}`)}</span>
                </td>
              </>
            ) : (
              <td colSpan={3} class="aside">
                {t('desk.limits.not-judged', { why: limit.why_not ?? '' })}
              </td>
            )}
          </tr>
        ))}
        {aside.map((n) => (
          <tr key={n.limit}>
            <th scope="row">
              {t(`limit.${n.limit}`)}
              <Reason sheet={sheet} name={n.limit} />
            </th>
            <td colSpan={6} class="aside">
              {t('desk.limits.not-judged', { why: n.why })}
            </td>
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

function Value({ label, name, value }: { label: string; name: LimitName; value: number | null }) {
  return (
    <td class="number" data-label={label}>
      {value === null ? t('desk.limits.nothing') : limitValue(name, value)}
    </td>
  );
}

function Outcome({ label, name, outcome }: { label: string; name: LimitName; outcome: LimitOutcome | null }) {
  if (outcome === null || outcome.value === null) return <Value label={label} name={name} value={null} />;
  const missed = outcome.margin !== null && outcome.margin < 0;
  return (
    <td class="number" data-label={label} data-missed={missed}>
      {limitValue(name, outcome.value, outcome.u)}
      {missed && <span class="missed">{t('desk.limits.missed')}</span>}
    </td>
  );
}
