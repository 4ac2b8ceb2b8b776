// Who may sign in, and a one-time link for somebody new.

import { useEffect, useState } from 'preact/hooks';
import { Button } from '../parts/Button';
import { Message } from '../parts/Message';
import type { Person, Role, User } from '../types';
import * as api from './api';
import { deskTime } from './format';
import { crewAsKnown, crewName } from './names';
import { t } from './words';

export function PeoplePage({ user }: { user: User }) {
  const [people, setPeople] = useState<Person[] | null>(null);
  const [trouble, setTrouble] = useState<string | null>(null);
  const load = () => {
    api.people().then(
      (list) => {
        setPeople(list);
        setTrouble(null);
      },
      (err: unknown) => setTrouble(err instanceof api.ApiProblem ? err.detail : t('desk.unreachable')),
    );
  };
  useEffect(load, []);
  const crews = [...new Set((people ?? []).map((p) => p.crew).filter((c): c is string => !!c))].sort();
  return (
    <div class="page people">
      <h1>{t('desk.tab.people')}</h1>
      {trouble !== null && (
        <div class="notice" role="alert">
          <p>{trouble}</p>
          <Button onPress={load}>
            {t('desk.try-again')}
          </Button>
        </div>
      )}
      {people !== null && (
        <table>
          <thead>
            <tr>
              <th scope="col">{t('desk.people.name')}</th>
              <th scope="col">{t('desk.people.role')}</th>
              <th scope="col">{t('desk.people.crew')}</th>
            </tr>
          </thead>
          <tbody>
            {people.map((p) => (
              <tr key={p.id}>
                <th scope="row">
                  {p.name} {p.id === user.id && <span class="hint">{t('desk.people.you')}</span>}
                </th>
                <td>{t(`desk.role.${p.role}`)}</td>
                <td>{p.crew ?? t('desk.people.no-crew')}</td>
              </tr>
            ))}
          </tbody>
        </table>
      )}
      <InviteForm crews={crews} />
    </div>
  );
}

function InviteForm({ crews }: { crews: string[] }) {
  const [role, setRole] = useState<Role>('climber');
  const [crew, setCrew] = useState('');
  const [invitation, setInvitation] = useState<(api.Invitation & { role: Role; crew: string }) | null>(null);
  const [complaint, setComplaint] = useState<string | null>(null);
  const [copied, setCopied] = useState(false);
  const [busy, setBusy] = useState(false);

  const submit = (event: Event) => {
    event.preventDefault();
    const name = crewAsKnown(crew, crews);
    if (role === 'climber' && name === '') return setComplaint(t('desk.invite.crew-missing'));
    setBusy(true);
    setComplaint(null);
    setCopied(false);
    api
      .invite(role, role === 'climber' ? name : null)
      .then(
        (made) => setInvitation({ ...made, role, crew: name }),
        (err: unknown) => setComplaint(err instanceof api.ApiProblem ? err.detail : t('desk.unreachable')),
      )
      .finally(() => setBusy(false));
  };
  // The server may say the link without its own name in front: this page knows under which name it was reached.
  const link = invitation === null ? '' : new URL(invitation.link, location.href).href;
  const copy = () => {
    navigator.clipboard.writeText(link).then(
      () => setCopied(true),
      () => setCopied(false),
    );
  };

  return (
    <section class="invite">
      <h2>{t('desk.invite')}</h2>
      <form class="sheet-form" onSubmit={submit} noValidate>
        <fieldset class="choices">
          <legend>{t('desk.invite.role')}</legend>
          {(['climber', 'supervisor'] as const).map((each) => (
            <label key={each}>
              <input type="radio" name="role" checked={role === each} onChange={() => setRole(each)} />
              <span>
                {t(`desk.role.${each}`)} <span class="hint">{t(`desk.invite.${each}`)}</span>
              </span>
            </label>
          ))}
        </fieldset>
        {role === 'climber' && (
          <label class="item">
            <span>{t('desk.invite.crew')}</span>
            <input
              value={crew}
              list="crews"
              aria-invalid={complaint !== null}
              aria-describedby={complaint === null ? undefined : 'invite-complaint'}
              onInput={(e) => setCrew(e.currentTarget.value)}
            />
            <datalist id="crews">
              {crews.map((c) => (
                <option key={c} value={c} />
              ))}
            </datalist>
          </label>
        )}
        {complaint !== null && (
          <Message tone="wrong" beside live id="invite-complaint">
            {complaint}
          </Message>
        )}
        <p class="buttons">
          <Button type="submit" kind="first" disabled={busy}>
            {t('desk.invite.make')}
          </Button>
        </p>
      </form>
      {invitation !== null && (
        <div class="invitation" role="status">
          <p>
            <strong>
              {t('desk.invite.made', {
                role: t(`desk.role.${invitation.role}`),
                crew: invitation.role === 'climber' ? `, ${crewName(invitation.crew)}` : '',
              })}
            </strong>{' '}
            {t('desk.invite.hand-over')}
            {invitation.until && <> {t('desk.invite.until', { when: deskTime(invitation.until) })}</>}
          </p>
          <p class="buttons">
            <input readOnly value={link} aria-label={t('desk.invite.link')} onFocus={(e) => e.currentTarget.select()} />
            <Button onPress={copy}>
              {t(copied ? 'desk.invite.copied' : 'desk.invite.copy')}
            </Button>
          </p>
        </div>
      )}
    </section>
  );
}
