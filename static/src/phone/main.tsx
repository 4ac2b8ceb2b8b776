// The phone page. Views hold no data of their own: store, sync and calc do.
import { render } from 'preact';
import { useEffect, useRef } from 'preact/hooks';
import '../../style/phone.css';
import { warmUp } from '../calc/client';
import { useWatched } from '../store';
import { session, start } from '../sync';
import { t } from '../words/words';
import { Apart } from './Apart';
import { Before } from './Before';
import { HandIn } from './HandIn';
import { JobPage } from './JobPage';
import { Jobs } from './Jobs';
import { Mount } from './Mount';
import { ReadingPage } from './ReadingPage';
import { useRoute } from './route';
import { SignIn } from './SignIn';
import { applyTheme, currentTheme } from './theme';
import { VerdictPage } from './VerdictPage';

function Phone() {
  const who = useWatched(session);
  const route = useRoute();
  const key = JSON.stringify(route);
  const first = useRef(true);
  useEffect(() => {
    if (first.current) {
      first.current = false; // the browser puts the focus where it belongs at the first page
      return;
    }
    scrollTo(0, 0);
    // A page with a field puts the focus there by itself.
    if (route.page !== 'reading') document.querySelector<HTMLElement>('h1')?.focus();
  }, [key]);

  if (who === undefined) return <p class="opening">{t('loading')}</p>;
  if (route.page === 'enter') return <SignIn key={key} invitation={route.invitation} />;
  if (who === null) return <SignIn invitation={null} />;
  switch (route.page) {
    case 'jobs':
      return <Jobs />;
    case 'apart':
      return <Apart />;
    case 'job':
      return <JobPage key={key} id={route.job} />;
    case 'before':
      return <Before key={key} id={route.job} />;
    case 'hand-in':
      return <HandIn key={key} id={route.job} />;
    case 'mount':
      return <Mount key={key} {...route} />;
    case 'verdict':
      return <VerdictPage key={key} {...route} />;
    case 'reading':
      return <ReadingPage key={key} {...route} />;
  }
}

applyTheme(currentTheme());
void start();
warmUp();
const root = document.getElementById('page');
if (root) render(<Phone />, root);
