// One visit from mast to sign-off: a phone and a desk, each with its own browser profile, the real server between them,
// killed in the middle. What a person does, by the words that stand on the screen.
import assert from 'node:assert/strict';
import { createHash } from 'node:crypto';
import { readdirSync, readFileSync } from 'node:fs';
import { test } from 'node:test';
import { complaints, DESK, openProfile, PHONE, picture, temporary, until } from './browser.mjs';
import { CLIMBER, Crossplumb, SUPERVISOR } from './crossplumb.mjs';

// ---- What the climber does ---------------------------------------------------------------------------------------

async function acceptInvitation(page, link) {
  await page.goto(link);
  await page.getByLabel('Name').fill(CLIMBER.name);
  await page.getByLabel('Passphrase', { exact: true }).fill(CLIMBER.passphrase);
  await page.getByRole('button', { name: 'Accept the invitation' }).click();
}

const field = (page) => page.locator('#reading-value, #reading-right');
const doubtField = (page) => page.locator('#reading-u');
const keep = (page) => page.getByRole('button', { name: /^Keep / });

async function openReading(page, phase, what) {
  await page.getByRole('region', { name: `Readings, ${phase}` }).getByRole('link', { name: new RegExp(`^Measure ${what}\\b`) }).click();
  await page.getByRole('heading', { name: what }).waitFor();
}

/** Types a reading with its doubt and direction, keeps it, and is back at the mount. */
async function read(page, phase, what, value, doubt, way) {
  await openReading(page, phase, what);
  await field(page).fill(value);
  await doubtField(page).fill(doubt);
  if (way) await page.getByRole('radio', { name: way, exact: true }).check({ force: true });
  await keep(page).click();
  await page.getByRole('status').filter({ hasText: `${what} ` }).filter({ hasText: 'kept on this phone' }).waitFor();
}

const strip = (page) => page.locator('a.strip');

/** The word of the verdict strip, once it is that of all readings entered. */
async function verdict(page, word) {
  await until(`the strip says ${word}`, () => strip(page).evaluate((it) => [it.getAttribute('aria-busy'), it.dataset.word].join(' ')), (now) => now === `false ${word}`);
  return strip(page).innerText();
}

const standing = (page) => page.getByRole('banner').getByRole('status');

async function waiting(page, n) {
  await until(`${n} waiting`, () => standing(page).innerText(), (text) => text.includes(n === 0 ? 'none waiting' : `${n} waiting`));
}

/** Own entries as they lie on the phone, in order. */
const onPhone = (page) =>
  page.evaluate(
    () =>
      new Promise((resolve, reject) => {
        const opening = indexedDB.open('crossplumb');
        opening.onerror = () => reject(opening.error);
        opening.onsuccess = () => {
          const all = opening.result.transaction('entries').objectStore('entries').getAll();
          all.onsuccess = () => {
            opening.result.close();
            resolve(all.result.filter((row) => row.own === 1).sort((a, b) => a.device_seq - b.device_seq));
          };
        };
      }),
  );

/** kill -9 of the whole browser, found by its profile: what was shown as kept must be on disk. */
async function killBrowser(context, profile) {
  const closed = new Promise((resolve) => context.once('close', resolve));
  const victims = readdirSync('/proc').filter((pid) => {
    if (!/^\d+$/.test(pid)) return false;
    try {
      const words = readFileSync(`/proc/${pid}/cmdline`, 'utf8').split('\0');
      return words.includes(`--user-data-dir=${profile}`);
    } catch {
      return false; // it ended meanwhile
    }
  });
  assert.ok(victims.length > 0, 'the browser runs');
  for (const pid of victims) {
    try {
      process.kill(Number(pid), 'SIGKILL');
    } catch {
      // its parent took it along
    }
  }
  await closed;
}

// ---- What the supervisor does ------------------------------------------------------------------------------------

async function signInAtDesk(page, address) {
  await page.goto(`${address}/desk`);
  await page.getByLabel('Name').fill(SUPERVISOR.name);
  await page.getByLabel('Passphrase', { exact: true }).fill(SUPERVISOR.passphrase);
  await page.getByRole('button', { name: 'Sign in', exact: true }).click();
}

// ---- What the log must hold --------------------------------------------------------------------------------------

/** Lost: kept on the phone, not on the server. Unexpected: there without the phone. Twice. Order. Bytes. */
async function compareLogs(server, job, rows) {
  const { entries, quarantined } = await server.must('GET', `/api/jobs/${job}`);
  const own = entries.filter((one) => JSON.parse(one.raw).device === rows[0].device);
  const ids = own.map((one) => JSON.parse(one.raw).id);
  assert.deepEqual(rows.filter((row) => !ids.includes(row.id)).map((row) => row.raw), [], 'lost');
  assert.deepEqual(ids.filter((id) => !rows.some((row) => row.id === id)), [], 'unexpected');
  assert.equal(new Set(ids).size, ids.length, 'twice');
  assert.deepEqual(own.map((one) => one.raw), rows.map((row) => row.raw), 'byte for byte, in the order in which they were made');
  assert.equal(quarantined, 0);
  let prev = '';
  rows.forEach((row, i) => {
    const entry = JSON.parse(row.raw);
    assert.equal(entry.device_seq, i + 1);
    assert.equal(entry.prev, prev);
    prev = createHash('sha256').update(row.raw).digest('hex');
  });
  return entries;
}

/** Steps of one story: after one that failed the others cannot tell anything. */
function steps(t) {
  let broken = null;
  return (name, run) =>
    t.test(name, async () => {
      if (broken !== null) throw new Error(`not tried: "${broken}" failed`);
      try {
        await run();
      } catch (error) {
        broken = name;
        throw error;
      }
    });
}

const plainOnly = (list) => list.filter((text) => !/ERR_CONNECTION_REFUSED|status of 401/.test(text));

test('a crossed pair, from mast to sign-off, with the server killed in the middle', { timeout: 300_000 }, async (t) => {
  const server = await Crossplumb.open(t, temporary('visit-data'));
  const { climberLink } = await server.people();
  const job = await server.job('crossed-pair-no-go.json', 'Gannet Head');
  const profile = temporary('visit-phone');
  let phone = await openProfile(t, profile, PHONE);
  let page = phone.pages()[0] ?? (await phone.newPage());
  let errors = complaints(page);
  const step = steps(t);

  await step('the climber comes in by a one-time link and takes the job along', async () => {
    await page.goto(climberLink);
    await picture(page, 'phone-01-invitation');
    await acceptInvitation(page, climberLink);
    await page.getByText('Ready without coverage.').waitFor();
    await page.getByRole('link', { name: /Gannet Head/ }).waitFor();
    await picture(page, 'phone-02-jobs');
    await page.getByRole('link', { name: /Gannet Head/ }).click();
    await page.getByText('Island rescue, 555 0112').waitFor();
    await picture(page, 'phone-03-job');
  });

  await step('it is closed for the way to the mast, and opens where it was', async () => {
    await phone.close();
    phone = await openProfile(t, profile, PHONE);
    page = phone.pages()[0] ?? (await phone.newPage());
    errors = complaints(page);
    await page.goto(`${server.address}/#/job/${job}`);
    await page.getByText('Island rescue, 555 0112').waitFor();
  });

  await step('before the climb: cautions are confirmed by name, and gate nothing', async () => {
    await page.getByRole('link', { name: /^before/ }).click();
    await page.getByRole('heading', { name: 'Before the climb' }).waitFor();
    const buttons = page.getByRole('button', { name: /^Confirm/ });
    const n = await buttons.count();
    assert.ok(n >= 3, `${n} cautions`);
    for (let i = 0; i < n; i++) {
      await buttons.nth(i).click();
      await until(`${i + 1} confirmed`, () => page.getByText(`confirmed by ${CLIMBER.name}`).count(), (count) => count === i + 1);
    }
    await picture(page, 'phone-04-before');
    await page.getByRole('link', { name: 'Go on to as found' }).click();
  });

  await step('an impossible reading is answered beside its field, and what was typed stays', async () => {
    await picture(page, 'phone-05-mount-unread');
    await openReading(page, 'as found', 'A skew');
    for (const [typed, answer] of [
      ['400', 'Skew goes to 180° either way; 400° cannot be.'],
      ['abc', 'Not a number: "abc".'],
      ['7,4,1', 'Only one comma or point: "7,4,1".'],
    ]) {
      await field(page).fill(typed);
      await keep(page).click();
      await page.getByText(answer).first().waitFor();
      assert.equal(await field(page).inputValue(), typed);
      assert.equal(await field(page).getAttribute('aria-invalid'), 'true');
      const text = await page.locator(`#${(await field(page).getAttribute('aria-describedby')).split(' ').pop()}`).innerText();
      assert.ok(text.includes(answer), `the answer belongs to the field: ${text}`);
    }
    await picture(page, 'phone-06-reading-wrong');
    const count = (await onPhone(page)).filter((row) => JSON.parse(row.raw).kind === 'reading.taken').length;
    assert.equal(count, 0, 'nothing of it became an entry');
    await page.getByRole('link', { name: 'Back' }).click();
  });

  await step('as found: comma as decimal sign, doubt beside the value, and the strip answers at once', async () => {
    await read(page, 'as found', 'A skew', '7,4', '0,3', 'clockwise');
    const begun = await strip(page).innerText();
    assert.match(begun, /MEASURE AGAIN|NO-GO/, 'one reading is not enough for go');
    await read(page, 'as found', 'A tilt', '0,4', '0,3', 'up');
    await read(page, 'as found', 'A azimuth', '47,6', '0,5');
    const said = await verdict(page, 'no-go');
    assert.match(said, /NO-GO/);
    assert.match(said, /ties port to port/, 'the reason');
    assert.match(said, /Turn A .*anticlockwise .*go/, 'the turn that helps most, and what it buys');
    await picture(page, 'phone-07-as-found');
    await strip(page).click();
    await page.getByRole('heading', { name: 'Verdict' }).waitFor();
    await page.getByText('Value, doubt and limit').first().waitFor();
    await picture(page, 'phone-08-verdict');
    await page.goBack();
    await waiting(page, 0);
  });

  await step('the server dies; the page opens again without it and goes on', async () => {
    await server.kill();
    assert.deepEqual(plainOnly(errors), []);
    await page.reload();
    await verdict(page, 'no-go');
    await page.getByRole('link', { name: /^adjust/ }).click();
    await page.getByRole('button', { name: 'I turned A skew' }).click();
    await page.getByRole('button', { name: 'Yes, it was turned' }).click();
    await page.getByText('turn noted').waitFor();
    await read(page, 'as left', 'A skew', '0,2', '0,3', 'clockwise');
    await verdict(page, 'go');
    await picture(page, 'phone-09-adjusted');
    await waiting(page, 2);
    await until('it says that there is no coverage', () => standing(page).innerText(), (text) => text.includes('no coverage'));
  });

  await step('the browser is killed in mid-entry: what was kept is there, and what was being typed too', async () => {
    await page.getByRole('link', { name: /^as left/ }).click();
    await read(page, 'as left', 'A tilt', '0.3', '0.3', 'up');
    await openReading(page, 'as left', 'A azimuth');
    await field(page).fill('47,');
    await until('the draft is on disk', () => draftsOf(page), (drafts) => drafts.some((text) => text.includes('47,')));
    await killBrowser(phone, profile);
    phone = await openProfile(t, profile, PHONE);
    page = phone.pages()[0] ?? (await phone.newPage());
    errors = complaints(page);
    await page.goto(`${server.address}/#/job/${job}/mount/m1/as-left/reading/A/azimuth`);
    await page.getByRole('heading', { name: 'A azimuth' }).waitFor();
    await waiting(page, 3);
    assert.equal(await field(page).inputValue(), '47,');
    await field(page).fill('47,3');
    await doubtField(page).fill('0,5');
    await picture(page, 'phone-10-reading');
    await keep(page).click();
    await verdict(page, 'go');
  });

  await step('the job is handed in, still without the server', async () => {
    await page.getByRole('link', { name: /^hand in/ }).first().click();
    await page.getByText('Nothing is open.').waitFor();
    await page.getByLabel('Remark for the desk').fill('Clamp was slack, tightened.');
    await picture(page, 'phone-11-hand-in');
    await page.getByRole('button', { name: 'Hand in', exact: true }).click();
    await page.getByText(/entries wait on this phone/).waitFor();
    await waiting(page, 5);
    await picture(page, 'phone-12-handed-in-offline');
    const rows = await onPhone(page);
    assert.equal(rows.filter((row) => row.whereabouts === 'waiting').length, 5);
  });

  await step('the server comes back: everything goes up by itself, once', async () => {
    await server.start();
    await until('none waits', () => standing(page).innerText(), (text) => text.includes('none waiting'), 90_000);
    await page.getByText('All of it is safe on the server.').waitFor();
    assert.deepEqual(plainOnly(errors), []);
    const rows = await onPhone(page);
    assert.ok(rows.every((row) => row.whereabouts === 'safe'));
    const entries = await compareLogs(server, job, rows);
    assert.equal(entries.length, rows.length + 2, 'what the phone made, planned and issued');
    const { jobs } = await server.must('GET', '/api/jobs');
    assert.deepEqual([jobs[0].stage, jobs[0].entries], ['handed in', entries.length]);
  });

  const office = await openProfile(t, temporary('visit-desk'), DESK);
  const desk = office.pages()[0] ?? (await office.newPage());
  const deskErrors = complaints(desk);

  await step('the desk sees the job, planned beside as found and as left, and sends it back', async () => {
    await desk.goto(`${server.address}/desk`);
    await picture(desk, 'desk-01-sign-in');
    await signInAtDesk(desk, server.address);
    await desk.getByRole('link', { name: /Gannet Head/ }).first().click();
    await desk.getByRole('heading', { name: /Gannet Head/ }).first().waitFor();
    for (const text of ['planned', 'as found', 'as left', 'Clamp was slack, tightened.']) await desk.getByText(text, { exact: false }).first().waitFor();
    await until('the word of the mount', () => desk.locator('main').innerText(), (text) => /\bGO\b/.test(text));
    await picture(desk, 'desk-02-job');
    await desk.getByRole('button', { name: 'Send back' }).click();
    await desk.getByRole('button', { name: 'Send back' }).click();
    await desk.getByText('A job goes back with a remark').waitFor();
    await desk.getByLabel(/What is the crew to do/).fill('Read the tilt again with the long level.');
    await picture(desk, 'desk-03-send-back');
    await desk.getByRole('button', { name: 'Send back' }).click();
    await desk.getByText('The job is with the crew again.').waitFor();
  });

  await step('the phone shows the remark, reads again and hands in again', async () => {
    await page.getByText('Read the tilt again with the long level.').waitFor({ timeout: 60_000 });
    await picture(page, 'phone-13-sent-back');
    await page.getByRole('link', { name: /^as left/ }).first().click();
    await read(page, 'as left', 'A tilt', '0,1', '0,1', 'up');
    await verdict(page, 'go');
    await page.getByRole('link', { name: /^hand in/ }).first().click();
    await page.getByLabel('Remark for the desk').fill('Read with the long level.');
    await page.getByRole('button', { name: 'Hand in', exact: true }).click();
    await page.getByText('All of it is safe on the server.').waitFor({ timeout: 30_000 });
  });

  await step('the desk signs off, and the phone shows it', async () => {
    await desk.goto(`${server.address}/desk`);
    await desk.getByRole('link', { name: /Gannet Head/ }).first().click();
    await desk.getByText('Read with the long level.').first().waitFor();
    await desk.getByRole('button', { name: 'Sign off' }).click();
    await picture(desk, 'desk-04-sign-off');
    await desk.getByRole('button', { name: 'Sign off' }).click();
    await desk.getByText(`Signed off by ${SUPERVISOR.name}`).first().waitFor();
    await picture(desk, 'desk-05-signed-off');
    await page.evaluate(() => dispatchEvent(new Event('focus'))); // somebody looks at the phone: it asks at once
    await page.getByText('Signed off. Nothing more to do here.').first().waitFor({ timeout: 60_000 });
    await picture(page, 'phone-14-signed-off');
    const rows = await onPhone(page);
    const entries = await compareLogs(server, job, rows);
    assert.equal(entries.length, rows.length + 4, 'planned, issued, sent back, signed off besides');
    assert.deepEqual(plainOnly(errors), []);
    assert.deepEqual(plainOnly(deskErrors), []);
  });
});

const draftsOf = (page) =>
  page.evaluate(
    () =>
      new Promise((resolve, reject) => {
        const opening = indexedDB.open('crossplumb');
        opening.onerror = () => reject(opening.error);
        opening.onsuccess = () => {
          const all = opening.result.transaction('drafts').objectStore('drafts').getAll();
          all.onsuccess = () => {
            opening.result.close();
            resolve(all.result.map((draft) => JSON.stringify(draft)));
          };
        };
      }),
  );

test('two like omnis set apart: the tape is read, an impossible distance is answered, a lost session loses nothing', { timeout: 120_000 }, async (t) => {
  const server = await Crossplumb.open(t, temporary('omnis-data'));
  const { climberLink } = await server.people();
  const job = await server.job('two-omnis-half-wavelength.json', 'Skerry Point');
  const phone = await openProfile(t, temporary('omnis-phone'), PHONE);
  const page = phone.pages()[0] ?? (await phone.newPage());
  const errors = complaints(page);
  await acceptInvitation(page, climberLink);
  await page.getByRole('link', { name: /Skerry Point/ }).click();
  await page.getByRole('link', { name: /^as found/ }).click();

  await openReading(page, 'as found', 'B position');
  await field(page).fill('-3');
  await keep(page).click();
  await page.getByText('A distance is never less than nothing').first().waitFor();
  assert.equal(await field(page).inputValue(), '-3');
  await picture(page, 'phone-20-distance-wrong');
  await page.getByRole('link', { name: 'Back' }).click();

  await read(page, 'as found', 'A skew', '0', '0,3');
  await read(page, 'as found', 'A tilt', '0', '0,3');
  await read(page, 'as found', 'B skew', '0,5', '0,3', 'right');
  await read(page, 'as found', 'B tilt', '0', '0,3');
  await read(page, 'as found', 'B position', '26,5', '1', 'right');
  const said = await until('a word', () => strip(page).evaluate((it) => (it.getAttribute('aria-busy') === 'false' ? it.dataset.word : '')), Boolean);
  assert.ok(['go', 'no-go', 'measure again'].includes(said), said);
  await picture(page, 'phone-21-omnis');
  await waiting(page, 0);

  // The server forgets the session (weeks have passed, or it was ended): what is read stays and goes up after signing in.
  await phone.clearCookies();
  await read(page, 'as found', 'A skew', '0,1', '0,3', 'left');
  await until('it asks to sign in again', () => standing(page).innerText(), (text) => text.includes('1 waiting') && text.includes('sign in again'));
  await page.goto(`${server.address}/#/`);
  await page.getByRole('link', { name: 'Sign in again' }).click();
  assert.equal(await page.getByLabel('Name').inputValue(), CLIMBER.name);
  await page.getByLabel('Passphrase', { exact: true }).fill('not this one');
  await page.getByRole('button', { name: 'Sign in', exact: true }).click();
  await page.getByText('Name or passphrase is not right.').waitFor();
  await picture(page, 'phone-22-sign-in-again');
  await page.getByLabel('Passphrase', { exact: true }).fill(CLIMBER.passphrase);
  await page.getByRole('button', { name: 'Sign in', exact: true }).click();
  await waiting(page, 0);
  await compareLogs(server, job, await onPhone(page));
  assert.deepEqual(plainOnly(errors), []);
});

test('two windows of one phone: one log, one sender, nothing twice', { timeout: 120_000 }, async (t) => {
  const server = await Crossplumb.open(t, temporary('windows-data'));
  const { climberLink } = await server.people();
  const job = await server.job('crossed-pair-go.json', 'Brae Hill');
  const phone = await openProfile(t, temporary('windows-phone'), PHONE);
  const one = phone.pages()[0] ?? (await phone.newPage());
  await acceptInvitation(one, climberLink);
  await one.getByRole('link', { name: /Brae Hill/ }).waitFor();
  const two = await phone.newPage();
  await two.goto(`${server.address}/#/job/${job}`);
  await one.goto(`${server.address}/#/job/${job}`);
  await server.kill();

  const note = async (page, text) => {
    await page.getByLabel('New note').fill(text);
    await page.getByRole('button', { name: 'Keep the note' }).click();
    await page.getByText(text, { exact: true }).waitFor();
  };
  for (let i = 1; i <= 4; i++) await Promise.all([note(one, `from one, ${i}`), note(two, `from two, ${i}`)]);
  await Promise.all([waiting(one, 8), waiting(two, 8)]);

  await server.start();
  await Promise.all([one, two].map((page) => page.evaluate(() => dispatchEvent(new Event('online')))));
  await Promise.all([waiting(one, 0), waiting(two, 0)]);
  const rows = await onPhone(one);
  assert.equal(rows.length, 8);
  await compareLogs(server, job, rows);
});
