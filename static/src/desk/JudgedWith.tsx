// What the verdict stands on besides the readings: radio, path, far end, surroundings, method.

import type { Sheet, Verdict } from '../types';
import { asGiven } from './format';
import { t } from './words';

interface Props {
  sheet: Sheet;
  verdict: Verdict;
}

export function JudgedWith({ sheet, verdict }: Props) {
  const { radio, path, surroundings } = sheet;
  const radioFacts = [
    asGiven(radio.frequency_mhz, 'MHz'),
    t('desk.radio.width', { width: asGiven(radio.bandwidth_mhz, 'MHz') }),
    t(radio.combining ? 'desk.radio.combines' : 'desk.radio.tied'),
    radio.snr_db == null ? t('desk.radio.snr-planned') : t('desk.radio.snr', { snr: asGiven(radio.snr_db, 'dB') }),
  ];
  const pathFacts = [
    t('desk.path.bearing', { bearing: asGiven(path.bearing_deg, 'deg') }),
    t('desk.path.elevation', { elevation: asGiven(path.elevation_deg, 'deg') }),
    t('desk.path.distance', { distance: asGiven(path.distance_m, 'm') }),
  ];
  return (
    <section class="judged-with">
      <h3>{t('desk.judged-with')}</h3>
      <dl>
        <div>
          <dt>{t('desk.radio')}</dt>
          <dd>{radioFacts.join(' · ')}</dd>
        </div>
        <div>
          <dt>{t('desk.path')}</dt>
          <dd>{pathFacts.join(' · ')}</dd>
        </div>
        <div>
          <dt>{t('desk.far-end')}</dt>
          <dd>{t(verdict.far_from_plan ? 'desk.far-end.plan' : 'desk.far-end.measured')}</dd>
        </div>
        <div>
          <dt>{t('desk.surroundings')}</dt>
          <dd>
            <strong>{t(verdict.surroundings.sight ? 'desk.sight' : 'desk.no-sight')}</strong> ·{' '}
            {verdict.surroundings.text}
            {surroundings.class && !verdict.surroundings.text.includes(surroundings.class.edition) && (
              <>
                {' '}
                · {t('desk.edition', { standard: surroundings.class.standard, edition: surroundings.class.edition })}
              </>
            )}
          </dd>
        </div>
        <div>
          <dt>{t('desk.method')}</dt>
          <dd>
            {t('desk.method.version', { version: verdict.method.version })} {verdict.method.sources.join('; ')}
          </dd>
        </div>
      </dl>
    </section>
  );
}
