// The jobs that this phone took along, what waits on it, and how it is prepared for a place without coverage.
import { useState } from 'preact/hooks';
import { Button } from '../parts/Button.tsx';
import { Choice } from '../parts/Choice.tsx';
import { Message } from '../parts/Message.tsx';
import { WordMark } from '../parts/WordMark.tsx';
import { counts, jobs, storageProtection, useStored, useWatched } from '../store/index.ts';
import { EntriesWait, NoAnswer, newVersionWaits, readyOffline, session, signOut, status, syncNow, takeNewVersion } from '../sync/index.ts';
import type { PhoneJob } from '../types.ts';
import { day, today, when } from '../words/when.ts';
import { t } from '../words/words.ts';
import { Page } from './Page.tsx';
import { titleBeside } from './titles.ts';
import { hrefOf } from './route.ts';
import { currentTheme, keepTheme, type Theme, themes } from './theme.ts';

export function Jobs() {
  const list = useStored(jobs, []);
  const tally = useStored(counts, []);
  const who = useWatched(session);
  const { signedIn, state, lastAnswerAt } = useWatched(status);
  const update = useWatched(newVersionWaits);
  const sending = state === 'sending';
  return (
    <Page title={t('jobs.title')} under={who?.user.crew ? t('jobs.crew', { crew: who.user.crew }) : 'Crossplumb'} kind="jobs">
      {update && (
        <Message tone="note">
          <p>{t('update.waits')}</p>
          <Button onPress={takeNewVersion}>{t('update.take')}</Button>
        </Message>
      )}
      {!signedIn && state === 'sign in' && (
        <Message tone="warn">
          <p>{t('enter.again-why')}</p>
          <Button href={hrefOf({ page: 'enter', invitation: null })}>{t('enter.again')}</Button>
        </Message>
      )}

      {list && list.length === 0 && (
        <div class="stack">
          <p>{t('jobs.none')}</p>
          <Button kind="first" wide busy={sending} onPress={() => void syncNow()}>
            {t(sending ? 'jobs.bringing' : 'jobs.bring')}
          </Button>
        </div>
      )}
      <ul class="jobs-list">
        {list && [...list].sort(byWork).map((job) => (
          <li key={job.summary.id}>
            <JobCard job={job} />
          </li>
        ))}
      </ul>

      <section class="section" aria-labelledby="counts-title">
        <h2 id="counts-title">{t('jobs.counts')}</h2>
        <dl class="tally">
          <div>
            <dd class="figure">{tally?.waiting ?? 0}</dd>
            <dt>{t('jobs.waiting')}</dt>
          </div>
          <div>
            <dd class="figure">{tally?.safe ?? 0}</dd>
            <dt>{t('jobs.safe')}</dt>
          </div>
          <div class={tally && tally.needsPerson > 0 ? 'marked' : ''}>
            <dd class="figure">{tally?.needsPerson ?? 0}</dd>
            <dt>{t('jobs.needs', { n: tally?.needsPerson ?? 0 })}</dt>
          </div>
        </dl>
        {tally && tally.needsPerson > 0 && (
          <Button href={hrefOf({ page: 'apart' })} wide>
            {t('apart.title')}
          </Button>
        )}
        <p class="quiet">{lastAnswerAt === null ? t('jobs.no-answer') : t('jobs.last-answer', { when: when(lastAnswerAt) })}</p>
        {list && list.length > 0 && (
          <Button wide busy={sending} onPress={() => void syncNow()}>
            {t(sending ? 'status.sending' : 'jobs.send')}
          </Button>
        )}
      </section>

      <ThisPhone />
    </Page>
  );
}

/** What a crew has to do comes first: sent back, then by day what is open, then what is at the desk, then what is signed. */
function byWork(a: PhoneJob, b: PhoneJob): number {
  const rank = ({ stage }: PhoneJob) => ({ 'sent back': 0, 'under way': 1, issued: 1, drafted: 2, 'handed in': 3, 'signed off': 4 })[stage];
  return rank(a) - rank(b) || (a.summary.visit_on ?? '9999').localeCompare(b.summary.visit_on ?? '9999');
}

function JobCard({ job }: { job: PhoneJob }) {
  const { summary, plan, stage, waiting } = job;
  const date = summary.visit_on;
  const visit = date === null ? t('jobs.no-visit') : date === today() ? t('jobs.visit-today') : t('jobs.visit', { day: day(date) });
  return (
    <a class={`card ${stage === 'sent back' ? 'marked' : ''}`} href={hrefOf({ page: 'job', job: summary.id })}>
      <span class="card-head">
        <strong class="card-title">{summary.site}</strong>
        <span class="stage">{t(`stage.${stage}`)}</span>
      </span>
      <span>{titleBeside(summary)}</span>
      <span class="quiet">{visit}</span>
      <span class="card-mounts">
        {plan.mounts.map((mount) => {
          // The server's word; with entries waiting here it may be an old one, and the job's own page works it out anew.
          const word = waiting > 0 ? undefined : summary.words[mount.id];
          return (
            <span class="card-mount" key={mount.id}>
              <span>{mount.name}</span>
              {word && <WordMark word={word} size={20} />}
            </span>
          );
        })}
      </span>
      {waiting > 0 && <span>{t('jobs.job-waiting', { n: waiting })}</span>}
    </a>
  );
}

function ThisPhone() {
  const ready = useWatched(readyOffline);
  const protection = useWatched(storageProtection);
  const who = useWatched(session);
  const [theme, setTheme] = useState<Theme>(currentTheme());
  const [trouble, setTrouble] = useState<string | null>(null);
  const leave = async () => {
    try {
      await signOut();
    } catch (error) {
      if (error instanceof EntriesWait) setTrouble(t('phone.sign-out-waits', { n: error.waiting }));
      else if (error instanceof NoAnswer) setTrouble(t('phone.sign-out-no-coverage'));
      else setTrouble(t('enter.trouble', { detail: error instanceof Error ? error.message : String(error) }));
    }
  };
  return (
    <section class="section" aria-labelledby="phone-title">
      <h2 id="phone-title">{t('phone.title')}</h2>
      <ul class="checks">
        <Check yes={ready}>{t(ready ? 'phone.ready' : 'phone.not-ready')}</Check>
        <Check yes={protection === 'protected'}>
          {protection === 'protected' ? t('phone.protected') : protection === 'not protected' ? t('phone.not-protected') : t('phone.protection-unknown')}
        </Check>
      </ul>
      <Choice
        legend={t('phone.light')}
        name="theme"
        value={theme}
        options={themes.map((value) => ({ value, label: t(`theme.${value}`) }))}
        onChoose={(value) => {
          keepTheme(value);
          setTheme(value);
        }}
      />
      {who && (
        <>
          <p>{t('phone.signed-in', { name: who.user.name })}</p>
          {trouble && (
            <Message tone="warn" live>
              {trouble}
            </Message>
          )}
          <Button onPress={() => void leave()}>{t('phone.sign-out')}</Button>
        </>
      )}
    </section>
  );
}

/** A line with a filled or an open square before it: form, not colour. */
function Check({ yes, children }: { yes: boolean; children: string }) {
  return (
    <li>
      <svg width="22" height="22" viewBox="0 0 22 22" aria-hidden="true" focusable="false">
        <rect x="3" y="3" width="16" height="16" fill={yes ? 'currentColor' : 'none'} stroke="currentColor" stroke-width="2.5" />
      </svg>
      <span>{children}</span>
    </li>
  );
}
