// Signing in, once, in coverage; or taking up an invitation.
import { useState } from 'preact/hooks';
import { Button } from '../parts/Button.tsx';
import { Message } from '../parts/Message.tsx';
import { acceptInvitation, NoAnswer, ServerProblem, session, signIn } from '../sync/index.ts';
import { useWatched } from '../store/index.ts';
import { t } from '../words/words.ts';
import { Page } from './Page.tsx';
import { go } from './route.ts';

/** Shortest passphrase that the server takes. */
const shortestPassphrase = 10;

type Where = 'name' | 'passphrase' | 'form';

export function SignIn({ invitation }: { invitation: string | null }) {
  const known = useWatched(session);
  const [name, setName] = useState(known?.user.name ?? '');
  const [passphrase, setPassphrase] = useState('');
  const [shown, setShown] = useState(false);
  const [busy, setBusy] = useState(false);
  const [wrong, setWrong] = useState<{ where: Where; text: string } | null>(null);
  const fresh = invitation !== null;
  const again = !fresh && known !== null && known !== undefined;

  const enter = async (event: Event) => {
    event.preventDefault();
    const asName = name.trim();
    if (asName === '') return setWrong({ where: 'name', text: t('enter.name-missing') });
    if (passphrase === '') return setWrong({ where: 'passphrase', text: t('enter.passphrase-missing') });
    if (fresh && [...passphrase].length < shortestPassphrase) return setWrong({ where: 'passphrase', text: t('enter.too-short') });
    setBusy(true);
    setWrong(null);
    try {
      await (invitation === null ? signIn(asName, passphrase) : acceptInvitation(invitation, asName, passphrase));
      go({ page: 'jobs' });
    } catch (error) {
      setWrong(troubleOf(error, fresh));
      setBusy(false);
    }
  };

  const message = (where: Where) =>
    wrong?.where === where && (
      <Message tone="wrong" beside live id={`enter-${where}`}>
        {wrong.text}
      </Message>
    );
  const described = (where: Where) => (wrong?.where === where ? `enter-${where}` : undefined);
  // The types of Preact part inputs by their kind; this one changes between two.
  const secret = { type: shown ? 'text' : 'password' } as { type: 'password' };

  return (
    <Page title="Crossplumb" under={t(fresh ? 'enter.invited' : again ? 'enter.again' : 'enter.title')} statusless kind="enter">
      <form class="stack" onSubmit={enter} noValidate>
        <p>{t(fresh ? 'enter.invited-why' : again ? 'enter.again-why' : 'enter.why')}</p>
        <div class="field">
          <label for="enter-as">{t('enter.name')}</label>
          <input
            id="enter-as"
            class="text-entry"
            type="text"
            autoComplete="username"
            autoCapitalize="none"
            spellcheck={false}
            value={name}
            aria-invalid={wrong?.where === 'name' ? 'true' : undefined}
            aria-describedby={described('name')}
            onInput={(event) => setName(event.currentTarget.value)}
          />
          {message('name')}
        </div>
        <div class="field">
          <label for="enter-with">{t('enter.passphrase')}</label>
          {fresh && (
            <span class="quiet" id="enter-advice">
              {t('enter.advice')}
            </span>
          )}
          <input
            id="enter-with"
            class="text-entry"
            {...secret}
            autoComplete={fresh ? 'new-password' : 'current-password'}
            autoCapitalize="none"
            spellcheck={false}
            value={passphrase}
            aria-invalid={wrong?.where === 'passphrase' ? 'true' : undefined}
            aria-describedby={[fresh ? 'enter-advice' : undefined, described('passphrase')].filter(Boolean).join(' ') || undefined}
            onInput={(event) => setPassphrase(event.currentTarget.value)}
          />
          {message('passphrase')}
        </div>
        <Button onPress={() => setShown(!shown)}>{t(shown ? 'enter.hide' : 'enter.show')}</Button>
        {message('form')}
        <Button kind="first" type="submit" wide busy={busy}>
          {t(fresh ? 'enter.accept' : 'enter.go')}
        </Button>
        {again && (
          <Button href="#/" wide>
            {t('enter.later')}
          </Button>
        )}
      </form>
    </Page>
  );
}

function troubleOf(error: unknown, fresh: boolean): { where: Where; text: string } {
  if (error instanceof NoAnswer) return { where: 'form', text: t('enter.no-coverage') };
  if (error instanceof ServerProblem) {
    if (error.status === 401 && !fresh) return { where: 'form', text: t('enter.refused') };
    const where: Where = error.field === 'name' || error.field === 'passphrase' ? error.field : 'form';
    return { where, text: t('enter.trouble', { detail: error.message }) };
  }
  return { where: 'form', text: t('failed.write', { why: String(error) }) };
}
