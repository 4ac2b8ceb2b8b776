// The entrance: name and passphrase; or, with a one-time link, a new person choosing both.

import type { ComponentChildren } from 'preact';
import { useEffect, useRef, useState } from 'preact/hooks';
import { Button } from '../parts/Button';
import { Message } from '../parts/Message';
import type { Session } from '../types';
import * as api from './api';
import { t } from './words';

/** Shortest passphrase that the server takes; fifteen is the advice (OWASP ASVS 5.0.0, V6.2.1). */
const shortest = 10;

interface Props {
  invitation?: string;
  /** The name that was signed in here until the session ran out. */
  again?: string;
  onEntered: (session: Session) => void;
}

interface Complaint {
  field: 'name' | 'passphrase' | 'twice' | 'form';
  text: string;
}

export function SignIn({ invitation, again, onEntered }: Props) {
  const [name, setName] = useState(again ?? '');
  const [passphrase, setPassphrase] = useState('');
  const [twice, setTwice] = useState('');
  const [shown, setShown] = useState(false);
  const [busy, setBusy] = useState(false);
  const [complaint, setComplaint] = useState<Complaint | null>(null);
  const fresh = invitation !== undefined;
  // The types of Preact part inputs by their kind; this one changes between two.
  const secret = { type: shown ? 'text' : 'password' } as { type: 'password' };

  const submit = (event: Event) => {
    event.preventDefault();
    const trimmed = name.trim();
    if (trimmed === '') return setComplaint({ field: 'name', text: t('desk.entry.name-missing') });
    if (passphrase === '') return setComplaint({ field: 'passphrase', text: t('desk.entry.passphrase-missing') });
    if (fresh && [...passphrase].length < shortest) {
      return setComplaint({ field: 'passphrase', text: t('desk.entry.too-short', { n: [...passphrase].length }) });
    }
    if (fresh && passphrase !== twice) return setComplaint({ field: 'twice', text: t('desk.entry.differ') });
    setBusy(true);
    setComplaint(null);
    const entering = fresh ? api.acceptInvitation(invitation, trimmed, passphrase) : api.signIn(trimmed, passphrase);
    entering.then(onEntered, (err: unknown) => {
      setBusy(false);
      if (!(err instanceof api.ApiProblem)) return setComplaint({ field: 'form', text: t('desk.unreachable') });
      const field = err.field === 'name' || err.field === 'passphrase' ? err.field : 'form';
      if (err.status === 401 && !fresh) return setComplaint({ field: 'form', text: t('desk.entry.refused') });
      setComplaint({ field, text: err.detail });
    });
  };

  const beside = (field: Complaint['field']) =>
    complaint?.field === field && (
      <Message tone="wrong" beside live id={`entry-${field}`}>
        {complaint.text}
      </Message>
    );
  const describedBy = (field: Complaint['field']) => (complaint?.field === field ? `entry-${field}` : undefined);

  const form = (
    <form class="entrance-form" onSubmit={submit} noValidate>
      <h1>{t(again !== undefined ? 'desk.entry.again' : fresh ? 'desk.entry.invited' : 'desk.brand')}</h1>
      <p>{t(again !== undefined ? 'desk.entry.again-why' : fresh ? 'desk.entry.invited-why' : 'desk.entry.why')}</p>
      <label>
        <span>{t('desk.entry.name')}</span>
        <input
          value={name}
          autocomplete="username"
          autocapitalize="none"
          spellcheck={false}
          aria-invalid={complaint?.field === 'name'}
          aria-describedby={describedBy('name')}
          onInput={(e) => setName(e.currentTarget.value)}
        />
        {beside('name')}
      </label>
      <label>
        <span>{t('desk.entry.passphrase')}</span>
        {fresh && <span class="hint">{t('desk.entry.advice')}</span>}
        <input
          {...secret}
          value={passphrase}
          autocomplete={fresh ? 'new-password' : 'current-password'}
          aria-invalid={complaint?.field === 'passphrase'}
          aria-describedby={describedBy('passphrase')}
          onInput={(e) => setPassphrase(e.currentTarget.value)}
        />
        {beside('passphrase')}
      </label>
      {fresh && (
        <label>
          <span>{t('desk.entry.twice')}</span>
          <input
            {...secret}
            value={twice}
            autocomplete="new-password"
            aria-invalid={complaint?.field === 'twice'}
            aria-describedby={describedBy('twice')}
            onInput={(e) => setTwice(e.currentTarget.value)}
          />
          {beside('twice')}
        </label>
      )}
      <label class="tick">
        <input type="checkbox" checked={shown} onChange={(e) => setShown(e.currentTarget.checked)} />
        {t('desk.entry.show')}
      </label>
      {beside('form')}
      <Button type="submit" kind="first" disabled={busy}>
        {t(busy ? 'desk.entry.busy' : fresh ? 'desk.entry.join' : 'desk.entry.go')}
      </Button>
    </form>
  );
  return again === undefined ? <main class="entrance">{form}</main> : <Over>{form}</Over>;
}

/** Over the page, which keeps what was typed in it; nothing beneath can be reached meanwhile. */
function Over({ children }: { children: ComponentChildren }) {
  const dialog = useRef<HTMLDialogElement>(null);
  useEffect(() => dialog.current?.showModal(), []);
  return (
    <dialog class="entrance over" ref={dialog} aria-label={t('desk.entry.again')} onCancel={(e) => e.preventDefault()}>
      {children}
    </dialog>
  );
}
