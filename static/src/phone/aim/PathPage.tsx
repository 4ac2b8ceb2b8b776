// The path to the far end: profile, obstacles of the plan and of the crew, the level that each chain should receive.
import { useState } from 'preact/hooks';
import type { PathAnswer } from '../../aim/answers.ts';
import { ExpectedLevels, obstacleSaid, PathView } from '../../aim/PathView.tsx';
import { pathQuestion } from '../../aim/questions.ts';
import { standingOf } from '../../aim/search.ts';
import { useReckoned } from '../../aim/useReckoned.ts';
import { Button } from '../../parts/Button.tsx';
import { Message } from '../../parts/Message.tsx';
import { addEntry } from '../../store/index.ts';
import type { Obstacle } from '../../types.ts';
import { say } from '../../words/aim.ts';
import { t } from '../../words/words.ts';
import { Gone } from '../Gone.tsx';
import { Page } from '../Page.tsx';
import { hrefOf } from '../route.ts';
import { errorIn, Field, type Form, numberIn, showFirst, told, useForm } from './form.tsx';
import { type Address, ask, type AimOpen, useAim, usePath, useTarget } from './useAim.ts';

export function PathPage(props: Address) {
  const open = useAim(props.job, props.mount);
  const form = useForm(`obstacle ${props.job} ${props.mount}`, { name: '', at: '', top: '', u: '' }, 'at');
  if (!open) return <Gone looking={open === undefined} />;
  if (!form) return <p class="opening">{t('loading')}</p>;
  return <Along {...props} open={open} form={form} />;
}

function Along({ open, form, job: jobId, mount: mountId }: Address & { open: AimOpen; form: Form }) {
  const { sheet, mount, entries } = open;
  const [busy, setBusy] = useState(false);
  const target = useTarget(sheet);
  const distance = target.answer?.distance_m ?? null;
  const path = usePath(sheet, distance);
  const heights = sheet.path.near_at && sheet.path.far_at;
  const at = numberIn(form, 'at');
  const top = numberIn(form, 'top');
  const u = numberIn(form, 'u');
  const obstacle: Obstacle | null = at === null || top === null ? null : { name: form.text('name').trim() || null, at_m: at, top_m: top, ...(u === null ? {} : { u_m: u }) };
  // The path with the new obstacle is asked before it is kept: what calc refuses is told beside its field. Where plan and
  // coordinates give two lengths, it has to stand within both.
  const tried = useReckoned<PathAnswer>(ask, 'aim.path', obstacle && heights ? pathQuestion({ ...sheet, path: { ...sheet.path, obstacles: [obstacle] } }, Math.min(distance ?? Infinity, sheet.path.distance_m)) : null);
  const noted = standingOf(entries, mountId, 'obstacle.noted');
  const plannedCount = mount.sheet.path.obstacles?.length ?? 0;
  const place = { job: jobId, mount: mountId };

  const keep = async () => {
    if (!obstacle || tried.problem || tried.asking || errorIn(form, 'u', true)) {
      form.ask(true);
      requestAnimationFrame(() => showFirst(['at', 'top', 'u']));
      return;
    }
    setBusy(true);
    try {
      await addEntry('obstacle.noted', jobId, mountId, obstacle, { dropsDraft: form.key });
      form.clear();
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

  return (
    <Page title={say('path.title')} under={mount.name} backHref={hrefOf({ page: 'aim', ...place })}>
      {path.problem && <Message tone="wrong">{path.problem.message}</Message>}
      {path.answer && <PathView sheet={sheet} path={path.answer} near={say('path.here')} far={say('path.far-end')} />}
      {path.answer && (
        <section class="section stack" aria-labelledby="level-title">
          <h2 id="level-title">{say('path.levels')}</h2>
          <ExpectedLevels sheet={sheet} path={path.answer} />
        </section>
      )}
      <section class="section stack" aria-labelledby="obstacles-title">
        <h2 id="obstacles-title">{say('path.obstacles')}</h2>
        {(path.answer?.obstacles.length ?? 0) === 0 && <p>{say('path.none')}</p>}
        <ol class="list-rows">
          {path.answer?.obstacles.map((o, i) => {
            const own = noted[i - plannedCount];
            return (
              <li key={i}>
                <div>
                  <p>
                    <strong>
                      {i + 1} {o.name ?? say('obstacle.unnamed')}
                    </strong>
                    {own ? ` · ${say('obstacle.noted')}` : ` · ${say('obstacle.planned')}`}
                  </p>
                  <p class="figure">{obstacleSaid(o)}</p>
                </div>
                {own && (
                  <Button onPress={() => void takeBack(own.id)} label={`${t('mount.take-back')}: ${o.name ?? i + 1}`}>
                    {t('mount.take-back')}
                  </Button>
                )}
              </li>
            );
          })}
        </ol>
      </section>
      {heights && (
        <section class="section stack" aria-labelledby="add-title">
          <h2 id="add-title">{say('obstacle.add')}</h2>
          <div class="field">
            <label for="field-name">{say('obstacle.name')}</label>
            <input id="field-name" class="text-entry" type="text" autoComplete="off" value={form.text('name')} onInput={(e) => form.put({ name: e.currentTarget.value })} />
          </div>
          <Field form={form} name="at" label={say('obstacle.at')} unit="m" problem={told(tried.problem, 'obstacles[0].at_m')} />
          <Field form={form} name="top" label={say('obstacle.top')} unit="m" hint={say('obstacle.top-hint', { datum: sheet.path.height_datum ?? '' })} problem={told(tried.problem, 'obstacles[0].top_m')} />
          <Field form={form} name="u" label={say('obstacle.u')} unit="m" optional problem={told(tried.problem, 'obstacles[0].u_m')} />
          {tried.answer?.obstacles[0] && <p class="figure">{obstacleSaid(tried.answer.obstacles[0])}</p>}
          {form.trouble && (
            <Message tone="wrong" live>
              {form.trouble}
            </Message>
          )}
          <Button kind="first" wide busy={busy} onPress={() => void keep()}>
            {say('obstacle.keep')}
          </Button>
        </section>
      )}
    </Page>
  );
}
