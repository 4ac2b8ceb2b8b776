// What a wrench can still do, best first, with what it buys; and what has to be read, or read better.

import { limitValue } from '../draw/limit';
import type { Remedy, Verdict } from '../types';
import { doubt, percent } from './format';
import { t } from './words';

export function Remedies({ verdict }: { verdict: Verdict }) {
  const { remedies, deciding, missing } = verdict;
  if (remedies.length === 0 && deciding === null && missing.length === 0) return null;
  return (
    <section class="remedies">
      <h3>{t('desk.remedies')}</h3>
      {remedies.length > 0 && (
        <ol>
          {remedies.map((r) => (
            <li key={`${r.antenna} ${r.quantity}`}>
              <strong>{r.text}</strong> <span>{buys(r)}</span>
            </li>
          ))}
        </ol>
      )}
      {deciding !== null && (
        <p>
          {t(deciding.u_needed === null ? 'desk.deciding.no-help' : 'desk.deciding', {
            antenna: deciding.antenna,
            quantity: t(`quantity.${deciding.quantity}`),
            u: doubt(deciding.u, deciding.unit),
            needed: deciding.u_needed === null ? '' : doubt(deciding.u_needed, deciding.unit),
          })}
        </p>
      )}
      {missing.length > 0 && (
        <p>
          {t('desk.missing')}{' '}
          {missing.map((m) => `${m.antenna}\u00a0${t(`quantity.${m.quantity}`)}`).join(', ')}.
        </p>
      )}
    </section>
  );
}

function buys(r: Remedy): string {
  const then = t('desk.remedy.then', {
    word: t(`word.${r.word_after}`),
    percent: percent(r.probability_after),
  });
  if (r.limit === null || r.from === null || r.to === null) return then;
  const what = t('desk.remedy.buys', {
    limit: t(`limit.${r.limit}`),
    from: limitValue(r.limit, r.from),
    to: limitValue(r.limit, r.to),
  });
  return `${what}; ${then}`;
}
