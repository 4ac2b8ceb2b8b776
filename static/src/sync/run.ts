// When to send and to bring: at start, when coverage seems back, when the page is looked at again, after each entry, by
// a timer, and by a button. One window at a time.
import { counts } from '../store/entries.ts';
import { onChange } from '../store/database.ts';
import { mendOutbox, outgoing } from '../store/outbox.ts';
import { askForProtection } from '../store/protection.ts';
import { localTime } from '../store/time.ts';
import { waitAfter } from './backoff.ts';
import { pull } from './pull.ts';
import { push } from './push.ts';
import { NoAnswer, ServerProblem } from './server.ts';
import { readSession, session } from './session.ts';
import { note, noteState, status } from './status.ts';
import { watchForUpdates } from './update.ts';

/** While all goes well the desk's decisions are looked for this often, as long as the page is looked at. */
const LOOK_MS = 30_000;
/** Entries of one touch of the screen come close together: they go up in one request. */
const GATHER_MS = 300;
/** Another window is at it: this one asks again soon, to know for itself how things stand. */
const BESIDE_MS = 1_000;

let timer: ReturnType<typeof setTimeout> | undefined;
let due = Infinity;
let failures = 0;
let running: Promise<void> | null = null;
let again = false;

/** Starts everything that the phone page does by itself. Once, from main. */
export async function start(): Promise<void> {
  watchForUpdates();
  void askForProtection();
  onChange(() => void countWaiting().then((more) => more && soon(GATHER_MS)));
  addEventListener('online', () => now());
  addEventListener('focus', () => now());
  document.addEventListener('visibilitychange', () => {
    if (document.visibilityState === 'visible') now();
  });
  session.watch(() => now());
  try {
    await readSession();
    const mended = await mendOutbox();
    if (mended > 0) console.warn(`${mended} waiting entries were not in the outbox`);
  } catch (error) {
    console.error('store:', error); // the page shows storeHealth; a later try may find the store again
  }
  await countWaiting();
  now();
}

/** The button: tries at once, whatever the back-off says. Resolves when the try is over; status says how it went. */
export function syncNow(): Promise<void> {
  clearTimeout(timer);
  due = Infinity;
  if (running) {
    again = true; // what was added meanwhile may have been too late for this round
    return running;
  }
  running = oneWindow().finally(() => {
    running = null;
    if (again) {
      again = false;
      now();
    } else {
      void countWaiting().then((more) => more && soon(GATHER_MS)); // made in the moment of ending
    }
  });
  return running;
}

function now(): void {
  void syncNow();
}

function soon(ms: number): void {
  if (running) return; // its end looks again
  if (status.value.state === 'sign in') return; // only a person can change that
  const at = Date.now() + ms;
  if (at >= due) return; // an earlier try is set already
  // A phone without coverage does not get it by one more entry: the back-off stands.
  if (failures > 0 && due !== Infinity) return;
  clearTimeout(timer);
  due = at;
  timer = setTimeout(now, ms);
}

function later(ms: number): void {
  clearTimeout(timer);
  due = Date.now() + ms;
  timer = setTimeout(now, ms);
}

/** Of several windows one sends; the others learn from the store what became of it. */
async function oneWindow(): Promise<void> {
  const locks = navigator.locks as LockManager | undefined;
  if (!locks) return round();
  await locks.request('crossplumb sync', { ifAvailable: true }, async (lock) => {
    if (lock) await round();
    else later(BESIDE_MS);
  });
}

async function round(): Promise<void> {
  if (!session.value) {
    note({ state: session.value === null ? 'sign in' : 'starting', signedIn: false });
    return;
  }
  // A look for news while all is well is not worth a word.
  if (status.value.state !== 'up to date' || status.value.waiting > 0) noteState('sending');
  try {
    await push();
    await pull();
    failures = 0;
    // An entry may have been made after the last batch went up, while the jobs were brought.
    const more = await countWaiting();
    note({ state: more ? 'sending' : 'up to date', signedIn: true, lastAnswerAt: localTime(new Date()) });
    later(more ? GATHER_MS : LOOK_MS);
  } catch (error) {
    await countWaiting();
    if (error instanceof ServerProblem && error.status === 401) {
      // The queue stays. Nothing goes up until somebody signs in, and asking more often would not help.
      note({ state: 'sign in', signedIn: false, lastAnswerAt: localTime(new Date()) });
      later(waitAfter(8, null, Math.random()));
      return;
    }
    if (!(error instanceof NoAnswer) && !(error instanceof ServerProblem)) console.error('sync:', error);
    noteState('no coverage');
    const retryAfter = error instanceof ServerProblem ? error.retryAfter : null;
    later(waitAfter(failures, retryAfter, Math.random()));
    failures++;
  }
}

/** Tells how many wait; true: a request could take some now. A store that fails is told of by storeHealth. */
async function countWaiting(): Promise<boolean> {
  try {
    const { waiting } = await counts();
    // "up to date" with something waiting would be untrue, also for the moment before it goes up.
    note(waiting > 0 && status.value.state === 'up to date' ? { waiting, state: 'sending' } : { waiting });
    return (await outgoing()) > 0;
  } catch (error) {
    console.error('store:', error);
    return false;
  }
}
