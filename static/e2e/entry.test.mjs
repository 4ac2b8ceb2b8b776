// What a person types: comma or point, size and direction, impossible values answered and kept; and how numbers are
// written back. Rules that hold without a browser; that the page shows them is seen in visit.test.mjs.
import assert from 'node:assert/strict';
import { test } from 'node:test';
import { compile } from './compiled.mjs';

const openWindow = compile();
const page = await openWindow('parts/number', 'phone/entry', 'phone/route', 'phone/log', 'phone/steps', 'words/figures');

const draft = (value, way = null, u = '0.3') => ({ fields: { value: { text: value, way } }, u, method: 'level', instrument: '', more: false });
const place = (axes, u = '3') => ({
  fields: Object.fromEntries(Object.entries(axes).map(([axis, [text, way]]) => [axis, { text, way }])),
  u,
  method: 'tape',
  instrument: '',
  more: true,
});

test('comma and point are both decimal signs, two of them are refused', () => {
  const { readNumber } = page;
  for (const [text, value] of [['6,2', 6.2], ['6.2', 6.2], [' 6,2 ', 6.2], ['.5', 0.5], ['5,', 5], ['-1.5', -1.5], ['\u22121,5', -1.5], ['+3', 3], ['007', 7]]) {
    assert.deepEqual(readNumber(text), { ok: true, value }, text);
  }
  for (const [text, why] of [['', 'empty'], ['  ', 'empty'], ['abc', 'not a number'], ['6.2.', 'two signs'], ['1.234,5', 'two signs'], ['1e3', 'not a number'], ['Infinity', 'not a number'], ['6°', 'not a number'], ['-', 'not a number']]) {
    assert.deepEqual(readNumber(text), { ok: false, why }, text);
  }
});

test('a direction is a sign: anticlockwise, down and left are less than nothing', () => {
  const value = (quantity, d) => page.check(quantity, d, 'A', true).reading?.value;
  assert.equal(value('skew', draft('6,2', 'more')), 6.2);
  assert.equal(value('skew', draft('6,2', 'less')), -6.2);
  assert.equal(value('tilt', draft('3', 'less')), -3);
  assert.equal(value('azimuth', draft('47.3')), 47.3);
  assert.equal(value('azimuth', draft('360')), 360);
  assert.equal(value('skew', draft('0')), 0, 'nothing leans no way');
  assert.deepEqual(value('position', place({ right: ['412', 'less'], up: ['', null], forward: ['', null] })), { right: -412, up: null, forward: null });
  assert.deepEqual(value('position', place({ right: ['0', null], up: ['5', 'more'] })), { right: 0, up: 5, forward: null });
});

test('a typed sign stands for its direction and wins over the chosen word', () => {
  assert.equal(page.check('skew', draft('-6.2', 'more'), 'A', true).reading.value, -6.2);
  assert.equal(page.check('skew', draft('\u22126.2', null), 'A', true).reading.value, -6.2);
  assert.equal(page.wayOf({ text: '+1', way: 'less' }), 'more');
  assert.equal(page.wayOf({ text: '1', way: 'less' }), 'less');
});

test('without a direction there is no reading, and the person is asked for it only when keeping', () => {
  const typing = page.check('skew', draft('6.2'), 'A', false);
  assert.equal(typing.reading, null);
  assert.deepEqual(typing.wayless, {});
  const kept = page.check('skew', draft('6.2'), 'A', true);
  assert.equal(kept.reading, null);
  assert.deepEqual(kept.wayless, { value: true });
});

test('impossible values get an answer that repeats what was typed, and make no reading', () => {
  const rows = [
    ['skew', draft('400', 'more'), 'value', /400/],
    ['skew', draft('abc', 'more'), 'value', /abc/],
    ['tilt', draft('91', 'more'), 'value', /91/],
    ['azimuth', draft('-1'), 'value', /-1/],
    ['azimuth', draft('360,5'), 'value', /360,5/],
    ['skew', draft('6.2', 'more', '0'), 'u', /0/],
    ['skew', draft('6.2', 'more', '-1'), 'u', /0/],
    ['skew', draft('6.2', 'more', 'x'), 'u', /x/],
    ['skew', draft('6.2', 'more', ''), 'u', /\S/],
    ['skew', draft('', 'more'), 'value', /\S/],
    ['position', place({ right: ['-3', 'more'] }), 'right', /minus/],
    ['position', place({ right: ['100001', 'more'] }), 'right', /100/],
    ['position', place({ right: ['4..2', 'more'] }), 'right', /4\.\.2/],
    ['position', place({ right: ['', null] }), 'all', /\S/],
  ];
  for (const [quantity, d, field, says] of rows) {
    const checked = page.check(quantity, d, 'A', true);
    assert.equal(checked.reading, null, `${quantity} ${JSON.stringify(d.fields)}`);
    assert.match(checked.errors[field] ?? '', says, `${quantity} ${field}`);
  }
});

test('one wrong axis keeps the whole position from being kept', () => {
  const checked = page.check('position', place({ right: ['412', 'more'], up: ['x', 'more'] }), 'A', true);
  assert.equal(checked.reading, null);
  assert.ok(checked.errors.up);
  assert.equal(checked.errors.right, undefined);
});

test('what is only begun is not called wrong while it is typed', () => {
  for (const text of ['', '-', '+', '.', ',', '-,']) {
    assert.deepEqual(page.check('skew', draft(text, 'more'), 'A', false).errors, {}, text);
  }
  assert.deepEqual(page.check('skew', draft('6', 'more', '0,'), 'A', false).errors, {}, 'doubt on its way to 0,3');
});

test('a reading far from the plan is pointed out, one near is not', () => {
  assert.equal(page.farFromPlan('skew', 6.2, 0), null);
  assert.match(page.farFromPlan('skew', 62, 0), /62/);
  assert.equal(page.farFromPlan('azimuth', 359, 2), null, 'three degrees across north are three degrees');
  assert.match(page.farFromPlan('azimuth', 182, 2), /180/);
  assert.match(page.farFromPlan('position', { right: 42, up: null, forward: null }, { right: 412, up: 0, forward: 0 }), /370/);
});

test('an address leads back to the page that it was made for', () => {
  const routes = [
    { page: 'jobs' },
    { page: 'apart' },
    { page: 'enter', invitation: null },
    { page: 'enter', invitation: 'a b/c#d' },
    { page: 'job', job: 'j/1' },
    { page: 'before', job: 'j1' },
    { page: 'hand-in', job: 'j1' },
    { page: 'mount', job: 'j1', mount: 'm 1', step: 'adjust' },
    { page: 'verdict', job: 'j1', mount: 'm1', step: 'as-left' },
    { page: 'reading', job: 'j1', mount: 'm1', step: 'as-found', antenna: 'A/1', quantity: 'position' },
  ];
  for (const route of routes) assert.deepEqual(page.routeOf(page.hrefOf(route)), route);
  for (const nowhere of ['', '#', '#/nowhere', '#/job/%E0%A4%A', '#/job/j1/mount/m1/sideways']) assert.ok(page.routeOf(nowhere).page);
});

test('a number is written with the figures that its doubt deserves, and never as certainty', () => {
  // At most two significant figures of a standard uncertainty (JCGM 100:2008, 7.2.6, from memory); here one, two where it begins with 1.
  assert.equal(page.withDoubt(19.13, 2.1), '19 ± 2');
  assert.equal(page.withDoubt(9.347, 0.19), '9.35 ± 0.19');
  assert.equal(page.withDoubt(0.214, 0.062), '0.21 ± 0.06');
  assert.equal(page.withDoubt(412.4, 12), '412 ± 12');
  assert.equal(page.withDoubt(3.25, 0), '3.3');
  assert.equal(page.withDoubt(0.00001, 0.00002, 2), '0', 'a doubt that would be shown as nothing is not shown');
  assert.equal(page.figure(-0.04, 1), '0.0', 'nothing has no sign');
  assert.equal(page.figure(-6.2, 1), '\u22126.2');
  assert.equal(page.percent(1), '> 99');
  assert.equal(page.percent(0.949), '94');
  assert.equal(page.percent(0), '< 1');
});

test('readings stand until taken back, and as left only since the bolt was last turned', () => {
  let n = 0;
  const entry = (kind, body, more = {}) => ({
    entry: { id: `e${++n}`, kind, mount: 'm1', at: `2026-11-30T09:0${n}:00+01:00`, body, ...more },
    whereabouts: 'waiting',
    own: true,
  });
  const reading = (phase, value) => entry('reading.taken', { phase, antenna: 'A', quantity: 'skew', reading: { value }, typed: String(value) });
  const values = (log, phase) => page.standing(log, 'm1', phase, 'A', 'skew').map(({ entry: e }) => e.body.reading.value);
  const found = reading('as_found', 6.2);
  const left = reading('as_left', 1);
  const log = [found, left, reading('as_left', 2)];
  assert.deepEqual(values(log, 'as_left'), [1, 2], 'pooled, not replaced');
  log.push(entry('bolt.moved', { antenna: 'A', quantity: 'tilt' }));
  assert.deepEqual(values(log, 'as_left'), [1, 2], "another bolt's turn");
  log.push(entry('bolt.moved', { antenna: 'A', quantity: 'skew' }));
  assert.deepEqual(values(log, 'as_left'), []);
  assert.deepEqual(values(log, 'as_found'), [6.2], 'as found is what was found');
  log.push(reading('as_left', 0.4), entry('reading.withdrawn', { withdraws: found.entry.id }));
  assert.deepEqual(values(log, 'as_left'), [0.4]);
  assert.deepEqual(values(log, 'as_found'), []);
  log.push({ ...reading('as_left', 9), whereabouts: 'needs person' });
  assert.deepEqual(values(log, 'as_left'), [0.4], 'what the server set apart counts for nobody');
  assert.equal(page.lastTurn(log, 'm1', 'A', 'skew'), '2026-11-30T09:05:00+01:00');
  assert.deepEqual(page.forFold(log, 'm1').map((e) => e.kind).filter((k) => k === 'bolt.moved').length, 2);
});

const pathOf = (antennas, entries) => {
  const mount = { id: 'm1', name: 'M', sheet: { near: { antennas } } };
  const job = { summary: { id: 'j' }, stage: 'issued', plan: { mounts: [mount] } };
  const log = entries.map(([kind, body], i) => ({ whereabouts: 'waiting', entry: { id: `e${i}`, device: 'd', device_seq: i + 1, mount: 'm1', kind, body, at: `2026-06-01T10:00:${10 + i}Z` } }));
  return page.stepsOf(job, log, 'm1').find((step) => step.key === 'aim');
};
const panel = (id) => ({ id, pattern: { kind: 'sector' }, azimuth: {}, elements: [] });
const asFound = ['reading.taken', { phase: 'as_found', antenna: 'A', quantity: 'azimuth', reading: { value: 47, method: 'sight' }, typed: '47' }];
const sight = (antenna, reference) => ['sight.taken', { antenna, phase: 'as_left', reference }];

test('the square "aim" is filled by aiming, not by an azimuth that was merely read', () => {
  const done = (entries, antennas = [panel('A')]) => pathOf(antennas, entries).done;
  assert.equal(done([]), false);
  assert.equal(done([asFound]), false, 'read as found');
  for (const reference of ['sun', 'landmark', 'compass']) assert.equal(done([sight('A', reference)]), true, reference);
  assert.equal(done([['level.stepped', { antenna: 'A' }]]), false, 'a search under way');
  assert.equal(done([['peak.fitted', { antenna: 'A' }]]), true, 'a peak kept');
  assert.equal(done([['obstacle.noted', {}]]), true, 'the path looked after');
  assert.equal(done([['obstacle.noted', {}], ['reading.withdrawn', { withdraws: 'e0' }]]), false, 'and taken back');
  assert.equal(done([sight('A', 'sun'), asFound, ['reading.withdrawn', { withdraws: 'e1' }]]), false, 'the sight’s reading taken back');
  assert.equal(done([sight('A', 'compass'), asFound, ['reading.withdrawn', { withdraws: 'e1' }]]), true, 'another reading taken back');
  assert.equal(done([sight('A', 'sun'), ['bolt.moved', { antenna: 'A', quantity: 'azimuth' }]]), false, 'turned since');
  assert.equal(done([sight('A', 'sun')], [panel('A'), panel('B')]), false, 'one of two');
  assert.equal(done([sight('A', 'sun'), sight('B', 'sun')], [panel('A'), panel('B')]), true);
});

test('a rod has nothing to aim: neither done nor open', () => {
  const rod = { id: 'A', pattern: { kind: 'omni' }, azimuth: {}, elements: [] };
  for (const entries of [[], [asFound]]) {
    const step = pathOf([rod], entries);
    assert.deepEqual([step.done, step.needless], [false, true]);
  }
  assert.equal(pathOf([rod, panel('B')], []).needless, false);
});

test('a distance is shown with the decimals that were read', () => {
  for (const [values, decimals] of [[[62.5, 0, 0], 1], [[62], 0], [[], 0], [[0.1 + 0.2], 1], [[-12.25, 3], 2], [[1 / 3], 3]]) {
    assert.equal(page.decimalsIn(values), decimals, String(values));
  }
  assert.equal(page.shortest(62.5, page.decimalsIn([62.5])), '62.5');
});
