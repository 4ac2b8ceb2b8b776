// The visit as people lived it: cautions, notes, what was handed in with what was open, and the phone's own verdicts
// beside the desk's, because the crew acted on the phone's.

import { WordMark } from '../parts/WordMark';
import type { JobPage, State, Verdict, Word } from '../types';
import { cautions as usualCautions } from '../words/cautions';
import { asGiven, deskTime, percent, placeTime } from './format';
import type { JobRecord, Line } from './record';
import { t } from './words';

interface Props {
  page: JobPage;
  record: JobRecord;
}

export function VisitSection({ page, record }: Props) {
  return (
    <section class="visit">
      <Cautions record={record} />
      <Planned page={page} />
      <Notes page={page} record={record} />
      {record.handIns.length > 0 && (
        <section class="hand-ins">
          <h3>{t('desk.handed-in')}</h3>
          {record.handIns.map((handIn, i) => (
            <HandIn key={handIn.id} page={page} handIn={handIn} last={i === record.handIns.length - 1} />
          ))}
        </section>
      )}
      {record.sentBack.length > 0 && (
        <section class="sent-back">
          <h3>{t('desk.sent-back')}</h3>
          <ul>
            {record.sentBack.map((s) => (
              <li key={s.id}>
                <span class="remark">{s.body.remark}</span>{' '}
                <span class="by">{t('desk.by', { name: s.by, when: deskTime(s.at) })}</span>
              </li>
            ))}
          </ul>
        </section>
      )}
    </section>
  );
}

/** What the crew was told about the place. */
function Planned({ page }: { page: JobPage }) {
  const { plan } = page;
  const facts: [string, string][] = [];
  if (plan.access) facts.push([t('desk.plan.access'), plan.access]);
  if (plan.emergency) facts.push([t('desk.plan.emergency'), plan.emergency]);
  if (plan.lat_deg !== null && plan.lon_deg !== null) {
    facts.push([t('desk.plan.coordinates'), `${asGiven(plan.lat_deg, 'deg')}, ${asGiven(plan.lon_deg, 'deg')}`]);
  }
  return (
    <section class="told">
      <h3>{t('desk.told')}</h3>
      {facts.length === 0 ? (
        <p class="hint">{t('desk.told.nothing')}</p>
      ) : (
        <dl>
          {facts.map(([name, text]) => (
            <div key={name}>
              <dt>{name}</dt>
              <dd>{text}</dd>
            </div>
          ))}
        </dl>
      )}
    </section>
  );
}

function Cautions({ record }: { record: JobRecord }) {
  const usual: readonly string[] = usualCautions;
  const others = record.cautions.map((c) => c.body.caution).filter((c) => !usual.includes(c));
  return (
    <section class="cautions">
      <h3>{t('desk.cautions')}</h3>
      <ul>
        {[...new Set([...usual, ...others])].map((caution) => {
          const confirmed = record.cautions.filter((c) => c.body.caution === caution);
          return (
            <li key={caution} data-confirmed={confirmed.length > 0}>
              <strong>{cautionName(caution)}</strong>
              {confirmed.length === 0 ? (
                <span class="unconfirmed">{t('desk.cautions.not')}</span>
              ) : (
                confirmed.map((c) => (
                  <span key={c.id}>
                    {t('desk.cautions.by', { name: c.body.name, when: placeTime(c.at), version: c.body.version })}
                    {c.body.name !== c.by && <> {t('desk.cautions.phone-of', { name: c.by })}</>}
                  </span>
                ))
              )}
            </li>
          );
        })}
      </ul>
      <p class="hint">{t('desk.cautions.what')}</p>
    </section>
  );
}

/** A caution that this version no longer asks for keeps the name it was logged under. */
function cautionName(caution: string): string {
  const known = usualCautions.find((c) => c === caution);
  return known === undefined ? caution : t(`caution.${known}.title`);
}

function Notes({ page, record }: Props) {
  return (
    <section class="notes">
      <h3>{t('desk.notes')}</h3>
      {record.notes.length === 0 ? (
        <p class="hint">{t('desk.notes.none')}</p>
      ) : (
        <ul>
          {record.notes.map((n) => (
            <li key={n.id}>
              <span class="remark">{n.body.text}</span>{' '}
              <span class="by">
                {n.mount !== null && page.mounts.length > 1 && <>{mountName(page, n.mount)} · </>}
                {t('desk.by', { name: n.by, when: placeTime(n.at) })}
              </span>
            </li>
          ))}
        </ul>
      )}
    </section>
  );
}

function mountName(page: JobPage, mount: string): string {
  return page.mounts.find((m) => m.id === mount)?.name ?? mount;
}

function HandIn({ page, handIn, last }: { page: JobPage; handIn: Line<'job.handed_in'>; last: boolean }) {
  const { remark, open, verdicts } = handIn.body;
  return (
    <div class="hand-in">
      <p>
        <strong>{t('desk.by', { name: handIn.by, when: placeTime(handIn.at) })}</strong>{' '}
        {remark ? <span class="remark">{remark}</span> : <span class="hint">{t('desk.handed-in.no-remark')}</span>}
      </p>
      {open.length > 0 ? (
        <div>
          <p>{t('desk.handed-in.open')}</p>
          <ul class="open-items">
            {open.map((item) => (
              <li key={item}>{item}</li>
            ))}
          </ul>
        </div>
      ) : (
        <p class="hint">{t('desk.handed-in.nothing-open')}</p>
      )}
      {verdicts.length > 0 && (
        <table class="compare">
          <caption>{t(last ? 'desk.compare' : 'desk.compare.earlier')}</caption>
          <thead>
            <tr>
              <th scope="col">{t('desk.compare.mount')}</th>
              <th scope="col">{t('desk.compare.phone')}</th>
              <th scope="col">{t('desk.compare.desk')}</th>
              <th scope="col">{t('desk.compare.same')}</th>
            </tr>
          </thead>
          <tbody>
            {verdicts.map((v) => {
              const now = page.mounts.find((m) => m.id === v.mount)?.verdict ?? null;
              const mine = now === null ? null : outcomeOf(now, v.phase);
              return (
                <tr key={`${v.mount} ${v.phase}`}>
                  <th scope="row">
                    {mountName(page, v.mount)}, {t(`desk.state.${v.phase}`)}
                  </th>
                  <td data-label={t('desk.compare.phone')}>
                    <Said word={v.word} probability={v.probability} version={v.method.version} />
                  </td>
                  <td data-label={t('desk.compare.desk')}>
                    {mine === null || now === null ? (
                      t('desk.compare.none')
                    ) : (
                      <Said word={mine.word} probability={mine.probability} version={now.method.version} />
                    )}
                  </td>
                  <td data-label={t('desk.compare.same')} data-same={mine !== null && mine.word === v.word}>
                    {mine === null ? '' : difference(v, mine, now?.method.version ?? '')}
                  </td>
                </tr>
              );
            })}
          </tbody>
        </table>
      )}
    </div>
  );
}

function Said({ word, probability, version }: { word: Word; probability: number; version: string }) {
  return (
    <span class="said">
      <WordMark word={word} /> {percent(probability)}{' '}
      <span class="hint">{t('desk.compare.version', { version })}</span>
    </span>
  );
}

function outcomeOf(verdict: Verdict, phase: State): { word: Word; probability: number } | null {
  if (verdict.judged === phase) return { word: verdict.word, probability: verdict.probability };
  return phase === 'planned' ? null : verdict.states[phase];
}

/** A hundredth of probability is far above what the two machines can differ by; more means other readings or other code. */
const sameWithin = 0.01;

function difference(
  phone: { word: Word; probability: number; method: { version: string } },
  desk: { word: Word; probability: number },
  deskVersion: string,
): string {
  const same = phone.word === desk.word && Math.abs(phone.probability - desk.probability) <= sameWithin;
  if (same) return t('desk.compare.yes');
  const why = phone.method.version === deskVersion ? 'desk.compare.differ-readings' : 'desk.compare.differ-version';
  return t(phone.word === desk.word ? 'desk.compare.odds-differ' : 'desk.compare.no') + ' ' + t(why);
}
