// The verdict on each mount of a job as a whole, on this phone, from what this phone knows: the server's may be older.
import { useEffect, useState } from 'preact/hooks';
import type { PlannedMount, Sheet, Verdict } from '../types.ts';
import { judge } from './judge.ts';
import type { OpenJob } from './useJob.ts';

export interface MountVerdict {
  mount: PlannedMount;
  sheet: Sheet | null;
  verdict: Verdict | null;
  /** Why there is no verdict. */
  why: string | null;
}

/** null until all are there. */
export function useWholeVerdicts(open: OpenJob | null | undefined): MountVerdict[] | null {
  const [verdicts, setVerdicts] = useState<MountVerdict[] | null>(null);
  useEffect(() => {
    if (!open) return;
    let live = true;
    const asked = open.job.plan.mounts.map((mount) =>
      judge(mount, open.log, null).then(
        ({ sheet, verdict }): MountVerdict => ({ mount, sheet, verdict, why: null }),
        (error: unknown): MountVerdict => ({ mount, sheet: null, verdict: null, why: error instanceof Error ? error.message : String(error) }),
      ),
    );
    void Promise.all(asked).then((all) => live && setVerdicts(all));
    return () => {
      live = false;
    };
  }, [open]);
  return verdicts;
}
