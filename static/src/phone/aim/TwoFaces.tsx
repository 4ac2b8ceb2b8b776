// Tilt or skew by reversal: the level or phone is read on the face, turned half round where it lies, and read again. The
// bias of the instrument falls out; the mean of each face's readings goes in.
import { useState } from 'preact/hooks';
import type { TwoFace } from '../../aim/answers.ts';
import { Facts } from '../../aim/Facts.tsx';
import { useReckoned } from '../../aim/useReckoned.ts';
import { Button } from '../../parts/Button.tsx';
import { Message } from '../../parts/Message.tsx';
import { say } from '../../words/aim.ts';
import { figure } from '../../words/figures.ts';
import { errorIn, Field, type Form, numberIn, told, useForm } from './form.tsx';
import { PhoneFaces } from './PhoneFaces.tsx';
import { ask } from './useAim.ts';

export interface TwoFacesProps {
  /** Keeps what is being typed apart from other readings. */
  draftKey: string;
  quantity: 'tilt' | 'skew';
  /** A rod instead of a panel: the phone's sensor is not offered where its signs are those of a back plate. */
  rod: boolean;
  /** Takes value and standard uncertainty, degrees, into the reading; by the phone's sensor where that read it. */
  onTake: (value: number, u: number, method: 'phone' | null) => void;
}

const readings = ['1', '2', '3'] as const;

export function TwoFaces({ draftKey, quantity, rod, onTake }: TwoFacesProps) {
  const [open, setOpen] = useState(false);
  const form = useForm(`two faces ${draftKey}`, {}, 'a1');
  return (
    <details class="more-figures" onToggle={(event) => setOpen(event.currentTarget.open)}>
      <summary>{say('faces.title')}</summary>
      {open && form && (
        <div class="stack">
          {!rod && (
            <section class="stack" aria-labelledby="live-title">
              <h3 id="live-title">{say('live.title')}</h3>
              <PhoneFaces quantity={quantity} onTake={(value, u) => onTake(value, u, 'phone')} />
            </section>
          )}
          <section class="stack" aria-labelledby="typed-title">
            <h3 id="typed-title">{say('faces.typed')}</h3>
            <Faces form={form} onTake={(value, u) => onTake(value, u, null)} />
          </section>
        </div>
      )}
    </details>
  );
}

/** What was read with one face, as typed; its mean, its spread and the doubt of the answer are calc's to make. */
function readOn(form: Form, face: 'a' | 'b'): number[] {
  return readings.map((n) => numberIn(form, `${face}${n}`)).filter((x): x is number => x !== null);
}

function Faces({ form, onTake }: { form: Form; onTake: (value: number, u: number) => void }) {
  const a = readOn(form, 'a');
  const b = readOn(form, 'b');
  const asked = a.length > 0 && b.length > 0 ? { readings_a_deg: a, readings_b_deg: b } : null;
  const found = useReckoned<TwoFace>(ask, 'tilt.twoface', asked);
  const unread = (['a', 'b'] as const).some((face) => readings.some((n) => errorIn(form, `${face}${n}`, true) !== null));
  return (
    <div class="stack">
      <p>{say('faces.how')}</p>
      {(['a', 'b'] as const).map((face) => (
        <fieldset class="stack" key={face}>
          <legend class="field-label">{say(`faces.${face}`)}</legend>
          {readings.map((n, i) => (
            <Field key={n} form={form} name={`${face}${n}`} label={say('faces.reading', { n })} unit="°" optional={i > 0} problem={told(found.problem, `readings_${face}_deg`)} />
          ))}
        </fieldset>
      ))}
      {found.answer && !unread && (
        <>
          <Facts
            facts={[
              { name: say('faces.answer'), value: `${figure(found.answer.tilt_deg, 2)}° ± ${figure(found.answer.u_deg, 2)}°` },
              { name: say('faces.bias'), value: `${figure(found.answer.bias_deg, 2)}°` },
            ]}
          />
          <Button wide onPress={() => found.answer && onTake(found.answer.tilt_deg, found.answer.u_deg)}>
            {say('faces.take')}
          </Button>
        </>
      )}
      {found.problem && !/^readings_/.test(found.problem.field) && <Message tone="wrong">{found.problem.message}</Message>}
    </div>
  );
}
