// The desk: how it reads a log, what it takes for an answer, and a supervisor's way through it in Chromium.
import assert from 'node:assert/strict';
import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { test } from 'node:test';
import { complaints, DESK, openProfile, picture, temporary, until } from './browser.mjs';
import { compile } from './compiled.mjs';
import { CLIMBER, CREW, Crossplumb, invitationOf, SUPERVISOR } from './crossplumb.mjs';
import { uuidv7 } from 'uuidv7';

const openWindow = compile();
const desk = await openWindow('desk/record', 'desk/sheets', 'desk/format', 'desk/api');

// ---- The log as a record -----------------------------------------------------------------------------------------

let lastSeq = 0;
function stored(kind, body, { mount = 'm1', device = 'phone-1', id = `e${lastSeq + 1}`, by = 'Una', from = by, number } = {}) {
  const seq = ++lastSeq;
  const raw = JSON.stringify({ id, device, device_seq: number ?? seq, kind, mount, body, at: `2026-11-30T09:${String(seq).padStart(2, '0')}:00+01:00` });
  return { seq, received_at: '2026-11-30T12:00:00Z', author_name: by, uploader_name: from, raw };
}
const taken = (phase, quantity, value, more) =>
  stored('reading.taken', { phase, antenna: 'B', quantity, typed: String(value), reading: { value, unit: 'deg', u: 0.3, method: 'level' } }, more);
const recordOf = (...entries) => desk.recordOf({ entries });

test('a withdrawn reading stays on the page, struck, with who withdrew it', () => {
  const wrong = taken('as_found', 'skew', 62);
  const { readings } = recordOf(wrong, stored('reading.withdrawn', { withdraws: `e${wrong.seq}` }, { by: 'Bo' }), taken('as_found', 'skew', 6.2));
  assert.deepEqual(readings.map((r) => [r.reading.value, r.standing.is]), [[62, 'withdrawn'], [6.2, 'used']]);
  assert.equal(readings[0].standing.by, 'Bo');
});

test('a bolt moved makes earlier as-left readings of its part stale, and no others', () => {
  const { readings } = recordOf(
    taken('as_found', 'skew', 6),
    taken('as_left', 'skew', 2),
    taken('as_left', 'tilt', 1),
    taken('as_left', 'skew', 3, { mount: 'm2' }),
    stored('bolt.moved', { antenna: 'B', quantity: 'skew' }),
    taken('as_left', 'skew', 0.2),
  );
  assert.deepEqual(readings.map((r) => r.standing.is), ['used', 'moved since', 'used', 'used', 'used']);
});

test('who carried an entry for its author is named beside it', () => {
  const record = recordOf(taken('as_found', 'skew', 6, { by: 'Una', from: 'Bo' }), taken('as_found', 'tilt', 1));
  assert.deepEqual(record.readings.map((r) => r.by), ['Una (sent by Bo)', 'Una']);
  assert.deepEqual(record.lines.map((l) => l.by), ['Una (sent by Bo)', 'Una']);
});

test('an entry that arrived late is read at the place that its device gave it', () => {
  // The turn of the bolt came after the reading that followed it: that reading stands.
  const record = recordOf(
    taken('as_left', 'skew', 2, { number: 1 }),
    taken('as_left', 'skew', 0.2, { number: 3 }),
    stored('bolt.moved', { antenna: 'B', quantity: 'skew' }, { number: 2 }),
  );
  assert.deepEqual(record.readings.map((r) => [r.reading.value, r.standing.is]), [[2, 'moved since'], [0.2, 'used']]);
  assert.deepEqual(record.lines.map((l) => l.entry.device_seq), [1, 3, 2], 'the log itself stands as it came in');
});

test('phones are counted without the desk, and text that cannot be read is kept as it came', () => {
  const record = recordOf(
    stored('job.planned', {}, { device: 'desk', mount: null }),
    taken('as_found', 'skew', 1),
    taken('as_found', 'tilt', 1, { device: 'phone-2' }),
    { seq: 900, received_at: '2026-11-30T12:00:00Z', author_name: 'Una', raw: '{"id":"cut sho' },
  );
  assert.deepEqual(record.phones, ['phone-1', 'phone-2']);
  assert.equal(record.lines.at(-1).entry, null);
  assert.equal(record.lines.at(-1).raw, '{"id":"cut sho');
});

test('a fingerprint is the SHA-256 of the text (FIPS 180-2, example B.1: "abc")', async () => {
  assert.equal(await desk.fingerprint('abc'), 'ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad');
});

// ---- Figures -----------------------------------------------------------------------------------------------------

test('a probability is never rounded over the verdict’s threshold', () => {
  assert.equal(desk.percent(0.9499), '94.9\u00a0%');
  assert.equal(desk.percent(0.9999), '>\u00a099.9\u00a0%');
  assert.equal(desk.percent(0.0004), '<\u00a00.1\u00a0%');
});

test('times are those of the place where they were written', () => {
  assert.equal(desk.placeTime('2026-11-30T23:40:00-02:00'), '30\u00a0Nov\u00a02026 23:40');
});

// ---- Answers -----------------------------------------------------------------------------------------------------

function answering(status, type, body) {
  const asked = [];
  globalThis.fetch = async (path, init) => {
    asked.push({ path, ...init });
    return new Response(status === 204 ? null : body, { status, headers: { 'Content-Type': type } });
  };
  return asked;
}
const realFetch = globalThis.fetch;
const withFetch = (name, run) =>
  test(name, async (t) => {
    t.after(() => (globalThis.fetch = realFetch));
    await run();
  });

withFetch('a page of a proxy with status 200 is no answer', async () => {
  answering(200, 'text/html', '<h1>Welcome to the harbour network</h1>');
  await assert.rejects(desk.jobs(), desk.Unreachable);
  answering(200, 'application/json', '{"jobs": [');
  await assert.rejects(desk.jobs(), desk.Unreachable);
});

withFetch('a problem keeps its field and says what to change', async () => {
  answering(422, 'application/problem+json', JSON.stringify({ code: 'out_of_range', field: 'path.distance_m', detail: 'must be above 0' }));
  await assert.rejects(desk.judge({}), (p) => p instanceof desk.ApiProblem && p.status === 422 && p.field === 'path.distance_m' && p.detail === 'Must be above 0.');
});

withFetch('every write carries the header that another site’s form cannot send; reading carries none', async () => {
  const asked = answering(200, 'application/json', '{"jobs": []}');
  await desk.jobs();
  await desk.decide('j', { id: 'i', decision: 'sign off', remark: null, base_seq: 1 });
  assert.equal(asked[0].headers['X-Crossplumb'], undefined);
  assert.equal(asked[1].headers['X-Crossplumb'], '1');
  assert.equal(asked[1].headers['Content-Type'], 'application/json');
});

withFetch('an ended session is told once it is met, but not by asking who is signed in', async () => {
  let told = 0;
  desk.onSignedOut(() => told++);
  answering(401, 'application/problem+json', '{"code":"sign_in","detail":"sign in first"}');
  assert.equal(await desk.session(), null);
  assert.equal(told, 0);
  await assert.rejects(desk.jobs(), desk.ApiProblem);
  assert.equal(told, 1);
});

// ---- Plans -------------------------------------------------------------------------------------------------------

test('a new bearing turns what looked along the path, and leaves what was aimed elsewhere', () => {
  const sheet = desk.sheetFrom('two crossed panels');
  desk.repath(sheet, 10, 0);
  sheet.near.antennas[1].azimuth.planned.value = 90;
  desk.repath(sheet, 300, 2);
  const aims = (end) => sheet[end].antennas.map((a) => [a.azimuth.planned.value, a.tilt.planned.value]);
  assert.deepEqual(aims('near'), [[300, 2], [90, 2]]);
  assert.deepEqual(aims('far'), [[120, -2], [120, -2]]);
  assert.equal(sheet.path.bearing_deg, 300);
});

test('no start knows the place: bearing and distance are empty, and what looks along the path has no azimuth until there is one', () => {
  for (const template of desk.templates) {
    const sheet = desk.sheetIn(desk.sheetText(desk.sheetFrom(template))); // as the draft keeps it
    assert.deepEqual([sheet.path.bearing_deg, sheet.path.distance_m], [null, null], template);
    const aims = () => [...sheet.near.antennas, ...sheet.far.antennas].flatMap((a) => (a.azimuth ? [a.azimuth.planned.value] : []));
    const beams = aims().length / 2;
    assert.equal(beams > 0, template !== 'two omnis apart');
    assert.deepEqual(aims(), Array(2 * beams).fill(null), template);
    desk.repath(sheet, 47, 0);
    assert.deepEqual(aims(), [...Array(beams).fill(47), ...Array(beams).fill(227)], template);
    desk.repath(sheet, null, 0);
    assert.deepEqual([sheet.path.bearing_deg, ...aims()], [null, ...Array(2 * beams).fill(null)], template);
  }
});

test('every limit that a plan starts with carries its reason', () => {
  for (const template of desk.templates) {
    for (const limit of desk.sheetFrom(template).limits) assert.ok(limit.reason, `${template}: ${limit.name}`);
  }
});

// ---- In the browser ----------------------------------------------------------------------------------------------

const axeSource = readFileSync(createRequire(import.meta.url).resolve('axe-core/axe.min.js'), 'utf8');

/** What axe finds, contrast of 7:1 and the size of targets included: both are off by default. */
async function barriers(page) {
  await page.evaluate(axeSource);
  return page.evaluate(async () => {
    const found = await axe.run(document, {
      rules: { 'color-contrast-enhanced': { enabled: true }, 'target-size': { enabled: true } },
    });
    return found.violations.map((v) => `${v.id}: ${v.nodes.map((n) => n.target.join(' ')).join(', ')}`);
  });
}

test('a supervisor plans and issues a job; complaints, contrast, three themes, a session that ends', { timeout: 180_000 }, async (t) => {
  const server = await Crossplumb.open(t, temporary('desk-data'));
  const { climberLink } = await server.people();
  const accepted = await fetch(`${server.address}/api/session`, {
    method: 'POST',
    headers: { 'Content-Type': 'application/json', 'X-Crossplumb': '1' },
    body: JSON.stringify({ invitation: invitationOf(climberLink), ...CLIMBER }),
  });
  assert.equal(accepted.status, 200);
  // axe is put into the page by the test: the page's own policy would not let a script in.
  const context = await openProfile(t, temporary('desk'), DESK, { bypassCSP: true });
  const page = await context.newPage();
  const heard = complaints(page);

  await page.goto(`${server.address}/desk`);
  await page.getByLabel('Name').fill(SUPERVISOR.name);
  await page.getByLabel('Passphrase', { exact: true }).fill('not these words');
  await page.getByRole('button', { name: 'Sign in' }).click();
  await page.getByText('do not belong together').waitFor();
  await page.getByLabel('Passphrase', { exact: true }).fill(SUPERVISOR.passphrase);
  await page.keyboard.press('Enter');
  await page.getByText('There are no jobs yet').waitFor();

  // Plan: the three starts are judged by the server; bad figures stay as typed, with the answer beside them.
  await page.getByRole('link', { name: 'Plan a job' }).click();
  const judged = page.getByText('If it hangs exactly as planned');
  const bearing = page.getByLabel('Bearing to the far end');
  const focused = (id) => until(`${id} has the focus`, () => page.evaluate(() => document.activeElement?.id), (is) => is === id);
  const issue = page.getByRole('button', { name: 'Issue the job' });
  for (const start of ['Two omnis apart', 'Two crossed panels', 'A crossed pair']) {
    await page.getByRole('button', { name: start }).click();
    // Nothing is made up for the place, and nothing judged without it.
    await page.getByText('Not judged yet').waitFor();
    assert.deepEqual([await bearing.inputValue(), await page.getByLabel('Distance').first().inputValue(), await judged.count()], ['', '', 0]);
    assert.match(await page.locator('#m1-bearing-error').innerText(), /Needed: the bearing/);
    assert.match(await page.locator('#m1-distance-error').innerText(), /Needed: the distance/);
    await bearing.fill('300');
    await page.getByText('Not judged yet').waitFor();
    await page.getByLabel('Distance').first().fill('1900');
    await page.getByText('If it hangs exactly as planned').waitFor();
  }
  const distance = page.getByLabel('Distance');
  for (const [typed, answer] of [['-3', 'Must be'], ['abc', 'This is not a number'], ['1.900,5', 'Two decimal signs']]) {
    await distance.fill(typed);
    await until(`${typed} is answered beside its field`, () => page.locator('#m1-distance-error').innerText(), (text) => text.includes(answer));
    assert.equal(await distance.inputValue(), typed);
  }
  // Emptied, its figure is gone: no verdict stands on one that nobody sees.
  await distance.fill('');
  await page.getByText('Not judged yet').waitFor();
  assert.equal(await judged.count(), 0);
  assert.equal(JSON.parse(await page.locator('.sheet-text').inputValue()).path.distance_m, null);
  await distance.fill('1900,5');
  await until('the sheet takes the comma', () => page.locator('.sheet-text').inputValue(), (text) => JSON.parse(text).path.distance_m === 1900.5);
  await page.getByRole('button', { name: 'Issue the job' }).click();
  await page.getByText('Name the site.').waitFor();
  await focused('plan-site');
  assert.deepEqual(await barriers(page), []);
  await picture(page, 'desk-plan');
  await page.getByLabel('Site').fill('Lowe Stack');
  await page.getByLabel('What is done there').fill('crossed pair to the ferry');
  await page.getByLabel('Crew').fill('a crew that is not');
  await page.getByText('nobody is in a crew of this name yet').waitFor();
  await page.getByLabel('Crew').fill(` ${CREW.toUpperCase()}`); // goes to the crew that is there: a job reaches the phones of exactly its name
  await page.getByText('nobody is in a crew of this name yet').waitFor({ state: 'detached' });
  await issue.click();
  await focused('m1-name');
  await page.getByLabel('Name of the mount').fill('west');
  await bearing.fill('');
  await issue.click();
  await focused('m1-bearing');
  const box = await bearing.boundingBox();
  assert.ok(box.y >= 0 && box.y + box.height <= page.viewportSize().height, 'the field is in sight');
  await bearing.fill('301');
  await page.reload(); // what was typed is kept
  await page.getByText('If it hangs exactly as planned').waitFor();
  await page.getByRole('button', { name: 'Issue the job' }).click();
  await page.getByRole('heading', { name: 'Lowe Stack is issued' }).waitFor();
  const { jobs } = await server.must('GET', '/api/jobs');
  assert.deepEqual(jobs.map((j) => [j.site, j.stage, j.crew]), [['Lowe Stack', 'issued', CREW]]);
  await page.getByRole('link', { name: 'Open it' }).click();
  await page.getByText('Nothing is read on this mount yet').waitFor();

  for (const theme of ['day', 'dark', 'night, red on black']) {
    await page.locator('.account summary').click();
    await page.getByLabel(theme, { exact: true }).check();
    await page.keyboard.press('Escape');
    await page.locator('h1').click();
    assert.deepEqual(await barriers(page), [], theme);
    await picture(page, `desk-job-${theme.split(',')[0]}`);
  }

  // The session ends elsewhere: what was typed stays under the sign-in.
  await page.getByRole('link', { name: 'Plan a job' }).click();
  await page.getByLabel('Site').fill('Half typed');
  await context.clearCookies();
  await page.evaluate(() => document.dispatchEvent(new Event('visibilitychange'))); // as when the window is looked at again
  await page.getByRole('heading', { name: 'Sign in again' }).waitFor();
  assert.deepEqual(await barriers(page), []);
  await page.getByRole('dialog').getByLabel('Passphrase', { exact: true }).fill(SUPERVISOR.passphrase);
  await page.keyboard.press('Enter');
  await page.getByRole('dialog').waitFor({ state: 'detached' });
  assert.equal(await page.getByLabel('Site').inputValue(), 'Half typed');

  // The browser itself notes every answer that is not 2xx; anything else would be the page's fault.
  assert.deepEqual(heard.filter((c) => !/status of (401|422)/.test(c)), []);
});

/** A climber's phone, as far as the desk can tell: entries chained, sent, stored. */
class Phone {
  #device = '7d0f0b8e-4c43-4b5e-9d9e-0c8b1a2f3d4e';
  #seq = 0;
  #prev = '';

  static async of(server, link) {
    const phone = new Phone();
    phone.server = server;
    const opened = await fetch(`${server.address}/api/session`, {
      method: 'POST',
      headers: { 'X-Crossplumb': '1', 'Content-Type': 'application/json' },
      body: JSON.stringify({ invitation: invitationOf(link), ...CLIMBER }),
    });
    assert.equal(opened.status, 200);
    phone.cookie = opened.headers.get('Set-Cookie').split(';')[0];
    phone.user = (await opened.json()).user.id;
    return phone;
  }

  async send(job, ...entries) {
    const wire = entries.map(([kind, mount, body]) => {
      const raw = JSON.stringify({
        id: uuidv7(),
        device: this.#device,
        device_seq: ++this.#seq,
        prev: this.#prev,
        job,
        mount,
        kind,
        schema: 1,
        at: `2026-11-30T09:${String(this.#seq).padStart(2, '0')}:00+01:00`,
        mono_ms: this.#seq * 1000,
        author: this.user,
        app: 'test',
        body,
      });
      this.#prev = createHash('sha256').update(raw, 'utf8').digest('hex');
      return { raw, hash: this.#prev };
    });
    const response = await fetch(`${this.server.address}/api/entries`, {
      method: 'POST',
      headers: { Cookie: this.cookie, 'X-Crossplumb': '1', 'Content-Type': 'application/json' },
      body: JSON.stringify({ entries: wire, sent_at: '2026-11-30T12:00:00Z' }),
    });
    const { answers } = await response.json();
    assert.deepEqual(answers.map((a) => a.status), entries.map(() => 'stored'), JSON.stringify(answers));
  }
}

const level = (phase, quantity, value, typed) => [
  'reading.taken',
  'm1',
  { phase, antenna: 'A', quantity, typed, reading: { value, unit: 'deg', u: 0.2, method: 'level', instrument: 'level 3' } },
];

test('a job handed in is read, sent back with a remark, comes again and is signed off', { timeout: 180_000 }, async (t) => {
  const server = await Crossplumb.open(t, temporary('decision-data'));
  const { climberLink } = await server.people();
  const phone = await Phone.of(server, climberLink);
  const job = await server.job('crossed-pair-go.json', 'Lowe Stack');
  const handedIn = (word, remark) => [
    'job.handed_in',
    null,
    { remark, open: ['photo of the earth bond'], verdicts: [{ mount: 'm1', phase: 'as_left', word, probability: 0.5, method: { version: '0', sources: [] } }] },
  ];
  await phone.send(
    job,
    ['caution.confirmed', null, { caution: 'height', version: 1, name: 'Idris Vane' }],
    level('as_found', 'skew', 6.2, '6,2'),
    ['bolt.moved', 'm1', { antenna: 'A', quantity: 'skew' }],
    level('as_left', 'skew', 0.4, '0,4'),
    handedIn('no-go', 'wind got up'),
  );

  const context = await openProfile(t, temporary('decision'), DESK, { bypassCSP: true });
  const page = await context.newPage();
  const heard = complaints(page);
  await page.goto(`${server.address}/desk`);
  await page.getByLabel('Name').fill(SUPERVISOR.name);
  await page.getByLabel('Passphrase', { exact: true }).fill(SUPERVISOR.passphrase);
  await page.keyboard.press('Enter');
  await page.getByRole('link', { name: 'Handed in 1' }).waitFor();
  await page.getByRole('link', { name: /Lowe Stack/ }).press('Enter');
  await page.getByRole('heading', { name: 'Lowe Stack' }).waitFor();
  const text = () => page.locator('main').innerText();
  const shown = await text();
  for (const part of ['6,2', 'level 3', 'Idris Vane', 'wind got up', 'photo of the earth bond', 'bolt moved', 'not confirmed', 'They differ.']) {
    assert.ok(shown.includes(part), `${part} is not on the page`);
  }
  assert.equal(await page.locator('.drawing').count(), 3);
  assert.deepEqual(await barriers(page), []);
  await picture(page, 'desk-review');

  // Back it goes, but not without a word.
  await page.getByRole('button', { name: 'Send back' }).click();
  await page.getByRole('button', { name: 'Send back' }).click();
  await page.getByText('A job goes back with a remark').waitFor();
  await page.getByLabel('What is the crew to do?').fill('Read the tilt as well.');
  await page.getByRole('button', { name: 'Send back' }).click();
  await page.getByText('The job is with the crew again.').waitFor();
  const stage = async () => (await server.must('GET', `/api/jobs/${job}`)).job;
  assert.equal((await stage()).stage, 'sent back');
  assert.equal((await stage()).remark, 'Read the tilt as well.');

  // It comes again; while it is open more comes in: the decision is refused, said so, and made on what is new.
  await phone.send(job, level('as_left', 'tilt', -0.4, '-0.4'), handedIn('go', null));
  await page.getByRole('button', { name: 'Show it' }).click({ timeout: 30_000 });
  await until('the tilt says its way in words', () => page.locator('.readings tbody').last().innerText(), (said) => /0\.4°\sdown/.test(said));
  await page.getByRole('button', { name: 'Sign off' }).click();
  await page.getByLabel('Remark, if there is one').fill('as drawn');
  await phone.send(job, level('as_left', 'skew', 0.5, '0,5'), handedIn('go', 'one more look'));
  await page.getByRole('button', { name: 'Sign off' }).click();
  await page.getByText('Not done: something came in').waitFor();
  assert.equal((await stage()).stage, 'handed in');
  await picture(page, 'desk-stale');
  await page.getByRole('button', { name: 'Show what came in' }).click();
  await page.getByText('one more look').waitFor();
  await page.getByRole('button', { name: 'Sign off' }).click();
  assert.equal(await page.getByLabel('Remark, if there is one').inputValue(), 'as drawn');
  await page.getByRole('button', { name: 'Sign off' }).click();
  await page.getByText(`Signed off by ${SUPERVISOR.name}`).first().waitFor();
  assert.equal((await stage()).stage, 'signed off');

  // On paper: no buttons, no list, and the head of the log on each sheet.
  await page.emulateMedia({ media: 'print' });
  for (const gone of ['.head-bar', '.queue', '.decision .button']) assert.ok(!(await page.locator(gone).first().isVisible()), gone);
  const { head } = await server.must('GET', '/api/state');
  const margins = await page.evaluate(() => document.adoptedStyleSheets.flatMap((s) => [...s.cssRules]).map((r) => r.cssText).join());
  assert.ok(margins.includes(head.hash) && margins.includes('Lowe Stack'), margins);
  await picture(page, 'desk-print');
  assert.deepEqual(heard.filter((c) => !/status of (401|409)/.test(c)), []);
});
