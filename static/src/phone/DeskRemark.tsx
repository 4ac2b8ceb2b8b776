// What the desk said when it sent the job back: first on every page of the job until the work is handed in again.
import { Message } from '../parts/Message.tsx';
import type { PhoneJob } from '../types.ts';
import { t } from '../words/words.ts';

export function DeskRemark({ job }: { job: PhoneJob }) {
  if (job.stage === 'signed off') {
    return (
      <Message tone="note">
        <strong>{t('job.signed-off')}</strong>
        {job.remark && <p class="as-typed">{job.remark}</p>}
      </Message>
    );
  }
  // After the first new reading the stage is under way again; the remark still says what the work is.
  if (!job.remark || job.stage === 'handed in') return null;
  return (
    <Message tone="warn">
      <strong>{t('job.sent-back')}</strong>
      <p class="as-typed">{job.remark}</p>
    </Message>
  );
}
