// A job's log, read for the page: what was read by whom with what, what was confirmed, handed in and decided.
// Nothing is computed here; which readings still count follows from the order of the log, as mount.fold has it.

import type { Bodies, Entry, JobPage, Kind, Phase, Quantity, Reading, ServerEntry } from '../types';
import { t } from './words.ts';

export type Standing =
  | { is: 'used' }
  | { is: 'withdrawn'; by: string; at: string }
  | { is: 'moved since'; by: string; at: string };

export interface ReadingLine {
  id: string;
  seq: number;
  mount: string | null;
  phase: Phase;
  antenna: string;
  quantity: Quantity;
  reading: Reading;
  typed: string;
  by: string;
  at: string;
  device: string;
  standing: Standing;
}

export interface MoveLine {
  id: string;
  seq: number;
  mount: string | null;
  antenna: string;
  quantity: Quantity;
  by: string;
  at: string;
}

export interface Line<K extends Kind> {
  id: string;
  seq: number;
  mount: string | null;
  by: string;
  at: string;
  body: Bodies[K];
}

export interface LogLine {
  seq: number;
  receivedAt: string;
  by: string;
  raw: string;
  /** null where the text cannot be read: it is shown as it came. */
  entry: Entry | null;
}

export interface JobRecord {
  lines: LogLine[];
  readings: ReadingLine[];
  moves: MoveLine[];
  cautions: Line<'caution.confirmed'>[];
  notes: Line<'note.added'>[];
  handIns: Line<'job.handed_in'>[];
  sentBack: Line<'job.sent_back'>[];
  signedOff: Line<'job.signed_off'> | null;
  /** Phones that wrote to this job, in the order they first appear; the desk's own entries are not counted. */
  phones: string[];
}

function read(entry: ServerEntry): Entry | null {
  try {
    const parsed = JSON.parse(entry.raw) as Entry;
    return parsed !== null && typeof parsed === 'object' && typeof parsed.kind === 'string' ? parsed : null;
  } catch {
    return null;
  }
}

/** The author stands first; whoever else was signed in where the entry came from is never left out. */
function byOf({ author_name: author, uploader_name: uploader }: ServerEntry): string {
  return uploader && uploader !== author ? t('desk.carried', { author, uploader }) : author;
}

/** By arrival, but each device's entries by their own numbers: so the server reads them when it judges. */
function inDeviceOrder(lines: readonly LogLine[]): LogLine[] {
  const devices = new Map<string, LogLine[]>();
  for (const line of lines) if (line.entry) devices.set(line.entry.device, [...(devices.get(line.entry.device) ?? []), line]);
  for (const own of devices.values()) own.sort((a, b) => (b.entry?.device_seq ?? 0) - (a.entry?.device_seq ?? 0));
  return lines.map((line) => (line.entry && devices.get(line.entry.device)?.pop()) || line);
}

const deskKinds: ReadonlySet<string> = new Set(['job.planned', 'job.issued', 'job.sent_back', 'job.signed_off']);

export function recordOf(page: JobPage): JobRecord {
  const record: JobRecord = {
    lines: [],
    readings: [],
    moves: [],
    cautions: [],
    notes: [],
    handIns: [],
    sentBack: [],
    signedOff: null,
    phones: [],
  };
  for (const stored of page.entries) {
    record.lines.push({ seq: stored.seq, receivedAt: stored.received_at, by: byOf(stored), raw: stored.raw, entry: read(stored) });
  }
  for (const { seq, by, entry } of inDeviceOrder(record.lines)) {
    if (entry === null) continue;
    if (!deskKinds.has(entry.kind) && !record.phones.includes(entry.device)) record.phones.push(entry.device);
    const line = { id: entry.id, seq, mount: entry.mount, by, at: entry.at };
    switch (entry.kind) {
      case 'reading.taken':
        record.readings.push({
          ...line,
          phase: entry.body.phase,
          antenna: entry.body.antenna,
          quantity: entry.body.quantity,
          reading: entry.body.reading,
          typed: entry.body.typed,
          device: entry.device,
          standing: { is: 'used' },
        });
        break;
      case 'reading.withdrawn': {
        const withdraws = entry.body.withdraws;
        const reading = record.readings.find((r) => r.id === withdraws);
        if (reading) reading.standing = { is: 'withdrawn', by, at: entry.at };
        break;
      }
      case 'bolt.moved': {
        const { antenna, quantity } = entry.body;
        record.moves.push({ ...line, antenna, quantity });
        for (const r of record.readings) {
          const stale =
            r.phase === 'as_left' && r.mount === entry.mount && r.antenna === antenna && r.quantity === quantity;
          if (stale && r.standing.is === 'used') r.standing = { is: 'moved since', by, at: entry.at };
        }
        break;
      }
      case 'caution.confirmed':
        record.cautions.push({ ...line, body: entry.body });
        break;
      case 'note.added':
        record.notes.push({ ...line, body: entry.body });
        break;
      case 'job.handed_in':
        record.handIns.push({ ...line, body: entry.body });
        break;
      case 'job.sent_back':
        record.sentBack.push({ ...line, body: entry.body });
        break;
      case 'job.signed_off':
        record.signedOff = { ...line, body: entry.body };
        break;
      default:
        break;
    }
  }
  return record;
}

/** SHA-256 of the entry's own bytes, in hex: what the chain of hashes is made of. */
export async function fingerprint(raw: string): Promise<string> {
  const digest = await crypto.subtle.digest('SHA-256', new TextEncoder().encode(raw));
  return [...new Uint8Array(digest)].map((b) => b.toString(16).padStart(2, '0')).join('');
}
