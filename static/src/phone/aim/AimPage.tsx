// Aim: where to point this mount, a rose of what there is to sight by, and the ways of finding that bearing on a steel
// mast; from here on to path, lean, ground covered and peak search.
import { useEffect, useState } from 'preact/hooks';
import type { Compass, Sun, Target } from '../../aim/answers.ts';
import { Facts } from '../../aim/Facts.tsx';
import { Pointing } from '../../aim/Pointing.tsx';
import { bearingQuestion, compassQuestion, lastAngle, standOf, sunQuestion } from '../../aim/questions.ts';
import { bearing, besides } from '../../aim/say.ts';
import { latestSearch, searchesOf } from '../../aim/search.ts';
import { useReckoned } from '../../aim/useReckoned.ts';
import { CompassRose, type RoseMark } from '../../draw/CompassRose.tsx';
import { Button } from '../../parts/Button.tsx';
import { Message } from '../../parts/Message.tsx';
import { localTime } from '../../store/index.ts';
import type { Landmark, Place } from '../../types.ts';
import { say } from '../../words/aim.ts';
import { figure } from '../../words/figures.ts';
import { today } from '../../words/when.ts';
import { methodName } from '../sentence.ts';
import { Gone } from '../Gone.tsx';
import { Page } from '../Page.tsx';
import { hrefOf } from '../route.ts';
import { Visit } from '../Visit.tsx';
import { type Address, ask, type AimOpen, useAim, useTarget } from './useAim.ts';

/** The sun moves a quarter of a degree a minute, at most one: asked again this often, what is shown is right to 0.1°. */
const sunEveryMs = 5_000;

export function useNow(everyMs: number): string {
  const [now, setNow] = useState(() => localTime(new Date()));
  useEffect(() => {
    const timer = setInterval(() => setNow(localTime(new Date())), everyMs);
    return () => clearInterval(timer);
  }, [everyMs]);
  return now;
}

export function AimPage({ job: jobId, mount: mountId }: Address) {
  const open = useAim(jobId, mountId);
  if (!open) return <Gone looking={open === undefined} />;
  return <Aiming open={open} job={jobId} mount={mountId} />;
}

function Aiming({ open, job: jobId, mount: mountId }: Address & { open: AimOpen }) {
  const { job, log, mount, sheet, entries } = open;
  const target = useTarget(sheet);
  const stand = standOf(sheet, job.plan);
  const compass = useReckoned<Compass>(ask, 'aim.compass', stand ? compassQuestion(stand, today(), []) : null);
  const now = useNow(sunEveryMs);
  const sun = useReckoned<Sun>(ask, 'aim.sun', stand ? sunQuestion(stand, now) : null);
  const aim = target.answer?.true_bearing_deg ?? sheet.path.bearing_deg;
  const landmarks = useLandmarkBearings(open);
  const turned = sheet.near.antennas.filter((antenna) => antenna.azimuth);
  const readings = turned.flatMap((antenna) => {
    const last = lastAngle(antenna.azimuth);
    if (!last || last === antenna.azimuth?.planned) return [];
    return [{ antenna: antenna.id, reading: last }];
  });
  const marks: RoseMark[] = [
    { kind: 'target', label: say('rose.target'), bearing_deg: aim },
    ...readings.map(({ antenna, reading }) => ({ kind: 'reading' as const, label: say('rose.reading', { antenna }), bearing_deg: reading.value, u_deg: reading.u ?? null })),
    ...(sun.answer?.usable
      ? [
          { kind: 'sun' as const, label: say('rose.sun'), bearing_deg: sun.answer.azimuth_deg },
          { kind: 'shadow' as const, label: say('rose.shadow'), bearing_deg: sun.answer.shadow_azimuth_deg ?? sun.answer.azimuth_deg + 180 },
        ]
      : []),
    ...landmarks.map((l, i) => ({ kind: 'landmark' as const, label: l.name, short: String(i + 1), bearing_deg: l.bearing_deg })),
  ];
  const place = { job: jobId, mount: mountId };
  const kept = searchesOf(entries, mountId).filter((s) => s.kept);
  const searchable = turned.length > 0;
  return (
    <Page
      title={say('aim.title')}
      under={mount.name}
      backHref={hrefOf({ page: 'mount', ...place, step: 'adjust' })}
      head={<Visit job={job} log={log} mount={mountId} here="aim" />}
      dock={
        <div class="actions">
          {searchable ? (
            <Button kind="first" extra="grow" href={hrefOf({ page: 'peak', ...place })}>
              {say('aim.to-peak')}
            </Button>
          ) : (
            <Button kind="first" extra="grow" href={hrefOf({ page: 'figures', ...place })}>
              {say('aim.to-figures')}
            </Button>
          )}
        </div>
      }
    >
      {open.problem && <Message tone="wrong">{open.problem.message}</Message>}
      <section class="section stack" aria-labelledby="where-title">
        <h2 id="where-title">{say('aim.where')}</h2>
        <Pointing sheet={sheet} target={target.answer} problem={target.problem} compass={compass.answer} />
      </section>

      <section class="section stack" aria-labelledby="rose-title">
        <h2 id="rose-title">{say('rose.title')}</h2>
        <CompassRose marks={marks} />
        <Facts
          facts={[
            { name: say('rose.target'), value: bearing(aim, target.answer?.u_bearing_deg ?? null) },
            ...readings.map(({ antenna, reading }) => ({
              name: say('rose.read-with', { antenna, method: methodName(reading.method ?? '') }),
              value: `${bearing(reading.value, reading.u ?? null)}, ${besides(reading.value, aim)}`,
            })),
            sun.answer && sun.answer.elevation_deg > 0
              ? { name: say('rose.sun-now'), value: say('rose.sun-at', { azimuth: `${figure(sun.answer.azimuth_deg, 1)}°`, up: `${figure(sun.answer.apparent_elevation_deg, 0)}°` }) }
              : null,
            ...landmarks.map((l, i) => ({
              name: `${i + 1} ${l.name}`,
              value: `${bearing(l.bearing_deg, l.u_deg)}, ${besides(l.bearing_deg, aim)}`,
            })),
          ]}
        />
        {sun.answer && sun.answer.elevation_deg <= 0 && <p>{say('rose.sun-down')}</p>}
        {readings.some(({ reading }) => reading.method === 'compass') && <Message tone="warn">{say('compass.alone')}</Message>}
      </section>

      {searchable && (
        <section class="section stack" aria-labelledby="find-title">
          <h2 id="find-title">{say('aim.find')}</h2>
          <Button wide left href={hrefOf({ page: 'sun', ...place })}>
            {say('aim.to-sun')}
          </Button>
          <Button wide left href={hrefOf({ page: 'landmark', ...place })}>
            {say('aim.to-landmark')}
          </Button>
          <Button wide left href={hrefOf({ page: 'compass', ...place })}>
            {say('aim.to-compass')}
          </Button>
          {turned.map((antenna) => (
            <Button key={antenna.id} wide left href={hrefOf({ page: 'reading', ...place, step: 'as-left', antenna: antenna.id, quantity: 'azimuth' })}>
              {say('aim.to-typed', { antenna: antenna.id })}
            </Button>
          ))}
        </section>
      )}

      <section class="section stack" aria-labelledby="more-title">
        <h2 id="more-title">{say('aim.more')}</h2>
        <Button wide left href={hrefOf({ page: 'path', ...place })}>
          {say('aim.to-path')}
        </Button>
        <Button wide left href={hrefOf({ page: 'ground', ...place })}>
          {say('aim.to-ground')}
        </Button>
        <Button wide left href={hrefOf({ page: 'lean', ...place })}>
          {say('aim.to-lean')}
        </Button>
      </section>

      {kept.length > 0 && (
        <section class="section stack" aria-labelledby="kept-title">
          <h2 id="kept-title">{say('aim.kept-peaks')}</h2>
          <ul class="plain-list">
            {kept.map((search) => (
              <li key={`${search.antenna} ${search.axis} ${search.number}`}>{keptPeak(search)}</li>
            ))}
          </ul>
        </section>
      )}
    </Page>
  );
}

export function keptPeak(search: NonNullable<ReturnType<typeof latestSearch>>): string {
  const answer = search.kept?.body.answer as { peak_deg?: number | null; peak_u_deg?: number | null; lobe?: 'main' | 'side' | 'unsure' } | undefined;
  const at = typeof answer?.peak_deg === 'number' ? `${figure(answer.peak_deg, 1)}° ± ${figure(answer.peak_u_deg ?? 0, 1)}°` : say('peak.not-yet');
  return say('peak.kept-line', { antenna: search.antenna, axis: say(`axis.${search.axis}`), at, lobe: say(`peak.short.${answer?.lobe ?? 'unsure'}`) });
}

export interface LandmarkBearing {
  name: string;
  bearing_deg: number;
  u_deg: number;
  place: Place;
}

/** True bearings of the landmarks that the plan names. */
export function useLandmarkBearings(open: AimOpen): LandmarkBearing[] {
  const [found, setFound] = useState<LandmarkBearing[]>([]);
  const list: Landmark[] = open.sheet.landmarks ?? [];
  const text = JSON.stringify([list, open.sheet.path.near_at, open.sheet.path.height_datum]);
  useEffect(() => {
    let live = true;
    const asked = list.map(async (place): Promise<LandmarkBearing | null> => {
      const question = bearingQuestion(open.sheet, place);
      if (!question) return null;
      try {
        const answer = await ask<Target>('aim.target', question);
        return { name: place.name, bearing_deg: answer.true_bearing_deg, u_deg: answer.u_bearing_deg, place };
      } catch {
        return null; // its own page says what is wrong with it
      }
    });
    void Promise.all(asked).then((all) => live && setFound(all.filter((one): one is LandmarkBearing => one !== null)));
    return () => {
      live = false;
    };
  }, [text]);
  return found;
}

