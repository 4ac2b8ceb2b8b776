// Sends what waits, oldest first, in batches; an entry is settled only by an answer about that very entry.
import { doubtHeads } from '../store/jobs.ts';
import { localTime } from '../store/time.ts';
import { deviceId, knownServer, nextBatch, noteServer, sendAgainAfter, settle } from '../store/outbox.ts';
import type { Outgoing, Settled } from '../store/outbox.ts';
import { ask, ServerProblem } from './server.ts';
import { isServerState, isUploadAnswer } from './shapes.ts';
import type { UploadAnswer } from './shapes.ts';

/** The server's limits are 50 entries and 256 KiB a request; some room is left for the frame. */
const MOST = 50;
const MOST_BYTES = 240 * 1024;

/** Sends until nothing waits. Throws NoAnswer or ServerProblem when it has to stop; then everything unanswered still waits. */
export async function push(): Promise<void> {
  await compareEpoch();
  let most = MOST;
  for (;;) {
    const batch = await nextBatch(most, MOST_BYTES);
    if (batch.length === 0) return;
    try {
      const answer = await upload(batch);
      const settled = answersFor(batch, answer);
      await settle(settled);
      const known = await knownServer();
      // Not the epoch: only compareEpoch may note another one, after it has drawn the consequence.
      await noteServer({ ...known, head_seq: answer.head.seq, head_hash: answer.head.hash });
      if (settled.length === 0) throw new ServerProblem(200, 'silent', '', 'the server answered for none of the entries', null);
      if (known.epoch !== null && known.epoch !== answer.epoch) await compareEpoch();
      most = MOST;
    } catch (error) {
      if (!(error instanceof ServerProblem) || !aboutTheContent(error)) throw error;
      // One entry that the server cannot read must not block those behind it: narrow down to it and set it apart.
      if (batch.length > 1) {
        most = Math.max(1, Math.floor(batch.length / 2));
        continue;
      }
      await settle(batch.map((one) => ({ id: one.id, whereabouts: 'needs person', seq: null, reason: error.message })));
    }
  }
}

/** The server should set such entries apart by itself; this is for a server or a proxy that refuses them outright. */
function aboutTheContent(problem: ServerProblem): boolean {
  return problem.status === 400 || problem.status === 413 || problem.status === 422;
}

function upload(batch: Outgoing[]): Promise<UploadAnswer> {
  const entries = batch.map(({ raw, hash }) => ({ raw, hash }));
  return ask('POST', '/api/entries', { entries, sent_at: localTime(new Date()) }, isUploadAnswer);
}

/** Answers about other ids are no answers; entries without one stay where they are. */
export function answersFor(batch: Outgoing[], answer: UploadAnswer): Settled[] {
  const sent = new Set(batch.map((one) => one.id));
  return answer.answers
    .filter((one) => sent.has(one.id))
    .map((one) => ({
      id: one.id,
      whereabouts: one.status === 'quarantined' ? ('needs person' as const) : ('safe' as const),
      seq: one.seq ?? null,
      reason: one.status === 'quarantined' ? (one.reason ?? 'the server set it apart') : null,
    }));
}

/**
 * A server with another epoch or identity, one whose log is shorter than it once was, or one that knows less of this
 * device than it once said, was restored or replaced: what it no longer has is sent again. (A number that it never had
 * is no reason: it may have been refused.)
 */
async function compareEpoch(): Promise<void> {
  const state = await ask('GET', '/api/state', undefined, isServerState);
  const known = await knownServer();
  const own = await deviceId();
  const contiguous = (own === null ? undefined : state.devices[own]?.max_contiguous_seq) ?? 0;
  const other = known.instance !== null && (known.instance !== state.instance || known.epoch !== state.epoch);
  const shorter = known.head_seq !== null && state.head.seq < known.head_seq; // a log only grows
  if (other || shorter || contiguous < known.contiguous) {
    await sendAgainAfter(contiguous);
    await doubtHeads();
  }
  await noteServer({ instance: state.instance, epoch: state.epoch, head_seq: state.head.seq, head_hash: state.head.hash, contiguous });
}
