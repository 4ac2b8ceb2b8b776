// The service worker in Chromium: the page is whole or is not promised, versions never mix, and a person decides when the
// new one comes.
import assert from 'node:assert/strict';
import { test } from 'node:test';
import { complaints, openProfile, PHONE, temporary, until } from './browser.mjs';
import { precache, Shelf } from './shelf.mjs';

async function phone(t) {
  const shelf = new Shelf();
  const address = await shelf.open();
  t.after(() => shelf.close());
  const context = await openProfile(t, temporary('worker'), PHONE);
  const page = context.pages()[0] ?? (await context.newPage());
  return { shelf, address, context, page };
}

const controlled = (page) => until('the worker is in charge', () => page.evaluate(() => Boolean(navigator.serviceWorker.controller)));

const askReady = (page) =>
  page.evaluate(
    () =>
      new Promise((resolve) => {
        const { port1, port2 } = new MessageChannel();
        port1.onmessage = (event) => resolve(event.data.ready);
        navigator.serviceWorker.controller.postMessage('ready?', [port2]);
      }),
  );

/** As if somebody had signed in on this phone: this shelf has no server behind it. */
const signedIn = (page) =>
  page.evaluate(
    () =>
      new Promise((resolve, reject) => {
        const opening = indexedDB.open('crossplumb');
        opening.onerror = () => reject(opening.error);
        opening.onsuccess = () => {
          const tx = opening.result.transaction('settings', 'readwrite');
          tx.objectStore('settings').put({ user: { id: 'u1', name: 'Una', role: 'climber', crew: 'west' }, until: '2100-01-01T00:00:00Z' }, 'session');
          tx.oncomplete = () => {
            opening.result.close();
            resolve();
          };
        };
      }),
  );

const release = (page) => page.evaluate(() => document.documentElement.dataset.release);

/** Asks calc through the very Worker and wasm that the page would use. */
const reckon = (page, op, input) =>
  page.evaluate(
    ([file, question]) =>
      new Promise((resolve, reject) => {
        const worker = new Worker(file);
        worker.onmessage = (event) => resolve(event.data);
        worker.onerror = (event) => reject(new Error(event.message));
        worker.postMessage(question);
      }),
    [precache().files.find((file) => file.startsWith('/gen/worker-')), { id: 1, op, json: JSON.stringify(input) }],
  );

test('with the server dead the page opens again, whole, and reckons', { timeout: 60_000 }, async (t) => {
  const { shelf, address, page } = await phone(t);
  await page.goto(address);
  await controlled(page);
  assert.equal(await askReady(page), true);
  await shelf.close();
  const errors = complaints(page);
  await page.reload();
  assert.ok(await page.evaluate(() => document.querySelector('#page').childElementCount > 0), 'the page is drawn');
  assert.equal(await page.evaluate(() => document.fonts.ready.then((fonts) => [...fonts].some((font) => font.status === 'loaded'))), true);
  const answer = await reckon(page, 'spacing.wavelengths', {
    frequency_mhz: 5800,
    spacing_mm: { right: 412, up: 0, forward: 0 },
    off_broadside_deg: 0,
  });
  // 299 792 458 m/s / 5.8 GHz = 51.688 mm (SI definition of the metre)
  assert.ok(Math.abs(JSON.parse(answer.answer).wavelength_mm - 299792.458 / 5800) < 1e-6, JSON.stringify(answer));
  await page.goto(`${address}/somewhere`);
  assert.ok(await page.evaluate(() => document.querySelector('#page') !== null), 'an unknown page is the phone page while nobody answers');
  assert.deepEqual(errors.filter((text) => !text.includes('ERR_CONNECTION_REFUSED')), [], 'nothing but the dead server');
});

test('every file of the list is there', { timeout: 60_000 }, async (t) => {
  const shelf = new Shelf();
  const address = await shelf.open();
  t.after(() => shelf.close());
  const { files } = precache();
  assert.ok(files.length >= 8);
  assert.equal(new Set(files).size, files.length);
  for (const file of files) assert.equal((await fetch(address + file)).status, 200, file);
});

test('one missing file: the phone is not ready, and says so', { timeout: 60_000 }, async (t) => {
  const { shelf, address, page } = await phone(t);
  shelf.missing.add(precache().files.find((file) => file.endsWith('.wasm')));
  await page.goto(address);
  await until('the list was asked for', () => shelf.requests.includes('/gen/precache.js'));
  const state = await until(
    'the worker gave up',
    () => page.evaluate(async () => (await navigator.serviceWorker.getRegistration()) === undefined),
    (gone) => gone === true,
  );
  assert.equal(state, true);
  assert.equal(await page.evaluate(() => navigator.serviceWorker.controller), null);
});

test('a file that the browser dropped makes the phone not ready', { timeout: 60_000 }, async (t) => {
  const { address, page } = await phone(t);
  await page.goto(address);
  await controlled(page);
  assert.equal(await askReady(page), true);
  await page.evaluate(async () => {
    const cache = await caches.open((await caches.keys())[0]);
    const [first] = (await cache.keys()).filter((request) => request.url.endsWith('.wasm'));
    await cache.delete(first);
  });
  assert.equal(await askReady(page), false);
});

test('a new version waits, whole, until a person takes it; then all of it is new', { timeout: 60_000 }, async (t) => {
  const { shelf, address, page } = await phone(t);
  await page.goto(address);
  await controlled(page);
  const first = await release(page);
  shelf.version = 'SECONDVERSION';
  await page.reload();
  const waits = () => page.evaluate(async () => Boolean((await navigator.serviceWorker.getRegistration()).waiting));
  await until('the new version waits', waits);
  await page.reload();
  await page.reload();
  assert.equal(await release(page), first, 'reloading does not take it');
  assert.equal(await waits(), true);
  await page.evaluate(async () => {
    const taken = new Promise((resolve) => navigator.serviceWorker.addEventListener('controllerchange', resolve, { once: true }));
    (await navigator.serviceWorker.getRegistration()).waiting.postMessage('take over');
    await taken;
  });
  await page.reload();
  assert.equal(await release(page), 'SECONDVERSION');
  assert.equal(await askReady(page), true);
  const kept = await page.evaluate(() => caches.keys());
  assert.equal(kept.length, 2, `this version and the one before: ${kept}`);
  await shelf.close();
  await page.reload();
  assert.equal(await release(page), 'SECONDVERSION', 'and without a server too');
});

test('the person is offered the new version, takes it, and the page loads again by itself', { timeout: 60_000 }, async (t) => {
  const { shelf, address, page } = await phone(t);
  await page.goto(address);
  await controlled(page);
  await signedIn(page);
  await page.reload();
  await page.getByRole('heading', { name: 'Jobs' }).waitFor();
  await page.getByText('Ready without coverage.').waitFor();
  shelf.version = 'SECONDVERSION';
  await page.evaluate(async () => (await navigator.serviceWorker.getRegistration()).update());
  const offer = page.getByRole('button', { name: 'Take the newer one' });
  await offer.waitFor();
  assert.notEqual(await release(page), 'SECONDVERSION');
  await offer.click();
  await until('the page is the new one', () => release(page), (now) => now === 'SECONDVERSION');
  await page.getByText('Ready without coverage.').waitFor();
  assert.equal(await offer.count(), 0);
});

test('with a hole in what is kept the page does not promise to work without coverage', { timeout: 60_000 }, async (t) => {
  const { shelf, address, page } = await phone(t);
  shelf.missing.add(precache().files.find((file) => file.startsWith('/gen/worker-')));
  await page.goto(address);
  await signedIn(page);
  await page.reload();
  await page.getByText('Not ready without coverage yet.').waitFor();
  await until('the list was asked for', () => shelf.requests.filter((path) => path === '/gen/precache.js').length > 0);
  await page.waitForTimeout(1_000);
  assert.equal(await page.getByText('Ready without coverage.').count(), 0);
});

test('/api is never answered from the phone', { timeout: 60_000 }, async (t) => {
  const { shelf, address, page } = await phone(t);
  await page.goto(address);
  await controlled(page);
  assert.equal(await page.evaluate(() => fetch('/api/state').then((r) => r.status)), 503, 'the server answers');
  await shelf.close();
  assert.equal(await page.evaluate(() => fetch('/api/state').then((r) => r.status, () => 'nobody')), 'nobody');
  const cached = await page.evaluate(async () => {
    const urls = [];
    for (const name of await caches.keys()) for (const request of await (await caches.open(name)).keys()) urls.push(request.url);
    return urls;
  });
  assert.deepEqual(cached.filter((url) => url.includes('/api')), []);
});

test('?no-sw takes the worker and its files away and leaves the log', { timeout: 60_000 }, async (t) => {
  const { address, page } = await phone(t);
  await page.goto(address);
  await controlled(page);
  const databases = () => page.evaluate(async () => (await indexedDB.databases()).map((one) => one.name));
  assert.ok((await databases()).includes('crossplumb'));
  await page.goto(`${address}/?no-sw`);
  await until('the worker is gone', () => page.evaluate(async () => (await navigator.serviceWorker.getRegistrations()).length === 0));
  await until('its files are gone', () => page.evaluate(async () => (await caches.keys()).length === 0));
  assert.ok((await databases()).includes('crossplumb'));
});
