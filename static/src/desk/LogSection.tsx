// What the page rests on: the head of the log, what the server set apart, and every entry as it came.

import { useEffect, useState } from 'preact/hooks';
import type { Entry } from '../types';
import { deskTime, placeTime, shortHash } from './format';
import { aimSaid } from './aimSaid.ts';
import type { Opened } from './JobPageView';
import { fingerprint, type JobRecord, type LogLine } from './record';
import { t } from './words';

interface Props {
  opened: Opened;
  record: JobRecord;
}

export function LogSection({ opened, record }: Props) {
  const { page, log, setApart } = opened;
  return (
    <section class="log">
      <h3>{t('desk.log')}</h3>
      <p>
        {log === null
          ? t('desk.log.unknown')
          : t('desk.log.head', { seq: log.head.seq, mine: page.job.head_seq, epoch: log.epoch })}{' '}
        {log !== null && <code class="hash">{log.head.hash}</code>}
      </p>
      {page.quarantined > 0 && (
        <div class="set-apart" role="note">
          <p>
            <strong>{t('desk.apart', { n: page.quarantined })}</strong> {t('desk.apart.what')}
          </p>
          {setApart === null ? (
            <p>{t('desk.apart.unknown')}</p>
          ) : (
            <ul>
              {setApart.map((q) => (
                <li key={q.id}>
                  {q.reason} · {q.author_name ?? t('desk.apart.nobody')} · {deskTime(q.received_at)}
                  <details>
                    <summary>{t('desk.apart.text')}</summary>
                    <code class="raw">{q.raw}</code>
                  </details>
                </li>
              ))}
            </ul>
          )}
        </div>
      )}
      <LogTable lines={record.lines} />
    </section>
  );
}

function LogTable({ lines }: { lines: LogLine[] }) {
  const [open, setOpen] = useState(false);
  const [prints, setPrints] = useState<Record<number, string>>({});
  useEffect(() => {
    if (!open) return;
    let here = true;
    Promise.all(lines.map(async (l) => [l.seq, await fingerprint(l.raw)] as const)).then(
      (pairs) => here && setPrints(Object.fromEntries(pairs)),
      // Outside https and localhost the browser reckons no hash: the column stays empty.
      () => {},
    );
    return () => {
      here = false;
    };
  }, [open, lines.length]);
  return (
    <details class="log-entries" onToggle={(e) => setOpen(e.currentTarget.open)}>
      <summary>{t('desk.log.all', { n: lines.length })}</summary>
      {open && (
        <table>
          <thead>
            <tr>
              <th scope="col" class="number">
                {t('desk.log.seq')}
              </th>
              <th scope="col">{t('desk.log.made')}</th>
              <th scope="col">{t('desk.log.received')}</th>
              <th scope="col">{t('desk.log.by')}</th>
              <th scope="col">{t('desk.log.what')}</th>
              <th scope="col">{t('desk.log.hash')}</th>
            </tr>
          </thead>
          <tbody>
            {lines.map((line) => (
              <tr key={line.seq}>
                <td class="number" data-label={t('desk.log.seq')}>
                  {line.seq}
                </td>
                <td data-label={t('desk.log.made')}>{line.entry === null ? '' : placeTime(line.entry.at)}</td>
                <td data-label={t('desk.log.received')}>{deskTime(line.receivedAt)}</td>
                <td data-label={t('desk.log.by')}>{line.by}</td>
                <td data-label={t('desk.log.what')}>
                  {line.entry === null ? <code class="raw">{line.raw}</code> : said(line.entry)}
                </td>
                <td data-label={t('desk.log.hash')}>
                  <code title={prints[line.seq]}>{shortHash(prints[line.seq] ?? '')}</code>
                </td>
              </tr>
            ))}
          </tbody>
        </table>
      )}
    </details>
  );
}

/** An entry in one line of words. */
function said(entry: Entry): string {
  switch (entry.kind) {
    case 'job.planned':
      return t('desk.said.planned', { title: entry.body.title });
    case 'job.issued':
      return t('desk.said.issued');
    case 'caution.confirmed':
      return t('desk.said.caution', { caution: entry.body.caution, name: entry.body.name });
    case 'reading.taken':
      return t('desk.said.reading', {
        part: `${entry.body.antenna} ${t(`quantity.${entry.body.quantity}`)}`,
        state: t(`desk.state.${entry.body.phase}`),
        typed: entry.body.typed,
      });
    case 'reading.withdrawn':
      return t('desk.said.withdrawn');
    case 'bolt.moved':
      return t('desk.said.moved', { part: `${entry.body.antenna} ${t(`quantity.${entry.body.quantity}`)}` });
    case 'note.added':
      return t('desk.said.note', { text: entry.body.text });
    case 'job.handed_in':
      return t('desk.said.handed-in');
    case 'job.sent_back':
      return t('desk.said.sent-back', { remark: entry.body.remark });
    case 'job.signed_off':
      return t('desk.said.signed-off');
    default:
      return aimSaid(entry) ?? (entry as { kind: string }).kind;
  }
}
