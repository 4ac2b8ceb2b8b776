// The ground that a sector covers: inner and outer edge of the beam for each antenna, from its downtilt, vertical
// beamwidth and height.
import type { Footprint } from '../../aim/answers.ts';
import { Facts } from '../../aim/Facts.tsx';
import { lastAngle, sectorQuestion } from '../../aim/questions.ts';
import { upDown } from '../../aim/say.ts';
import { useReckoned } from '../../aim/useReckoned.ts';
import { metres } from '../../draw/PathProfile.tsx';
import { Message } from '../../parts/Message.tsx';
import type { Antenna } from '../../types.ts';
import { say } from '../../words/aim.ts';
import { shortest } from '../../words/figures.ts';
import { t } from '../../words/words.ts';
import { Gone } from '../Gone.tsx';
import { Page } from '../Page.tsx';
import { hrefOf } from '../route.ts';
import { Field, numberIn, told, useForm } from './form.tsx';
import { ask, useAim } from './useAim.ts';

export function GroundPage({ job, mount: mountId }: { job: string; mount: string }) {
  const open = useAim(job, mountId);
  const planned = open?.mount.sheet.path.above_ground_m ?? null;
  const form = useForm(`ground ${job} ${mountId}`, { height: planned === null ? '' : shortest(planned, 2) }, 'height');
  if (!open) return <Gone looking={open === undefined} />;
  if (!form) return <p class="opening">{t('loading')}</p>;
  const { sheet, mount } = open;
  const height = numberIn(form, 'height') ?? (form.text('height').trim() === '' ? planned : null);
  return (
    <Page title={say('ground.title')} under={mount.name} backHref={hrefOf({ page: 'aim', job, mount: mountId })}>
      <Field form={form} name="height" label={say('ground.height')} unit="m" hint={planned === null ? say('ground.height-hint') : say('ground.height-plan', { height: metres(planned) })} />
      {sheet.near.antennas.map((antenna) => (
        <Covered key={antenna.id} antenna={antenna} height={height} />
      ))}
    </Page>
  );
}

function Covered({ antenna, height }: { antenna: Antenna; height: number | null }) {
  const question = sectorQuestion(antenna, height);
  const found = useReckoned<Footprint>(ask, 'aim.sector', question);
  const tilt = lastAngle(antenna.tilt);
  const planned = tilt === antenna.tilt.planned;
  const edge = (m: number | null) => (m === null ? say('ground.no-edge') : metres(m));
  return (
    <section class="section stack" aria-labelledby={`ground-${antenna.id}`}>
      <h2 id={`ground-${antenna.id}`}>{say('ground.of', { antenna: antenna.id })}</h2>
      {antenna.pattern.beamwidth_el_deg == null && <Message tone="note">{say('ground.no-width')}</Message>}
      {height === null && <p>{say('ground.no-height')}</p>}
      {found.problem && <Message tone="wrong">{told(found.problem, 'height_m', 'tilt_deg', 'beamwidth_deg') ?? found.problem.message}</Message>}
      {found.answer && (
        <>
          <Facts
            facts={[
              { name: say('ground.inner'), value: edge(found.answer.inner_edge_m), large: true },
              { name: say('ground.centre'), value: edge(found.answer.centre_m) },
              { name: say('ground.outer'), value: edge(found.answer.outer_edge_m), large: true },
              tilt && { name: say(planned ? 'ground.tilt-plan' : 'ground.tilt-read'), value: upDown(tilt.value) },
              antenna.electrical_tilt_deg ? { name: say('ground.electrical'), value: upDown(antenna.electrical_tilt_deg) } : null,
            ]}
          />
          <p>{found.answer.text}</p>
          <p class="quiet">{say('ground.flat')}</p>
        </>
      )}
    </section>
  );
}
