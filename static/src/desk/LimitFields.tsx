// The limits of a mount in the plan: each with its number and its reason. A supervisor a year later reads the reason.

import { Button } from '../parts/Button';
import type { Limit, LimitName, Sheet } from '../types';
import { NumberField } from './NumberField';
import { usualLimits } from './sheets';
import { TextField } from './TextField';
import { t } from './words';

interface Props {
  id: string;
  sheet: Sheet;
  edit: (change: (sheet: Sheet) => void) => void;
  problemAt: (...fields: string[]) => string | null;
  onUnread: (id: string, unread: boolean) => void;
}

interface LimitKind {
  name: LimitName;
  sense: 'at_least' | 'at_most';
  unit: string;
  /** Shown = value in the sheet × this. */
  shows: number;
  /** What stands in the field when the limit is added. */
  first: number;
}

export const limitKinds: readonly LimitKind[] = [
  { name: 'effective_streams', sense: 'at_least', unit: '', shows: 1, first: 1.5 },
  { name: 'rate_share', sense: 'at_least', unit: '%', shows: 100, first: 0.9 },
  { name: 'crosstalk_db', sense: 'at_least', unit: 'dB', shows: 1, first: 25 },
  { name: 'envelope_correlation', sense: 'at_most', unit: '', shows: 1, first: 0.5 },
  { name: 'pointing_loss_db', sense: 'at_most', unit: 'dB', shows: 1, first: 1 },
  { name: 'chain_imbalance_db', sense: 'at_most', unit: 'dB', shows: 1, first: 3 },
  { name: 'pair_angle_error_deg', sense: 'at_most', unit: '°', shows: 1, first: 3 },
  { name: 'skew_deviation_deg', sense: 'at_most', unit: '°', shows: 1, first: 2 },
  { name: 'tilt_deviation_deg', sense: 'at_most', unit: '°', shows: 1, first: 1 },
  { name: 'azimuth_deviation_deg', sense: 'at_most', unit: '°', shows: 1, first: 3 },
  { name: 'position_deviation_mm', sense: 'at_most', unit: 'mm', shows: 1, first: 20 },
];

export function LimitFields({ id, sheet, edit, problemAt, onUnread }: Props) {
  const limits = sheet.limits ?? [];
  const left = limitKinds.filter((k) => !limits.some((l) => l.name === k.name));
  const add = (kind: LimitKind) =>
    edit((s) => {
      const usual: Limit | undefined = (usualLimits as Partial<Record<LimitName, Limit>>)[kind.name];
      s.limits = [...(s.limits ?? []), usual ? { ...usual } : { name: kind.name, [kind.sense]: kind.first, reason: '' }];
    });
  return (
    <fieldset class="group limits-form">
      <legend>{t('desk.plan.limits')}</legend>
      {limits.map((limit, i) => {
        const kind = limitKinds.find((k) => k.name === limit.name);
        if (!kind) return null;
        const title = t(`limit.${limit.name}`);
        return (
          <div class="limit-row wide" key={limit.name}>
            <NumberField
              id={`${id}-${limit.name}`}
              label={t(kind.sense === 'at_least' ? 'desk.plan.at-least' : 'desk.plan.at-most', { limit: title })}
              unit={kind.unit}
              value={limit[kind.sense] == null ? null : (limit[kind.sense] ?? 0) * kind.shows}
              onValue={(v) => v !== null && edit((s) => s.limits[i] && (s.limits[i][kind.sense] = v / kind.shows))}
              problem={problemAt(`limits[${i}]`)}
              onUnread={onUnread}
            />
            <TextField
              id={`${id}-${limit.name}-reason`}
              label={t('desk.plan.reason')}
              text={limit.reason ?? ''}
              onText={(text) => edit((s) => s.limits[i] && (s.limits[i].reason = text))}
            />
            <Button kind="quiet" label={t('desk.plan.remove-limit', { limit: title })} onPress={() => edit((s) => void s.limits.splice(i, 1))}>
              {t('desk.plan.remove')}
            </Button>
          </div>
        );
      })}
      {left.length > 0 && (
        <div class="field">
          <label for={`${id}-add`}>{t('desk.plan.add-limit')}</label>
          <select
            id={`${id}-add`}
            class="text-entry"
            value=""
            onChange={(e) => {
              const kind = limitKinds.find((k) => k.name === e.currentTarget.value);
              if (kind) add(kind);
              e.currentTarget.value = '';
            }}
          >
            <option value="">{t('desk.plan.pick-limit')}</option>
            {left.map((k) => (
              <option key={k.name} value={k.name}>
                {t(`limit.${k.name}`)}
              </option>
            ))}
          </select>
        </div>
      )}
    </fieldset>
  );
}
