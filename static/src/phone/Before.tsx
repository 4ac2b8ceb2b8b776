// The usual cautions before the climb. A confirmation is logged with name, time and the version of the text; nothing on
// the following pages waits for it.
import { useState } from 'preact/hooks';
import { Button } from '../parts/Button.tsx';
import { Message } from '../parts/Message.tsx';
import { addEntry, useWatched } from '../store/index.ts';
import { session } from '../sync/index.ts';
import { type Caution, cautions, cautionVersion } from '../words/cautions.ts';
import { when } from '../words/when.ts';
import { t } from '../words/words.ts';
import { DeskRemark } from './DeskRemark.tsx';
import { Gone } from './Gone.tsx';
import { saidOf } from './log.ts';
import { Page } from './Page.tsx';
import { stepsOf } from './steps.ts';
import { useJob } from './useJob.ts';
import { Visit } from './Visit.tsx';
import { hrefOf } from './route.ts';

export function Before({ id }: { id: string }) {
  const open = useJob(id);
  const who = useWatched(session);
  const [name, setName] = useState<string | null>(null);
  const [wrong, setWrong] = useState<{ caution: Caution; text: string } | null>(null);
  const [busy, setBusy] = useState<Caution | null>(null);
  if (!open) return <Gone looking={open === undefined} />;
  const { job, log } = open;
  const asName = name ?? who?.user.name ?? '';
  const confirmed = saidOf(log, 'caution.confirmed');

  const confirm = async (caution: Caution) => {
    if (asName.trim() === '') return setWrong({ caution, text: t('before.name-missing') });
    setBusy(caution);
    try {
      await addEntry('caution.confirmed', id, null, { caution, version: cautionVersion[caution], name: asName.trim() });
      setWrong(null);
    } catch (error) {
      setWrong({ caution, text: t('failed.write', { why: String(error) }) });
    }
    setBusy(null);
  };
  const next = stepsOf(job, log, null).find((step) => step.key === 'as-found');

  return (
    <Page
      title={t('before.title')}
      under={job.plan.site}
      backHref={hrefOf({ page: 'job', job: id })}
      head={<Visit job={job} log={log} mount={null} here="before" />}
      dock={
        next && (
          <Button kind="first" wide href={next.href}>
            {t('before.go-on')}
          </Button>
        )
      }
    >
      <DeskRemark job={job} />
      <p>{t('before.intro')}</p>
      <p>
        <strong>{t('before.hands')}</strong>
      </p>
      <div class="field">
        <label for="confirms">{t('before.name')}</label>
        <input
          id="confirms"
          class="text-entry"
          type="text"
          autoComplete="name"
          value={asName}
          onInput={(event) => setName(event.currentTarget.value)}
        />
      </div>
      <ul class="cautions">
        {cautions.map((caution) => {
          const last = confirmed.filter(({ entry }) => entry.body.caution === caution).pop();
          const title = t(`caution.${caution}.title`);
          return (
            <li class="section stack" key={caution}>
              <h2>{title}</h2>
              <p>{t(`caution.${caution}.text`)}</p>
              {last && (
                <p class="confirmed" role="status">
                  <Tick />
                  {t('before.confirmed', { name: last.entry.body.name, when: when(last.entry.at) })}
                </p>
              )}
              {wrong?.caution === caution && (
                <Message tone="wrong" beside live>
                  {wrong.text}
                </Message>
              )}
              <Button wide busy={busy === caution} onPress={() => void confirm(caution)}>
                {t(last ? 'before.again' : 'before.confirm', { caution: title })}
              </Button>
            </li>
          );
        })}
      </ul>
    </Page>
  );
}

function Tick() {
  return (
    <svg width="22" height="22" viewBox="0 0 22 22" aria-hidden="true" focusable="false">
      <rect x="2" y="2" width="18" height="18" fill="currentColor" />
    </svg>
  );
}
