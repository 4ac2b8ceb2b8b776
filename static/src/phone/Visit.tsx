// The path of the visit with the words of this phone.
import { VisitPath } from '../parts/VisitPath.tsx';
import type { LoggedEntry, PhoneJob } from '../types.ts';
import { t } from '../words/words.ts';
import { type Step, stepsOf } from './steps.ts';

export function Visit({ job, log, mount, here }: { job: PhoneJob; log: readonly LoggedEntry[]; mount: string | null; here: Step['key'] | null }) {
  return (
    <VisitPath
      steps={stepsOf(job, log, mount).map((step) => ({ ...step, label: t(`step.${step.key}`), here: step.key === here }))}
    />
  );
}
