// The phone page. Views hold no data of their own: store, sync and calc do.
import { render } from 'preact';
import { useEffect, useRef } from 'preact/hooks';
import '../../style/phone.css';
import { AimPages } from './aim/AimPages.tsx';
import { warmUp } from '../calc/client.ts';
import { useWatched } from '../store/index.ts';
import { session, start } from '../sync/index.ts';
import { t } from '../words/words.ts';
import { Apart } from './Apart.tsx';
import { Before } from './Before.tsx';
import { HandIn } from './HandIn.tsx';
import { JobPage } from './JobPage.tsx';
import { Jobs } from './Jobs.tsx';
import { Mount } from './Mount.tsx';
import { ReadingPage } from './ReadingPage.tsx';
import { useRoute } from './route.ts';
import { SignIn } from './SignIn.tsx';
import { applyTheme, currentTheme } from './theme.ts';
import { VerdictPage } from './VerdictPage.tsx';

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
    default:
      return <AimPages key={key} route={route} />;
  }
}

applyTheme(currentTheme());
void start();
warmUp();
const root = document.getElementById('page');
if (root) render(<Phone />, root);
