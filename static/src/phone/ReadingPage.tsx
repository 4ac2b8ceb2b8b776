// Entering one reading: value, its doubt, which way, read with what. Keys for a glove, plan and last value in sight, what
// was typed kept at every stroke. Nothing typed is ever thrown away because it is wrong.
import { useEffect, useMemo, useRef, useState } from 'preact/hooks';
import { statesOf, quantitiesOf } from '../draw/drawn.ts';
import { Button } from '../parts/Button.tsx';
import { Choice } from '../parts/Choice.tsx';
import { Keypad } from '../parts/Keypad.tsx';
import { Message } from '../parts/Message.tsx';
import { NumberEntry } from '../parts/NumberEntry.tsx';
import { addEntry, getDraft, localTime, setDraft, useWatched } from '../store/index.ts';
import { session } from '../sync/index.ts';
import type { Antenna, LoggedEntry, Phase, PlannedMount, Quantity, Reading, States } from '../types.ts';
import { figure, shortest } from '../words/figures.ts';
import { when } from '../words/when.ts';
import { t } from '../words/words.ts';
import { TurnedBolt } from './TurnedBolt.tsx';
import { blank, check, type Draft, farFromPlan, type FieldName, wayOf } from './entry.ts';
import { Gone } from './Gone.tsx';
import { lastTurn, saidOf, type Said, standing } from './log.ts';
import { axes, type Axis, datumOf, type Directed, directedOf, methods, saidReading, wayName } from './manner.ts';
import { leaveNotice } from './notice.ts';
import { Page } from './Page.tsx';
import { go, hrefOf, type MountStep, phaseOf } from './route.ts';
import { methodName, unitSign } from './sentence.ts';
import { type OpenJob, useJob } from './useJob.ts';
import { BearingFrom } from './aim/BearingFrom.tsx';
import { TwoFaces } from './aim/TwoFaces.tsx';

interface Address {
  job: string;
  mount: string;
  step: MountStep;
  antenna: string;
  quantity: Quantity;
}

export function ReadingPage(address: Address) {
  const open = useJob(address.job);
  const mount = open?.job.plan.mounts.find((m) => m.id === address.mount);
  const antenna = mount?.sheet.near.antennas.find((a) => a.id === address.antenna);
  const [kept, setKept] = useState<Draft | null | undefined>(undefined);
  const draftKey = `reading ${address.job} ${address.mount} ${phaseOf(address.step)} ${address.antenna} ${address.quantity}`;
  useEffect(() => {
    getDraft<Draft>(draftKey).then(
      (found) => setKept(found ?? null),
      () => setKept(null),
    );
  }, [draftKey]);
  if (!open || !mount || !antenna) return <Gone looking={open === undefined} />;
  if (kept === undefined) return <p class="opening">{t('loading')}</p>;
  return <Entering {...address} open={open} planned={mount} body={antenna} kept={kept} draftKey={draftKey} />;
}

interface EnteringProps extends Address {
  open: OpenJob;
  planned: PlannedMount;
  body: Antenna;
  kept: Draft | null;
  draftKey: string;
}

function Entering(props: EnteringProps) {
  const { open, planned, body, step, quantity, draftKey } = props;
  const { log } = open;
  const phase = phaseOf(step);
  const datum = datumOf(planned.sheet);
  const who = useWatched(session);
  const states = statesOf(body, quantity) as States<Reading> | null | undefined;
  const plan = states?.planned ?? null;
  const fieldNames = fieldsOf(quantity);
  const main = mainField(quantity, plan);
  const [draft, setDraftState] = useState<Draft>(() => props.kept ?? freshDraft(quantity, plan, log));
  const [inUse, setInUse] = useState<FieldName | 'u'>(main);
  const [asked, setAsked] = useState(false);
  const [busy, setBusy] = useState(false);
  const [trouble, setTrouble] = useState<string | null>(null);
  const mainInput = useRef<HTMLInputElement>(null);
  useEffect(() => {
    mainInput.current?.focus({ preventScroll: true });
    // On a low screen the whole of what is asked comes into sight, not just the edge of its field.
    mainInput.current?.closest('.measured')?.scrollIntoView({ block: 'nearest' });
  }, []);

  const checked = useMemo(() => check(quantity, draft, datum, asked), [quantity, draft, datum, asked]);
  const sign = quantity === 'position' ? 'mm' : '°';
  const spoken = t(quantity === 'position' ? 'reading.millimetres' : 'reading.degrees');
  const mountHref = hrefOf({ page: 'mount', job: props.job, mount: props.mount, step });
  const title = t('reading.title', { antenna: body.id, quantity: t(`quantity.${quantity}`) });
  const so = standing(log, props.mount, phase, body.id, quantity);
  const last = so[so.length - 1] ?? null;
  const turnedAt = lastTurn(log, props.mount, body.id, quantity);
  const far = checked.reading ? farFromPlan(quantity, checked.reading.value, plan?.value) : null;

  const change = (next: Draft) => {
    setDraftState(next);
    setTrouble(null);
    setDraft(draftKey, next).catch((error: unknown) => setTrouble(t('failed.write', { why: String(error) })));
  };
  const setField = (name: FieldName, part: { text?: string; way?: 'more' | 'less' }) => {
    const before = draft.fields[name] ?? blank;
    const after = { ...before, ...part };
    // Choosing a direction by word takes the place of a typed sign.
    if (part.way && quantity !== 'position') after.text = after.text.replace(/^\s*[+\-\u2212\u2013]/, '');
    change({ ...draft, fields: { ...draft.fields, [name]: after } });
  };
  const setMethod = (name: string) => {
    const usual = methods[quantity].find((m) => m.name === name)?.u;
    const told = lastWith(log, quantity, name);
    change({ ...draft, method: name, u: usual === undefined ? draft.u : shortest(usual, 2), instrument: told ?? '' });
  };
  const onKey = (apply: (text: string) => string) => {
    if (inUse === 'u') change({ ...draft, u: apply(draft.u) });
    else setField(inUse, { text: apply((draft.fields[inUse] ?? blank).text) });
  };
  const keep = async () => {
    if (busy) return;
    const now = check(quantity, draft, datum, true);
    if (!now.reading) {
      setAsked(true);
      const flawed = fieldNames.find((name) => now.errors[name] || now.wayless[name]) ?? (now.errors.u ? 'u' : main);
      const field = document.getElementById(`reading-${flawed}`);
      field?.focus();
      field?.scrollIntoView({ block: 'center' });
      return;
    }
    setBusy(true);
    const reading: Reading = {
      value: now.reading.value,
      unit: quantity === 'position' ? 'mm' : 'deg',
      u: now.reading.u,
      method: draft.method,
      instrument: draft.instrument.trim() === '' ? null : draft.instrument.trim(),
      at: localTime(new Date()),
      by: who?.user.name ?? null,
      ...(quantity === 'azimuth' ? { north: 'true' } : {}),
    };
    try {
      const entry = await addEntry('reading.taken', props.job, props.mount, { phase, antenna: body.id, quantity, reading, typed: now.typed }, { dropsDraft: draftKey });
      const named = { antenna: body.id, quantity: t(`quantity.${quantity}`) };
      leaveNotice({ text: t('mount.kept', { ...named, value: saidReading(quantity, body, reading) }), entry: entry.id, takenBack: t('mount.taken-back', named) });
      go({ page: 'mount', job: props.job, mount: props.mount, step });
    } catch (error) {
      setTrouble(t('failed.write', { why: error instanceof Error ? error.message : String(error) }));
      setBusy(false);
    }
  };

  const shownFields = quantity === 'position' ? (draft.more ? fieldNames : [main]) : fieldNames;
  return (
    <Page
      title={title}
      under={`${planned.name}, ${t(`phase.${phase}`)}`}
      backHref={mountHref}
      kind="reading"
      head={<Quantities {...props} />}
      dock={
        <>
          <Keypad onKey={onKey} />
          {trouble && (
            <Message tone="wrong" live>
              {trouble}
            </Message>
          )}
          <Button kind="first" wide busy={busy} onPress={() => void keep()}>
            {checked.reading ? t('reading.keep', { value: saidReading(quantity, body, { value: checked.reading.value }) }) : t('reading.keep-bare')}
          </Button>
        </>
      }
    >
      {phase === 'as_found' && turnedAt !== null && (
        <Message tone="warn">
          <p>{t('reading.moved-already', { when: when(turnedAt) })}</p>
          <Button href={hrefOf({ ...props, page: 'reading', step: 'as-left' })}>{t('reading.to-as-left')}</Button>
        </Message>
      )}
      <p class="sight figure">
        <span>{plan ? t('reading.plan', { value: saidReading(quantity, body, plan) }) : ''}</span>
        <span>{last ? t('reading.last', { value: saidReading(quantity, body, last.entry.body.reading) }) : t('reading.no-last')}</span>
      </p>
      {shownFields.map((name) => {
        const field = draft.fields[name] ?? blank;
        const directed = directedFor(quantity, body, name);
        return (
          <div class="measured" key={name}>
            <div class={name === main ? 'value-and-u' : ''}>
              <NumberEntry
                id={`reading-${name}`}
                label={name === 'value' ? t(quantity === 'azimuth' ? 'reading.value-azimuth' : 'reading.value') : t(`reading.axis.${name}`, { datum })}
                text={field.text}
                unit={sign}
                unitSpoken={spoken}
                big={name === main}
                keys="none"
                inUse={inUse === name}
                inputRef={name === main ? mainInput : undefined}
                error={checked.errors[name] ?? null}
                onText={(text) => setField(name, { text })}
                onFocus={() => setInUse(name)}
                onEnter={() => void keep()}
              />
              {name === main && (
                <NumberEntry
                  id="reading-u"
                  label={`${t('reading.u')} \u00b1`}
                  text={draft.u}
                  unit={sign}
                  unitSpoken={spoken}
                  big
                  keys="none"
                  inUse={inUse === 'u'}
                  error={checked.errors.u ?? null}
                  onText={(u) => change({ ...draft, u })}
                  onFocus={() => setInUse('u')}
                  onEnter={() => void keep()}
                />
              )}
            </div>
            {directed && (
              <>
                <Choice
                  legend={t(`reading.which-way.${directed}`, { datum })}
                  name={`way-${name}`}
                  value={wayOf(field)}
                  options={(['less', 'more'] as const).map((way) => ({ value: way, label: wayName(directed, way) }))}
                  onChoose={(way) => setField(name, { way })}
                />
                {checked.wayless[name] && (
                  <Message tone="wrong" beside live>
                    {t('reading.way-missing')}
                  </Message>
                )}
              </>
            )}
          </div>
        );
      })}
      {checked.errors.all && (
        <Message tone="wrong" beside live>
          {checked.errors.all}
        </Message>
      )}
      {far && (
        <Message tone="warn" live>
          {t('reading.far', { amount: far })}
        </Message>
      )}
      <Choice
        legend={t('reading.how')}
        name="method"
        value={draft.method}
        options={methods[quantity].map((m) => ({ value: m.name as string, label: methodName(m.name) }))}
        onChoose={setMethod}
      />
      {quantity === 'azimuth' && <p>{t('reading.north')}</p>}
      <p class="quiet">{t('reading.usual', { u: usualDoubt(quantity, draft.method) })}</p>
      {quantity === 'position' && <p>{t('reading.middles')}</p>}
      {quantity === 'azimuth' && <BearingFrom job={props.job} mount={props.mount} compass={draft.method === 'compass'} />}
      {(quantity === 'skew' || quantity === 'tilt') && (
        <TwoFaces
          draftKey={draftKey}
          quantity={quantity}
          rod={directedOf(quantity, body) !== quantity}
          onTake={(value, u, method) => {
            const way = value < 0 ? ('less' as const) : ('more' as const);
            change({ ...draft, u: shortest(u, 2), method: method ?? draft.method, fields: { ...draft.fields, value: { text: shortest(Math.abs(value), 2), way } } });
          }}
        />
      )}
      {body.level_datum && (quantity === 'skew' || quantity === 'tilt') && <p>{t('reading.datum-flat', { surface: body.level_datum.surface, antenna: body.id })}</p>}
      {quantity === 'position' && !draft.more && (
        <Button wide onPress={() => change({ ...draft, more: true })}>
          {t('reading.more-axes')}
        </Button>
      )}
      <div class="field">
        <label for="instrument">{t('reading.instrument')}</label>
        <input
          id="instrument"
          class="text-entry"
          type="text"
          autoComplete="off"
          value={draft.instrument}
          aria-describedby="instrument-hint"
          onInput={(event) => change({ ...draft, instrument: event.currentTarget.value })}
        />
        <span class="quiet" id="instrument-hint">
          {t('reading.instrument-hint')}
        </span>
      </div>
      <SoFar {...props} phase={phase} readings={so} />
      {phase === 'as_left' && (
        <section class="section stack" aria-labelledby="bolt-title">
          <h2 id="bolt-title">{t('reading.bolt')}</h2>
          <p>{t('reading.bolt-text')}</p>
          <TurnedBolt job={props.job} mount={props.mount} antenna={body.id} quantity={quantity} onTurned={() => undefined} />
        </section>
      )}
    </Page>
  );
}

/** The other readings of this antenna, one touch away. */
function Quantities({ open, planned, body, job, mount, step, quantity }: EnteringProps) {
  const phase = phaseOf(step);
  return (
    <nav aria-label={t('mount.readings', { phase: t(`phase.${phase}`) })}>
      <ul class="tabs">
        {quantitiesOf(planned.sheet, body).map((q) => {
          const done = standing(open.log, mount, phase, body.id, q).length > 0;
          return (
            <li key={q}>
              <a href={hrefOf({ page: 'reading', job, mount, step, antenna: body.id, quantity: q })} aria-current={q === quantity ? 'page' : undefined}>
                <svg width="16" height="16" viewBox="0 0 16 16" aria-hidden="true" focusable="false">
                  <rect x="2" y="2" width="12" height="12" fill={done ? 'currentColor' : 'none'} stroke="currentColor" stroke-width="2" />
                </svg>
                {t(`quantity.${q}`)}
                <span class="spoken">{done ? t('path.done') : t('path.open')}</span>
              </a>
            </li>
          );
        })}
      </ul>
    </nav>
  );
}

/** What was read of it so far, each with its way back. */
function SoFar(props: EnteringProps & { phase: Phase; readings: Said<'reading.taken'>[] }) {
  const { readings, body, quantity } = props;
  const [trouble, setTrouble] = useState<string | null>(null);
  if (readings.length === 0) return null;
  const takeBack = async (id: string) => {
    try {
      await addEntry('reading.withdrawn', props.job, props.mount, { withdraws: id });
      setTrouble(null);
    } catch (error) {
      setTrouble(t('failed.write', { why: String(error) }));
    }
  };
  return (
    <section class="section stack" aria-labelledby="so-far-title">
      <h2 id="so-far-title">{t(props.phase === 'as_left' ? 'reading.so-far' : 'reading.so-far-found')}</h2>
      {readings.length > 1 && <p class="quiet">{t('reading.pooled')}</p>}
      {trouble && (
        <Message tone="wrong" live>
          {trouble}
        </Message>
      )}
      <ul class="so-far">
        {[...readings].reverse().map(({ entry, logged }) => {
          const { reading } = entry.body;
          const value = `${saidReading(quantity, body, reading)} \u00b1 ${figureOf(reading.u)}${unitSign(reading.unit)}`;
          return (
            <li key={entry.id}>
              <div>
                <p class="figure">
                  <strong>{value}</strong>
                </p>
                <p class="quiet">
                  {t('reading.by', { method: methodName(reading.method ?? ''), name: logged.own ? t('job.you') : (logged.author_name ?? ''), when: when(entry.at) })}
                </p>
              </div>
              <Button onPress={() => void takeBack(entry.id)} label={`${t('mount.take-back')}: ${value}`}>
                {t('mount.take-back')}
              </Button>
            </li>
          );
        })}
      </ul>
    </section>
  );
}

function figureOf(u: number | null | undefined): string {
  return u ? shortest(u, 2) : figure(0, 0);
}

function fieldsOf(quantity: Quantity): FieldName[] {
  return quantity === 'position' ? [...axes] : ['value'];
}

/** The axis that the plan sets the antenna off by most is the one a tape is laid along. */
function mainField(quantity: Quantity, plan: Reading | null): FieldName {
  if (quantity !== 'position') return 'value';
  const at = plan?.value;
  if (!at || typeof at === 'number') return 'right';
  return [...axes].sort((a, b) => Math.abs(at[b] ?? 0) - Math.abs(at[a] ?? 0))[0] ?? 'right';
}

function directedFor(quantity: Quantity, body: Antenna, name: FieldName): Directed | null {
  if (quantity === 'azimuth') return null;
  if (quantity === 'position') return name as Axis;
  return directedOf(quantity, body);
}

function usualDoubt(quantity: Quantity, method: string): string {
  const usual = methods[quantity].find((m) => m.name === method);
  return usual ? `${shortest(usual.u, 2)}${quantity === 'position' ? ' mm' : '°'}` : '';
}

/** A new draft: method and instrument as last used for this quantity on this job, directions as planned. */
function freshDraft(quantity: Quantity, plan: Reading | null, log: readonly LoggedEntry[]): Draft {
  const used = saidOf(log, 'reading.taken')
    .filter(({ entry, logged }) => logged.own && entry.body.quantity === quantity)
    .pop()?.entry.body.reading;
  const known = methods[quantity].find((m) => m.name === used?.method) ?? methods[quantity][0];
  const fields: Draft['fields'] = {};
  const wayOfPlan = (x: number | null | undefined) => (!x ? null : x > 0 ? ('more' as const) : ('less' as const));
  if (quantity === 'position') {
    const at = plan?.value;
    for (const axis of axes) fields[axis] = { text: '', way: at && typeof at !== 'number' ? wayOfPlan(at[axis]) : null };
  } else {
    fields.value = { text: '', way: typeof plan?.value === 'number' && quantity !== 'azimuth' ? wayOfPlan(plan.value) : null };
  }
  const sameMethod = used && used.method === known?.name;
  return {
    fields,
    u: shortest(sameMethod && used.u ? used.u : (known?.u ?? 1), 3),
    method: known?.name ?? '',
    instrument: sameMethod ? (used.instrument ?? '') : '',
    more: false,
  };
}

/** The instrument last named with this method, so that it is named once. */
function lastWith(log: readonly LoggedEntry[], quantity: Quantity, method: string): string | null {
  const used = saidOf(log, 'reading.taken')
    .filter(({ entry, logged }) => logged.own && entry.body.quantity === quantity && entry.body.reading.method === method)
    .pop();
  return used?.entry.body.reading.instrument ?? null;
}
