// The full verdict of every sheet in testdata/jobs, timed in the Worker and wasm of the page in Chromium, beside the
// same question asked of the native code by the same machine in the same run. Prints medians; judges nothing.
import { execFileSync } from 'node:child_process';
import { readdirSync, readFileSync } from 'node:fs';
import path from 'node:path';
import { test } from 'node:test';
import { fileURLToPath } from 'node:url';
import { openProfile, PHONE, temporary } from '../e2e/browser.mjs';
import { Crossplumb } from '../e2e/crossplumb.mjs';

const root = path.join(path.dirname(fileURLToPath(import.meta.url)), '..', '..');
const jobs = path.join(root, 'testdata', 'jobs');
const rounds = 15;

function median(values) {
  const sorted = [...values].sort((a, b) => a - b);
  return sorted[Math.floor(sorted.length / 2)];
}

/** Milliseconds a verdict by BenchmarkJudge, median of three, by the name of the sheet. */
function native() {
  const out = execFileSync('go', ['test', '-run', '^$', '-bench', 'Judge', '-count', '3', './calc/verdict'], { cwd: root, encoding: 'utf8' });
  const found = new Map();
  for (const [, name, ns] of out.matchAll(/^BenchmarkJudge\/(\S+?)(?:-\d+)?\s+\d+\s+(\d+(?:\.\d+)?) ns\/op/gm)) {
    found.set(name, [...(found.get(name) ?? []), Number(ns) / 1e6]);
  }
  return new Map([...found].map(([name, ms]) => [name, median(ms)]));
}

test('verdicts, native and in Chromium', { timeout: 900_000 }, async (t) => {
  const server = await Crossplumb.open(t, temporary('bench-data'));
  const page = await (await openProfile(t, temporary('bench'), PHONE)).newPage();
  await page.goto(server.address);
  const rows = [];
  for (const file of readdirSync(jobs).filter((name) => name.endsWith('.json'))) {
    const sheet = readFileSync(path.join(jobs, file), 'utf8');
    const taken = await page.evaluate(
      async ([sheet, rounds]) => {
        const list = await (await fetch('/gen/precache.js')).text();
        const worker = new Worker(/\/gen\/worker-[A-Z2-7]+\.js/.exec(list)[0]);
        const ask = (id) =>
          new Promise((resolve, reject) => {
            worker.onmessage = ({ data }) => (data.answer ? resolve(data) : reject(new Error(JSON.stringify(data))));
            worker.postMessage({ id, op: 'mount.verdict', json: sheet });
          });
        await ask(0);
        const ms = [];
        for (let i = 1; i <= rounds; i++) {
          const began = performance.now();
          await ask(i);
          ms.push(performance.now() - began);
        }
        worker.terminate();
        return ms;
      },
      [sheet, rounds],
    );
    rows.push([file.replace('.json', ''), median(taken)]);
  }
  const own = native();
  console.log('| sheet | native ms | Chromium wasm ms | ratio |\n|---|---|---|---|');
  for (const [name, ms] of rows) {
    const ref = own.get(name);
    console.log(`| ${name} | ${ref?.toFixed(1) ?? 'not measured'} | ${ms.toFixed(1)} | ${ref ? (ms / ref).toFixed(1) : ''} |`);
  }
});
