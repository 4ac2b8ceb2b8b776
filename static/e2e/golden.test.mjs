// The golden files in Chromium: the questions that calc answers natively and under Node, asked of the Worker and the
// wasm that the real server sends to a phone.
import assert from 'node:assert/strict';
import { readdirSync, readFileSync } from 'node:fs';
import path from 'node:path';
import { test } from 'node:test';
import { fileURLToPath } from 'node:url';
import { openProfile, PHONE, temporary } from './browser.mjs';
import { Crossplumb } from './crossplumb.mjs';

const folder = path.join(path.dirname(fileURLToPath(import.meta.url)), '..', '..', 'testdata', 'golden');

/** What is named must be there, numbers within the tolerance (|got − want| ≤ abs + rel·|want|), lists as long. */
function compare(at, got, want, { abs = 0, rel = 0 }) {
  if (typeof want === 'number') {
    assert.ok(typeof got === 'number' && Math.abs(got - want) <= abs + rel * Math.abs(want), `${at} is ${got}, want ${want}`);
  } else if (Array.isArray(want)) {
    assert.ok(Array.isArray(got) && got.length === want.length, `${at} is ${JSON.stringify(got)}, want ${want.length} items`);
    want.forEach((item, i) => compare(`${at}[${i}]`, got[i], item, { abs, rel }));
  } else if (want !== null && typeof want === 'object') {
    assert.ok(got !== null && typeof got === 'object', `${at} is ${JSON.stringify(got)}, want an object`);
    for (const [name, value] of Object.entries(want)) {
      assert.ok(name in got, `${at}.${name} is not in the answer`);
      compare(`${at}.${name}`, got[name], value, { abs, rel });
    }
  } else {
    assert.deepEqual(got, want, at);
  }
}

test('the golden files, in the Worker of the page', { timeout: 300_000 }, async (t) => {
  const server = await Crossplumb.open(t, temporary('golden-data'));
  const page = await (await openProfile(t, temporary('golden'), PHONE)).newPage();
  await page.goto(server.address);
  await page.evaluate(async () => {
    const list = await (await fetch('/gen/precache.js')).text();
    const worker = new Worker(/\/gen\/worker-[A-Z2-7]+\.js/.exec(list)[0]);
    let next = 0;
    globalThis.askCalc = (op, input) =>
      new Promise((resolve, reject) => {
        const id = ++next;
        worker.onmessage = ({ data }) => (data.id === id ? resolve(data) : reject(new Error(JSON.stringify(data))));
        worker.onerror = (event) => reject(new Error(event.message));
        worker.postMessage({ id, op, json: JSON.stringify(input) });
      });
  });

  const files = readdirSync(folder).filter((name) => name.endsWith('.json'));
  assert.ok(files.length >= 6, `${files.length} golden files`);
  for (const file of files) {
    for (const { name, op, in: input, out, problem, tolerance } of JSON.parse(readFileSync(path.join(folder, file), 'utf8'))) {
      await t.test(`${op}: ${name}`, async () => {
        const reply = await page.evaluate(([op, input]) => globalThis.askCalc(op, input), [op, input]);
        if (problem) {
          assert.ok(reply.problem, `answered ${reply.answer}`);
          assert.equal(reply.problem.code, problem.code);
          assert.equal(reply.problem.field, problem.field);
        } else {
          assert.ok(reply.answer, JSON.stringify(reply.problem));
          assert.ok(out, 'neither an answer nor a problem is expected');
          compare('out', JSON.parse(reply.answer), out, tolerance ?? {});
        }
      });
    }
  }
});
