// The log on the phone: rules that hold in any browser, on an IndexedDB in memory. That a real browser keeps what it
// says is shown in visit.test.mjs.
import 'fake-indexeddb/auto';
import assert from 'node:assert/strict';
import { createHash } from 'node:crypto';
import { beforeEach, test } from 'node:test';
import { compile } from './compiled.mjs';

const openWindow = compile();
const JOB = '0191e9a4-0000-7000-8000-000000000001';
const SESSION = { user: { id: 'u1', name: 'Una', role: 'climber', crew: 'west' }, until: '2027-01-01T00:00:00Z' };

async function storeWindow() {
  const store = await openWindow('store/database', 'store/entries', 'store/drafts', 'store/outbox', 'store/jobs', 'store/people');
  return store;
}

beforeEach(() => {
  globalThis.indexedDB = new IDBFactory(); // an empty phone
});

const sha256 = (text) => createHash('sha256').update(text, 'utf8').digest('hex');

function assertChain(logged) {
  let prev = '';
  logged.forEach(({ entry, raw, hash }, i) => {
    assert.equal(entry.device_seq, i + 1, 'device_seq has no gaps');
    assert.equal(entry.prev, prev, 'prev is the hash of the entry before');
    assert.equal(hash, sha256(raw), 'hash is that of the raw text');
    assert.deepEqual(JSON.parse(raw), entry);
    prev = hash;
  });
}

test('entries made at once keep the order of the calls, without gaps, chained', async () => {
  const store = await storeWindow();
  await store.keepSession(SESSION);
  await Promise.all(Array.from({ length: 25 }, (_, i) => store.addEntry('note.added', JOB, null, { text: `note ${i} – 6,2°` })));
  const logged = await store.ownEntries();
  assert.equal(logged.length, 25);
  assertChain(logged);
  assert.deepEqual(logged.map((one) => one.entry.body.text), Array.from({ length: 25 }, (_, i) => `note ${i} – 6,2°`));
  assert.deepEqual(await store.counts(), { waiting: 25, safe: 0, needsPerson: 0 });
  await store.closeDatabase();
});

test('two windows of one phone write one chain', async () => {
  const [one, two] = [await storeWindow(), await storeWindow()];
  await one.keepSession(SESSION);
  await Promise.all(
    Array.from({ length: 12 }, (_, i) => [
      one.addEntry('note.added', JOB, null, { text: `one ${i}` }),
      two.addEntry('note.added', JOB, null, { text: `two ${i}` }),
    ]).flat(),
  );
  const logged = await two.ownEntries();
  assert.equal(logged.length, 24);
  assertChain(logged);
  assert.equal(new Set(logged.map((l) => l.entry.device)).size, 1, 'one device');
  await Promise.all([one.closeDatabase(), two.closeDatabase()]);
});

test('an entry has an author, or there is none', async () => {
  const store = await storeWindow();
  await assert.rejects(store.addEntry('note.added', JOB, null, { text: 'nobody' }), { name: 'NotSignedIn' });
  assert.deepEqual(await store.ownEntries(), []);
  await store.keepSession(SESSION);
  const entry = await store.addEntry('note.added', JOB, null, { text: 'Una' });
  assert.equal(entry.author, 'u1');
  assert.equal(entry.device_seq, 1, 'the refused one took no number');
  await store.closeDatabase();
});

test('a transaction that fails leaves neither entry nor outbox nor a moved head, and the next entry works', async (t) => {
  const store = await storeWindow();
  await store.keepSession(SESSION);
  await store.addEntry('note.added', JOB, null, { text: 'first' });
  await store.setDraft('d', '6,');
  const put = IDBObjectStore.prototype.put;
  t.mock.method(IDBObjectStore.prototype, 'put', function (value, key) {
    if (key === 'device') throw new DOMException('the phone is full', 'QuotaExceededError');
    return put.call(this, value, key);
  });
  await assert.rejects(store.addEntry('note.added', JOB, null, { text: 'lost' }, { dropsDraft: 'd' }));
  t.mock.restoreAll();
  assert.equal((await store.ownEntries()).length, 1);
  assert.equal((await store.nextBatch(50, 1e6)).length, 1);
  assert.equal(await store.getDraft('d'), '6,', 'what was typed stays');
  await store.addEntry('note.added', JOB, null, { text: 'second' }, { dropsDraft: 'd' });
  assertChain(await store.ownEntries());
  assert.equal(await store.getDraft('d'), undefined, 'the draft went with the entry');
  await store.closeDatabase();
});

test('entries and outbox are written with strict durability', async (t) => {
  const store = await storeWindow();
  await store.keepSession(SESSION);
  await store.addEntry('note.added', JOB, null, { text: 'makes the device' });
  const asked = [];
  const transaction = IDBDatabase.prototype.transaction;
  t.mock.method(IDBDatabase.prototype, 'transaction', function (names, mode, options) {
    if (mode === 'readwrite') asked.push(options?.durability);
    return transaction.call(this, names, mode, options);
  });
  await store.addEntry('note.added', JOB, null, { text: 'kept' });
  await store.setDraft('d', 1);
  assert.ok(asked.length >= 2);
  assert.deepEqual([...new Set(asked)], ['strict']);
  await store.closeDatabase();
});

test('a batch is the oldest entries that fit, and at least one', async () => {
  const store = await storeWindow();
  await store.keepSession(SESSION);
  for (let i = 0; i < 5; i++) await store.addEntry('note.added', JOB, null, { text: 'x'.repeat(1000) });
  const seqs = async (...limits) => (await store.nextBatch(...limits)).map((one) => one.device_seq);
  assert.deepEqual(await seqs(3, 1e6), [1, 2, 3]);
  assert.deepEqual(await seqs(50, 3500), [1, 2]);
  assert.deepEqual(await seqs(50, 10), [1]);
  await store.closeDatabase();
});

test('an entry that waits and is not in the outbox is put there at the next start', async () => {
  const store = await storeWindow();
  await store.keepSession(SESSION);
  for (let i = 0; i < 3; i++) await store.addEntry('note.added', JOB, null, { text: `note ${i}` });
  assert.equal(await store.mendOutbox(), 0);
  await store.write(['outbox'], (tx) => tx.objectStore('outbox').delete(2));
  assert.equal(await store.outgoing(), 2);
  assert.equal(await store.mendOutbox(), 1);
  assert.deepEqual((await store.nextBatch(50, 1e6)).map((one) => one.device_seq), [1, 2, 3]);
  await store.closeDatabase();
});

test('a newer page that upgrades the store is not held up, and this page says that it is outdated', async () => {
  const store = await storeWindow();
  await store.keepSession(SESSION);
  await new Promise((resolve, reject) => {
    const newer = indexedDB.open(store.NAME, 99);
    newer.onsuccess = () => resolve(newer.result.close());
    newer.onerror = () => reject(newer.error);
    newer.onblocked = () => reject(new Error('blocked: the old page did not let go'));
  });
  assert.equal(store.storeHealth.value.state, 'outdated');
  await assert.rejects(store.addEntry('note.added', JOB, null, { text: 'too late' }), /reload/);
});

test('a lost connection is opened once more', async () => {
  const store = await storeWindow();
  await store.keepSession(SESSION);
  (await store.database()).close(); // as iOS does it: without a word
  const entry = await store.addEntry('note.added', JOB, null, { text: 'after' });
  assert.equal(entry.device_seq, 1);
  await store.closeDatabase();
});

test('every request went well, but the disk did not take it: the entry is not called kept', async (t) => {
  const store = await storeWindow();
  await store.keepSession(SESSION);
  await store.addEntry('note.added', JOB, null, { text: 'first' });
  const put = IDBObjectStore.prototype.put;
  t.mock.method(IDBObjectStore.prototype, 'put', function (value, key) {
    const request = put.call(this, value, key);
    if (key === 'device') request.addEventListener('success', () => this.transaction.abort()); // as a full disk does at commit
    return request;
  });
  await assert.rejects(store.addEntry('note.added', JOB, null, { text: 'not kept' }));
  t.mock.restoreAll();
  assert.deepEqual((await store.ownEntries()).map((one) => one.entry.body.text), ['first']);
  await store.closeDatabase();
});

test('a connection that is lost after the entry was written does not make it twice', async (t) => {
  const store = await storeWindow();
  await store.keepSession(SESSION);
  await store.addEntry('note.added', JOB, null, { text: 'makes the device' });
  const transaction = IDBDatabase.prototype.transaction;
  let lost = false;
  t.mock.method(IDBDatabase.prototype, 'transaction', function (names, mode, options) {
    const tx = transaction.call(this, names, mode, options);
    if (lost || mode !== 'readwrite' || !names.includes('outbox')) return tx;
    lost = true;
    // It completes, but the page is told that the connection is gone, as iOS does it.
    const add = tx.addEventListener.bind(tx);
    const gone = () => Object.defineProperty(tx, 'error', { value: new DOMException('connection to the server lost', 'UnknownError') });
    tx.addEventListener = (type, listener) => {
      if (type === 'abort') add('complete', () => (gone(), listener()));
      else if (type !== 'complete') add(type, listener);
    };
    return tx;
  });
  const entry = await store.addEntry('note.added', JOB, null, { text: 'once' });
  assert.ok(lost);
  const logged = await store.ownEntries();
  assert.deepEqual(logged.map((one) => one.entry.body.text), ['makes the device', 'once']);
  assert.equal(logged[1].entry.id, entry.id);
  assertChain(logged);
  await store.closeDatabase();
});

test('on a phone that two people share, what the other one read is not yours, and bears the name', async () => {
  const store = await storeWindow();
  await store.keepSession(SESSION);
  await store.addEntry('note.added', JOB, null, { text: 'of Una' });
  await store.keepSession({ ...SESSION, user: { ...SESSION.user, id: 'u2', name: 'Ivo' } });
  await store.addEntry('note.added', JOB, null, { text: 'of Ivo' });
  const seen = (log) => log.map((one) => [one.entry.author, one.author_name, one.own]);
  assert.deepEqual(seen(await store.entriesOf(JOB)), [['u1', 'Una', false], ['u2', 'Ivo', true]]);
  await store.keepSession(SESSION);
  assert.deepEqual(seen(await store.ownEntries()), [['u1', 'Una', true], ['u2', 'Ivo', false]]);
  await store.closeDatabase();
});

test('an entry that went up late is read at the place that its device gave it', async () => {
  const store = await storeWindow();
  await store.keepSession(SESSION);
  const made = [];
  for (let i = 0; i < 4; i++) made.push((await store.addEntry('note.added', JOB, null, { text: `${i}` })).id);
  const at = [10, 12, 11]; // the second came after the third; the fourth waits
  await store.settle(at.map((seq, i) => ({ id: made[i], whereabouts: 'safe', seq, reason: null })));
  assert.deepEqual((await store.entriesOf(JOB)).map((one) => one.entry.device_seq), [1, 2, 3, 4]);
  await store.closeDatabase();
});

test('the stage follows from what waits here', async () => {
  const { stageAfter } = await storeWindow();
  for (const [from, kinds, to] of [
    ['issued', [], 'issued'],
    ['issued', ['note.added'], 'issued'],
    ['issued', ['caution.confirmed'], 'under way'],
    ['issued', ['reading.taken', 'job.handed_in'], 'handed in'],
    ['sent back', ['reading.taken'], 'under way'],
    ['sent back', ['note.added', 'job.handed_in'], 'handed in'],
    ['handed in', ['reading.taken'], 'handed in'],
    ['signed off', ['reading.taken', 'job.handed_in'], 'signed off'],
  ]) {
    assert.equal(stageAfter(from, kinds), to, `${from} + ${kinds}`);
  }
});

test('local time carries the offset of the place', async () => {
  const { localTime } = await openWindow('store/time');
  const before = process.env.TZ;
  try {
    for (const [zone, at, want] of [
      ['UTC', '2026-11-30T09:12:00.005Z', '2026-11-30T09:12:00.005+00:00'],
      ['Asia/Kolkata', '2026-11-30T09:12:00Z', '2026-11-30T14:42:00.000+05:30'],
      ['America/St_Johns', '2026-07-01T00:10:00Z', '2026-06-30T21:40:00.000-02:30'],
      ['Europe/Madrid', '2026-11-30T23:30:00Z', '2026-12-01T00:30:00.000+01:00'],
    ]) {
      process.env.TZ = zone;
      assert.equal(localTime(new Date(at)), want, zone);
    }
  } finally {
    if (before === undefined) delete process.env.TZ;
    else process.env.TZ = before;
  }
});

test('storage is called protected only when the browser said so, and it is asked until it does', async (t) => {
  const before = Object.getOwnPropertyDescriptor(globalThis, 'navigator');
  t.after(() => (before ? Object.defineProperty(globalThis, 'navigator', before) : delete globalThis.navigator));
  for (const [persisted, persist, want, asked] of [
    [true, false, 'protected', 0],
    [false, true, 'protected', 1],
    [false, false, 'not protected', 1],
    [new Error('no'), false, 'unknown', 0],
  ]) {
    let times = 0;
    const storage = {
      persisted: async () => {
        if (persisted instanceof Error) throw persisted;
        return persisted;
      },
      persist: async () => {
        times++;
        return persist;
      },
    };
    Object.defineProperty(globalThis, 'navigator', { value: { storage }, configurable: true });
    const phone = await openWindow('store/protection');
    assert.equal(phone.storageProtection.value, 'unknown');
    await phone.askForProtection();
    assert.deepEqual([phone.storageProtection.value, times], [want, asked]);
  }
});
