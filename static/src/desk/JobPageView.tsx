// One job as one page: fetched, then shown until something newer is asked for. What a supervisor is reading does not
// change under the eyes: new entries are announced, and loaded on a press.

import { useCallback, useEffect, useRef, useState } from 'preact/hooks';
import { Button } from '../parts/Button';
import { Message } from '../parts/Message';
import type { JobPage, JobSummary, QuarantinedEntry } from '../types';
import * as api from './api';
import { DecisionFoot } from './DecisionFoot';
import { JobHead } from './JobHead';
import { LogSection } from './LogSection';
import { MountSection } from './MountSection';
import { setPaperHead } from './paper';
import { recordOf } from './record';
import { hrefOf, tabOf, type Tab } from './route';
import { VisitSection } from './VisitSection';
import { t } from './words';

export interface Opened {
  page: JobPage;
  /** null where the server did not answer this part; the page then says so. */
  log: api.LogState | null;
  setApart: QuarantinedEntry[] | null;
}

interface Props {
  id: string;
  mount: string | null;
  tab: Tab;
  /** The job as the list last had it, to notice what came in meanwhile. */
  newest: JobSummary | null;
  onDecided: () => void;
}

export function JobPageView({ id, mount, tab, newest, onDecided }: Props) {
  const [opened, setOpened] = useState<Opened | null>(null);
  const [trouble, setTrouble] = useState<string | null>(null);
  const heading = useRef<HTMLHeadingElement>(null);

  const load = useCallback(async () => {
    try {
      const page = await api.job(id);
      const [log, apart] = await Promise.all([
        api.logState().catch(() => null),
        page.quarantined > 0 ? api.quarantine().catch(() => null) : Promise.resolve([]),
      ]);
      setOpened({ page, log, setApart: apart === null ? null : apart.filter((q) => q.job === id) });
      setTrouble(null);
    } catch (err) {
      setTrouble(err instanceof api.ApiProblem ? err.detail : t('desk.unreachable'));
    }
  }, [id]);
  useEffect(() => void load(), [load]);

  const ready = opened !== null;
  useEffect(() => {
    // After a link in the list the reader stands at the head of the job, not at the end of the list.
    if (ready) heading.current?.focus({ preventScroll: true });
  }, [ready]);
  useEffect(() => {
    if (opened) setPaperHead(opened.page.job, opened.log);
  }, [opened]);

  if (opened === null) {
    return (
      <article class="job">
        <Back tab={tab} />
        {trouble === null ? (
          <p role="status" class="empty">
            {t('desk.loading')}
          </p>
        ) : (
          <div class="empty">
            <Message tone="wrong" live>
              {trouble}
            </Message>
            <Button onPress={() => void load()}>{t('desk.try-again')}</Button>
          </div>
        )}
      </article>
    );
  }

  // After a decision, or one that was refused, the reader stands at the head again: that is where it is said.
  const again = async () => {
    await load();
    onDecided();
    scrollTo(0, 0);
    heading.current?.focus({ preventScroll: true });
  };
  const { page } = opened;
  const record = recordOf(page);
  const shown = page.mounts.find((m) => m.id === mount) ?? page.mounts[0];
  const newer = newest !== null && newest.head_seq > page.job.head_seq ? newest : null;
  return (
    <article class="job">
      <Back tab={tab} />
      {newer !== null && (
        <div class="notice" role="status">
          <p>
            {newer.entries > page.job.entries
              ? t('desk.newer', { n: newer.entries - page.job.entries })
              : t('desk.newer.some')}
          </p>
          <Button onPress={() => void load()}>{t('desk.newer.load')}</Button>
        </div>
      )}
      {trouble !== null && (
        <Message tone="warn" live>
          {trouble}
        </Message>
      )}
      <JobHead heading={heading} page={page} record={record} shown={shown?.id ?? null} tab={tabOf(page.job.stage)} />
      {page.mounts.map((m) => (
        <MountSection key={m.id} mount={m} page={page} record={record} shown={m.id === shown?.id} />
      ))}
      <VisitSection page={page} record={record} />
      <LogSection opened={opened} record={record} />
      <DecisionFoot opened={opened} record={record} onStale={again} onDecided={() => void again()} />
    </article>
  );
}

/** Seen where list and job do not fit side by side. */
function Back({ tab }: { tab: Tab }) {
  return (
    <a class="back" href={hrefOf({ page: 'queue', tab, job: null, mount: null })}>
      {t('desk.back', { list: t(`desk.tab.${tab}`) })}
    </a>
  );
}
