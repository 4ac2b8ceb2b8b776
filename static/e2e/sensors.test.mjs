// Tilt and skew by the phone's sensor: traces of a simulator (calc/peak/gravity_test.go) come as motion events through the
// code that listens to a live sensor; a phone that denies, lacks or silences its sensor says so and typing goes on.
import assert from 'node:assert/strict';
import { readdirSync, readFileSync } from 'node:fs';
import path from 'node:path';
import { test } from 'node:test';
import { fileURLToPath } from 'node:url';
import { complaints, openProfile, PHONE, picture, temporary, until } from './browser.mjs';
import { CLIMBER, Crossplumb } from './crossplumb.mjs';

const traces = path.join(path.dirname(fileURLToPath(import.meta.url)), '..', '..', 'testdata', 'traces');
const trace = (name) => JSON.parse(readFileSync(path.join(traces, `${name}.json`), 'utf8'));

/** Plays rows of (s, x, y, z) as the browser would send them, about fifteen times as fast; their own times stand in them. */
const play = (page, rows, from = 0) =>
  page.evaluate(
    async ([rows, from]) => {
      globalThis.traceClock ??= 1000;
      const start = globalThis.traceClock;
      let sent = 0;
      for (const [t, x, y, z] of rows.filter(([t]) => t >= from)) {
        const event = new DeviceMotionEvent('devicemotion', { accelerationIncludingGravity: { x, y, z }, interval: 50 });
        Object.defineProperty(event, 'timeStamp', { value: (start + t) * 1000 });
        dispatchEvent(event);
        globalThis.traceClock = start + t + 1;
        if (++sent % 20 === 0) await new Promise((resolve) => setTimeout(resolve, 65));
      }
    },
    [rows, from],
  );

const fact = (page, name) => page.locator('.facts > div', { has: page.locator('dt', { hasText: new RegExp(`^${name}$`) }) }).locator('dd');
const numberOf = (text) => Number(/-?\d+(\.\d+)?/.exec(text.replace('\u2212', '-'))[0]);
const press = (page, name) => page.getByRole('button', { name, exact: true }).click();

async function openFaces(page, job, quantity) {
  await page.evaluate((hash) => (location.hash = hash), `#/job/${job}/mount/m1/as-found/reading/A/${quantity}`);
  await page.getByRole('heading', { name: new RegExp(quantity) }).waitFor();
  await page.getByText('By two faces').click();
  await page.getByRole('button', { name: 'Start sensors' }).waitFor();
}

async function bothWidths(page, name) {
  for (const width of [320, 390]) {
    await page.setViewportSize({ ...PHONE, width });
    await new Promise((resolve) => setTimeout(resolve, 120));
    assert.ok((await page.evaluate(() => document.documentElement.scrollWidth - innerWidth)) <= 0, `${name} scrolls sideways at ${width} px`);
    await picture(page, `sensors-${name}-${width}`);
  }
}

const shown = (page, locator) => locator.evaluate((it) => it.scrollIntoView({ block: 'start' }));

test('tilt and skew by the phone, two faces, and phones that have no sensor to give', { timeout: 240_000 }, async (t) => {
  const server = await Crossplumb.open(t, temporary('sensors-data'));
  const { climberLink } = await server.people();
  const job = await server.job('crossed-pair-go.json', 'Vord Hill');
  const phone = await openProfile(t, temporary('sensors-phone'), PHONE);
  const page = phone.pages()[0] ?? (await phone.newPage());
  const errors = complaints(page);
  await page.addInitScript(() => {
    // The browser grants by itself here; what counts is that both are asked once, in the tap.
    globalThis.asked = [];
    const answer = () => sessionStorage.getItem('answer') ?? 'granted';
    for (const name of ['DeviceMotionEvent', 'DeviceOrientationEvent']) {
      if (sessionStorage.getItem('answer') === 'missing') delete globalThis[name];
      else
        globalThis[name].requestPermission = (absolute) => {
          globalThis.asked.push([name, absolute ?? null, navigator.userActivation.isActive]);
          return Promise.resolve(answer());
        };
    }
  });
  await page.goto(climberLink);
  await page.getByLabel('Name').fill(CLIMBER.name);
  await page.getByLabel('Passphrase', { exact: true }).fill(CLIMBER.passphrase);
  await page.getByRole('button', { name: 'Accept the invitation' }).click();
  await page.getByRole('link', { name: /Vord Hill/ }).waitFor();

  // ---- Silent first: Chromium without a sensor sends one event with empty values ----
  await openFaces(page, job, 'tilt');
  await shown(page, page.locator('.more-figures[open]'));
  await bothWidths(page, 'start');
  assert.deepEqual(await page.evaluate(() => globalThis.asked), [], 'nothing is asked before the tap');
  await press(page, 'Start sensors');
  await page.getByText('The sensor is silent').waitFor();
  assert.deepEqual(await page.evaluate(() => globalThis.asked), [['DeviceMotionEvent', null, true], ['DeviceOrientationEvent', true, true]]);
  await page.getByLabel('Reading 1').first().fill('1.5');
  assert.equal(await page.getByLabel('Reading 1').first().inputValue(), '1.5', 'typing is beside it');
  await bothWidths(page, 'silent');

  // ---- The sign once: this trace has it the other way round ----
  const tilt = trace('tilt');
  assert.equal(tilt.up_sign, -1);
  await press(page, 'It lies screen up');
  await play(page, tilt.a.slice(0, 60));
  await page.getByText(/does not lie still on its back/).waitFor();
  assert.equal(await page.getByText('Face A', { exact: true }).count(), 0, 'an upright phone tells no sign');
  await press(page, 'It lies screen up');
  // Three seconds of lying: the first goes to the hand.
  await play(page, [...tilt.face_up, ...tilt.face_up.map(([s, ...a]) => [s + 2.1, ...a])]);
  await page.getByText('Face A', { exact: true }).waitFor();

  // ---- Two faces ----
  const hold = async (rows, face) => {
    await press(page, `Read face ${face}`);
    await play(page, rows.filter(([s]) => s < 6));
    await until('six seconds are shown', () => fact(page, 'Seconds').innerText(), (text) => /^[45] of /.test(text));
    assert.equal(await page.getByRole('button', { name: 'Take this face' }).isDisabled(), true, 'a mast that sways is not enough after six seconds');
    assert.equal(await page.getByText('It sways: hold on').count(), 1);
    if (face === 'A') {
      await shown(page, page.getByText('Face A', { exact: true }));
      await bothWidths(page, 'holding');
    }
    await page.evaluate(() => (globalThis.traceClock -= 6.95));
    await play(page, rows, 6);
    await until('enough', () => page.getByRole('button', { name: 'Take this face' }).isEnabled());
    assert.ok(numberOf(await fact(page, 'Samples rejected').innerText()) > 0, 'knocks are rejected');
    await press(page, 'Take this face');
  };
  await hold(tilt.a, 'A');
  await hold(tilt.b, 'B');
  const said = await until('an answer', () => fact(page, 'Without the phone’s error').innerText());
  const [value, u] = said.split('±').map(numberOf);
  assert.ok(u >= 0.1 && u < 0.3, said);
  assert.ok(Math.abs(value - tilt.tilt_deg) <= 2 * u, `${said}, truth ${tilt.tilt_deg}`);
  await shown(page, page.getByText('Face B', { exact: true }));
  await bothWidths(page, 'answer');
  await press(page, 'Take into the reading');
  assert.ok(await page.getByRole('radio', { name: 'phone' }).isChecked());
  assert.ok(await page.getByRole('radio', { name: 'down' }).isChecked());
  assert.ok(Math.abs(Number(await page.locator('#reading-value').inputValue()) + tilt.tilt_deg) <= 2 * u);
  await page.getByRole('button', { name: /^Keep/ }).click();
  await page.getByText(/A tilt.*kept/i).first().waitFor();

  // ---- A phone that has changed: the same sign is remembered, an error that jumped is flagged ----
  await page.evaluate(
    () =>
      new Promise((resolve, reject) => {
        const opening = indexedDB.open('crossplumb');
        opening.onerror = reject;
        opening.onsuccess = () => {
          const tx = opening.result.transaction('settings', 'readwrite');
          const settings = tx.objectStore('settings');
          settings.get('motion sensor').onsuccess = ({ target }) => {
            const kept = target.result;
            kept.bias.tilt_by_edge.deg += 2;
            settings.put(kept, 'motion sensor');
          };
          tx.oncomplete = () => resolve(opening.result.close());
        };
      }),
  );
  await openFaces(page, job, 'tilt');
  await press(page, 'Start sensors');
  for (const [face, rows] of [['A', tilt.a], ['B', tilt.b]]) {
    await press(page, `Read face ${face}`);
    await play(page, rows);
    await until('enough', () => page.getByRole('button', { name: 'Take this face' }).isEnabled());
    if (face === 'B') await page.evaluate(() => (Date.now = ((now) => () => now() + 121_000)(Date.now)));
    await press(page, 'Take this face');
  }
  await page.getByText('The phone’s error is not what it was last time.').waitFor();
  await page.getByText('More than two minutes lie between the two faces.').waitFor();
  await shown(page, page.getByText('Face B', { exact: true }));
  await bothWidths(page, 'flagged');

  // ---- No ----
  for (const [answer, words] of [['denied', 'does not let the page use its motion sensors'], ['missing', 'has no motion sensor']]) {
    await page.evaluate((a) => sessionStorage.setItem('answer', a), answer);
    await page.reload();
    await openFaces(page, job, 'skew');
    await press(page, 'Start sensors');
    await page.getByText(words).waitFor();
    assert.ok(await page.getByLabel('Reading 1').first().isVisible(), 'typing is beside it');
    await bothWidths(page, answer);
  }
  assert.deepEqual(errors, []);
});

test('skew on the back of the plate, by a phone with the sign of the specification', { timeout: 120_000 }, async (t) => {
  const server = await Crossplumb.open(t, temporary('sensors-skew-data'));
  const { climberLink } = await server.people();
  const job = await server.job('crossed-pair-go.json', 'Vord Hill');
  const page = await (await openProfile(t, temporary('sensors-skew'), PHONE)).newPage();
  await page.goto(climberLink);
  await page.getByLabel('Name').fill(CLIMBER.name);
  await page.getByLabel('Passphrase', { exact: true }).fill(CLIMBER.passphrase);
  await page.getByRole('button', { name: 'Accept the invitation' }).click();
  await page.getByRole('link', { name: /Vord Hill/ }).waitFor();
  const skew = trace('skew');
  await openFaces(page, job, 'skew');
  await press(page, 'Start sensors');
  await press(page, 'It lies screen up');
  await play(page, [...skew.face_up, ...skew.face_up.map(([s, ...a]) => [s + 2.1, ...a])]);
  for (const [face, rows] of [['A', skew.a], ['B', skew.b]]) {
    await press(page, `Read face ${face}`);
    await play(page, rows);
    await until('enough', () => page.getByRole('button', { name: 'Take this face' }).isEnabled());
    await press(page, 'Take this face');
  }
  const [value, u] = (await until('an answer', () => fact(page, 'Without the phone’s error').innerText())).split('±').map(numberOf);
  assert.ok(Math.abs(value - skew.skew_deg) <= 2 * u, `${value} ± ${u}, truth ${skew.skew_deg}`);
  await press(page, 'Take into the reading');
  assert.ok(await page.getByRole('radio', { name: 'clockwise', exact: true }).isChecked());
});

test('only the sensors folder touches the motion interface', () => {
  const source = path.join(traces, '..', '..', 'static', 'src');
  const touching = readdirSync(source, { recursive: true })
    .filter((name) => /\.tsx?$/.test(name) && /devicemotion|deviceorientation|DeviceMotionEvent|DeviceOrientationEvent/.test(readFileSync(path.join(source, name), 'utf8')))
    .map((name) => name.split(path.sep).join('/'));
  assert.deepEqual(touching, ['sensors/motion.ts']);
});
