// Handing in: the verdict of each mount, what is open, a remark; a person decides. Afterwards: where it is.
import { useEffect, useState } from 'preact/hooks';
import { Button } from '../parts/Button.tsx';
import { Message } from '../parts/Message.tsx';
import { WordMark } from '../parts/WordMark.tsx';
import { addEntry, dropDraft, getDraft, setDraft } from '../store/index.ts';
import type { LoggedEntry, PhoneJob } from '../types.ts';
import { when } from '../words/when.ts';
import { t } from '../words/words.ts';
import { DeskRemark } from './DeskRemark.tsx';
import { Gone } from './Gone.tsx';
import { saidOf } from './log.ts';
import { Page } from './Page.tsx';
import { hrefOf } from './route.ts';
import { reasonOf } from './sentence.ts';
import { useJob } from './useJob.ts';
import { turnedUnread, unconfirmed, unread, wantedOf } from './steps.ts';
import { type MountVerdict, useWholeVerdicts } from './whole.ts';
import { Visit } from './Visit.tsx';

export function HandIn({ id }: { id: string }) {
  const open = useJob(id);
  const verdicts = useWholeVerdicts(open);
  const [remark, setRemark] = useState('');
  const [busy, setBusy] = useState(false);
  const [trouble, setTrouble] = useState<string | null>(null);
  const draftKey = `hand in ${id}`;
  useEffect(() => {
    getDraft<string>(draftKey).then((kept) => kept && setRemark((now) => now || kept), () => undefined);
  }, [draftKey]);
  if (!open) return <Gone looking={open === undefined} />;
  const { job, log } = open;
  const things = openThings(job, log, verdicts ?? []);
  const handed = saidOf(log, 'job.handed_in').pop() ?? null;
  const done = job.stage === 'handed in' || job.stage === 'signed off';

  const type = (text: string) => {
    setRemark(text);
    (text === '' ? dropDraft(draftKey) : setDraft(draftKey, text)).catch((error: unknown) => setTrouble(t('failed.write', { why: String(error) })));
  };
  const handIn = async () => {
    if (!verdicts) return;
    setBusy(true);
    try {
      await addEntry(
        'job.handed_in',
        id,
        null,
        {
          remark: remark.trim() === '' ? null : remark.trim(),
          open: things,
          verdicts: verdicts.flatMap(({ mount, verdict }) =>
            verdict ? [{ mount: mount.id, phase: verdict.judged, word: verdict.word, probability: verdict.probability, method: verdict.method }] : [],
          ),
        },
        { dropsDraft: draftKey },
      );
      setRemark('');
      setTrouble(null);
      document.querySelector('.sheet')?.scrollTo(0, 0);
    } catch (error) {
      setTrouble(t('failed.write', { why: error instanceof Error ? error.message : String(error) }));
    }
    setBusy(false);
  };
  const label = done ? t('hand-in.again') : things.length > 0 ? t('hand-in.go-open', { n: things.length }) : t('hand-in.go');

  return (
    <Page
      title={t('hand-in.title')}
      under={job.plan.site}
      backHref={hrefOf({ page: 'job', job: id })}
      head={<Visit job={job} log={log} mount={null} here="hand-in" />}
      dock={
        job.stage === 'signed off' ? undefined : (
          <Button kind={done ? 'plain' : 'first'} wide busy={busy || !verdicts} onPress={() => void handIn()}>
            {label}
          </Button>
        )
      }
    >
      {done && handed && (
        <Message tone="note" live>
          <p>
            <strong>{t('hand-in.done', { when: when(handed.entry.at) })}</strong>
          </p>
          <p>{job.waiting > 0 ? t('hand-in.done-waits', { n: job.waiting }) : t('hand-in.done-safe')}</p>
        </Message>
      )}
      <DeskRemark job={job} />
      {trouble && (
        <Message tone="wrong" live>
          {trouble}
        </Message>
      )}
      <section class="section stack" aria-labelledby="verdicts-title">
        <h2 id="verdicts-title">{t('hand-in.mounts')}</h2>
        <ul class="stack">
          {(verdicts ?? []).map(({ mount, sheet, verdict, why }) => (
            <li class="hand-in-mount" key={mount.id}>
              <p class="card-head">
                <strong>{mount.name}</strong>
                {verdict && verdict.judged !== 'planned' && <WordMark word={verdict.word} />}
              </p>
              {verdict && sheet && verdict.judged !== 'planned' && (
                <p>
                  {t(`phase.${verdict.judged}`)}: {reasonOf(verdict, sheet)}
                </p>
              )}
              {verdict && verdict.judged === 'planned' && <p>{t('hand-in.nothing-read')}</p>}
              {why && <p>{t('strip.cannot', { why })}</p>}
            </li>
          ))}
        </ul>
      </section>
      <section class="section stack" aria-labelledby="open-title">
        <h2 id="open-title">{t('hand-in.open')}</h2>
        {things.length === 0 && <p>{t('hand-in.nothing-open')}</p>}
        <ul class="open-things">
          {things.map((thing) => (
            <li key={thing}>
              <svg width="18" height="18" viewBox="0 0 18 18" aria-hidden="true" focusable="false">
                <rect x="2" y="2" width="14" height="14" fill="none" stroke="currentColor" stroke-width="2.5" />
              </svg>
              <span>{thing}</span>
            </li>
          ))}
        </ul>
        {job.stage !== 'signed off' && <p>{t('hand-in.decide')}</p>}
      </section>
      {job.stage !== 'signed off' && (
        <div class="field">
          <label for="hand-in-remark">{t('hand-in.remark')}</label>
          <textarea id="hand-in-remark" class="text-entry" value={remark} onInput={(event) => type(event.currentTarget.value)} />
        </div>
      )}
    </Page>
  );
}

/** What is open, in sentences: shown here and handed in with the job. A mount where no bolt was turned is complete as found. */
function openThings(job: PhoneJob, log: readonly LoggedEntry[], verdicts: MountVerdict[]): string[] {
  const things: string[] = [];
  for (const mount of job.plan.mounts) {
    const verdict = verdicts.find((v) => v.mount.id === mount.id)?.verdict ?? null;
    if (verdict && verdict.judged !== 'planned' && verdict.word !== 'go') {
      things.push(t('hand-in.open-word', { mount: mount.name, word: t(`said.${verdict.word}`) }));
    }
    const turned = turnedUnread(log, mount);
    const named = (w: { antenna: string; quantity: string }) => `${w.antenna} ${t(`quantity.${w.quantity as 'skew'}`)}`;
    for (const w of turned) things.push(t('hand-in.open-turned', { mount: mount.name, antenna: w.antenna, quantity: t(`quantity.${w.quantity}`) }));
    const wanted = wantedOf(mount.sheet).length;
    const phase = turned.length > 0 || unread(log, mount, 'as_left').length < wanted ? 'as_left' : 'as_found';
    const missing = unread(log, mount, phase).filter((w) => !turned.some((x) => x.antenna === w.antenna && x.quantity === w.quantity));
    if (missing.length === wanted) things.push(t('hand-in.open-unread', { mount: mount.name }));
    else if (missing.length > 0) things.push(t('hand-in.open-readings', { mount: mount.name, phase: t(`phase.${phase}`), what: missing.map(named).join(', ') }));
  }
  for (const caution of unconfirmed(log)) things.push(t('hand-in.open-caution', { caution: t(`caution.${caution}.title`) }));
  return things;
}
