// A job with its log, drawn again at each change of the store. undefined: not looked up yet. null: not on this phone.
import { entriesOf, job, useStored } from '../store/index.ts';
import type { LoggedEntry, PhoneJob } from '../types.ts';

export interface OpenJob {
  job: PhoneJob;
  log: LoggedEntry[];
}

export function useJob(id: string): OpenJob | null | undefined {
  return useStored(async () => {
    const [found, log] = await Promise.all([job(id), entriesOf(id)]);
    return found ? { job: found, log } : null;
  }, [id]);
}
