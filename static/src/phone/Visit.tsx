// The path of the visit with the words of this phone.
import { VisitPath } from '../parts/VisitPath';
import type { LoggedEntry, PhoneJob } from '../types';
import { t } from '../words/words';
import { type Step, stepsOf } from './steps';

export function Visit({ job, log, mount, here }: { job: PhoneJob; log: readonly LoggedEntry[]; mount: string | null; here: Step['key'] | null }) {
  return (
    <VisitPath
      steps={stepsOf(job, log, mount).map((step) => ({ ...step, label: t(`step.${step.key}`), here: step.key === here }))}
    />
  );
}
