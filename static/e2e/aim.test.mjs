// Aim, sights, path, lean, peak search and radio figures by a person at 390 px, with the server stopped in between: what
// the pictures say in words, what is said beside a wrong entry, what the log holds afterwards, and what the desk shows.
import assert from 'node:assert/strict';
import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import path from 'node:path';
import { test } from 'node:test';
import { fileURLToPath } from 'node:url';
import { uuidv7 } from 'uuidv7';
import { complaints, DESK, openProfile, PHONE, picture, temporary, until } from './browser.mjs';
import { CLIMBER, CREW, Crossplumb, SUPERVISOR } from './crossplumb.mjs';

const root = path.join(path.dirname(fileURLToPath(import.meta.url)), '..', '..');
const axeSource = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');

async function barriers(page) {
  await page.evaluate(axeSource);
  return page.evaluate(async () => {
    const found = await axe.run(document, { rules: { 'color-contrast-enhanced': { enabled: true }, 'target-size': { enabled: true } } });
    return found.violations.map((v) => `${v.id}: ${v.nodes.map((n) => n.target.join(' ')).join(', ')}`);
  });
}

/** Buttons, links and fields lower than 56 px, which a glove misses. */
const small = (page) =>
  page.evaluate(() =>
    [...document.querySelectorAll('button, a[href], input:not([type=radio]), textarea, summary')]
      .filter((it) => it.checkVisibility({ visibilityProperty: true, opacityProperty: true }))
      // A number's field is the ruled box with its unit: the input inside is smaller by the rules alone.
      .map((it) => [it, (it.closest('.entry') ?? it).getBoundingClientRect()])
      .filter(([, box]) => box.width > 1 && box.height < 55.5)
      .map(([it, box]) => `${it.tagName.toLowerCase()} "${(it.getAttribute('aria-label') ?? it.innerText ?? '').trim()}" ${Math.round(box.width)}x${Math.round(box.height)}`),
  );

/** Letters smaller than 18 px that somebody is meant to read. */
const tiny = (page) =>
  page.evaluate(() =>
    [...document.querySelectorAll('main *, footer *')]
      .filter((it) => [...it.childNodes].some((n) => n.nodeType === 3 && n.textContent.trim() !== '') && it.checkVisibility({ visibilityProperty: true }))
      .filter((it) => parseFloat(getComputedStyle(it).fontSize) < 17.9)
      .map((it) => `${it.tagName} ${getComputedStyle(it).fontSize}: ${it.textContent.trim().slice(0, 40)}`),
  );

const sideways = (page) => page.evaluate(() => document.documentElement.scrollWidth - innerWidth);

/** Inline styles in the page's own HTML; what a script sets on an element is not one. */
const inlined = (html) => html.match(/\sstyle="/g) ?? [];

async function lookAt(page, name) {
  for (const theme of ['day', 'dark', 'night']) {
    await page.evaluate((t) => (document.documentElement.dataset.theme = t), theme);
    assert.deepEqual(await barriers(page), [], `${name}, ${theme}`);
  }
  await page.evaluate(() => (document.documentElement.dataset.theme = 'day'));
  assert.deepEqual(await small(page), [], name);
  assert.deepEqual(await tiny(page), [], name);
  await page.setViewportSize({ width: 320, height: 700 });
  await new Promise((resolve) => setTimeout(resolve, 120));
  assert.ok((await sideways(page)) <= 0, `${name} scrolls sideways at 320 px`);
  await picture(page, `aim-${name}-320`);
  await page.setViewportSize(PHONE);
  await picture(page, `aim-${name}`);
}

/** A link whose both ends are surveyed. Bearing and distance of the sheet are those of the coordinates, rounded. */
async function surveyedJob(server, change = () => undefined) {
  const sheet = JSON.parse(readFileSync(path.join(root, 'testdata', 'jobs', 'crossed-pair-go.json'), 'utf8'));
  for (const antenna of sheet.near.antennas) {
    for (const states of [antenna.position_mm, antenna.azimuth, antenna.tilt, antenna.skew]) Object.assign(states, { as_found: null, as_left: null });
  }
  Object.assign(sheet.path, {
    near_at: { lat_deg: 60.1, lon_deg: -1.2, height_m: 61, u_m: 3 },
    far_at: { lat_deg: 60.111584, lon_deg: -1.174936, height_m: 74, u_m: 3 },
    height_datum: 'mean sea level',
    above_ground_m: 24,
    obstacles: [{ name: 'boat shed', at_m: 400, top_m: 38 }],
  });
  sheet.landmarks = [{ name: 'kirk spire', lat_deg: 60.118, lon_deg: -1.23, height_m: 52 }];
  change(sheet);
  const id = uuidv7();
  await server.must('POST', '/api/jobs', {
    id, site: 'Vord Hill', title: 'Link to Scarva', crew: CREW, visit_on: '2026-12-02', access: null, emergency: 'Island rescue, 555 0112', lat_deg: 60.1, lon_deg: -1.2,
    mounts: [{ id: 'm1', name: 'north-east', sheet }],
  });
  return id;
}

async function takeAlong(page, link) {
  await page.goto(link);
  await page.getByLabel('Name').fill(CLIMBER.name);
  await page.getByLabel('Passphrase', { exact: true }).fill(CLIMBER.passphrase);
  await page.getByRole('button', { name: 'Accept the invitation' }).click();
  await page.getByText('Ready without coverage.').waitFor();
  await page.getByRole('link', { name: /Vord Hill/ }).waitFor();
}

const fact = (page, name) => page.locator('.facts > div', { has: page.locator('dt', { hasText: new RegExp(`^${name}$`) }) }).locator('dd');
const choose = (page, name) => page.getByRole('radio', { name, exact: true }).check({ force: true });
const back = (page) => page.getByRole('link', { name: 'Back' }).click();
const numberOf = (text) => Number(/-?\d+(\.\d+)?/.exec(text.replace('\u2212', '-'))[0]);

test('aim, peak search and radio figures on the phone without coverage, then at the desk', { timeout: 300_000 }, async (t) => {
  const server = await Crossplumb.open(t, temporary('aim-data'));
  const { climberLink } = await server.people();
  const job = await surveyedJob(server);
  // axe is put into the page by the test: the page's own policy would not let a script in.
  const phone = await openProfile(t, temporary('aim-phone'), PHONE, { bypassCSP: true });
  const page = phone.pages()[0] ?? (await phone.newPage());
  const errors = complaints(page);
  await takeAlong(page, climberLink);
  await server.kill();

  // ---- Where to point ----
  await page.getByRole('link', { name: /Vord Hill/ }).click();
  await page.getByRole('link', { name: /^aim/ }).click();
  await page.getByRole('heading', { name: 'Where to point' }).waitFor();
  await until('the bearing of the coordinates with its doubt', () => fact(page, 'True bearing').innerText(), (text) => /^47\.\d+° ± 0\.\d+°$/.test(text));
  assert.ok(Math.abs(numberOf(await fact(page, 'True bearing').innerText()) - 47.3) < 0.1);
  assert.match(await fact(page, 'Elevation').innerText(), /^0\.39° up$|^0\.40° up$/);
  assert.match(await fact(page, 'Distance').innerText(), /^1\.90 km$/);
  await page.getByText(/Magnetic north lies .* \(WMM2025, good until 2030\)/).waitFor();
  await page.getByText('It alone never makes go on azimuth.').waitFor();
  await page.getByRole('img', { name: /^Bearings from this mast: target 47°.*kirk spire 320°/ }).waitFor();
  await lookAt(page, 'where');

  // ---- By the sun's shadow ----
  await page.getByRole('link', { name: 'By the sun’s shadow' }).click();
  await page.getByText('Never look at the sun, nor through any glass at it. Use the shadow.').waitFor();
  await until('the sun now, in true degrees', () => fact(page, 'Sun, true bearing').innerText(), (text) => /^\d+\.\d°$/.test(text));
  const angle = page.getByRole('textbox', { name: /^Angle/ });
  await angle.fill('12,3,4');
  await page.getByText('Only one comma or point').waitFor();
  assert.equal(await angle.inputValue(), '12,3,4');
  await page.getByRole('button', { name: 'Keep the reading' }).click();
  await page.getByText('When did the shadow fall there?').waitFor();
  await lookAt(page, 'sun');
  await angle.fill('40,5');
  await choose(page, 'right');
  await page.getByLabel('Time of the shadow').fill('25:00');
  await page.getByText('is no time of day').waitFor();
  await page.getByLabel('Time of the shadow').fill('13:00:00');
  await page.getByText(/^A looks to \d/).waitFor();
  await page.getByRole('button', { name: 'Keep as azimuth of A' }).click();
  await page.getByRole('status').filter({ hasText: 'A azimuth' }).filter({ hasText: 'kept on this phone' }).waitFor();

  // ---- By a landmark ----
  await page.getByRole('link', { name: /^aim/ }).click();
  await page.getByRole('link', { name: 'By a landmark' }).click();
  await choose(page, 'kirk spire');
  await until('where the landmark lies', () => fact(page, 'True bearing of kirk spire').innerText(), (text) => /^320/.test(text));
  await page.getByRole('textbox', { name: /^Angle/ }).fill('87');
  await choose(page, 'right');
  await page.getByText(/^A looks to 47\.\d° ± 1\.\d°\./).waitFor();
  await lookAt(page, 'landmark');
  await page.getByRole('button', { name: 'Keep as azimuth of A' }).click();
  await page.getByRole('status').filter({ hasText: 'kept on this phone' }).waitFor();

  // ---- Compass ----
  await page.getByRole('link', { name: /^aim/ }).click();
  await page.getByRole('link', { name: 'Compass, against gross errors' }).click();
  const shows = page.getByRole('textbox', { name: /^Compass shows/ });
  await shows.fill('400');
  await page.getByText(/from 0 to 360/).waitFor();
  await shows.fill('95');
  await page.getByText('Too far apart for a compass’s usual doubt').waitFor();
  await lookAt(page, 'compass');
  await page.getByRole('button', { name: 'Keep the check' }).click();
  await page.getByRole('heading', { name: 'Where to point' }).waitFor();

  // ---- Path ----
  await page.getByRole('link', { name: 'The path to the far end' }).click();
  await page.getByRole('img', { name: /^Path of 1\.90 km from here to far end, obstacles listed: 1, the Fresnel zone is free of them/ }).waitFor();
  assert.match(await fact(page, 'Port 1').innerText(), /^\u221259 dBm ± 1\.\d dB$/);
  await page.getByLabel('What is it?').fill('crane');
  await page.getByRole('textbox', { name: /^Distance from here/ }).fill('2500');
  await page.getByRole('textbox', { name: /^Height of its top/ }).fill('72');
  await page.getByText('Lies at or beyond the far end').waitFor();
  assert.equal(await page.getByRole('textbox', { name: /^Distance from here/ }).inputValue(), '2500');
  await page.getByRole('textbox', { name: /^Distance from here/ }).fill('1300');
  await page.getByRole('button', { name: 'Keep the obstacle' }).click();
  await page.getByRole('img', { name: /obstacles listed: 2, the Fresnel zone is not free/ }).waitFor();
  await lookAt(page, 'path');
  await page.getByRole('button', { name: 'Take back: crane' }).click();
  await page.getByRole('img', { name: /obstacles listed: 1/ }).waitFor();
  await back(page);

  // ---- Ground covered, lean ----
  await page.getByRole('link', { name: 'The ground it covers' }).click();
  await page.getByRole('heading', { name: 'Antenna A' }).waitFor();
  await until('the inner edge', () => fact(page, 'Inner edge').innerText(), (text) => /m$/.test(text));
  await lookAt(page, 'ground');
  await back(page);
  await page.getByRole('link', { name: 'Lean of the mast' }).click();
  await page.getByRole('textbox', { name: /^Off plumb/ }).first().fill('1,5');
  await choose(page, 'to the far end');
  await page.getByRole('textbox', { name: /^Off plumb/ }).last().fill('0,8');
  await choose(page, 'right');
  await page.getByText('Tilts it 1.50° down, skews it 0.8° clockwise.').waitFor();
  await lookAt(page, 'lean');
  await page.getByRole('button', { name: 'Keep the lean' }).click();
  await page.getByText(/it tilts this mount 1\.50° down and skews it 0\.8° clockwise/).waitFor();
  await back(page);

  // ---- Peak search ----
  await page.getByRole('link', { name: 'Peak search' }).click();
  await page.getByRole('heading', { name: 'First: transmit power control off' }).waitFor();
  await choose(page, 'tilt');
  const steps = [[-5, -65], [-3, -62], [-1, -60], [1, -59], [3, -60], [5, -62], [7, -66]];
  const step = async (deg, dbm) => {
    await page.getByRole('textbox', { name: /^Angle/ }).fill(String(deg));
    await page.getByRole('textbox', { name: /^Level/ }).fill(String(dbm));
    await page.getByRole('button', { name: 'Keep this step' }).click();
    await page.getByText(`${String(deg).replace('-', '\u2212')}° at \u2212${-dbm} dBm kept.`).waitFor();
  };
  // Levels without their sign, as a phone's keys have none: told, and mended by one press.
  await page.getByRole('textbox', { name: /^Angle/ }).fill('-5');
  await page.getByRole('textbox', { name: /^Level/ }).fill('65');
  await page.getByText(/received levels are negative dBm/i).waitFor();
  assert.equal(await page.getByRole('textbox', { name: /^Level/ }).inputValue(), '65');
  await page.getByRole('button', { name: 'Take it as \u221265 dBm' }).click();
  await page.getByRole('button', { name: 'Keep this step' }).click();
  await page.getByText('\u22125° at \u221265 dBm kept.').waitFor();
  await page.getByText('Too few readings').waitFor();
  await page.getByText('Is automatic transmit power control off at both ends?').first().waitFor();
  await page.getByRole('button', { name: 'It is off at both ends' }).click();
  await page.getByText(`Automatic transmit power control off at both ends, says ${CLIMBER.name}`).waitFor();
  for (const [deg, dbm] of steps.slice(1)) await step(deg, dbm);
  await until('the peak', () => fact(page, 'Peak').innerText(), (text) => Math.abs(numberOf(text) - 1) < 0.4);
  await until('the lobe', () => fact(page, 'Lobe').innerText(), (text) => /^main/.test(text));
  assert.match(await fact(page, 'Bolt back from here').innerText(), /^[56]\.\d° down$/);
  await page.getByRole('img', { name: /^7 steps; the fitted peak lies at (0\.\d|1(\.\d)?)°/ }).waitFor();
  await page.getByRole('button', { name: /^Keep the peak/ }).click();
  await page.getByText(/^A tilt: peak .* main lobe$/).waitFor();
  await lookAt(page, 'peak');
  await back(page);

  // ---- Radio figures: the feeder of port 2 loses 8 dB at this end ----
  await page.getByRole('link', { name: /^figures/ }).click();
  await page.getByText('says ' + CLIMBER.name).waitFor();
  await page.getByRole('link', { name: 'This end' }).click();
  await page.getByRole('button', { name: 'Keep the figures' }).click();
  await page.getByText('Type at least one port’s level').waitFor();
  await page.getByRole('textbox', { name: /^Port 1 level/ }).fill('59');
  await page.getByText(/received levels are negative dBm/i).waitFor();
  await page.getByRole('button', { name: 'Take it as \u221259 dBm' }).click();
  await page.getByRole('textbox', { name: /^Port 1 signal over noise/ }).fill('25');
  await page.getByRole('textbox', { name: /^Port 2 level/ }).fill('-67');
  await page.getByRole('textbox', { name: /^Port 2 signal over noise/ }).fill('22');
  await lookAt(page, 'radio-page');
  await page.getByRole('button', { name: 'Keep the figures' }).click();
  await page.getByRole('link', { name: 'Far end' }).click();
  await page.getByRole('textbox', { name: /^Port 1 level/ }).fill('-67');
  await page.getByRole('textbox', { name: /^Port 1 signal over noise/ }).fill('18');
  await page.getByRole('textbox', { name: /^Port 2 level/ }).fill('-59');
  await page.getByRole('textbox', { name: /^Port 2 signal over noise/ }).fill('26');
  await page.getByRole('button', { name: 'Keep the figures' }).click();
  await page.getByRole('heading', { name: 'What may be wrong' }).waitFor();
  const first = page.locator('.candidates > li').first();
  await until('a feeder of port 2 is first', () => first.innerText(), (text) => /feeder, port 2/i.test(text));
  await first.getByText('Check next:').waitFor();
  await first.getByText('What it predicts').click();
  const table = page.getByRole('table', { name: 'Predicted and measured' }).first();
  assert.match(await table.getByRole('row', { name: /^Port 1 level/ }).innerText(), /\u221259 ± 2/);
  await lookAt(page, 'figures');
  assert.deepEqual(errors.filter((text) => !/ERR_CONNECTION_REFUSED|ERR_INTERNET_DISCONNECTED/.test(text)), []);

  // ---- Coverage returns: everything goes up, and the server comes to the same figures ----
  await server.start();
  const standing = page.getByRole('banner').getByRole('status');
  await page.goto(`${server.address}/#/`);
  await page.getByRole('button', { name: 'Send and bring now' }).click();
  await until('everything is sent', () => standing.innerText(), (text) => text.includes('none waiting'), 60_000);
  const { entries, mounts, quarantined } = await server.must('GET', `/api/jobs/${job}`);
  assert.equal(quarantined, 0);
  const logged = entries.map((one) => JSON.parse(one.raw));
  const count = (kind) => logged.filter((e) => e.kind === kind).length;
  assert.deepEqual(
    ['level.stepped', 'power_control.confirmed', 'peak.fitted', 'figures.read', 'sight.taken', 'lean.read', 'obstacle.noted', 'reading.withdrawn'].map((kind) => [kind, count(kind)]),
    [['level.stepped', 7], ['power_control.confirmed', 1], ['peak.fitted', 1], ['figures.read', 2], ['sight.taken', 3], ['lean.read', 1], ['obstacle.noted', 1], ['reading.withdrawn', 1]],
  );
  for (const reference of ['sun', 'landmark']) {
    const sight = logged.find((e) => e.kind === 'sight.taken' && e.body.reference === reference).body;
    const again = await server.must('POST', '/api/calc/aim.sight', sight.asked);
    assert.ok(Math.abs(again.azimuth_deg - sight.answer.azimuth_deg) <= 1e-9 * Math.abs(again.azimuth_deg), `${reference}: ${again.azimuth_deg} at the server, ${sight.answer.azimuth_deg} on the phone`);
    const reading = logged.find((e) => e.kind === 'reading.taken' && e.body.reading.method === reference).body.reading;
    assert.equal(reading.north, 'true');
    assert.ok(Math.abs(reading.value - again.azimuth_deg) < 0.006 && Math.abs(reading.u - again.u_deg) < 0.006);
  }
  assert.equal(logged.filter((e) => e.kind === 'reading.taken').length, 2, 'a compass check is no reading');
  const figures = mounts[0].sheet.radio_figures;
  assert.deepEqual([figures.power_control_off, figures.near.ports[1].level_dbm, figures.far.ports[0].level_dbm], [true, -67, -67]);
  assert.equal(mounts[0].sheet.path.obstacles.length, 1, 'the obstacle taken back is gone');

  // ---- The desk ----
  const deskContext = await openProfile(t, temporary('aim-desk'), DESK, { bypassCSP: true });
  const desk = deskContext.pages()[0] ?? (await deskContext.newPage());
  const deskErrors = complaints(desk);
  await desk.goto(`${server.address}/desk`);
  await desk.getByLabel('Name').fill(SUPERVISOR.name);
  await desk.getByLabel('Passphrase', { exact: true }).fill(SUPERVISOR.passphrase);
  await desk.getByRole('button', { name: 'Sign in', exact: true }).click();
  await desk.getByRole('link', { name: /^Under way/ }).first().click();
  await desk.getByRole('link', { name: /Vord Hill/ }).first().click();
  await desk.getByRole('heading', { name: 'Aim and radio figures' }).waitFor();
  await desk.getByRole('img', { name: /^Path of 1\.90 km/ }).waitFor();
  await desk.getByRole('img', { name: /^Bearings from this mast: target 47°/ }).waitFor();
  await desk.getByRole('img', { name: /^7 steps; the fitted peak/ }).waitFor();
  await desk.getByRole('heading', { name: 'Peak search 1, A tilt' }).waitFor();
  assert.match(await desk.locator('.candidates > li').first().innerText(), /feeder, port 2/i);
  await desk.getByText('by compass, a check only').waitFor();
  await desk.getByText(/feeder, port 2/i).first().scrollIntoViewIfNeeded();
  await picture(desk, 'aim-desk');
  for (const theme of ['day', 'dark', 'night']) {
    await desk.evaluate((name) => (document.documentElement.dataset.theme = name), theme);
    assert.deepEqual(await barriers(desk), [], `desk, ${theme}`);
  }
  assert.deepEqual(deskErrors.filter((text) => !/status of 401/.test(text)), []);
  for (const shell of ['/', '/desk']) assert.deepEqual(inlined(await (await fetch(server.address + shell)).text()), [], shell);
});

test('coordinates typed into a plan give the bearing, and a slip is told beside its field', { timeout: 120_000 }, async (t) => {
  const server = await Crossplumb.open(t, temporary('aim-plan-data'));
  await server.people();
  const context = await openProfile(t, temporary('aim-plan'), DESK, { bypassCSP: true });
  const page = context.pages()[0] ?? (await context.newPage());
  await page.goto(`${server.address}/desk`);
  await page.getByLabel('Name').fill(SUPERVISOR.name);
  await page.getByLabel('Passphrase', { exact: true }).fill(SUPERVISOR.passphrase);
  await page.getByRole('button', { name: 'Sign in', exact: true }).click();
  await page.getByRole('link', { name: 'Plan a job' }).first().click();
  const type = (name, value) => page.getByRole('textbox', { name }).fill(value);
  await type(/^This end, latitude/, '60.1');
  await type(/^This end, longitude/, '-1.2');
  await type(/^This end, height of antenna/, '61');
  await type(/^Far end, latitude/, '97');
  await type(/^Far end, longitude/, '-1.174936');
  await type(/^Far end, height of antenna/, '74');
  await page.getByLabel('Heights are above').fill('mean sea level');
  await page.getByText(/from -90 to 90/).first().waitFor();
  assert.equal(await page.getByRole('textbox', { name: /^Far end, latitude/ }).inputValue(), '97');
  await type(/^Far end, latitude/, '60.111584');
  await page.getByText(/The coordinates give: bearing 47\.\d+°/).waitFor();
  await page.getByRole('button', { name: 'Take these into the path' }).click();
  await until('the path has the bearing', () => page.getByRole('textbox', { name: /^Bearing to the far end/ }).inputValue(), (text) => Math.abs(Number(text) - 47.3) < 0.1);
  await until('and the distance', () => page.getByRole('textbox', { name: /^Distance, m|^Distance/ }).first().inputValue(), (text) => Math.abs(Number(text) - 1900) < 2);
  await page.getByRole('button', { name: 'Add an obstacle' }).click();
  await page.getByRole('textbox', { name: /^Distance from this end/ }).fill('5000');
  await page.getByRole('textbox', { name: /^Height of its top/ }).fill('30');
  await page.getByText(/at or beyond the far end/i).first().waitFor();
  await page.getByRole('textbox', { name: /^Distance from this end/ }).fill('500');
  await page.getByRole('button', { name: 'Add a landmark' }).click();
  await page.getByRole('textbox', { name: /^Its name/ }).fill('kirk spire');
  await picture(page, 'aim-plan');
  for (const theme of ['day', 'dark', 'night']) {
    await page.evaluate((name) => (document.documentElement.dataset.theme = name), theme);
    assert.deepEqual(await barriers(page), [], `plan, ${theme}`);
  }
});

test('no coordinates, no sun, no levels: each page says what is missing and still takes what is typed', { timeout: 120_000 }, async (t) => {
  const server = await Crossplumb.open(t, temporary('aim-bare-data'));
  const { climberLink } = await server.people();
  await surveyedJob(server, (sheet) => {
    for (const field of ['near_at', 'far_at', 'height_datum', 'above_ground_m', 'obstacles']) delete sheet.path[field];
    sheet.landmarks = null;
    sheet.radio.tx_power_dbm = null;
  });
  const phone = await openProfile(t, temporary('aim-bare'), PHONE);
  const page = phone.pages()[0] ?? (await phone.newPage());
  await takeAlong(page, climberLink);
  await page.getByRole('link', { name: /Vord Hill/ }).click();
  await page.getByRole('link', { name: /^aim/ }).click();
  await page.getByText('The plan holds no coordinates of both ends.').waitFor();
  await page.getByRole('link', { name: 'By a landmark' }).click();
  await page.getByText('The plan holds no coordinates of this mast').waitFor();
  await back(page);
  await page.getByRole('link', { name: 'The path to the far end' }).click();
  await page.getByText('The plan holds no heights of both ends').waitFor();
  await page.getByText('No level can be expected').waitFor();
  await back(page);
  await page.getByRole('link', { name: /^figures/ }).click();
  await page.getByRole('link', { name: 'This end' }).click();
  await page.getByRole('textbox', { name: /^Port 1 level/ }).fill('-60');
  await page.getByRole('button', { name: 'Keep the figures' }).click();
  await page.getByText(/transmit power/i).first().waitFor();
  await page.getByText('This belongs into the plan').waitFor();
});
