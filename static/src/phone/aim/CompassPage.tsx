// A compass beside steel: a check on gross errors. What it shows is made true by the declination and laid beside the
// target and what was read; it becomes no azimuth reading.
import { useState } from 'preact/hooks';
import type { Compass } from '../../aim/answers.ts';
import { Facts } from '../../aim/Facts.tsx';
import { Declination } from '../../aim/Pointing.tsx';
import { compassQuestion, lastAngle, standOf } from '../../aim/questions.ts';
import { bearing, besides, offBy } from '../../aim/say.ts';
import { useReckoned } from '../../aim/useReckoned.ts';
import { Button } from '../../parts/Button.tsx';
import { Choice } from '../../parts/Choice.tsx';
import { Message } from '../../parts/Message.tsx';
import { addEntry } from '../../store/index.ts';
import { say } from '../../words/aim.ts';
import { figure } from '../../words/figures.ts';
import { today } from '../../words/when.ts';
import { t } from '../../words/words.ts';
import { Gone } from '../Gone.tsx';
import { leaveNotice } from '../notice.ts';
import { Page } from '../Page.tsx';
import { go, hrefOf } from '../route.ts';
import { methodName } from '../sentence.ts';
import { Field, type Form, numberIn, showFirst, told, useForm } from './form.tsx';
import { type Address, ask, type AimOpen, useAim, useTarget } from './useAim.ts';

const fields = ['first', 'second', 'third'] as const;

export function CompassPage(props: Address) {
  const open = useAim(props.job, props.mount);
  const form = useForm(`compass ${props.job} ${props.mount}`, { first: '', second: '', third: '', antenna: '' }, 'first');
  if (!open) return <Gone looking={open === undefined} />;
  if (!form) return <p class="opening">{t('loading')}</p>;
  return <Checking {...props} open={open} form={form} />;
}

/** A compass and a better reading part by more than chance from three of the compass's own doubts on. */
const grossFrom = 3;

function Checking({ open, form, job: jobId, mount: mountId }: Address & { open: AimOpen; form: Form }) {
  const { sheet, mount } = open;
  const [busy, setBusy] = useState(false);
  const turned = sheet.near.antennas.filter((a) => a.azimuth);
  const antenna = turned.find((a) => a.id === form.text('antenna')) ?? turned[0];
  const stand = standOf(sheet, open.job.plan);
  const target = useTarget(sheet);
  const aim = target.answer?.true_bearing_deg ?? sheet.path.bearing_deg;
  const readings = fields.map((f) => numberIn(form, f)).filter((x): x is number => x !== null);
  const asked = stand ? compassQuestion(stand, today(), readings) : null;
  const compass = useReckoned<Compass>(ask, 'aim.compass', asked);
  const place = { job: jobId, mount: mountId };
  const found = compass.answer?.bearing ?? null;
  const last = antenna ? lastAngle(antenna.azimuth) : null;
  const better = last && last !== antenna?.azimuth?.planned && last.method !== 'compass' ? last : null;
  const against = better ? better.value : aim;
  const gross = found !== null && Math.abs(offBy(found.true_bearing_deg, against)) > grossFrom * found.u_deg;
  const keep = async () => {
    if (!found || !asked || !antenna) {
      form.ask(true);
      requestAnimationFrame(() => showFirst([...fields]));
      return;
    }
    setBusy(true);
    try {
      await addEntry(
        'sight.taken',
        jobId,
        mountId,
        { antenna: antenna.id, phase: 'as_left', reference: 'compass', landmark: null, asked, answer: { ...found, method: compass.answer?.method }, typed: fields.map((f) => form.text(f)).join(' / ') },
        { dropsDraft: form.key },
      );
      leaveNotice({ text: say('compass.kept'), entry: null, takenBack: '' });
      go({ page: 'aim', ...place });
    } catch (error) {
      form.fail(t('failed.write', { why: error instanceof Error ? error.message : String(error) }));
      setBusy(false);
    }
  };
  if (!antenna) return <Gone looking={false} />;
  return (
    <Page
      title={say('compass.title')}
      under={mount.name}
      backHref={hrefOf({ page: 'aim', ...place })}
      dock={
        <>
          {form.trouble && (
            <Message tone="wrong" live>
              {form.trouble}
            </Message>
          )}
          <Button kind="first" wide busy={busy} onPress={() => void keep()}>
            {say('compass.keep')}
          </Button>
        </>
      }
    >
      <Message tone="warn">{say('compass.alone')}</Message>
      {!stand && <Message tone="wrong">{say('sun.no-place')}</Message>}
      {turned.length > 1 && (
        <Choice legend={say('sight.antenna')} name="antenna" value={antenna.id} options={turned.map((a) => ({ value: a.id, label: a.id }))} onChoose={(id) => form.put({ antenna: id })} />
      )}
      {fields.map((f, i) => (
        <Field key={f} form={form} name={f} label={say(`compass.${f}`)} unit="°" optional={i > 0} hint={i === 0 ? say('compass.hint') : null} problem={told(compass.problem, `compass_deg[${i}]`)} />
      ))}
      {compass.problem && !/^compass_deg\[/.test(compass.problem.field) && <Message tone="wrong">{compass.problem.message}</Message>}
      {found && (
        <section class="section stack" aria-labelledby="came-title">
          <h2 id="came-title">{say('compass.came')}</h2>
          <Facts
            facts={[
              { name: say('compass.true'), value: bearing(found.true_bearing_deg, found.u_deg), large: true },
              { name: say('rose.target'), value: `${figure(aim, 1)}°, ${besides(found.true_bearing_deg, aim)}` },
              better && { name: say('rose.read-with', { antenna: antenna.id, method: methodName(better.method ?? '') }), value: `${figure(better.value, 1)}°, ${besides(found.true_bearing_deg, better.value)}` },
            ]}
          />
          {gross ? <Message tone="warn">{say('compass.gross')}</Message> : <p>{say('compass.fits')}</p>}
        </section>
      )}
      {compass.answer && (
        <section class="section stack" aria-labelledby="decl-title">
          <h2 id="decl-title">{say('compass.declination')}</h2>
          <Declination compass={compass.answer} />
        </section>
      )}
    </Page>
  );
}
