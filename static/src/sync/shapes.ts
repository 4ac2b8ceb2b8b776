// The shapes by which an answer is known to be the server's. They look at what this page relies on, no further: a newer
// server may say more.
import type { JobPage, JobSummary, Session } from '../types.ts';
import { isObject } from './server.ts';

export interface UploadAnswer {
  answers: { id: string; status: 'stored' | 'duplicate' | 'quarantined'; seq: number | null; reason: string | null }[];
  epoch: number;
  head: { seq: number; hash: string };
}

export interface ServerState {
  instance: string;
  epoch: number;
  head: { seq: number; hash: string };
  devices: Record<string, { max_contiguous_seq: number; hash: string }>;
}

export function isSession(value: unknown): value is Session {
  return isObject(value) && isObject(value['user']) && typeof value['user']['id'] === 'string' && typeof value['user']['role'] === 'string';
}

export function isNothing(_value: unknown): _value is unknown {
  return true;
}

function isHead(value: unknown): boolean {
  return isObject(value) && typeof value['seq'] === 'number' && typeof value['hash'] === 'string';
}

const statuses: readonly unknown[] = ['stored', 'duplicate', 'quarantined'];

export function isUploadAnswer(value: unknown): value is UploadAnswer {
  return (
    isObject(value) &&
    typeof value['epoch'] === 'number' &&
    isHead(value['head']) &&
    Array.isArray(value['answers']) &&
    value['answers'].every((one) => isObject(one) && typeof one['id'] === 'string' && statuses.includes(one['status']))
  );
}

export function isServerState(value: unknown): value is ServerState {
  return (
    isObject(value) &&
    typeof value['instance'] === 'string' &&
    typeof value['epoch'] === 'number' &&
    isHead(value['head']) &&
    isObject(value['devices']) &&
    Object.values(value['devices']).every((one) => isObject(one) && typeof one['max_contiguous_seq'] === 'number')
  );
}

function isSummary(value: unknown): value is JobSummary {
  return (
    isObject(value) &&
    typeof value['id'] === 'string' &&
    typeof value['stage'] === 'string' &&
    typeof value['head_seq'] === 'number' &&
    Array.isArray(value['mounts'])
  );
}

export function isJobList(value: unknown): value is { jobs: JobSummary[] } {
  return isObject(value) && Array.isArray(value['jobs']) && value['jobs'].every(isSummary);
}

export function isJobPage(value: unknown): value is JobPage {
  return (
    isObject(value) &&
    isSummary(value['job']) &&
    isObject(value['plan']) &&
    Array.isArray(value['plan']['mounts']) &&
    Array.isArray(value['entries']) &&
    value['entries'].every((one) => isObject(one) && typeof one['seq'] === 'number' && typeof one['raw'] === 'string')
  );
}
