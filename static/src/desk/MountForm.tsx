// One mount of the plan: the most used figures as fields, the whole sheet as text beneath, and the plan drawn and
// judged beside them while it is typed. Fields and text are two views of one thing.

import { useCallback, useState } from 'preact/hooks';
import { Button } from '../parts/Button';
import { Message } from '../parts/Message';
import type { Antenna, Sheet } from '../types';
import type { MountDraft } from './draft';
import { LimitFields } from './LimitFields';
import { NumberField } from './NumberField';
import { PlanCheck, usePlanCheck } from './PlanCheck';
import { repath, sheetFrom, sheetIn, sheetText, type Template, templates, usualLimits } from './sheets';
import { SurroundingFields } from './SurroundingFields';
import { SurveyFields } from './SurveyFields.tsx';
import { TextField } from './TextField';
import { t } from './words';

interface Props {
  mount: MountDraft;
  place: number;
  nameMissing: boolean;
  onChange: (change: Partial<MountDraft>) => void;
  /** Told whether the sheet as it stands can be judged. */
  onFit: (fit: boolean) => void;
  onRemove: (() => void) | null;
}

export function MountForm({ mount, place, nameMissing, onChange, onFit, onRemove }: Props) {
  const [unread, setUnread] = useState<ReadonlySet<string>>(new Set());
  const onUnread = useCallback((id: string, is: boolean) => {
    setUnread((before) => {
      if (before.has(id) === is) return before;
      const next = new Set(before);
      if (is) next.add(id);
      else next.delete(id);
      return next;
    });
  }, []);
  const check = usePlanCheck(mount.text, unread.size > 0, onFit);
  const sheet = sheetIn(mount.text);
  const write = (next: Sheet) => onChange({ text: sheetText(next) });
  const edit = (change: (sheet: Sheet) => void) => {
    if (sheet === null) return;
    const next = structuredClone(sheet);
    change(next);
    write(next);
  };
  const problemAt = (...fields: string[]) => {
    const p = check.problem;
    return p !== null && fields.some((f) => p.field === f || p.field.startsWith(`${f}.`) || p.field.startsWith(`${f}[`))
      ? p.message
      : null;
  };
  const id = (name: string) => `${mount.id}-${name}`;
  const number = (name: string, unit: string, value: number | null | undefined, put: (sheet: Sheet, value: number) => void, fields: string[], more: { hint?: string } = {}) => (
    <NumberField
      id={id(name)}
      label={t(`desk.field.${name}` as Parameters<typeof t>[0])}
      unit={unit}
      value={value ?? null}
      onValue={(v) => v !== null && edit((s) => put(s, v))}
      hint={more.hint ?? null}
      problem={problemAt(...fields)}
      onUnread={onUnread}
    />
  );
  // Bearing and distance: no start can know them, so they begin empty, and emptied they are gone from the sheet.
  const ofPlace = (name: 'bearing' | 'distance', unit: string, value: number | null | undefined, put: (sheet: Sheet, value: number | null) => void, hint?: string) => (
    <NumberField
      id={id(name)}
      label={t(`desk.field.${name}`)}
      unit={unit}
      value={value ?? null}
      needed={t(`desk.field.${name}-needed`)}
      onValue={(v) => edit((s) => put(s, v))}
      hint={hint ?? null}
      problem={problemAt(`path.${name === 'bearing' ? 'bearing_deg' : 'distance_m'}`)}
      onUnread={onUnread}
    />
  );

  return (
    <section class="mount-form" aria-labelledby={id('head')}>
      <header>
        <h2 id={id('head')}>{t('desk.plan.mount', { n: place })}</h2>
        {onRemove !== null && (
          <Button kind="quiet" onPress={onRemove}>
            {t('desk.plan.remove-mount')}
          </Button>
        )}
      </header>
      <div class="mount-columns">
        <div class="mount-fields">
          <TextField
            id={id('name')}
            label={t('desk.plan.mount-name')}
            hint={t('desk.plan.mount-name-hint')}
            text={mount.name}
            onText={(name) => onChange({ name })}
            error={nameMissing ? t('desk.plan.missing.mount') : null}
          />
          <Starts onStart={(template) => write(sheetFrom(template))} onText={(text) => onChange({ text })} />
          {sheet === null ? (
            <Message tone="wrong" live>
              {t('desk.plan.unreadable')}
            </Message>
          ) : (
            <>
              <fieldset class="group">
                <legend>{t('desk.radio')}</legend>
                {number('frequency', 'MHz', sheet.radio.frequency_mhz, (s, v) => (s.radio.frequency_mhz = v), ['radio.frequency_mhz'])}
                {number('bandwidth', 'MHz', sheet.radio.bandwidth_mhz, (s, v) => (s.radio.bandwidth_mhz = v), ['radio.bandwidth_mhz'])}
                {number('tx-power', 'dBm', sheet.radio.tx_power_dbm?.[0], (s, v) => (s.radio.tx_power_dbm = [v]), ['radio.tx_power_dbm'], {
                  hint: (sheet.radio.tx_power_dbm?.length ?? 0) > 1 ? t('desk.field.tx-power-many') : undefined,
                })}
                {number('noise-figure', 'dB', sheet.radio.noise_figure_db, (s, v) => (s.radio.noise_figure_db = v), ['radio.noise_figure_db'])}
                <div class="picks wide" role="radiogroup" aria-label={t('desk.field.combining')}>
                  {[true, false].map((combining) => (
                    <label key={String(combining)}>
                      <input
                        type="radio"
                        name={id('combining')}
                        checked={sheet.radio.combining === combining}
                        onChange={() =>
                          edit((s) => {
                            s.radio.combining = combining;
                            // Port-tied, cross-talk is what decides: its limit comes along.
                            const asked = (s.limits ?? []).some((l) => l.name === 'crosstalk_db');
                            if (!combining && !asked) s.limits = [{ ...usualLimits.crosstalk_db }, ...(s.limits ?? [])];
                          })
                        }
                      />
                      <span>
                        {t(combining ? 'desk.radio.combines' : 'desk.radio.tied')}
                        <span class="hint">{t(combining ? 'desk.radio.combines-what' : 'desk.radio.tied-what')}</span>
                      </span>
                    </label>
                  ))}
                </div>
              </fieldset>
              <fieldset class="group">
                <legend>{t('desk.path')}</legend>
                {ofPlace('bearing', '°', sheet.path.bearing_deg, (s, v) => repath(s, v, s.path.elevation_deg), t('desk.field.bearing-hint'))}
                {number('elevation', '°', sheet.path.elevation_deg, (s, v) => repath(s, s.path.bearing_deg, v), ['path.elevation_deg'], { hint: t('desk.field.elevation-hint') })}
                {ofPlace('distance', 'm', sheet.path.distance_m, (s, v) => ((s.path.distance_m as number | null) = v))}
              </fieldset>
              <SurveyFields id={id('survey')} sheet={sheet} edit={edit} problemAt={problemAt} onUnread={onUnread} />
              <AntennaFields sheet={sheet} end="near" number={number} />
              <AntennaFields sheet={sheet} end="far" number={number} />
              <SurroundingFields id={id('around')} sheet={sheet} edit={edit} problemAt={problemAt} onUnread={onUnread} />
              <LimitFields id={id('limits')} sheet={sheet} edit={edit} problemAt={problemAt} onUnread={onUnread} />
            </>
          )}
          <details class="as-text" open={sheet === null}>
            <summary>{t('desk.plan.as-text')}</summary>
            <textarea
              class="text-entry sheet-text"
              rows={18}
              spellcheck={false}
              value={mount.text}
              aria-label={t('desk.plan.as-text')}
              aria-invalid={sheet === null ? 'true' : undefined}
              onInput={(e) => onChange({ text: e.currentTarget.value })}
            />
          </details>
        </div>
        <PlanCheck id={id('check')} sheet={sheet} check={check} />
      </div>
    </section>
  );
}

type NumberMaker = (
  name: string,
  unit: string,
  value: number | null | undefined,
  put: (sheet: Sheet, value: number) => void,
  fields: string[],
  more?: { hint?: string },
) => preact.JSX.Element;

/** Data-sheet figures that all antennas of an end share, and where the others hang from the first. */
function AntennaFields({ sheet, end, number }: { sheet: Sheet; end: 'near' | 'far'; number: NumberMaker }) {
  const antennas = sheet[end].antennas;
  const first = antennas[0];
  if (!first) return null;
  const { pattern } = first;
  const all = (put: (a: Antenna, value: number) => void) => (s: Sheet, v: number) => s[end].antennas.forEach((a) => put(a, v));
  const at = (part: string) => antennas.map((_, i) => `${end}.antennas[${i}].${part}`);
  const others = antennas.slice(1);
  return (
    <fieldset class="group">
      <legend>{t(`desk.plan.antennas-${end}`)}</legend>
      <p class="hint wide">{t('desk.plan.antennas-are', { n: antennas.length, kinds: kinds(antennas) })}</p>
      {number(`gain-${end}`, 'dBi', pattern.gain_dbi, all((a, v) => (a.pattern.gain_dbi = v)), at('pattern.gain_dbi'))}
      {pattern.beamwidth_az_deg != null &&
        number(`beam-az-${end}`, '°', pattern.beamwidth_az_deg, all((a, v) => (a.pattern.beamwidth_az_deg = v)), at('pattern.beamwidth_az_deg'))}
      {pattern.beamwidth_el_deg != null &&
        number(`beam-el-${end}`, '°', pattern.beamwidth_el_deg, all((a, v) => (a.pattern.beamwidth_el_deg = v)), at('pattern.beamwidth_el_deg'))}
      {others.map((other, k) => {
        const i = k + 1;
        const value = other.position_mm.planned?.value;
        const place = `${end}.antennas[${i}].position_mm.planned.value`;
        const put = (axis: 'right' | 'up') => (s: Sheet, v: number) => {
          const planned = s[end].antennas[i]?.position_mm.planned;
          if (planned) planned.value = { ...planned.value, [axis]: v };
        };
        return (
          <div class="pair wide" key={other.id}>
            <p class="pair-head">{t('desk.plan.from-first', { antenna: other.id, first: first.id })}</p>
            {number(`right-${end}`, 'mm', value?.right, put('right'), [`${place}.right`])}
            {number(`up-${end}`, 'mm', value?.up, put('up'), [`${place}.up`])}
          </div>
        );
      })}
    </fieldset>
  );
}

function kinds(antennas: Antenna[]): string {
  return [...new Set(antennas.map((a) => a.pattern.kind))]
    .map((kind) => t(`desk.pattern.${kind}`))
    .join(', ');
}

function Starts({ onStart, onText }: { onStart: (template: Template) => void; onText: (text: string) => void }) {
  const take = async (input: HTMLInputElement) => {
    const file = input.files?.[0];
    if (file) onText(await file.text());
    // So that the same file, mended, can be taken again.
    input.value = '';
  };
  return (
    <div class="starts" role="group" aria-label={t('desk.plan.start')}>
      <p class="field-label">{t('desk.plan.start')}</p>
      <p class="buttons">
        {templates.map((template) => (
          <Button key={template} onPress={() => onStart(template)}>
            {t(`desk.template.${template}`)}
          </Button>
        ))}
        <label class="button file">
          {t('desk.plan.file')}
          <input type="file" accept=".json,application/json" onChange={(e) => void take(e.currentTarget)} />
        </label>
      </p>
      <p class="hint">{t('desk.plan.start-what')}</p>
    </div>
  );
}
