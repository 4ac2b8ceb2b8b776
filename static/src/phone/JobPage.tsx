// One job: what the desk said, the path, the mounts, the site with access and emergency in large type, notes.
import { useEffect, useState } from 'preact/hooks';
import { Button } from '../parts/Button.tsx';
import { Message } from '../parts/Message.tsx';
import { WordMark } from '../parts/WordMark.tsx';
import { addEntry, dropDraft, getDraft, setDraft } from '../store/index.ts';
import type { LoggedEntry, PhoneJob } from '../types.ts';
import { figure } from '../words/figures.ts';
import { day, when } from '../words/when.ts';
import { t } from '../words/words.ts';
import { DeskRemark } from './DeskRemark.tsx';
import { Gone } from './Gone.tsx';
import { saidOf } from './log.ts';
import { Page } from './Page.tsx';
import { hrefOf } from './route.ts';
import { useJob } from './useJob.ts';
import { nextStep, unread } from './steps.ts';
import { titleBeside } from './titles.ts';
import { Visit } from './Visit.tsx';
import { useWholeVerdicts } from './whole.ts';

export function JobPage({ id }: { id: string }) {
  const open = useJob(id);
  const verdicts = useWholeVerdicts(open);
  if (!open) return <Gone looking={open === undefined} />;
  const { job, log } = open;
  const { plan } = job;
  return (
    <Page
      title={plan.site}
      under={`${titleBeside(plan)}, ${t(`stage.${job.stage}`)}`}
      backHref="#/"
      head={<Visit job={job} log={log} mount={null} here={null} />}
    >
      <DeskRemark job={job} />
      <section class="section" aria-labelledby="mounts-title">
        <h2 id="mounts-title">{t('job.mounts')}</h2>
        <ul class="stack">
          {plan.mounts.map((mount) => {
            const step = nextStep(log, mount);
            const phase = step === 'as-found' ? 'as_found' : 'as_left';
            const verdict = verdicts?.find((v) => v.mount.id === mount.id)?.verdict ?? null;
            const word = verdict && verdict.judged !== 'planned' ? verdict.word : null;
            return (
              <li key={mount.id}>
                <a class="card" href={hrefOf({ page: 'mount', job: id, mount: mount.id, step })}>
                  <span class="card-head">
                    <strong class="card-title">{mount.name}</strong>
                    {word && <WordMark word={word} />}
                  </span>
                  <span class="quiet">{mount.sheet.title}</span>
                  <span>
                    {t(`phase.${phase}`)}: {unread(log, mount, phase).length === 0 ? t('job.all-read') : t('job.to-read', { n: unread(log, mount, phase).length })}
                  </span>
                </a>
              </li>
            );
          })}
        </ul>
      </section>

      <Emergency job={job} />

      <section class="section stack" aria-labelledby="site-title">
        <h2 id="site-title">{t('job.access')}</h2>
        <p class="as-typed">{plan.access ?? t('job.no-access')}</p>
        <p class="quiet">{plan.visit_on === null ? t('jobs.no-visit') : t('jobs.visit', { day: day(plan.visit_on) })}</p>
      </section>

      <Notes job={job} log={log} />
    </Page>
  );
}

/** Large, because it is read by somebody else, at arm's length, in a hurry. */
function Emergency({ job }: { job: PhoneJob }) {
  const { emergency, lat_deg, lon_deg } = job.plan;
  return (
    <section class="section emergency" aria-labelledby="emergency-title">
      <h2 id="emergency-title">{t('job.emergency')}</h2>
      <p class="large as-typed">{emergency ?? t('job.no-emergency')}</p>
      <h3>{t('job.coordinates')}</h3>
      <p class="large figure">
        {lat_deg === null || lon_deg === null ? t('job.no-coordinates') : t('job.coordinates-value', {
              lat: figure(Math.abs(lat_deg), 5),
              north: t(lat_deg < 0 ? 'south' : 'north'),
              lon: figure(Math.abs(lon_deg), 5),
              east: t(lon_deg < 0 ? 'west' : 'east'),
            })}
      </p>
    </section>
  );
}

function Notes({ job, log }: { job: PhoneJob; log: readonly LoggedEntry[] }) {
  const id = job.summary.id;
  const draftKey = `note ${id}`;
  const [text, setText] = useState('');
  const [wrong, setWrong] = useState<string | null>(null);
  const [busy, setBusy] = useState(false);
  useEffect(() => {
    getDraft<string>(draftKey).then((kept) => kept && setText((now) => now || kept), () => undefined);
  }, [draftKey]);
  const type = (next: string) => {
    setText(next);
    (next === '' ? dropDraft(draftKey) : setDraft(draftKey, next)).catch((error: unknown) => setWrong(t('failed.write', { why: String(error) })));
  };
  const keep = async () => {
    if (text.trim() === '') return;
    setBusy(true);
    try {
      await addEntry('note.added', id, null, { text: text.trim() }, { dropsDraft: draftKey });
      setText('');
      setWrong(null);
    } catch (error) {
      setWrong(t('failed.write', { why: String(error) }));
    }
    setBusy(false);
  };
  const notes = saidOf(log, 'note.added');
  return (
    <section class="section stack" aria-labelledby="notes-title">
      <h2 id="notes-title">{t('job.notes')}</h2>
      {notes.length === 0 && <p class="quiet">{t('job.no-notes')}</p>}
      <ul class="stack">
        {notes.map(({ entry, logged }) => (
          <li key={entry.id}>
            <p class="as-typed">{entry.body.text}</p>
            <p class="quiet">
              {t('job.note-by', { name: logged.own ? t('job.you') : (logged.author_name ?? ''), when: when(entry.at) })} {'\u00b7'} {t(`where.${logged.whereabouts}`)}
            </p>
          </li>
        ))}
      </ul>
      <div class="field">
        <label for="note">{t('job.note')}</label>
        <textarea id="note" class="text-entry" value={text} onInput={(event) => type(event.currentTarget.value)} />
        {wrong && (
          <Message tone="wrong" beside live>
            {wrong}
          </Message>
        )}
      </div>
      <Button wide busy={busy} onPress={() => void keep()}>
        {t('job.note-keep')}
      </Button>
    </section>
  );
}
