// The frame of the desk: who is signed in, where one is, the list on the left and the page beside it.

import { useCallback, useEffect, useState } from 'preact/hooks';
import { Button } from '../parts/Button';
import type { Session } from '../types';
import * as api from './api';
import { HeadBar } from './HeadBar';
import { JobPageView } from './JobPageView';
import { PeoplePage } from './PeoplePage';
import { PlanPage } from './PlanPage';
import { useQueue } from './queue';
import { QueueList } from './QueueList';
import { forgetInvitation, useRoute } from './route';
import { SignIn } from './SignIn';
import { t } from './words';

type Who = { is: 'asking' } | { is: 'unreachable' } | { is: 'nobody' } | { is: 'someone'; session: Session };

export function Desk() {
  const route = useRoute();
  const [who, setWho] = useState<Who>({ is: 'asking' });
  // The session ran out while something was open: the page stays, with what was typed in it, under the sign-in.
  const [again, setAgain] = useState(false);
  const [search, setSearch] = useState('');

  const ask = useCallback(() => {
    setWho({ is: 'asking' });
    api.session().then(
      (session) => setWho(session === null ? { is: 'nobody' } : { is: 'someone', session }),
      () => setWho({ is: 'unreachable' }),
    );
  }, []);
  useEffect(ask, [ask]);
  useEffect(() => api.onSignedOut(() => setAgain(true)), []);

  const signedIn = who.is === 'someone' && who.session.user.role === 'supervisor';
  const queue = useQueue(signedIn && !again);

  const entered = (session: Session) => {
    setWho({ is: 'someone', session });
    setAgain(false);
    if (route.page === 'invitation') forgetInvitation();
  };
  const leave = () => {
    api.signOut().finally(() => setWho({ is: 'nobody' }));
  };

  if (route.page === 'invitation') return <SignIn invitation={route.token} onEntered={entered} />;
  switch (who.is) {
    case 'asking':
      return (
        <main class="entrance">
          <p role="status">{t('desk.asking')}</p>
        </main>
      );
    case 'unreachable':
      return (
        <main class="entrance">
          <h1>{t('desk.brand')}</h1>
          <p role="alert">{t('desk.unreachable')}</p>
          <Button onPress={ask}>
            {t('desk.try-again')}
          </Button>
        </main>
      );
    case 'nobody':
      return <SignIn onEntered={entered} />;
    case 'someone':
      break;
  }
  const { user } = who.session;
  if (user.role !== 'supervisor') {
    return (
      <main class="entrance">
        <h1>{t('desk.brand')}</h1>
        <p>{t('desk.climber', { name: user.name })}</p>
        <p class="buttons">
          <Button href="/">
            {t('desk.to-phone')}
          </Button>
          <Button onPress={leave}>
            {t('desk.sign-out')}
          </Button>
        </p>
      </main>
    );
  }

  const job = route.page === 'queue' ? route.job : null;
  return (
    <div class="desk" data-page={route.page} data-open={job === null ? 'list' : 'job'}>
      <a class="skip" href="#desk-main" onClick={skipToMain}>
        {t('desk.skip')}
      </a>
      <HeadBar route={route} jobs={queue.jobs} user={user} search={search} onSearch={setSearch} onSignOut={leave} />
      {again && <SignIn again={user.name} onEntered={entered} />}
      <main class="desk-body">
        {route.page === 'queue' && (
          <QueueList queue={queue} tab={route.tab} open={route.job} search={search} onSearch={setSearch} />
        )}
        <div id="desk-main" class="desk-main" tabIndex={-1}>
          {route.page === 'plan' && <PlanPage jobs={queue.jobs} onIssued={queue.refresh} />}
          {route.page === 'people' && <PeoplePage user={user} />}
          {route.page === 'queue' && job === null && (
            <p class="empty">{t(queue.jobs?.length === 0 ? 'desk.no-jobs' : 'desk.pick')}</p>
          )}
          {route.page === 'queue' && job !== null && (
            <JobPageView
              key={job}
              id={job}
              mount={route.mount}
              tab={route.tab}
              newest={queue.jobs?.find((j) => j.id === job) ?? null}
              onDecided={queue.refresh}
            />
          )}
        </div>
      </main>
    </div>
  );
}

/** The address holds the route, so the skip link moves the focus by itself. */
function skipToMain(event: Event) {
  event.preventDefault();
  document.getElementById('desk-main')?.focus();
}
