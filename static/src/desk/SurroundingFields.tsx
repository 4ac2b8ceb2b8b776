// The surroundings in the plan: sight or none, then typed spreads or a published class. Surveyed reflectors are kept in
// the sheet's text.

import type { Sheet, Surroundings } from '../types';
import { NumberField } from './NumberField';
import { t } from './words';

interface Props {
  id: string;
  sheet: Sheet;
  edit: (change: (sheet: Sheet) => void) => void;
  problemAt: (...fields: string[]) => string | null;
  onUnread: (id: string, unread: boolean) => void;
}

type Kind = 'spreads' | 'class' | 'reflectors';

const scenarios = ['RMa', 'UMa', 'UMi', 'InH'] as const;

function kindOf(s: Surroundings): Kind {
  return s.reflectors ? 'reflectors' : s.class ? 'class' : 'spreads';
}

/** What stands in the fields when a kind is first chosen; said to be a starting point on the page. */
function fresh(kind: 'spreads' | 'class', sight: boolean): Surroundings {
  if (kind === 'class') {
    return { sight, class: { standard: '3GPP TR 38.901', edition: 'V16.1.0', scenario: 'RMa', mast_end: 'near' } };
  }
  return {
    sight,
    spreads: {
      near: { azimuth_deg: 8, elevation_deg: 2 },
      far: { azimuth_deg: 8, elevation_deg: 2 },
      k_db: sight ? 7 : null,
      xpr_db: 9,
      spectrum: 'laplacian',
    },
  };
}

export function SurroundingFields({ id, sheet, edit, problemAt, onUnread }: Props) {
  const around = sheet.surroundings;
  const kind = kindOf(around);
  const { spreads } = around;
  const setSight = (sight: boolean) =>
    edit((s) => {
      s.surroundings.sight = sight;
      // Without sight there is no Ricean factor; with it there must be one.
      if (s.surroundings.spreads) s.surroundings.spreads.k_db = sight ? (s.surroundings.spreads.k_db ?? 7) : null;
    });
  return (
    <fieldset class="group">
      <legend>{t('desk.surroundings')}</legend>
      <div class="picks wide" role="radiogroup" aria-label={t('desk.field.sight')}>
        {[true, false].map((sight) => (
          <label key={String(sight)}>
            <input type="radio" name={`${id}-sight`} checked={around.sight === sight} onChange={() => setSight(sight)} />
            <span>{t(sight ? 'desk.sight' : 'desk.no-sight')}</span>
          </label>
        ))}
      </div>
      <div class="picks wide" role="radiogroup" aria-label={t('desk.field.around')}>
        {(['spreads', 'class'] as const).map((each) => (
          <label key={each}>
            <input
              type="radio"
              name={`${id}-kind`}
              checked={kind === each}
              onChange={() => edit((s) => (s.surroundings = fresh(each, s.surroundings.sight)))}
            />
            <span>
              {t(`desk.around.${each}`)}
              <span class="hint">{t(`desk.around.${each}-what`)}</span>
            </span>
          </label>
        ))}
      </div>
      {kind === 'reflectors' && <p class="hint wide">{t('desk.around.reflectors', { n: around.reflectors?.length ?? 0 })}</p>}
      {kind === 'class' && (
        <div class="field">
          <label for={`${id}-scenario`}>{t('desk.field.scenario')}</label>
          <select
            id={`${id}-scenario`}
            class="text-entry"
            value={around.class?.scenario}
            onChange={(e) => {
              const chosen = scenarios.find((s) => s === e.currentTarget.value);
              if (chosen) edit((s) => s.surroundings.class && (s.surroundings.class.scenario = chosen));
            }}
          >
            {scenarios.map((s) => (
              <option key={s} value={s}>
                {t(`desk.scenario.${s}`)}
              </option>
            ))}
          </select>
        </div>
      )}
      {spreads && (
        <>
          {(['near', 'far'] as const).flatMap((end) =>
            (['azimuth_deg', 'elevation_deg'] as const).map((part) => (
              <NumberField
                key={`${end} ${part}`}
                id={`${id}-${end}-${part}`}
                label={t(`desk.field.spread-${end}-${part}`)}
                unit="°"
                value={spreads[end][part]}
                onValue={(v) => v !== null && edit((s) => s.surroundings.spreads && (s.surroundings.spreads[end][part] = v))}
                problem={problemAt(`surroundings.spreads.${end}.${part}`)}
                onUnread={onUnread}
              />
            )),
          )}
          {around.sight && (
            <NumberField
              id={`${id}-k`}
              label={t('desk.field.k')}
              unit="dB"
              value={spreads.k_db}
              onValue={(v) => edit((s) => s.surroundings.spreads && (s.surroundings.spreads.k_db = v))}
              hint={t('desk.field.k-hint')}
              problem={problemAt('surroundings.spreads.k_db')}
              onUnread={onUnread}
            />
          )}
          <NumberField
            id={`${id}-xpr`}
            label={t('desk.field.xpr')}
            unit="dB"
            value={spreads.xpr_db}
            onValue={(v) => v !== null && edit((s) => s.surroundings.spreads && (s.surroundings.spreads.xpr_db = v))}
            problem={problemAt('surroundings.spreads.xpr_db')}
            onUnread={onUnread}
          />
        </>
      )}
    </fieldset>
  );
}
