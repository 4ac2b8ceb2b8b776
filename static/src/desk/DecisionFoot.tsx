// The decision at the foot: sign off, or send back with what is to be done. It is made on what was on this screen; if
// the log moved on meanwhile the server refuses, and the page says so.

import { useEffect, useRef, useState } from 'preact/hooks';
import { uuidv7 } from 'uuidv7';
import { Button } from '../parts/Button';
import { Message } from '../parts/Message';
import { cautions as usualCautions } from '../words/cautions';
import * as api from './api';
import { deskTime, shortHash } from './format';
import type { Opened } from './JobPageView';
import type { JobRecord } from './record';
import { t } from './words';

interface Props {
  opened: Opened;
  record: JobRecord;
  /** Loads the job again; what was typed stays. */
  onStale: () => Promise<void>;
  onDecided: () => void;
}

type Choice = { decision: 'sign off' | 'send back'; id: string };

export function DecisionFoot({ opened, record, onStale, onDecided }: Props) {
  const { page, log } = opened;
  const [choice, setChoice] = useState<Choice | null>(null);
  // Each decision has a remark of its own: what the crew is to do is not what is signed.
  const [remarks, setRemarks] = useState({ 'sign off': '', 'send back': '' });
  const [complaint, setComplaint] = useState<string | null>(null);
  const [stale, setStale] = useState(false);
  const [busy, setBusy] = useState(false);
  const field = useRef<HTMLTextAreaElement>(null);
  const chosen = choice?.decision ?? null;
  useEffect(() => {
    if (chosen !== null) field.current?.focus();
  }, [chosen]);

  if (page.job.stage !== 'handed in') {
    const by = record.signedOff;
    return (
      <footer class="decision" data-open={false}>
        <p class="decision-facts">
          {page.job.stage === 'signed off' && by !== null
            ? t('desk.signed-by', { name: by.by, when: deskTime(by.at) })
            : t(`desk.nothing-to-decide.${page.job.stage}`)}
          {log !== null && <> · {t('desk.head', { hash: shortHash(log.head.hash) })}</>}
        </p>
        <Button onPress={() => print()}>
          {t('desk.print')}
        </Button>
      </footer>
    );
  }

  const open = (decision: Choice['decision']) => {
    // One id for one decision, also when it has to be sent twice: the server stores it once.
    setChoice({ decision, id: uuidv7() });
    setComplaint(null);
    setStale(false);
  };
  const submit = (event: Event) => {
    event.preventDefault();
    if (choice === null || busy) return;
    const text = remarks[choice.decision].trim();
    if (choice.decision === 'send back' && text === '') {
      setComplaint(t('desk.decision.remark-missing'));
      field.current?.focus();
      return;
    }
    setBusy(true);
    setComplaint(null);
    api
      .decide(page.job.id, {
        id: choice.id,
        decision: choice.decision,
        remark: text === '' ? null : text,
        base_seq: page.job.stage_seq,
      })
      .then(
        () => {
          setChoice(null);
          setRemarks({ 'sign off': '', 'send back': '' });
          onDecided();
        },
        (err: unknown) => {
          if (err instanceof api.ApiProblem && err.status === 409) setStale(true);
          else setComplaint(err instanceof api.ApiProblem ? err.detail : t('desk.decision.unreachable'));
        },
      )
      .finally(() => setBusy(false));
  };

  const confirmed = usualCautions.filter((c) => record.cautions.some((r) => r.body.caution === c)).length;
  const unmet = page.mounts.filter((m) => m.verdict === null || m.verdict.word !== 'go');
  return (
    <footer class="decision" data-open={choice !== null}>
      {choice === null ? (
        <>
          <p class="decision-facts">
            {t('desk.decision.cautions', { n: confirmed, of: usualCautions.length })}
            {page.quarantined > 0 && <> · {t('desk.apart', { n: page.quarantined })}</>}
            {log !== null && <> · {t('desk.head', { hash: shortHash(log.head.hash) })}</>}
          </p>
          <Button onPress={() => print()}>
            {t('desk.print')}
          </Button>
          <Button onPress={() => open('send back')}>
            {t('desk.decision.send-back')}
          </Button>
          <Button kind="first" onPress={() => open('sign off')}>
            {t('desk.decision.sign-off')}
          </Button>
        </>
      ) : (
        <form onSubmit={submit} aria-label={t(`desk.decision.${chosen === 'send back' ? 'send-back' : 'sign-off'}`)}>
          {choice.decision === 'sign off' && (
            <p>
              {unmet.length > 0 && (
                <strong class="decision-warns">
                  {t('desk.decision.not-go', {
                    n: unmet.length,
                    mounts: unmet
                      .map((m) => `${m.name} (${m.verdict === null ? t('desk.no-word') : t(`word.${m.verdict.word}`)})`)
                      .join(', '),
                  })}{' '}
                </strong>
              )}
              {t('desk.decision.means', { n: page.mounts.length })}
            </p>
          )}
          <label>
            <span>
              {t(choice.decision === 'send back' ? 'desk.decision.remark-needed' : 'desk.decision.remark-optional')}
            </span>
            <textarea
              ref={field}
              rows={3}
              value={remarks[choice.decision]}
              aria-invalid={complaint !== null}
              aria-describedby={complaint === null ? undefined : 'decision-complaint'}
              onInput={(e) => setRemarks({ ...remarks, [choice.decision]: e.currentTarget.value })}
            />
          </label>
          {complaint !== null && (
            <Message tone="wrong" beside live id="decision-complaint">
              {complaint}
            </Message>
          )}
          {stale && (
            <div class="notice" role="alert">
              <p>{t('desk.decision.stale')}</p>
              <Button
 onPress={() =>
                  void onStale().then(() => {
                    setChoice(null);
                    setStale(false);
                  })
                }
              >
                {t('desk.decision.read-again')}
              </Button>
            </div>
          )}
          <p class="buttons">
            <Button onPress={() => setChoice(null)}>
              {t('desk.decision.not-yet')}
            </Button>
            <Button type="submit" kind="first" disabled={busy || stale}>
              {t(
                busy
                  ? 'desk.decision.busy'
                  : choice.decision === 'send back'
                    ? 'desk.decision.send-back'
                    : 'desk.decision.sign-off',
              )}
            </Button>
          </p>
        </form>
      )}
    </footer>
  );
}
