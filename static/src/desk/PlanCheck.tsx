// The plan as the server judges it while it is typed: drawn, its values beside the limits, or what is wrong and where.

import { useEffect, useRef, useState } from 'preact/hooks';
import { limitValue } from '../draw/limit';
import { Message } from '../parts/Message';
import type { Problem, Sheet, Verdict } from '../types';
import * as api from './api';
import { PlacedMount } from './PlacedMount';
import { sheetIn } from './sheets';
import { t } from './words';

export interface Check {
  /** The verdict on the text as it stands, null while it is being asked or cannot be given. */
  verdict: Verdict | null;
  problem: Problem | null;
  asking: boolean;
  unreachable: boolean;
  /** A field holds no number: there is nothing to judge, for the sheet would have one that nobody sees. */
  waits: boolean;
}

/** Long enough not to ask at each keystroke, short enough to be felt as an answer. */
const pauseMs = 400;

const nothing: Check = { verdict: null, problem: null, asking: true, unreachable: false, waits: false };

export function usePlanCheck(text: string, unread: boolean, onFit: (fit: boolean) => void): Check {
  const [check, setCheck] = useState<Check>(nothing);
  const latest = useRef(0);
  const report = useRef(onFit);
  report.current = onFit;

  useEffect(() => {
    const turn = ++latest.current;
    report.current(false);
    setCheck((c) => ({ ...c, asking: true }));
    const sheet = sheetIn(text);
    if (sheet === null) {
      setCheck({ ...nothing, asking: false });
      return;
    }
    if (unread) {
      setCheck({ ...nothing, asking: false, waits: true });
      return;
    }
    const settle = (next: Partial<Check>) => {
      if (turn === latest.current) setCheck({ ...nothing, asking: false, ...next });
    };
    const ask = () =>
      api.judge(sheet).then(
        (verdict) => {
          if (turn === latest.current) report.current(true);
          settle({ verdict });
        },
        (err: unknown) => {
          if (!(err instanceof api.ApiProblem)) return settle({ unreachable: true });
          settle({ problem: { code: err.code, field: err.field, message: err.detail } });
        },
      );
    const timer = setTimeout(() => void ask(), pauseMs);
    return () => clearTimeout(timer);
  }, [text, unread]);

  return check;
}

export function PlanCheck({ id, sheet, check }: { id: string; sheet: Sheet | null; check: Check }) {
  const { verdict, problem } = check;
  return (
    <aside id={id} tabIndex={-1} class="plan-check" aria-busy={check.asking} aria-live="polite">
      <h3>{t('desk.check')}</h3>
      {check.unreachable && <Message tone="warn">{t('desk.check.unreachable')}</Message>}
      {check.waits && sheet !== null && <p>{t('desk.check.waits')}</p>}
      {problem !== null && (
        <Message tone="wrong">
          {problem.field !== '' && <code class="at-field">{problem.field}</code>}
          {problem.message}
        </Message>
      )}
      {sheet === null && <p>{t('desk.plan.unreadable')}</p>}
      {verdict !== null && sheet !== null && problem === null && (
        <>
          <p class="drawing-note">{t('drawing.from-behind')}</p>
          <div class="drawing">
            <PlacedMount sheet={sheet} verdict={verdict} state="planned" most={260} />
          </div>
          <PlannedValues verdict={verdict} />
          <p class="hint">
            {t(verdict.surroundings.sight ? 'desk.sight' : 'desk.no-sight')} · {verdict.surroundings.text}
          </p>
        </>
      )}
      {check.asking && (
        <p class="hint" role="status">
          {t('desk.check.asking')}
        </p>
      )}
    </aside>
  );
}

/** What the mount gives when it hangs exactly as planned. A plan that misses its own limit is told before the climb. */
function PlannedValues({ verdict }: { verdict: Verdict }) {
  const { values } = verdict.states.planned;
  return (
    <table class="planned-values">
      <caption>{t('desk.check.caption')}</caption>
      <thead>
        <tr>
          <th scope="col">{t('desk.limits.limit')}</th>
          <th scope="col" class="number">
            {t('desk.check.asked')}
          </th>
          <th scope="col" class="number">
            {t('desk.state.planned')}
          </th>
        </tr>
      </thead>
      <tbody>
        {verdict.limits.map((limit) => {
          const value = values.find((v) => v.name === limit.name)?.value ?? null;
          const missed = value !== null && (limit.sense === 'at least' ? value < limit.limit : value > limit.limit);
          return (
            <tr key={limit.name}>
              <th scope="row">{t(`limit.${limit.name}`)}</th>
              {value === null || !limit.applicable ? (
                <td colSpan={2} class="aside">
                  {t('desk.limits.not-judged', { why: limit.why_not ?? '' })}
                </td>
              ) : (
                <>
                  <td class="number">
                    {t(`desk.limits.${limit.sense}`, { limit: limitValue(limit.name, limit.limit) })}
                  </td>
                  <td class="number" data-missed={missed}>
                    {limitValue(limit.name, value)}
                    {missed && <span class="missed">{t('desk.limits.missed')}</span>}
                  </td>
                </>
              )}
            </tr>
          );
        })}
      </tbody>
    </table>
  );
}
