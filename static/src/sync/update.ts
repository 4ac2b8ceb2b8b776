// The service worker seen from the page: whether the page is whole without coverage, and whether a newer version waits
// for a person's yes.
import { Observable } from '../store/observable.ts';
import type { Watchable } from '../store/observable.ts';

const waits = new Observable(false);
/** True while a newer version is on the phone and waits to be taken. */
export const newVersionWaits: Watchable<boolean> = waits;

const offline = new Observable(false);
/** True only when every file that the page needs is kept and this page is served from there. */
export const readyOffline: Watchable<boolean> = offline;

const HOUR_MS = 3_600_000;

let registration: ServiceWorkerRegistration | null = null;
let accepted = false;

export function watchForUpdates(): void {
  const workers = navigator.serviceWorker as ServiceWorkerContainer | undefined;
  if (!workers) return; // no secure page, or a browser without: nothing is promised then
  if (new URLSearchParams(location.search).has('no-sw')) {
    void removeWorker(workers);
    return;
  }
  workers.addEventListener('controllerchange', () => {
    // The first worker takes over a page that is already the right one; only a version that was asked for reloads.
    if (accepted) location.reload();
    else void look();
  });
  document.addEventListener('visibilitychange', () => {
    if (document.visibilityState === 'visible') void registration?.update().catch(() => undefined);
  });
  setInterval(() => void registration?.update().catch(() => undefined), HOUR_MS);
  void register(workers);
}

async function register(workers: ServiceWorkerContainer): Promise<void> {
  try {
    // 'none': with the default, a list kept by the HTTP cache would hide every update.
    registration = await workers.register('/sw.js', { updateViaCache: 'none' });
  } catch (error) {
    console.warn('service worker:', error); // no server in reach, or refused: the page works, but is not ready offline
    registration = (await workers.getRegistration()) ?? null;
    if (!registration) return;
  }
  registration.addEventListener('updatefound', () => follow(registration?.installing ?? null));
  follow(registration.installing);
  await look();
}

function follow(worker: ServiceWorker | null): void {
  worker?.addEventListener('statechange', () => void look());
}

async function look(): Promise<void> {
  waits.set(Boolean(registration?.waiting) && Boolean(registration?.active));
  offline.set(Boolean(navigator.serviceWorker.controller) && (await whole()));
}

/** Asks the worker in charge whether every file of its list is really there. */
function whole(): Promise<boolean> {
  const worker = navigator.serviceWorker.controller;
  if (!worker) return Promise.resolve(false);
  return new Promise((resolve) => {
    const { port1, port2 } = new MessageChannel();
    const timer = setTimeout(() => resolve(false), 5_000);
    port1.onmessage = (event: MessageEvent<{ ready: boolean }>) => {
      clearTimeout(timer);
      port1.close();
      resolve(event.data.ready === true);
    };
    worker.postMessage('ready?', [port2]);
  });
}

/**
 * Takes the waiting version and reloads. Only after a person said yes; the view offers it when no reading is open and
 * nothing is being sent.
 */
export function takeNewVersion(): void {
  if (!registration?.waiting) return;
  accepted = true;
  registration.waiting.postMessage('take over');
}

/** `/?no-sw`: the way out when a kept version is broken. Readings are in IndexedDB and stay. */
async function removeWorker(workers: ServiceWorkerContainer): Promise<void> {
  for (const one of await workers.getRegistrations()) await one.unregister();
  for (const name of await caches.keys()) if (name.startsWith('crossplumb ')) await caches.delete(name);
}
