// Pages of the phone by the part of the address behind "#". Back leads where the phone's own back leads.
import { useEffect, useState } from 'preact/hooks';
import type { Phase, Quantity } from '../types.ts';

/** The steps of the path that a mount is worked through in. Adjusting and as left both take readings as left. */
export type MountStep = 'as-found' | 'adjust' | 'as-left';

export const mountSteps: readonly MountStep[] = ['as-found', 'adjust', 'as-left'];

export function phaseOf(step: MountStep): Phase {
  return step === 'as-found' ? 'as_found' : 'as_left';
}

export type Route =
  | { page: 'jobs' }
  | { page: 'enter'; invitation: string | null }
  | { page: 'apart' }
  | { page: 'job'; job: string }
  | { page: 'before'; job: string }
  | { page: 'hand-in'; job: string }
  | { page: 'mount'; job: string; mount: string; step: MountStep }
  | { page: 'verdict'; job: string; mount: string; step: MountStep }
  | { page: 'reading'; job: string; mount: string; step: MountStep; antenna: string; quantity: Quantity }
  | AimRoute;

/** Aim, what belongs to it, and radio figures: all of one mount. */
export interface AimRoute {
  page: (typeof aimPages)[number];
  job: string;
  mount: string;
}

export const aimPages = ['aim', 'sun', 'landmark', 'compass', 'path', 'ground', 'lean', 'peak', 'figures', 'radio-near', 'radio-far'] as const;

const quantityNames: readonly string[] = ['skew', 'tilt', 'azimuth', 'position'];

export function hrefOf(route: Route): string {
  const path = (...parts: string[]) => `#/${parts.map(encodeURIComponent).join('/')}`;
  switch (route.page) {
    case 'jobs':
      return '#/';
    case 'enter':
      return route.invitation === null ? '#/enter' : `#invitation=${encodeURIComponent(route.invitation)}`;
    case 'apart':
      return '#/apart';
    case 'job':
      return path('job', route.job);
    case 'before':
    case 'hand-in':
      return path('job', route.job, route.page);
    case 'mount':
      return path('job', route.job, 'mount', route.mount, route.step);
    case 'verdict':
      return path('job', route.job, 'mount', route.mount, route.step, 'verdict');
    case 'reading':
      return path('job', route.job, 'mount', route.mount, route.step, 'reading', route.antenna, route.quantity);
    default:
      return path('job', route.job, 'mount', route.mount, route.page);
  }
}

export function routeOf(hash: string): Route {
  const invitation = /^#invitation=(.+)$/.exec(hash);
  if (invitation?.[1]) return { page: 'enter', invitation: decoded(invitation[1]) };
  const [first, job, third, mount, step, sixth, antenna, quantity] = hash.replace(/^#\/?/, '').split('/').map(decoded);
  if (first === 'enter') return { page: 'enter', invitation: null };
  if (first === 'apart') return { page: 'apart' };
  if (first !== 'job' || !job) return { page: 'jobs' };
  if (third === 'before' || third === 'hand-in') return { page: third, job };
  const aim = aimPages.find((page) => page === step);
  if (third === 'mount' && mount && aim) return { page: aim, job, mount };
  const known = mountSteps.find((s) => s === step);
  if (third !== 'mount' || !mount || !known) return { page: 'job', job };
  if (sixth === 'verdict') return { page: 'verdict', job, mount, step: known };
  if (sixth === 'reading' && antenna && quantity && quantityNames.includes(quantity)) {
    return { page: 'reading', job, mount, step: known, antenna, quantity: quantity as Quantity };
  }
  return { page: 'mount', job, mount, step: known };
}

function decoded(part: string): string {
  try {
    return decodeURIComponent(part);
  } catch {
    return part; // an address that somebody cut short
  }
}

export function go(route: Route): void {
  location.hash = hrefOf(route);
}

export function useRoute(): Route {
  const [hash, setHash] = useState(location.hash);
  useEffect(() => {
    const follow = () => setHash(location.hash);
    addEventListener('hashchange', follow);
    return () => removeEventListener('hashchange', follow);
  }, []);
  return routeOf(hash);
}
