// The queue before the Worker: order, a Worker that dies or hangs, questions that a later one replaces.
import assert from 'node:assert/strict';
import { test } from 'node:test';
import { compile } from './compiled.mjs';

const openWindow = compile();
const { CalcClient } = await openWindow('calc/client');

/** Workers that do as `behave` says; `made` lists them. */
function client(behave) {
  const made = [];
  const calc = new CalcClient(() => {
    const worker = {
      onmessage: null,
      onerror: null,
      asked: [],
      terminated: false,
      number: made.length + 1,
      postMessage(question) {
        worker.asked.push(question);
        setTimeout(() => {
          if (!worker.terminated) behave(worker, question, (reply) => worker.onmessage?.({ data: reply }));
        }, 1);
      },
      terminate() {
        worker.terminated = true;
      },
    };
    made.push(worker);
    return worker;
  });
  return { calc, made };
}

const echo = (_worker, { id, op, json }, reply) => reply({ id, answer: JSON.stringify({ op, in: JSON.parse(json) }), ms: 1 });

test('answers come in the order of the questions, one in the Worker at a time', async () => {
  let inside = 0;
  const { calc, made } = client((worker, question, reply) => {
    assert.equal(++inside, 1);
    setTimeout(() => {
      inside--;
      echo(worker, question, reply);
    }, 2);
  });
  const answers = await Promise.all([1, 2, 3].map((n) => calc.reckon('op', { n })));
  assert.deepEqual(answers.map((a) => a.in.n), [1, 2, 3]);
  assert.equal(made.length, 1);
  calc.stop();
});

test('a problem is a CalcProblem with code, field and message', async () => {
  const { calc } = client((_w, { id }, reply) => reply({ id, problem: { code: 'out_of_range', field: 'near.skew', message: 'at most 180' }, ms: 1 }));
  await assert.rejects(calc.reckon('op', {}), { name: 'CalcProblem', code: 'out_of_range', field: 'near.skew', message: 'at most 180' });
  calc.stop();
});

test('a Worker that died is replaced and the question asked again', async () => {
  const { calc, made } = client((worker, question, reply) => (worker.number === 1 ? reply({ dead: 'exited' }) : echo(worker, question, reply)));
  const [first, second] = await Promise.all([calc.reckon('a', 1), calc.reckon('b', 2)]);
  assert.deepEqual([first.op, second.op], ['a', 'b']);
  assert.equal(made.length, 2);
  assert.ok(made[0].terminated);
  calc.stop();
});

test('a question that kills every Worker is given up, and the next one is answered', async () => {
  const { calc, made } = client((worker, question, reply) => (question.op === 'poison' ? reply({ dead: 'exited' }) : echo(worker, question, reply)));
  const poison = calc.reckon('poison', {});
  const next = calc.reckon('good', {});
  await assert.rejects(poison, { code: 'unavailable' });
  assert.equal((await next).op, 'good');
  assert.equal(made.length, 3);
  calc.stop();
});

test('a Worker that cannot load says so', async () => {
  const { calc } = client((worker) => worker.onerror?.({ message: 'no such file' }));
  await assert.rejects(calc.reckon('op', {}), { code: 'unavailable', message: 'no such file' });
  calc.stop();
});

test('a question that hangs ends by its time, and the next one gets a new Worker', async () => {
  const { calc, made } = client((worker, question, reply) => question.op !== 'hang' && echo(worker, question, reply));
  const hang = calc.reckon('hang', {}, { timeoutMs: 20 });
  const next = calc.reckon('good', {});
  await assert.rejects(hang, { code: 'timeout' });
  assert.equal((await next).op, 'good');
  assert.equal(made.length, 2);
  calc.stop();
});

test('of questions with one key only the one being asked and the last one are answered', async () => {
  const { calc, made } = client(echo);
  const asked = [1, 2, 3, 4].map((n) => calc.reckon('mount.verdict', n, { replaces: 'm1' }));
  const settled = await Promise.allSettled(asked);
  assert.deepEqual(settled.map((s) => (s.status === 'fulfilled' ? s.value.in : s.reason.code)), [1, 'replaced', 'replaced', 4]);
  assert.equal(made[0].asked.length, 2);
  calc.stop();
});
