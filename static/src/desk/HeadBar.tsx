// The bar on top: the four lists with their counts, plan, people, the search box, and who is signed in.

import { useEffect, useRef, useState } from 'preact/hooks';
import { Button } from '../parts/Button';
import type { JobSummary, User } from '../types';
import { inTab } from './queue';
import { hrefOf, tabs, type Route } from './route';
import { applyTheme, keepTheme, keptTheme, themes, type Theme } from './theme';
import { t } from './words';

interface Props {
  route: Route;
  jobs: JobSummary[] | null;
  user: User;
  search: string;
  onSearch: (text: string) => void;
  onSignOut: () => void;
}

export function HeadBar({ route, jobs, user, search, onSearch, onSignOut }: Props) {
  const current = (is: boolean) => (is ? ('page' as const) : undefined);
  return (
    <header class="head-bar">
      <span class="brand">{t('desk.brand')}</span>
      <nav aria-label={t('desk.nav')}>
        {tabs.map((tab) => (
          <a
            key={tab}
            href={hrefOf({ page: 'queue', tab, job: null, mount: null })}
            aria-current={current(route.page === 'queue' && route.tab === tab)}
          >
            {t(`desk.tab.${tab}`)} <span class="count">{jobs === null ? '' : inTab(jobs, tab).length}</span>
          </a>
        ))}
        <a href={hrefOf({ page: 'plan' })} aria-current={current(route.page === 'plan')}>
          {t('desk.tab.plan')}
        </a>
        <a href={hrefOf({ page: 'people' })} aria-current={current(route.page === 'people')}>
          {t('desk.tab.people')}
        </a>
      </nav>
      {route.page === 'queue' && (
        <input
          class="search"
          type="search"
          value={search}
          aria-label={t('desk.search')}
          placeholder={t('desk.search')}
          onInput={(e) => onSearch(e.currentTarget.value)}
        />
      )}
      <Account user={user} onSignOut={onSignOut} />
    </header>
  );
}

function Account({ user, onSignOut }: { user: User; onSignOut: () => void }) {
  const [theme, setTheme] = useState<Theme | null>(keptTheme());
  const choose = (next: Theme) => {
    keepTheme(next);
    applyTheme(next);
    setTheme(next);
  };
  // A press elsewhere or another page closes the sheet.
  const sheet = useRef<HTMLDetailsElement>(null);
  useEffect(() => {
    const close = (event: Event) => {
      const details = sheet.current;
      if (details && !(event.type === 'pointerdown' && details.contains(event.target as Node))) details.open = false;
    };
    addEventListener('pointerdown', close);
    addEventListener('hashchange', close);
    return () => {
      removeEventListener('pointerdown', close);
      removeEventListener('hashchange', close);
    };
  }, []);
  return (
    <details class="account" ref={sheet}>
      <summary>{user.name}</summary>
      <div class="account-sheet">
        <fieldset>
          <legend>{t('desk.theme')}</legend>
          {themes.map((each) => (
            <label key={each}>
              <input type="radio" name="theme" checked={theme === each} onChange={() => choose(each)} />
              {t(`desk.theme.${each}`)}
            </label>
          ))}
        </fieldset>
        <Button onPress={onSignOut}>
          {t('desk.sign-out')}
        </Button>
      </div>
    </details>
  );
}
