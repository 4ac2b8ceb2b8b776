// Where the desk is, kept in the address after the #: a page can be kept, sent on, and reached by the back button.

import { useEffect, useState } from 'preact/hooks';
import type { Stage } from '../types';

export type Tab = 'handed-in' | 'under-way' | 'issued' | 'signed-off';

export const tabs: readonly Tab[] = ['handed-in', 'under-way', 'issued', 'signed-off'];

export type Route =
  | { page: 'queue'; tab: Tab; job: string | null; mount: string | null }
  | { page: 'plan' }
  | { page: 'people' }
  | { page: 'invitation'; token: string };

/** A job that was sent back is with the crew again, so it stands with those under way. */
export function tabOf(stage: Stage): Tab {
  switch (stage) {
    case 'handed in':
      return 'handed-in';
    case 'under way':
    case 'sent back':
      return 'under-way';
    case 'drafted':
    case 'issued':
      return 'issued';
    case 'signed off':
      return 'signed-off';
  }
}

export function parseRoute(hash: string): Route {
  const text = hash.replace(/^#/, '');
  const token = /^invitation=(.+)$/.exec(text);
  if (token) return { page: 'invitation', token: decodeURIComponent(token[1] ?? '') };
  const parts = text.split('/').filter((p) => p !== '').map(decodeURIComponent);
  if (parts[0] === 'plan') return { page: 'plan' };
  if (parts[0] === 'people') return { page: 'people' };
  const tab = tabs.find((t) => t === parts[0]) ?? 'handed-in';
  return { page: 'queue', tab, job: parts[1] ?? null, mount: parts[2] ?? null };
}

export function hrefOf(route: Exclude<Route, { page: 'invitation' }>): string {
  if (route.page !== 'queue') return `#/${route.page}`;
  const parts: string[] = [route.tab];
  if (route.job !== null) parts.push(route.job);
  if (route.job !== null && route.mount !== null) parts.push(route.mount);
  return `#/${parts.map(encodeURIComponent).join('/')}`;
}

export function go(route: Exclude<Route, { page: 'invitation' }>): void {
  location.hash = hrefOf(route);
}

/** The one-time token leaves the address as soon as it was used: it is not to stay in the history. */
export function forgetInvitation(): void {
  history.replaceState(null, '', '#/handed-in');
  dispatchEvent(new HashChangeEvent('hashchange'));
}

export function useRoute(): Route {
  const [hash, setHash] = useState(location.hash);
  useEffect(() => {
    const follow = () => setHash(location.hash);
    addEventListener('hashchange', follow);
    return () => removeEventListener('hashchange', follow);
  }, []);
  return parseRoute(hash);
}
