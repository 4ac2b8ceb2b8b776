// Sending and bringing, against a server that answers as it should, as it should not, or not at all.
import 'fake-indexeddb/auto';
import assert from 'node:assert/strict';
import { beforeEach, test } from 'node:test';
import { compile } from './compiled.mjs';

const openWindow = compile();
const JOB = '0191e9a4-0000-7000-8000-000000000001';
const SESSION = { user: { id: 'u1', name: 'Una', role: 'climber', crew: 'west' }, until: '2027-01-01T00:00:00Z' };

/** A server in a few lines: it keeps what it stores, and `spoil` may answer in its place. */
class Server {
  stored = new Map();
  requests = [];
  epoch = 1;
  instance = 'first';
  spoil = null;

  answer = async (url, init = {}) => {
    const body = init.body === undefined ? undefined : JSON.parse(init.body);
    this.requests.push({ method: init.method, url, body, headers: init.headers });
    const spoilt = await this.spoil?.(url, body);
    if (spoilt) return spoilt;
    if (url === '/api/state') {
      return json({ instance: this.instance, epoch: this.epoch, head: this.head(), devices: this.devices() });
    }
    if (url === '/api/entries') return json({ answers: this.take(body.entries), epoch: this.epoch, head: this.head() });
    throw new Error(`no such route: ${url}`);
  };

  take(entries) {
    return entries.map(({ raw, hash }) => {
      const { id, device, device_seq } = JSON.parse(raw);
      const known = this.stored.get(id);
      if (known) return { id, status: 'duplicate', seq: known.seq, reason: null };
      this.stored.set(id, { seq: this.stored.size + 1, raw, hash, device, device_seq });
      return { id, status: 'stored', seq: this.stored.size, reason: null };
    });
  }

  head() {
    return { seq: this.stored.size, hash: 'h' };
  }

  devices() {
    const devices = {};
    for (const { device, device_seq, hash } of this.stored.values()) {
      if (device_seq === (devices[device]?.max_contiguous_seq ?? 0) + 1) devices[device] = { max_contiguous_seq: device_seq, hash };
    }
    return devices;
  }

  uploads() {
    return this.requests.filter((one) => one.url === '/api/entries').map((one) => one.body.entries.length);
  }
}

function json(value, status = 200, type = 'application/json', headers = {}) {
  return new Response(typeof value === 'string' ? value : JSON.stringify(value), { status, headers: { 'Content-Type': type, ...headers } });
}
const problem = (status, code) => json({ type: 'about:blank', title: code, status, detail: code, code }, status, 'application/problem+json');

let server;
let phone;

beforeEach(async (t) => {
  globalThis.indexedDB = new IDBFactory();
  server = new Server();
  t.mock.method(globalThis, 'fetch', server.answer);
  phone = await openWindow('store/database', 'store/entries', 'store/outbox', 'store/people', 'store/jobs', 'sync/push', 'sync/pull', 'sync/server', 'sync/session');
  await phone.keepSession(SESSION);
  t.after(() => phone.closeDatabase());
});

async function notes(count, text = 'note') {
  const ids = [];
  for (let i = 0; i < count; i++) ids.push((await phone.addEntry('note.added', JOB, null, { text: `${text} ${i}` })).id);
  return ids;
}

test('what waits goes up in order, byte for byte, at most fifty a request, and is then safe', async () => {
  await notes(120);
  await phone.push();
  assert.deepEqual(server.uploads(), [50, 50, 20]);
  const own = await phone.ownEntries();
  assert.deepEqual([...server.stored.values()].map((one) => one.raw), own.map((one) => one.raw));
  assert.ok(own.every((one) => one.whereabouts === 'safe' && one.seq !== null));
  assert.deepEqual(await phone.counts(), { waiting: 0, safe: 120, needsPerson: 0 });
  const upload = server.requests.find((one) => one.url === '/api/entries');
  assert.equal(upload.headers['X-Crossplumb'], '1');
  assert.equal(upload.headers['Content-Type'], 'application/json');
});

test('nothing that is not the server counts as an answer', async () => {
  const rows = {
    'no network': () => Promise.reject(new TypeError('fetch failed')),
    'the page of a captive portal': () => json('<html>Welcome</html>', 200, 'text/html'),
    'JSON under the wrong type': (body) => json({ answers: server.take(body.entries), epoch: 1, head: server.head() }, 200, 'text/plain'),
    'JSON cut short': () => json('{"answers":[{"id":"', 200),
    'another shape': () => json({ ok: true }),
    'answers without a head': (body) => json({ answers: server.take(body.entries), epoch: 1 }),
    'an unknown status': (body) => json({ answers: [{ id: JSON.parse(body.entries[0].raw).id, status: 'fine' }], epoch: 1, head: server.head() }),
    'the right words under the wrong status': (body) => json({ answers: server.take(body.entries), epoch: 1, head: server.head() }, 503),
    'busy': () => problem(503, 'busy'),
    'too many': () => problem(429, 'too_many'),
    'signed out': () => problem(401, 'signed_out'),
    'forbidden': () => problem(403, 'forbidden'),
    'broken': () => problem(500, 'internal'),
  };
  await notes(3);
  for (const [name, spoilt] of Object.entries(rows)) {
    server.spoil = (url, body) => (url === '/api/entries' ? spoilt(body) : null);
    await assert.rejects(phone.push(), Error, name);
    assert.deepEqual(await phone.counts(), { waiting: 3, safe: 0, needsPerson: 0 }, name);
  }
  server.spoil = null;
  await phone.push();
  assert.deepEqual(await phone.counts(), { waiting: 0, safe: 3, needsPerson: 0 });
});

test('an answer that was lost on the way: the entries go up again and are there once', async () => {
  const ids = await notes(5);
  let cut = true;
  server.spoil = (url, body) => {
    if (url !== '/api/entries' || !cut) return null;
    cut = false;
    server.take(body.entries); // it arrived; the answer does not
    throw new TypeError('connection reset');
  };
  await assert.rejects(phone.push(), { name: 'NoAnswer' });
  await phone.push();
  assert.deepEqual([...server.stored.keys()], ids);
  assert.equal((await phone.counts()).safe, 5);
});

test('only the entries that were answered for leave the outbox', async () => {
  const ids = await notes(3);
  let first = true;
  server.spoil = (url, body) => {
    if (url !== '/api/entries' || !first) return null;
    first = false;
    const answers = server.take(body.entries.slice(0, 2));
    return json({ answers: [...answers, { id: 'somebody else', status: 'stored', seq: 9, reason: null }], epoch: 1, head: server.head() });
  };
  await phone.push();
  assert.deepEqual(server.uploads(), [3, 1], 'the third is sent again by itself');
  assert.deepEqual([...server.stored.keys()], ids);
});

test('an answer about an entry that was not in the request is no answer', async () => {
  const ids = await notes(51);
  let first = true;
  server.spoil = (url, body) => {
    if (url !== '/api/entries' || !first) return null;
    first = false;
    const answers = server.take(body.entries);
    return json({ answers: [...answers, { id: ids[50], status: 'stored', seq: 51, reason: null }], epoch: 1, head: server.head() });
  };
  await phone.push();
  assert.deepEqual(server.uploads(), [50, 1]);
  assert.ok(server.stored.has(ids[50]));
});

test('a server that answers for nothing is not asked for ever', async () => {
  await notes(2);
  server.spoil = (url) => (url === '/api/entries' ? json({ answers: [], epoch: 1, head: server.head() }) : null);
  await assert.rejects(phone.push());
  assert.equal(server.uploads().length, 1);
  assert.equal((await phone.counts()).waiting, 2);
});

test('what the server sets apart is shown to a person with its reason, and does not hold up the rest', async () => {
  const ids = await notes(3);
  server.spoil = (url, body) => {
    if (url !== '/api/entries') return null;
    const answers = body.entries.map(({ raw }) => {
      const { id } = JSON.parse(raw);
      return id === ids[1] ? { id, status: 'quarantined', seq: null, reason: 'unknown job' } : { id, status: 'stored', seq: 1, reason: null };
    });
    return json({ answers, epoch: 1, head: server.head() });
  };
  await phone.push();
  assert.deepEqual(await phone.counts(), { waiting: 0, safe: 2, needsPerson: 1 });
  const [one] = await phone.needingPerson();
  assert.equal(one.entry.id, ids[1]);
  assert.equal(one.reason, 'unknown job');
  server.spoil = null;
  await phone.sendAgain(ids[1]);
  await phone.push();
  assert.deepEqual(await phone.counts(), { waiting: 0, safe: 3, needsPerson: 0 });
});

test('an entry that is refused outright is narrowed down to, set apart, and the others pass', async () => {
  const ids = await notes(9);
  server.spoil = (url, body) => {
    if (url !== '/api/entries') return null;
    return body.entries.some(({ raw }) => JSON.parse(raw).id === ids[4]) ? problem(400, 'malformed') : null;
  };
  await phone.push();
  assert.deepEqual(await phone.counts(), { waiting: 0, safe: 8, needsPerson: 1 });
  assert.ok(!server.stored.has(ids[4]));
});

test('a server restored from a backup gets again what it lost, and nothing is sent twice to one that lost nothing', async () => {
  const ids = await notes(6);
  await phone.push();
  for (const id of ids.slice(4)) server.stored.delete(id);
  server.epoch = 2;
  await phone.push();
  assert.deepEqual([...server.stored.keys()], ids);
  assert.deepEqual(server.uploads(), [6, 2]);
  await phone.push();
  assert.deepEqual(server.uploads(), [6, 2]);
});

test('a server that knows less than it once said gets it again, also without a new epoch; a refused number is no reason', async () => {
  const ids = await notes(4);
  let refuse = true;
  server.spoil = (url, body) => (refuse && url === '/api/entries' && body.entries.some(({ raw }) => JSON.parse(raw).id === ids[1]) ? problem(400, 'malformed') : null);
  await phone.push();
  assert.deepEqual([...server.stored.keys()], [ids[0], ids[2], ids[3]], 'a gap at the second');
  refuse = false;
  const sent = server.uploads().length;
  await phone.push();
  await phone.push();
  assert.equal(server.uploads().length, sent, 'the gap makes nothing go up again');
  server.stored.delete(ids[0]);
  await phone.push();
  assert.deepEqual([...server.stored.keys()].sort(), [...ids].sort(), 'the refused one was tried again with the rest');
  assert.deepEqual(await phone.counts(), { waiting: 0, safe: 4, needsPerson: 0 });
});

test('a server that lost what it acknowledged a moment ago gets it again: its log is shorter than it was', async () => {
  const ids = await notes(3);
  await phone.push(); // the only look at the server's state was before the upload
  server.stored.clear();
  await phone.push();
  assert.deepEqual([...server.stored.keys()], ids);
});

test('a restore between two batches of one sending is not overlooked', async () => {
  const ids = await notes(60);
  let batches = 0;
  server.spoil = (url) => {
    if (url === '/api/entries' && ++batches === 2) {
      for (const id of ids.slice(10, 50)) server.stored.delete(id);
      server.epoch = 2;
    }
    return null;
  };
  await phone.push();
  assert.deepEqual([...server.stored.keys()].sort(), ids);
  assert.deepEqual(await phone.counts(), { waiting: 0, safe: 60, needsPerson: 0 });
});

test('a job that comes without an entry that was called safe makes it go up again; what others wrote follows the server', async () => {
  const [kept, gone] = await notes(2);
  await phone.push();
  const [first, second] = await phone.ownEntries();
  const foreign = (id, device, device_seq) =>
    JSON.stringify({ id, device, device_seq, prev: '', job: JOB, mount: null, kind: 'note.added', schema: 1, at: '2026-11-30T09:12:00+01:00', mono_ms: 1, author: 'u2', app: 'x', body: { text: 'theirs' } });
  const summary = { id: JOB, site: 's', title: 't', crew: 'west', stage: 'issued', stage_seq: 2, visit_on: null, mounts: [], head_seq: 4, entries: 4, remark: null, handed_in_at: null, words: {} };
  const plan = { site: 's', title: 't', crew: 'west', visit_on: null, access: null, emergency: null, lat_deg: null, lon_deg: null, mounts: [] };
  const bring = async (...raws) => {
    summary.head_seq++;
    const entries = raws.map((raw, i) => ({ seq: i + 1, received_at: 'r', author_name: 'x', raw }));
    server.spoil = (url) => (url === '/api/jobs' ? json({ jobs: [summary] }) : url.startsWith('/api/jobs/') ? json({ job: summary, plan, entries, mounts: [], quarantined: 0 }) : null);
    await phone.pull();
  };
  await bring(first.raw, second.raw, foreign('0191e9a4-0000-7000-8000-00000000000a', 'd2', 7));
  assert.equal((await phone.entriesOf(JOB)).length, 3);
  assert.equal((await phone.counts()).waiting, 0);

  // Copied back from an older file: our second is not there, and the other device has another entry under its number.
  // Somebody wrote under our own device, too; that must not stop the job from coming.
  await bring(first.raw, foreign('0191e9a4-0000-7000-8000-00000000000b', 'd2', 7), foreign('0191e9a4-0000-7000-8000-00000000000c', first.entry.device, 2));
  assert.deepEqual((await phone.entriesOf(JOB)).map((one) => [one.entry.id, one.whereabouts]), [
    [kept, 'safe'],
    ['0191e9a4-0000-7000-8000-00000000000b', 'safe'],
    [gone, 'waiting'],
  ]);
  assert.deepEqual((await phone.nextBatch(50, 1e6)).map((one) => one.id), [gone]);
});

test('what was set apart while another person was signed in goes up again when its author comes back', async () => {
  const [mine] = await notes(1);
  const apart = () => (url, body) =>
    url === '/api/entries' ? json({ answers: body.entries.map(({ raw }) => ({ id: JSON.parse(raw).id, status: 'quarantined', seq: null, reason: 'unknown job' })), epoch: 1, head: server.head() }) : null;
  await phone.keepSession({ ...SESSION, user: { ...SESSION.user, id: 'u9', crew: 'east' } });
  server.spoil = apart();
  await phone.push();
  assert.deepEqual(await phone.counts(), { waiting: 0, safe: 0, needsPerson: 1 });
  await phone.keepSession({ ...SESSION, user: { ...SESSION.user, id: 'u8', crew: 'east' } });
  assert.equal((await phone.counts()).needsPerson, 1, 'a third person changes nothing');
  await phone.keepSession(SESSION);
  server.spoil = null;
  await phone.push();
  assert.deepEqual(await phone.counts(), { waiting: 0, safe: 1, needsPerson: 0 });
  assert.equal(JSON.parse(server.stored.get(mine).raw).author, 'u1', 'and it is still of who made it');
});

test('a window learns that another one signed somebody else in', async (t) => {
  const other = await openWindow('store/database', 'store/people', 'sync/session');
  t.after(() => other.closeDatabase());
  await other.readSession();
  assert.equal(other.session.value.user.id, 'u1');
  let told = 0;
  other.session.watch(() => told++);
  await phone.addEntry('note.added', JOB, null, { text: 'a change that is none of the session' });
  await phone.keepSession({ ...SESSION, user: { ...SESSION.user, id: 'u2', name: 'Ivo' } });
  for (let i = 0; i < 100 && other.session.value.user.id !== 'u2'; i++) await new Promise((resolve) => setTimeout(resolve, 20));
  assert.equal(other.session.value.user.id, 'u2');
  assert.equal(told, 1);
});

test('jobs come in with the entries of others, and own ones that come back are safe', async () => {
  const [mine] = await notes(1, 'mine');
  const raw = (await phone.ownEntries())[0].raw;
  const foreign = JSON.stringify({ id: '0191e9a4-0000-7000-8000-00000000000a', device: 'd2', device_seq: 7, prev: '', job: JOB, mount: null, kind: 'note.added', schema: 1, at: '2026-11-30T09:12:00+01:00', mono_ms: 1, author: 'u2', app: 'x', body: { text: 'theirs' } });
  const summary = { id: JOB, site: 'Gannet Head', title: 't', crew: 'west', stage: 'issued', stage_seq: 2, visit_on: null, mounts: [{ id: 'm1', name: 'north-east' }], head_seq: 4, entries: 4, remark: null, handed_in_at: null, words: {} };
  const plan = { site: 'Gannet Head', title: 't', crew: 'west', visit_on: null, access: null, emergency: null, lat_deg: null, lon_deg: null, mounts: [] };
  let pages = 0;
  server.spoil = (url) => {
    if (url === '/api/jobs') return json({ jobs: [summary] });
    if (url === `/api/jobs/${JOB}`) {
      pages++;
      const entries = [{ seq: 3, received_at: 'r', author_name: 'Una', raw }, { seq: 4, received_at: 'r', author_name: 'Ivo', raw: foreign }];
      return json({ job: summary, plan, entries, mounts: [], quarantined: 0 });
    }
    return null;
  };
  await phone.pull();
  const logged = await phone.entriesOf(JOB);
  assert.deepEqual(logged.map((one) => [one.entry.id, one.own, one.whereabouts, one.seq]), [
    [mine, true, 'safe', 3],
    ['0191e9a4-0000-7000-8000-00000000000a', false, 'safe', 4],
  ]);
  assert.equal((await phone.counts()).waiting, 0);
  assert.deepEqual(await phone.nextBatch(50, 1e6), [], 'it is not sent once more');
  await phone.pull();
  assert.equal(pages, 1, 'a job that did not move is not fetched again');
  summary.words = { m1: 'no-go' };
  await phone.pull();
  assert.deepEqual([(await phone.job(JOB)).summary.words, pages], [{ m1: 'no-go' }, 1], 'the word comes later, with the list');
  await phone.push();
  await phone.pull();
  assert.equal(pages, 1);
  server.epoch = 2;
  await phone.push();
  await phone.pull();
  assert.equal(pages, 2, 'after a restore every job is fetched again');

  server.spoil = (url) => (url === '/api/jobs' ? json({ jobs: [] }) : null);
  await phone.pull();
  assert.deepEqual(await phone.jobs(), []);
  assert.deepEqual((await phone.entriesOf(JOB)).map((one) => one.entry.id), [mine], 'what others wrote there is not kept');
  assert.equal((await phone.ownEntries()).length, 1, 'what was made here stays');
});

test('signing out is refused while something waits, and keeps the own log afterwards', async () => {
  await notes(2);
  server.spoil = (url) => (url === '/api/session' ? new Response(null, { status: 204 }) : null);
  await assert.rejects(phone.signOut(), { name: 'EntriesWait', waiting: 2 });
  assert.equal(server.requests.length, 0);
  await phone.push();
  await phone.signOut();
  assert.equal(await phone.keptSession(), null);
  assert.equal((await phone.ownEntries()).length, 2);
});

test('a store that cannot be opened leaves nobody signed in, and says why', async (t) => {
  await phone.closeDatabase();
  const broken = await openWindow('store/database', 'sync/session');
  t.mock.method(IDBFactory.prototype, 'open', () => {
    throw new DOMException('the disk is broken', 'UnknownError');
  });
  await assert.rejects(broken.readSession());
  assert.equal(broken.session.value, null);
  assert.equal(broken.storeHealth.value.state, 'failed');
  assert.match(broken.storeHealth.value.why, /the disk is broken/);
});

test('the wait doubles with chance in it, ends at five minutes, and respects what the server asks', async () => {
  const { waitAfter } = await openWindow('sync/backoff');
  assert.equal(waitAfter(0, null, 0), 1_000);
  assert.equal(waitAfter(0, null, 1), 2_000);
  assert.equal(waitAfter(3, null, 1), 16_000);
  assert.equal(waitAfter(50, null, 1), 300_000);
  assert.equal(waitAfter(50, null, 0), 150_000);
  assert.equal(waitAfter(0, 120, 0.5), 120_000);
});
