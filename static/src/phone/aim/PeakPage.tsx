// Peak search: step the mount, read the level, see the lobe take shape; how far to bolt back, main or side lobe, what more
// to take. Power control is asked for first, and nothing waits for the answer.
import { useState } from 'preact/hooks';
import type { PeakAnswer } from '../../aim/answers.ts';
import { PeakView, goBack, peakAngle } from '../../aim/PeakView.tsx';
import { type Axis, beamwidthOf, peakQuestion, portsOf, searchAxes } from '../../aim/questions.ts';
import { controlOff, latestSearch, searchesOf } from '../../aim/search.ts';
import { useReckoned } from '../../aim/useReckoned.ts';
import { Button } from '../../parts/Button.tsx';
import { Choice } from '../../parts/Choice.tsx';
import { Keypad } from '../../parts/Keypad.tsx';
import { Message } from '../../parts/Message.tsx';
import { addEntry, useWatched } from '../../store/index.ts';
import { session } from '../../sync/index.ts';
import type { EntryOf } from '../../types.ts';
import { say } from '../../words/aim.ts';
import { figure, shortest } from '../../words/figures.ts';
import { clock, when } from '../../words/when.ts';
import { t } from '../../words/words.ts';
import { Gone } from '../Gone.tsx';
import { Page } from '../Page.tsx';
import { hrefOf } from '../route.ts';
import { Field, type Form, numberIn, showFirst, told, useForm } from './form.tsx';
import { keptPeak } from './AimPage.tsx';
import { type Address, ask, type AimOpen, useAim, usePath, useTarget } from './useAim.ts';

export function PeakPage(props: Address) {
  const open = useAim(props.job, props.mount);
  const form = useForm(`peak ${props.job} ${props.mount}`, { angle: '', level: '\u2212', antenna: '', axis: 'azimuth' }, 'angle');
  if (!open) return <Gone looking={open === undefined} />;
  if (!form) return <p class="opening">{t('loading')}</p>;
  return <Searching {...props} open={open} form={form} />;
}

function Searching({ open, form, job: jobId, mount: mountId }: Address & { open: AimOpen; form: Form }) {
  const { sheet, mount, entries } = open;
  const [busy, setBusy] = useState(false);
  const [said, setSaid] = useState<string | null>(null);
  const turned = sheet.near.antennas.filter((a) => a.azimuth);
  const antenna = turned.find((a) => a.id === form.text('antenna')) ?? turned[0];
  const axis: Axis = form.text('axis') === 'tilt' ? 'tilt' : 'azimuth';
  const target = useTarget(sheet);
  const path = usePath(sheet, target.answer?.distance_m ?? null);
  const searches = searchesOf(entries, mountId);
  const latest = antenna ? latestSearch(searches, antenna.id, axis) : null;
  const fresh = form.text('fresh') === `${antenna?.id} ${axis} ${latest?.number ?? 0}`;
  const number = fresh || !latest ? (latest?.number ?? 0) + 1 : latest.number;
  const steps: EntryOf<'level.stepped'>[] = fresh ? [] : (latest?.steps ?? []);
  const off = controlOff(entries, mountId);
  const port = antenna ? portsOf(sheet.near.antennas).indexOf(antenna.elements[0]?.port ?? '') : 0;
  const bodies = steps.map((s) => s.body);
  const question = antenna && steps.length > 0 ? peakQuestion(antenna, axis, bodies, off !== null, path.answer, port) : null;
  const fit = useReckoned<PeakAnswer>(ask, 'peak.fit', question);
  const angle = numberIn(form, 'angle');
  const level = numberIn(form, 'level');
  // The step that is being typed is asked as a search of its own: what calc refuses is told beside its field.
  const tried = useReckoned<PeakAnswer>(ask, 'peak.fit', angle !== null && level !== null ? { angles_deg: [angle], levels_dbm: [level] } : null);
  const expectedLevel = path.answer?.expected_levels_dbm?.[port] ?? null;
  const expected = expectedLevel !== null && path.answer?.u_db ? { level: expectedLevel, u: path.answer.u_db } : null;
  const place = { job: jobId, mount: mountId };
  if (!antenna) return <Gone looking={false} />;

  const keepStep = async () => {
    if (angle === null || level === null || tried.problem || tried.asking) {
      form.ask(true);
      requestAnimationFrame(() => showFirst(['angle', 'level']));
      return;
    }
    setBusy(true);
    try {
      await addEntry('level.stepped', jobId, mountId, { antenna: antenna.id, axis, search: number, angle_deg: angle, level_dbm: level, typed: `${form.text('angle')} / ${form.text('level')}` });
      form.clear(['antenna', 'axis']);
      form.put({ angle: '', level: '\u2212' });
      form.use('angle');
      document.getElementById('field-angle')?.focus({ preventScroll: true });
      setSaid(say('peak.step-kept', { angle: `${shortest(angle, 2)}°`, level: `${shortest(level, 1)} dBm` }));
    } catch (error) {
      form.fail(t('failed.write', { why: error instanceof Error ? error.message : String(error) }));
    }
    setBusy(false);
  };
  const takeBack = async (id: string) => {
    try {
      await addEntry('reading.withdrawn', jobId, mountId, { withdraws: id });
    } catch (error) {
      form.fail(t('failed.write', { why: String(error) }));
    }
  };
  const keepPeak = async () => {
    const { answer } = fit;
    if (!answer) return;
    setBusy(true);
    try {
      const { curve: _curve, used: _used, left_out: _leftOut, ...short } = answer;
      await addEntry('peak.fitted', jobId, mountId, { antenna: antenna.id, axis, search: number, answer: short });
      setSaid(say('peak.kept'));
    } catch (error) {
      form.fail(t('failed.write', { why: error instanceof Error ? error.message : String(error) }));
    }
    setBusy(false);
  };
  const wrongSign = level !== null && level > 0;
  const keptNow = latest?.kept && !fresh && (latest.steps[latest.steps.length - 1]?.device_seq ?? 0) <= latest.kept.device_seq ? latest : null;

  return (
    <Page
      title={say('peak.title')}
      under={`${mount.name}, ${antenna.id} ${say(`axis.${axis}`)}`}
      backHref={hrefOf({ page: 'aim', ...place })}
      kind="reading"
      dock={
        <>
          {fit.answer?.peak_deg !== null && fit.answer?.peak_deg !== undefined && (
            <p class="figure peak-now" role="status">
              <strong>{say('peak.now', { peak: peakAngle(axis, fit.answer) })}</strong> {fit.answer.from_last_deg !== null && say('peak.now-back', { back: goBack(axis, fit.answer.from_last_deg) })}
            </p>
          )}
          <Keypad onKey={form.onKey} />
          {form.trouble && (
            <Message tone="wrong" live>
              {form.trouble}
            </Message>
          )}
          <Button kind="first" wide busy={busy} onPress={() => void keepStep()}>
            {say('peak.keep-step')}
          </Button>
        </>
      }
    >
      <PowerControl job={jobId} mount={mountId} off={off} />
      {turned.length > 1 && (
        <Choice legend={say('sight.antenna')} name="antenna" value={antenna.id} options={turned.map((a) => ({ value: a.id, label: a.id }))} onChoose={(id) => form.put({ antenna: id })} />
      )}
      <Choice
        legend={say('peak.axis')}
        name="axis"
        value={axis}
        options={searchAxes.map((a) => ({ value: a, label: say(`peak.axis.${a}`) }))}
        onChoose={(next) => form.put({ axis: next })}
      />
      <div class="value-and-u">
        <Field form={form} name="angle" label={say('peak.angle')} unit="°" big keyed problem={told(tried.problem, 'angles_deg')} />
        <Field form={form} name="level" label={say('peak.level-read')} unit="dBm" big keyed problem={told(tried.problem, 'levels_dbm')} />
      </div>
      {wrongSign && (
        <Button wide onPress={() => form.put({ level: `\u2212${form.text('level').replace(/^[+\s]+/, '')}` })}>
          {say('peak.minus', { level: `\u2212${form.text('level').replace(/^[+\s]+/, '')}` })}
        </Button>
      )}
      <p class="quiet">{say(`peak.how.${axis}`)}</p>
      {said && (
        <p role="status">
          <strong>{said}</strong>
        </p>
      )}
      <section class="section stack" aria-labelledby="fit-title">
        <h2 id="fit-title">{say('peak.so-far')}</h2>
        {fit.problem && <Message tone="wrong">{fit.problem.message}</Message>}
        <PeakView axis={axis} steps={bodies} answer={fit.answer} expected={expected} />
        {beamwidthOf(antenna, axis) === null && <Message tone="note">{say('peak.no-beamwidth')}</Message>}
        {keptNow && <Message tone="note">{keptPeak(keptNow)}</Message>}
        {fit.answer && fit.answer.peak_deg !== null && !keptNow && (
          <Button wide busy={busy} onPress={() => void keepPeak()}>
            {say('peak.keep', { peak: `${figure(fit.answer.peak_deg, 1)}°` })}
          </Button>
        )}
        {steps.length > 0 && (
          <Button kind="quiet" onPress={() => form.put({ fresh: `${antenna.id} ${axis} ${latest?.number ?? 0}` })}>
            {say('peak.anew')}
          </Button>
        )}
      </section>
      {steps.length > 0 && (
        <section class="section stack" aria-labelledby="steps-title">
          <h2 id="steps-title">{say('peak.steps', { n: steps.length })}</h2>
          <ul class="list-rows">
            {[...steps].reverse().map((step) => (
              <li key={step.id}>
                <span class="figure">
                  <strong>
                    {shortest(step.body.angle_deg, 2)}° {'\u00b7'} {shortest(step.body.level_dbm, 1)} dBm
                  </strong>{' '}
                  <span class="quiet">{clock(step.at)}</span>
                </span>
                <Button onPress={() => void takeBack(step.id)} label={`${t('mount.take-back')}: ${shortest(step.body.angle_deg, 2)}°`}>
                  {t('mount.take-back')}
                </Button>
              </li>
            ))}
          </ul>
        </section>
      )}
    </Page>
  );
}

/** Asked at the head of everything that reads levels. It is logged with its name; writing levels down never waits for it. */
export function PowerControl({ job, mount, off }: Address & { off: EntryOf<'power_control.confirmed'> | null }) {
  const who = useWatched(session);
  const [name, setName] = useState<string | null>(null);
  const [wrong, setWrong] = useState<string | null>(null);
  const [busy, setBusy] = useState(false);
  if (off) {
    return (
      <p class="confirmed">
        <svg width="22" height="22" viewBox="0 0 22 22" aria-hidden="true" focusable="false">
          <rect x="2" y="2" width="18" height="18" fill="currentColor" />
        </svg>
        {say('control.confirmed', { name: off.body.name, when: when(off.at) })}
      </p>
    );
  }
  const as = name ?? who?.user.name ?? '';
  const confirm = async () => {
    if (as.trim() === '') return setWrong(t('before.name-missing'));
    setBusy(true);
    try {
      await addEntry('power_control.confirmed', job, mount, { name: as.trim() });
    } catch (error) {
      setWrong(t('failed.write', { why: String(error) }));
    }
    setBusy(false);
  };
  return (
    <section class="section stack" aria-labelledby="control-title">
      <h2 id="control-title">{say('control.title')}</h2>
      <p>{say('control.why')}</p>
      <div class="field">
        <label for="control-name">{t('before.name')}</label>
        <input id="control-name" class="text-entry" type="text" autoComplete="name" value={as} onInput={(event) => setName(event.currentTarget.value)} />
        {wrong && (
          <Message tone="wrong" beside live>
            {wrong}
          </Message>
        )}
      </div>
      <Button wide busy={busy} onPress={() => void confirm()}>
        {say('control.confirm')}
      </Button>
    </section>
  );
}
