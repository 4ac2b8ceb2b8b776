// A sight by the sun's shadow or by a known point: the angle between it and the boresight gives the mount's azimuth with
// its doubt, or the reason why not. Typed, whatever it was read with.
import type { Sight, Sun, Target } from '../../aim/answers.ts';
import { Facts } from '../../aim/Facts.tsx';
import { bearingQuestion, lastAngle, standOf, sunQuestion } from '../../aim/questions.ts';
import { bearing, besides } from '../../aim/say.ts';
import { useReckoned } from '../../aim/useReckoned.ts';
import { Button } from '../../parts/Button.tsx';
import { Choice } from '../../parts/Choice.tsx';
import { Message } from '../../parts/Message.tsx';
import { addEntry, localTime, useWatched } from '../../store/index.ts';
import { session } from '../../sync/index.ts';
import type { Antenna, Landmark, Phase, Place, Reading } from '../../types.ts';
import { say } from '../../words/aim.ts';
import { figure } from '../../words/figures.ts';
import { t } from '../../words/words.ts';
import { useState } from 'preact/hooks';
import { Gone } from '../Gone.tsx';
import { lastTurn, standing } from '../log.ts';
import { leaveNotice } from '../notice.ts';
import { Page } from '../Page.tsx';
import { go, hrefOf } from '../route.ts';
import { useNow } from './AimPage.tsx';
import { errorIn, Field, type Form, numberIn, showFirst, told, useForm } from './form.tsx';
import { ask, type AimOpen, useAim, useTarget } from './useAim.ts';

interface SightProps {
  job: string;
  mount: string;
  reference: 'sun' | 'landmark';
}

export function SightPage(props: SightProps) {
  const open = useAim(props.job, props.mount);
  const form = useForm(`sight ${props.reference} ${props.job} ${props.mount}`, { angle: '', u: '1', side: '', how: '', time: '', antenna: '', phase: '', landmark: '', name: '', lat: '', lon: '', height: '' }, 'angle');
  if (!open) return <Gone looking={open === undefined} />;
  if (!form) return <p class="opening">{t('loading')}</p>;
  return <Sighting {...props} open={open} form={form} />;
}

/** The offset of this phone's clock, as an RFC 3339 time has it. */
const offsetNow = () => localTime(new Date()).slice(19).replace(/^\.\d+/, '');

function Sighting({ open, form, reference, job: jobId, mount: mountId }: SightProps & { open: AimOpen; form: Form }) {
  const { sheet, mount } = open;
  const who = useWatched(session);
  const [busy, setBusy] = useState(false);
  const now = useNow(1000);
  const turned = sheet.near.antennas.filter((a) => a.azimuth);
  const antenna = turned.find((a) => a.id === form.text('antenna')) ?? turned[0];
  const stand = standOf(sheet, open.job.plan);
  const target = useTarget(sheet);
  const aim = target.answer?.true_bearing_deg ?? sheet.path.bearing_deg;
  const sun = useReckoned<Sun>(ask, 'aim.sun', reference === 'sun' && stand ? sunQuestion(stand, now.slice(0, 18) + '0' + now.slice(19)) : null);
  const how = form.text('how') || (reference === 'sun' ? 'shadow' : 'horizontal');
  const side = form.text('side');
  const clockNow = now.slice(11, 19);
  const typedTime = form.text('time').trim();
  const timeWrong = typedTime !== '' && !/^([01]?\d|2[0-3]):[0-5]\d(:[0-5]\d)?$/.test(typedTime) ? say('sight.time-wrong', { typed: typedTime }) : null;
  const full = typedTime.length === 0 ? null : typedTime.split(':').map((p) => p.padStart(2, '0')).concat('00').slice(0, 3).join(':');
  const time = full === null || timeWrong ? null : `${now.slice(0, 10)}T${full}${offsetNow()}`;
  const known = landmarksOf(open);
  const chosen = known.find((l) => l.name === form.text('landmark')) ?? (form.text('landmark') === own || known.length === 0 ? ownLandmark(form) : undefined);
  const owned = reference === 'landmark' && (form.text('landmark') === own || known.length === 0);
  const lie = useReckoned<Target>(ask, 'aim.target', reference === 'landmark' && chosen ? bearingQuestion(sheet, chosen) : null);

  const angle = numberIn(form, 'angle');
  const u = numberIn(form, 'u');
  const question = (): Record<string, unknown> | null => {
    if (!antenna || angle === null || u === null || side === '') return null;
    const tilt = lastAngle(antenna.tilt)?.value ?? 0;
    const base = {
      reference,
      how,
      angle_deg: how === 'space' ? angle : side === 'left' ? -angle : angle,
      u_angle_deg: u,
      ...(how === 'space' ? { side, boresight_elevation_deg: tilt } : {}),
    };
    if (reference === 'sun') return stand && time ? { ...base, sun: { ...stand, time } } : null;
    const { near_at } = sheet.path;
    if (!near_at || !chosen) return null;
    return { ...base, landmark: { from: near_at, to: { lat_deg: chosen.lat_deg, lon_deg: chosen.lon_deg, height_m: chosen.height_m, u_m: chosen.u_m ?? null }, k_factor: sheet.path.k_factor ?? null } };
  };
  const asked = question();
  const sight = useReckoned<Sight>(ask, 'aim.sight', asked);
  const phase = phaseIn(form, open, antenna);
  const place = { job: jobId, mount: mountId };
  const problem = sight.problem;

  const keep = async () => {
    if (!antenna || !asked || !sight.answer || sight.asking) {
      form.ask(true);
      requestAnimationFrame(() => showFirst(['angle', 'u', 'time', 'lat', 'lon', 'height']));
      return;
    }
    setBusy(true);
    const typed = `${form.text('angle')} ${side} ${how}`;
    const reading: Reading = { value: Number(sight.answer.azimuth_deg.toFixed(2)), unit: 'deg', u: Number(Math.max(0.01, sight.answer.u_deg).toFixed(2)), method: reference, instrument: null, at: localTime(new Date()), by: who?.user.name ?? null, north: 'true' };
    try {
      await addEntry('sight.taken', jobId, mountId, { antenna: antenna.id, phase, reference, landmark: chosen?.name ?? null, asked, answer: { azimuth_deg: sight.answer.azimuth_deg, u_deg: sight.answer.u_deg, method: sight.answer.method }, typed });
      const entry = await addEntry('reading.taken', jobId, mountId, { phase, antenna: antenna.id, quantity: 'azimuth', reading, typed }, { dropsDraft: form.key });
      const named = { antenna: antenna.id, quantity: t('quantity.azimuth') };
      leaveNotice({ text: t('mount.kept', { ...named, value: `${figure(reading.value as number, 1)}°` }), entry: entry.id, takenBack: t('mount.taken-back', named) });
      go({ page: 'mount', ...place, step: phase === 'as_found' ? 'as-found' : 'as-left' });
    } catch (error) {
      form.fail(t('failed.write', { why: error instanceof Error ? error.message : String(error) }));
      setBusy(false);
    }
  };

  if (!antenna) return <Gone looking={false} />;
  return (
    <Page
      title={say(`sight.title.${reference}`)}
      under={mount.name}
      backHref={hrefOf({ page: 'aim', ...place })}
      dock={
        <>
          <div class="sight-answer" role="status">
            {sight.answer ? (
              <p class="figure">
                <strong>{say('sight.answer', { antenna: antenna.id, azimuth: bearing(sight.answer.azimuth_deg, sight.answer.u_deg) })}</strong>{' '}
                {say('sight.against', { off: besides(sight.answer.azimuth_deg, aim) })}
              </p>
            ) : (
              <p>{problem ? say('sight.none') : say('sight.wanting')}</p>
            )}
          </div>
          {form.trouble && (
            <Message tone="wrong" live>
              {form.trouble}
            </Message>
          )}
          <Button kind="first" wide busy={busy} onPress={() => void keep()}>
            {sight.answer ? say('sight.keep', { antenna: antenna.id }) : t('reading.keep-bare')}
          </Button>
        </>
      }
    >
      {reference === 'sun' && (
        <Message tone="warn">
          <p>
            <strong>{say('sun.caution')}</strong>
          </p>
          <p>{say('sun.caution-how')}</p>
        </Message>
      )}
      {reference === 'sun' && (
        <section class="section stack" aria-labelledby="sun-title">
          <h2 id="sun-title">{say('sun.now')}</h2>
          {!stand && <Message tone="wrong">{say('sun.no-place')}</Message>}
          {sun.problem && <Message tone="wrong">{sun.problem.message}</Message>}
          {sun.answer && (
            <>
              <Facts
                facts={[
                  { name: say('sun.azimuth'), value: `${figure(sun.answer.azimuth_deg, 1)}°`, large: true },
                  { name: say('sun.elevation'), value: `${figure(sun.answer.apparent_elevation_deg, 1)}°` },
                  sun.answer.shadow_azimuth_deg === null ? null : { name: say('sun.shadow'), value: `${figure(sun.answer.shadow_azimuth_deg, 1)}°` },
                ]}
              />
              {!sun.answer.usable && <Message tone="warn">{upper(sun.answer.why_not ?? '')}</Message>}
            </>
          )}
          <p class="quiet">{say('sun.clock', { time: clockNow })}</p>
        </section>
      )}
      {reference === 'landmark' && (
        <section class="section stack" aria-labelledby="mark-title">
          <h2 id="mark-title">{say('landmark.which')}</h2>
          {!sheet.path.near_at && <Message tone="wrong">{say('landmark.no-place')}</Message>}
          {known.length > 0 && (
            <Choice
              legend={say('landmark.which')}
              legendHidden
              name="landmark"
              value={form.text('landmark') || null}
              options={[...known.map((l) => ({ value: l.name, label: l.name })), { value: own, label: say('landmark.own') }]}
              onChoose={(landmark) => form.put({ landmark })}
            />
          )}
          {form.asked && !chosen && known.length > 0 && !owned && (
            <Message tone="wrong" beside live>
              {say('landmark.missing')}
            </Message>
          )}
          {owned && (
            <>
              <div class="field">
                <label for="field-name">{say('landmark.name')}</label>
                <input id="field-name" class="text-entry" type="text" autoComplete="off" value={form.text('name')} onInput={(e) => form.put({ name: e.currentTarget.value })} />
              </div>
              <Field form={form} name="lat" label={say('landmark.lat')} unit="°" hint={say('landmark.lat-hint')} problem={told(lie.problem, 'to.lat_deg')} />
              <Field form={form} name="lon" label={say('landmark.lon')} unit="°" hint={say('landmark.lon-hint')} problem={told(lie.problem, 'to.lon_deg')} />
              <Field form={form} name="height" label={say('landmark.height')} unit="m" hint={say('landmark.height-hint', { datum: sheet.path.height_datum ?? say('landmark.same-datum') })} problem={told(lie.problem, 'to.height_m')} />
            </>
          )}
          {lie.problem && !told(lie.problem, 'to.lat_deg', 'to.lon_deg', 'to.height_m') && <Message tone="wrong">{lie.problem.message}</Message>}
          {lie.answer && chosen && (
            <Facts facts={[{ name: say('landmark.lies', { name: chosen.name }), value: bearing(lie.answer.true_bearing_deg, lie.answer.u_bearing_deg), large: true }]} />
          )}
        </section>
      )}

      <section class="section stack" aria-labelledby="angle-title">
        <h2 id="angle-title">{say('sight.angle-title')}</h2>
        {turned.length > 1 && (
          <Choice legend={say('sight.antenna')} name="antenna" value={antenna.id} options={turned.map((a) => ({ value: a.id, label: a.id }))} onChoose={(id) => form.put({ antenna: id })} />
        )}
        <Choice
          legend={say('sight.how')}
          name="how"
          value={how}
          options={[
            { value: reference === 'sun' ? 'shadow' : 'horizontal', label: say(reference === 'sun' ? 'sight.how.shadow' : 'sight.how.horizontal') },
            { value: 'space', label: say('sight.how.space') },
          ]}
          onChoose={(next) => form.put({ how: next })}
        />
        <p>{say(`sight.what.${how === 'space' ? (reference === 'sun' ? 'space-sun' : 'space') : how === 'shadow' ? 'shadow' : 'horizontal'}`)}</p>
        <Choice
          legend={say(how === 'shadow' ? 'sight.side.shadow' : reference === 'sun' ? 'sight.side.sun' : 'sight.side.landmark')}
          name="side"
          value={side || null}
          options={[
            { value: 'left', label: t('way.left') },
            { value: 'right', label: t('way.right') },
          ]}
          onChoose={(next) => form.put({ side: next })}
        />
        {form.asked && side === '' && (
          <Message tone="wrong" beside live>
            {t('reading.way-missing')}
          </Message>
        )}
        <div class="value-and-u">
          <Field form={form} name="angle" label={say('sight.angle')} unit="°" big problem={told(problem, 'angle_deg')} />
          <Field form={form} name="u" label={`${t('reading.u')} ±`} unit="°" big problem={told(problem, 'u_angle_deg')} />
        </div>
        {reference === 'sun' && (
          <div class="field">
            <label for="field-time">{say('sight.time')}</label>
            <div class="with-button">
              <input
                id="field-time"
                class="text-entry"
                type="text"
                inputMode="text"
                autoComplete="off"
                placeholder="09:12:00"
                value={form.text('time')}
                aria-invalid={timeWrong || (form.asked && typedTime === '') ? 'true' : undefined}
                aria-describedby="field-time-hint"
                onInput={(e) => form.put({ time: e.currentTarget.value })}
              />
              <Button onPress={() => form.put({ time: localTime(new Date()).slice(11, 19) })}>{say('sight.time-now')}</Button>
            </div>
            <span class="hint" id="field-time-hint">
              {say('sight.time-hint')}
            </span>
            {(timeWrong || (form.asked && typedTime === '')) && (
              <Message tone="wrong" beside live>
                {timeWrong ?? say('sight.time-missing')}
              </Message>
            )}
          </div>
        )}
        {problem && !told(problem, 'angle_deg', 'u_angle_deg') && <Message tone="wrong">{problem.message}</Message>}
        <Choice
          legend={say('sight.phase')}
          name="phase"
          value={phase}
          options={[
            { value: 'as_found', label: t('phase.as_found') },
            { value: 'as_left', label: t('phase.as_left') },
          ]}
          onChoose={(next) => form.put({ phase: next })}
        />
        {errorIn(form, 'angle', true) === null && form.text('angle') === '' && <p class="quiet">{say('sight.typed-beside')}</p>}
      </section>
    </Page>
  );
}

const own = 'another point';

function landmarksOf(open: AimOpen): Landmark[] {
  const list = [...(open.sheet.landmarks ?? [])];
  const { far_at } = open.sheet.path;
  if (far_at) list.push({ name: say('landmark.far-end'), ...far_at });
  return list;
}

function ownLandmark(form: Form): (Place & { name: string }) | undefined {
  const lat = numberIn(form, 'lat');
  const lon = numberIn(form, 'lon');
  const height = numberIn(form, 'height');
  if (lat === null || lon === null || height === null) return undefined;
  return { name: form.text('name').trim() || say('landmark.unnamed'), lat_deg: lat, lon_deg: lon, height_m: height };
}

/** As chosen; before that: as found while nothing was read or turned, else as left. */
function phaseIn(form: Form, open: AimOpen, antenna: Antenna | undefined): Phase {
  const chosen = form.text('phase');
  if (chosen === 'as_found' || chosen === 'as_left') return chosen;
  if (!antenna) return 'as_left';
  const { log, mount } = open;
  const found = standing(log, mount.id, 'as_found', antenna.id, 'azimuth').length > 0;
  return found || lastTurn(log, mount.id, antenna.id, 'azimuth') !== null ? 'as_left' : 'as_found';
}

function upper(text: string): string {
  return text === '' ? text : `${text.charAt(0).toUpperCase()}${text.slice(1)}.`;
}

