// The lean of the mast, read in two planes, and what it does to the tilt and skew of this mount.
import { useState } from 'preact/hooks';
import type { Lean } from '../../aim/answers.ts';
import { Facts } from '../../aim/Facts.tsx';
import { turned, upDown } from '../../aim/say.ts';
import { standingOf } from '../../aim/search.ts';
import { useReckoned } from '../../aim/useReckoned.ts';
import { Button } from '../../parts/Button.tsx';
import { Choice } from '../../parts/Choice.tsx';
import { Message } from '../../parts/Message.tsx';
import { addEntry } from '../../store/index.ts';
import { say } from '../../words/aim.ts';
import { figure, shortest } from '../../words/figures.ts';
import { when } from '../../words/when.ts';
import { t } from '../../words/words.ts';
import { Gone } from '../Gone.tsx';
import { Page } from '../Page.tsx';
import { hrefOf } from '../route.ts';
import { Field, type Form, numberIn, showFirst, told, useForm } from './form.tsx';
import { type Address, ask, type AimOpen, useAim } from './useAim.ts';

export function LeanPage(props: Address) {
  const open = useAim(props.job, props.mount);
  const looks = open ? open.mount.sheet.path.bearing_deg : 0;
  const form = useForm(`lean ${props.job} ${props.mount}`, { first: '', 'first-way': '', 'first-toward': '', second: '', 'second-way': '', 'second-toward': '' }, 'first');
  if (!open) return <Gone looking={open === undefined} />;
  if (!form) return <p class="opening">{t('loading')}</p>;
  return <Leaning {...props} open={open} form={form} looks={looks} />;
}

function Leaning({ open, form, looks, job: jobId, mount: mountId }: Address & { open: AimOpen; form: Form; looks: number }) {
  const { mount, entries } = open;
  const [busy, setBusy] = useState(false);
  // The planes are along the boresight and across it, unless the crew names others.
  const towards = { first: turned(looks), second: turned(looks + 90) };
  const axis = (which: 'first' | 'second') => {
    const size = numberIn(form, which);
    const way = form.text(`${which}-way`);
    const named = form.text(`${which}-toward`).trim() === '' ? towards[which] : numberIn(form, `${which}-toward`);
    if (size === null || named === null || (size !== 0 && way === '')) return null;
    return { lean_deg: way === 'away' ? -size : size, toward_deg: named };
  };
  const first = axis('first');
  const second = axis('second');
  const asked = first && second ? { axes: [first, second], mount_azimuth_deg: turned(looks) } : null;
  const lean = useReckoned<Lean>(ask, 'aim.lean', asked);
  const last = standingOf(entries, mountId, 'lean.read').pop() ?? null;
  const place = { job: jobId, mount: mountId };

  const keep = async () => {
    if (!asked || !lean.answer || lean.asking) {
      form.ask(true);
      requestAnimationFrame(() => showFirst(['first', 'first-toward', 'second', 'second-toward']));
      return;
    }
    setBusy(true);
    try {
      const typed = (['first', 'second'] as const).map((w) => `${form.text(w)} ${form.text(`${w}-way`)}`).join(' / ');
      await addEntry('lean.read', jobId, mountId, { asked, answer: { ...lean.answer }, typed }, { dropsDraft: form.key });
      form.clear();
    } catch (error) {
      form.fail(t('failed.write', { why: error instanceof Error ? error.message : String(error) }));
    }
    setBusy(false);
  };

  const plane = (which: 'first' | 'second') => {
    const toward = form.text(`${which}-toward`).trim() === '' ? towards[which] : (numberIn(form, `${which}-toward`) ?? towards[which]);
    const index = which === 'first' ? 0 : 1;
    const wayMissing = form.asked && form.text(`${which}-way`) === '' && numberIn(form, which) !== 0;
    return (
      <section class="section stack" aria-labelledby={`plane-${which}`}>
        <h2 id={`plane-${which}`}>{say(`lean.plane.${which}`)}</h2>
        <Field form={form} name={which} label={say('lean.amount')} unit="°" problem={told(lean.problem, `axes[${index}].lean_deg`)} />
        <Choice
          legend={say('lean.which-way', { bearing: `${figure(toward, 0)}°` })}
          name={`way-${which}`}
          value={form.text(`${which}-way`) || null}
          options={[
            { value: 'toward', label: say(which === 'first' ? 'lean.toward-far' : 'lean.toward-right') },
            { value: 'away', label: say(which === 'first' ? 'lean.away-far' : 'lean.toward-left') },
          ]}
          onChoose={(way) => form.put({ [`${which}-way`]: way })}
        />
        {wayMissing && (
          <Message tone="wrong" beside live>
            {t('reading.way-missing')}
          </Message>
        )}
        <Field form={form} name={`${which}-toward`} label={say('lean.toward')} unit="°" optional hint={say('lean.toward-hint', { bearing: `${shortest(towards[which], 1)}°` })} problem={told(lean.problem, `axes[${index}].toward_deg`)} />
      </section>
    );
  };

  return (
    <Page
      title={say('lean.title')}
      under={mount.name}
      backHref={hrefOf({ page: 'aim', ...place })}
      dock={
        <>
          {lean.answer && (
            <p class="figure" role="status">
              <strong>{say('lean.short', { tilt: upDown(lean.answer.tilt_deg), skew: skewed(lean.answer.skew_deg) })}</strong>
            </p>
          )}
          {form.trouble && (
            <Message tone="wrong" live>
              {form.trouble}
            </Message>
          )}
          <Button kind="first" wide busy={busy} onPress={() => void keep()}>
            {say('lean.keep')}
          </Button>
        </>
      }
    >
      <p>{say('lean.what')}</p>
      {last && (
        <Message tone="note">
          {say('lean.last', {
            lean: `${figure(Number(last.body.answer['lean_deg']), 1)}°`,
            toward: `${figure(Number(last.body.answer['toward_deg']), 0)}°`,
            tilt: upDown(Number(last.body.answer['tilt_deg'])),
            skew: skewed(Number(last.body.answer['skew_deg'])),
            when: when(last.at),
          })}
        </Message>
      )}
      {plane('first')}
      {plane('second')}
      {lean.problem && !/^axes\[/.test(lean.problem.field) && <Message tone="wrong">{lean.problem.message}</Message>}
      {lean.answer && (
        <section class="section stack" aria-labelledby="lean-came">
          <h2 id="lean-came">{say('lean.came')}</h2>
          <Facts
            facts={[
              { name: say('lean.lean'), value: say('lean.toward-bearing', { lean: `${figure(lean.answer.lean_deg, 1)}°`, toward: `${figure(lean.answer.toward_deg, 0)}°` }) },
              { name: t('quantity.tilt'), value: upDown(lean.answer.tilt_deg) },
              { name: t('quantity.skew'), value: skewed(lean.answer.skew_deg) },
            ]}
          />
          <p>{lean.answer.text}</p>
        </section>
      )}
    </Page>
  );
}

function skewed(deg: number): string {
  if (Math.abs(deg) < 0.05) return '0°';
  return `${figure(Math.abs(deg), 1)}° ${t(deg > 0 ? 'way.clockwise' : 'way.anticlockwise')}`;
}
