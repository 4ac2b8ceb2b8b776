// Pointing, path, peak searches and radio figures of one mount, as the crew had them: the same answers of calc, asked of
// the server.

import type { Compass, FaultRanking, PathAnswer, PeakAnswer, Target } from '../aim/answers.ts';
import { Candidates, FiguresTable } from '../aim/FiguresView.tsx';
import { Facts } from '../aim/Facts.tsx';
import { ExpectedLevels, obstacleSaid, PathView } from '../aim/PathView.tsx';
import { PeakView } from '../aim/PeakView.tsx';
import { Pointing } from '../aim/Pointing.tsx';
import { bearingQuestion, compassQuestion, faultQuestion, lastAngle, pathQuestion, peakQuestion, portsOf, standOf, targetQuestion } from '../aim/questions.ts';
import { bearing, besides, upDown } from '../aim/say.ts';
import { controlOff, searchesOf, type Search, standingOf } from '../aim/search.ts';
import { type Ask, useReckoned } from '../aim/useReckoned.ts';
import { CompassRose, type RoseMark } from '../draw/CompassRose.tsx';
import { Message } from '../parts/Message.tsx';
import type { Entry, EntryOf, JobPage, Landmark, Sheet } from '../types.ts';
import { say } from '../words/aim.ts';
import { figure } from '../words/figures.ts';
import * as api from './api.ts';
import { placeTime } from './format.ts';
import type { JobRecord } from './record.ts';

interface Props {
  mount: JobPage['mounts'][number];
  page: JobPage;
  record: JobRecord;
}

const ask: Ask = (op, input) => api.reckon(op, input);

export function AimSection({ mount, page, record }: Props) {
  const { sheet } = mount;
  const entries = record.lines.flatMap((line) => (line.entry === null ? [] : [line.entry]));
  const searches = searchesOf(entries, mount.id);
  const figuresRead = standingOf(entries, mount.id, 'figures.read');
  const sights = standingOf(entries, mount.id, 'sight.taken');
  const lean = standingOf(entries, mount.id, 'lean.read').pop() ?? null;
  const surveyed = targetQuestion(sheet) !== null;
  const target = useReckoned<Target>(ask, 'aim.target', targetQuestion(sheet));
  const path = useReckoned<PathAnswer>(ask, 'aim.path', surveyed && target.asking ? null : pathQuestion(sheet, target.answer?.distance_m ?? null));
  const ranking = useReckoned<FaultRanking>(ask, 'fault.rank', path.asking ? null : faultQuestion(sheet, path.answer));
  const nothing = !surveyed && searches.length === 0 && figuresRead.length === 0 && sights.length === 0 && !sheet.radio_figures && lean === null;
  if (nothing) return null;
  const off = controlOff(entries, mount.id);
  const by = (entry: Entry) => record.lines.find((line) => line.entry?.id === entry.id)?.by ?? '';
  return (
    <section class="aim-section">
      <h3>{say('desk.aim')}</h3>
      <div class="aim-grid">
        {surveyed && <Where sheet={sheet} page={page} target={target.answer} problem={target.problem} />}
        {surveyed && path.answer && (
          <section>
            <h4>{say('path.title')}</h4>
            <PathView sheet={sheet} path={path.answer} near={say('path.here')} far={say('path.far-end')} />
            {path.answer.obstacles.length > 0 ? (
              <ol class="numbered figure">
                {path.answer.obstacles.map((o, i) => (
                  <li key={i}>
                    <strong>{o.name ?? say('obstacle.unnamed')}</strong> {obstacleSaid(o)}
                  </li>
                ))}
              </ol>
            ) : null}
            <h4>{say('path.levels')}</h4>
            <ExpectedLevels sheet={sheet} path={path.answer} />
          </section>
        )}
        {searches.map((search) => (
          <SearchOf key={`${search.antenna} ${search.axis} ${search.number}`} search={search} sheet={sheet} path={path.answer} off={off} by={by} />
        ))}
        {(figuresRead.length > 0 || sheet.radio_figures) && (
          <section>
            <h4>{say('fault.title')}</h4>
            <p>{off ? say('control.confirmed', { name: off.body.name, when: placeTime(off.at) }) : say('desk.control-unknown')}</p>
            {ranking.problem && <Message tone="wrong">{ranking.problem.message}</Message>}
            {ranking.answer && <Candidates ranking={ranking.answer} />}
          </section>
        )}
        {ranking.answer && (
          <section>
            <h4>{say('figures.title')}</h4>
            {(['near', 'far'] as const).map((end) => {
              const read = figuresRead.filter((f) => f.body.end === end).pop();
              const of = ranking.answer?.expected.filter((p) => p.end === end) ?? [];
              return (
                <div key={end}>
                  {of.length > 0 ? <FiguresTable predicted={of} caption={say(`figures.end.${end}`)} /> : <p>{`${say(`figures.end.${end}`)}: ${say('desk.not-read')}`}</p>}
                  {read && <p class="hint">{say('desk.read-by', { name: by(read), when: placeTime(read.at) })}</p>}
                </div>
              );
            })}
          </section>
        )}
        {(sights.length > 0 || lean) && (
          <section>
            <h4>{say('desk.sights')}</h4>
            <ul class="numbered figure">
              {sights.map((sight) => (
                <li key={sight.id}>{sightSaid(sight, by(sight))}</li>
              ))}
              {lean && (
                <li>
                  {say('lean.last', {
                    lean: `${figure(Number(lean.body.answer['lean_deg']), 1)}°`,
                    toward: `${figure(Number(lean.body.answer['toward_deg']), 0)}°`,
                    tilt: upDown(Number(lean.body.answer['tilt_deg'])),
                    skew: `${figure(Number(lean.body.answer['skew_deg']), 1)}°`,
                    when: placeTime(lean.at),
                  })}
                </li>
              )}
            </ul>
          </section>
        )}
      </div>
    </section>
  );
}

function Where({ sheet, page, target, problem }: { sheet: Sheet; page: JobPage; target: Target | null; problem: Parameters<typeof Pointing>[0]['problem'] }) {
  const stand = standOf(sheet, page.plan);
  const visit = page.plan.visit_on;
  const compass = useReckoned<Compass>(ask, 'aim.compass', stand && visit ? compassQuestion(stand, visit, []) : null);
  const aim = target?.true_bearing_deg ?? sheet.path.bearing_deg;
  const readings = sheet.near.antennas.flatMap((antenna) => {
    const last = lastAngle(antenna.azimuth);
    return last && last !== antenna.azimuth?.planned ? [{ antenna: antenna.id, reading: last }] : [];
  });
  return (
    <section>
      <h4>{say('aim.where')}</h4>
      <Pointing sheet={sheet} target={target} problem={problem} compass={compass.answer} />
      <Rose aim={aim} sheet={sheet} readings={readings} />
      <Facts
        facts={readings.map(({ antenna, reading }) => ({
          name: say('rose.read-with', { antenna, method: reading.method ?? '' }),
          value: `${bearing(reading.value, reading.u ?? null)}, ${besides(reading.value, aim)}`,
        }))}
      />
      {readings.some(({ reading }) => reading.method === 'compass') && <Message tone="warn">{say('compass.alone')}</Message>}
    </section>
  );
}

/** The plan names few landmarks; each is asked for by a component of its own, so that hooks keep their order. */
function Rose({ aim, sheet, readings }: { aim: number; sheet: Sheet; readings: { antenna: string; reading: { value: number; u?: number | null } }[] }) {
  const first = useLandmark(sheet, 0);
  const second = useLandmark(sheet, 1);
  const third = useLandmark(sheet, 2);
  const marks: RoseMark[] = [
    { kind: 'target', label: say('rose.target'), bearing_deg: aim },
    ...readings.map(({ antenna, reading }) => ({ kind: 'reading' as const, label: say('rose.reading', { antenna }), bearing_deg: reading.value, u_deg: reading.u ?? null })),
    ...[first, second, third].filter((mark): mark is RoseMark => mark !== null),
  ];
  return <CompassRose marks={marks} />;
}

function useLandmark(sheet: Sheet, i: number): RoseMark | null {
  const landmark: Landmark | undefined = sheet.landmarks?.[i];
  const found = useReckoned<Target>(ask, 'aim.target', landmark ? bearingQuestion(sheet, landmark) : null);
  if (!landmark || !found.answer) return null;
  return { kind: 'landmark', label: landmark.name, short: String(i + 1), bearing_deg: found.answer.true_bearing_deg };
}

function SearchOf({ search, sheet, path, off, by }: { search: Search; sheet: Sheet; path: PathAnswer | null; off: EntryOf<'power_control.confirmed'> | null; by: (entry: Entry) => string }) {
  const antenna = sheet.near.antennas.find((a) => a.id === search.antenna) ?? sheet.near.antennas[0];
  const port = antenna ? portsOf(sheet.near.antennas).indexOf(antenna.elements[0]?.port ?? '') : 0;
  const steps = search.steps.map((s) => s.body);
  const fit = useReckoned<PeakAnswer>(ask, 'peak.fit', antenna && steps.length > 0 ? peakQuestion(antenna, search.axis, steps, off !== null, path, port) : null);
  const level = path?.expected_levels_dbm?.[port] ?? null;
  const last = search.steps[search.steps.length - 1];
  return (
    <section>
      <h4>{say('desk.search', { antenna: search.antenna, axis: say(`axis.${search.axis}`), n: search.number })}</h4>
      <PeakView axis={search.axis} steps={steps} answer={fit.answer} expected={level !== null && path?.u_db ? { level, u: path.u_db } : null} />
      {fit.problem && <Message tone="wrong">{fit.problem.message}</Message>}
      {last && <p class="hint">{say('desk.read-by', { name: by(last), when: placeTime(last.at) })}</p>}
      <p class="hint">{search.kept ? say('desk.peak-kept', { name: by(search.kept), when: placeTime(search.kept.at) }) : say('desk.peak-not-kept')}</p>
    </section>
  );
}

function sightSaid(sight: EntryOf<'sight.taken'>, by: string): string {
  const { reference, antenna, landmark, answer } = sight.body;
  const azimuth = Number(answer['azimuth_deg'] ?? answer['true_bearing_deg']);
  const what = reference === 'landmark' ? say('desk.sight.landmark', { name: landmark ?? '' }) : say(`desk.sight.${reference}`);
  return say('desk.sight', { antenna, what, azimuth: bearing(azimuth, Number(answer['u_deg'])), typed: sight.body.typed, name: by, when: placeTime(sight.at) });
}
