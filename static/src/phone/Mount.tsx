// One mount at one step of the visit: the drawing that readings are entered through, the readings as a list, the verdict
// and the next thing to do in thumb's reach.
import { useEffect, useState } from 'preact/hooks';
import { drawnFrom, drawnRemedy, type DrawnAntenna, quantitiesOf, statesOf } from '../draw/drawn.ts';
import { MountDrawing } from '../draw/MountDrawing.tsx';
import { Button } from '../parts/Button.tsx';
import { addEntry } from '../store/index.ts';
import type { Antenna, LoggedEntry, Phase, PlannedMount, Quantity, Reading, States } from '../types.ts';
import { decimalsFor, decimalsIn, figure, shortest } from '../words/figures.ts';
import { t } from '../words/words.ts';
import { DeskRemark } from './DeskRemark.tsx';
import { Gone } from './Gone.tsx';
import { useJudged } from './judge.ts';
import { lastTurn, standing } from './log.ts';
import { axes, type Axis, directedOf, saidReading, wayName } from './manner.ts';
import { type Action, nextActions } from './nextAction.ts';
import { type Notice, takeNotice } from './notice.ts';
import { Page } from './Page.tsx';
import { go, hrefOf, type MountStep, phaseOf } from './route.ts';
import { mirrorFact } from './sentence.ts';
import { TurnedBolt } from './TurnedBolt.tsx';
import { useJob } from './useJob.ts';
import { VerdictStrip } from './VerdictStrip.tsx';
import { Visit } from './Visit.tsx';

export function Mount({ job: id, mount: mountId, step }: { job: string; mount: string; step: MountStep }) {
  const open = useJob(id);
  const mount = open?.job.plan.mounts.find((m) => m.id === mountId);
  const { verdict, sheet, problem, thinking } = useJudged(mount, open?.log, step);
  const most = useDrawingHeight();
  const [notice, setNotice] = useState<Notice | null>(takeNotice);
  if (!open || !mount) return <Gone looking={open === undefined} />;
  const { job, log } = open;
  const phase = phaseOf(step);
  const shown = sheet ?? mount.sheet;
  const state = verdict && verdict.judged === phase ? phase : 'planned';
  const antennas = drawnFrom(shown, verdict, state);
  const actions = nextActions(step, log, mount, state === phase ? verdict : null);
  const action = actions[0] ?? null;
  const remedy = action?.do === 'measure' && !action.again ? null : drawnRemedy(verdict, state);
  const spacings = state === 'planned' && verdict?.judged !== 'planned' ? [] : (verdict?.geometry.spacings ?? []);
  const measure = (antenna: string, quantity: Quantity) => go({ page: 'reading', job: id, mount: mountId, step, antenna, quantity });
  const mirror = mirrorFact(mount.sheet);
  const { mounts } = job.plan;
  const k = mounts.indexOf(mount) + 1;

  const takeBack = async (entry: string, said: string) => {
    try {
      await addEntry('reading.withdrawn', id, mountId, { withdraws: entry });
      setNotice({ text: said, entry: null, takenBack: '' });
    } catch (error) {
      setNotice({ text: t('failed.write', { why: String(error) }), entry, takenBack: said });
    }
  };

  return (
    <Page
      title={job.plan.site}
      under={mounts.length > 1 ? t('mount.place', { mount: mount.name, k, n: mounts.length }) : mount.name}
      backHref={hrefOf({ page: 'job', job: id })}
      kind="mount"
      head={<Visit job={job} log={log} mount={mountId} here={step} />}
      dock={
        <>
          {notice && (
            <div class="notice" role="status">
              <span>{notice.text}</span>
              {notice.entry && <Button onPress={() => void takeBack(notice.entry ?? '', notice.takenBack)}>{t('mount.take-back')}</Button>}
            </div>
          )}
          <VerdictStrip
            verdict={verdict}
            sheet={sheet}
            problem={problem}
            thinking={thinking}
            phase={phase}
            href={hrefOf({ page: 'verdict', job: id, mount: mountId, step })}
            begin={action?.do === 'measure' ? action : null}
          />
          <div class="actions">
            {actions.map((one, i) => (
              <ActionButton
                key={JSON.stringify(one)}
                action={one}
                first={i === 0}
                job={id}
                mount={mountId}
                step={step}
                onTurned={(antenna, quantity) =>
                  setNotice({ text: t('mount.turned-kept', { antenna, quantity: t(`quantity.${quantity}`) }), entry: null, takenBack: '' })
                }
              />
            ))}
          </div>
        </>
      }
    >
      <DeskRemark job={job} />
      <MountDrawing antennas={antennas} spacings={spacings} remedy={remedy} ghost onTouch={measure} most={most} />
      <section class="section" aria-labelledby="readings-title">
        <h2 id="readings-title">{t('mount.readings', { phase: t(`phase.${phase}`) })}</h2>
        <p class="quiet">{t(`mount.step-${step}`)}</p>
        {mount.sheet.near.antennas.map((antenna) => (
          <Schedule
            key={antenna.id}
            antenna={antenna}
            drawn={antennas.find((a) => a.id === antenna.id)}
            mount={mount}
            shown={shown.near.antennas.find((a) => a.id === antenna.id) ?? antenna}
            log={log}
            phase={phase}
            doubts={verdict?.geometry.antennas.find((a) => a.id === antenna.id)?.[phase] ?? null}
            hrefOfReading={(quantity) => hrefOf({ page: 'reading', job: id, mount: mountId, step, antenna: antenna.id, quantity })}
          />
        ))}
      </section>
      <ul class="plain-list conditions">
        {verdict && <li>{t(verdict.surroundings.sight ? 'mount.sight' : 'mount.no-sight')}</li>}
        {verdict && <li>{t(verdict.far_from_plan ? 'mount.far-plan' : 'mount.far-read')}</li>}
        {mirror && <li>{mirror}</li>}
        {step === 'adjust' && <li>{t('mount.stands')}</li>}
      </ul>
      {mounts.length > 1 && <OtherMounts job={id} mounts={mounts} here={mountId} step={step} />}
    </Page>
  );
}

/** The drawing takes what the head and the dock leave of the screen, so that it is seen whole with its verdict. */
function useDrawingHeight(): number {
  const fit = () => Math.min(400, Math.max(230, innerHeight - 460));
  const [height, setHeight] = useState(fit);
  useEffect(() => {
    const follow = () => setHeight(fit());
    addEventListener('resize', follow);
    return () => removeEventListener('resize', follow);
  }, []);
  return height;
}

function ActionButton(props: {
  action: Action;
  first: boolean;
  job: string;
  mount: string;
  step: MountStep;
  onTurned: (antenna: string, quantity: Quantity) => void;
}) {
  const { action, first, job, mount, step } = props;
  const kind = first ? 'first' : 'plain';
  switch (action.do) {
    case 'measure': {
      const named = { antenna: action.antenna, quantity: t(`quantity.${action.quantity}`) };
      return (
        <Button kind={kind} extra="grow" href={hrefOf({ page: 'reading', job, mount, step, antenna: action.antenna, quantity: action.quantity })}>
          {t(action.again ? 'mount.measure-again' : 'mount.measure', named)}
        </Button>
      );
    }
    case 'turned': {
      const { antenna, quantity } = action;
      return <TurnedBolt first={first} job={job} mount={mount} antenna={antenna} quantity={quantity} onTurned={() => props.onTurned(antenna, quantity)} />;
    }
    case 'go':
      return (
        <Button kind={kind} extra="grow" href={action.to === 'hand-in' ? hrefOf({ page: 'hand-in', job }) : hrefOf({ page: 'mount', job, mount, step: action.to })}>
          {action.to === 'hand-in' ? t('mount.to-hand-in') : action.to === 'adjust' ? t('mount.to-adjust') : t('mount.to-as-left')}
        </Button>
      );
  }
}

// ---- Schedule of readings ---------------------------------------------------------------------------------------

interface ScheduleProps {
  antenna: Antenna;
  drawn: DrawnAntenna | undefined;
  mount: PlannedMount;
  /** The antenna as folded, cut to the step. */
  shown: Antenna;
  log: readonly LoggedEntry[];
  phase: Phase;
  doubts: PlacedDoubts | null;
  hrefOfReading: (quantity: Quantity) => string;
}

type PlacedDoubts = NonNullable<import('../types.ts').Geometry['antennas'][number]['as_left']>;

/** One antenna's readings, a line each: a line is a link to entering it. */
function Schedule(props: ScheduleProps) {
  const { antenna, drawn, mount, shown, log, phase, hrefOfReading } = props;
  return (
    <div class="schedule">
      <h3>{t('drawing.antenna', { antenna: antenna.id })}</h3>
      <ul>
        {quantitiesOf(mount.sheet, antenna).map((quantity) => {
          const states = statesOf(antenna, quantity) as States<Reading> | null | undefined;
          const count = readingsHere(shown, quantity, phase);
          const off = drawn?.off.includes(quantity) ?? false;
          const own = standing(log, mount.id, phase, antenna.id, quantity).length;
          const turned = phase === 'as_left' && own === 0 && lastTurn(log, mount.id, antenna.id, quantity) !== null;
          const value = count > 0 ? valueOf(quantity, antenna, drawn, props.doubts, decimalsRead(shown, quantity, phase)) : null;
          return (
            <li key={quantity}>
              <a href={hrefOfReading(quantity)} class={`schedule-row${off ? ' off' : ''}${value ? '' : ' unread'}`}>
                <QuantitySign quantity={quantity} />
                <span class="spoken">{t('mount.row', { antenna: antenna.id })}</span>
                <span class="what">
                  <span class="name">{t(`quantity.${quantity}`)}</span>
                  <span class="quiet figure">
                    {states?.planned ? t('mount.planned', { value: saidReading(quantity, antenna, states.planned) }) : ''}
                  </span>
                  {value && own === 0 && phase === 'as_left' && <span class="quiet">{t('mount.from-found')}</span>}
                </span>
                <span class="value">
                  {value ? (
                    <>
                      <span class="big figure">{value.number}</span>
                      <span class="beside figure">
                        {value.way} {value.u}
                      </span>
                    </>
                  ) : (
                    <span class="none">{turned ? t('mount.moved') : t('reading.none')}</span>
                  )}
                </span>
              </a>
            </li>
          );
        })}
      </ul>
    </div>
  );
}

function readingsHere(shown: Antenna, quantity: Quantity, phase: Phase): number {
  const list = (statesOf(shown, quantity) as States<Reading> | null | undefined)?.[phase];
  return list ? (Array.isArray(list) ? list.length : 1) : 0;
}

/** Decimals of the finest reading here: what was read as 62.5 is not shown as 63. */
function decimalsRead(shown: Antenna, quantity: Quantity, phase: Phase): number {
  const list = (statesOf(shown, quantity) as States<Reading> | null | undefined)?.[phase];
  const readings: readonly Reading[] = list ? (Array.isArray(list) ? list : [list]) : [];
  const values = readings.flatMap(({ value }) => (typeof value === 'number' ? [value] : axes.map((axis) => value[axis] ?? 0)));
  return decimalsIn(values);
}

interface ShownValue {
  number: string;
  way: string;
  u: string;
}

/** What calc pooled from the readings: value with the decimals that were read, direction, doubt. */
function valueOf(quantity: Quantity, antenna: Antenna, drawn: DrawnAntenna | undefined, doubts: PlacedDoubts | null, read: number): ShownValue | null {
  if (!drawn || !doubts) return null;
  if (quantity === 'position') {
    const axis = [...axes].sort((a, b) => Math.abs(along(drawn.planned, b)) - Math.abs(along(drawn.planned, a)))[0] ?? 'right';
    const mm = along(drawn.placed, axis);
    const u = doubts[`u_${axis}_mm`];
    return { number: `${shortest(Math.abs(mm), read)} mm`, way: wayName(axis, mm < 0 ? 'less' : 'more'), u: u ? `\u00b1 ${figure(u, decimalsFor(u))} mm` : '' };
  }
  const value = quantity === 'skew' ? drawn.placed.skew_deg : quantity === 'tilt' ? drawn.placed.tilt_deg : drawn.placed.azimuth_deg;
  const u = quantity === 'skew' ? doubts.u_skew_deg : quantity === 'tilt' ? doubts.u_tilt_deg : doubts.u_azimuth_deg;
  const number = `${shortest(Math.abs(value), Math.max(1, read))}°`;
  const way = quantity === 'azimuth' || number === '0°' ? '' : wayName(directedOf(quantity, antenna), value < 0 ? 'less' : 'more');
  return { number, way, u: u ? `\u00b1 ${figure(u, Math.min(2, decimalsFor(u)))}°` : '' };
}

function along(place: DrawnAntenna['placed'], axis: Axis): number {
  return axis === 'right' ? place.right_mm : axis === 'up' ? place.up_mm : place.forward_mm;
}

/** How each is turned, drawn: about the line of sight, up and down, about the mast, along the tape. */
function QuantitySign({ quantity }: { quantity: Quantity }) {
  return (
    <svg class="quantity-sign" width="40" height="40" viewBox="0 0 40 40" aria-hidden="true" focusable="false">
      {quantity === 'skew' && (
        <>
          <rect x="13" y="7" width="14" height="26" transform="rotate(14 20 20)" />
          <path d="M20 3 V37" class="thin" />
        </>
      )}
      {quantity === 'tilt' && (
        <>
          <path d="M12 6 V34 M12 20 L36 28" />
          <path d="M12 20 H36" class="thin" />
        </>
      )}
      {quantity === 'azimuth' && (
        <>
          <path d="M20 22 L32 6" />
          <path d="M20 36 V4 M14 10 L20 3 L26 10" class="thin" />
          <circle cx="20" cy="24" r="3.5" class="solid" />
        </>
      )}
      {quantity === 'position' && <path d="M5 10 V30 M35 10 V30 M5 20 H35 M11 15 L5 20 L11 25 M29 15 L35 20 L29 25" />}
    </svg>
  );
}

function OtherMounts({ job, mounts, here, step }: { job: string; mounts: PlannedMount[]; here: string; step: MountStep }) {
  return (
    <section class="section stack" aria-labelledby="others-title">
      <h2 id="others-title">{t('job.mounts')}</h2>
      <div class="buttons">
        {mounts
          .filter((m) => m.id !== here)
          .map((m) => (
            <Button key={m.id} extra="grow" href={hrefOf({ page: 'mount', job, mount: m.id, step })}>
              {m.name}
            </Button>
          ))}
      </div>
    </section>
  );
}
