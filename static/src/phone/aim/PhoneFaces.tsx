// Tilt or skew by the phone's own sensor, two faces: what comes is shown as it comes, a face is taken when it is enough,
// and the answer of both goes into the reading. Without a sensor this says so; typing is beside it all the time.
import { useEffect, useRef, useState } from 'preact/hooks';
import type { FaceHeld, TwoFace } from '../../aim/answers.ts';
import { Facts } from '../../aim/Facts.tsx';
import { problemOf, useReckoned } from '../../aim/useReckoned.ts';
import { Button } from '../../parts/Button.tsx';
import { Message } from '../../parts/Message.tsx';
import { APART_MS, type Axis, type Calibration, calibration, jumped, keepCalibration } from '../../sensors/calibration.ts';
import { Motion, SILENT_MS } from '../../sensors/motion.ts';
import { localTime } from '../../store/index.ts';
import { say } from '../../words/aim.ts';
import { figure, withDoubt } from '../../words/figures.ts';
import { t } from '../../words/words.ts';
import { ask } from './useAim.ts';

export interface PhoneFacesProps {
  quantity: 'tilt' | 'skew';
  onTake: (value: number, u: number) => void;
}

type State = 'off' | 'asking' | 'denied' | 'missing' | 'on' | 'silent';
type Step = 'face_up' | 'a' | 'b';

interface Taken {
  held: FaceHeld;
  at: number;
}

/** The hand that pressed needs a moment to come to rest. */
const SETTLE_S = 1;
/** How long the phone lies face up. */
const LIE_S = 2;
/** Above this share of rejected samples it is the hand or a gust, and holding on longer does not help. */
const SHAKEN = 0.25;

export function PhoneFaces({ quantity, onTake }: PhoneFacesProps) {
  const axis: Axis = quantity === 'tilt' ? 'tilt_by_edge' : 'skew';
  const motion = useRef<Motion | null>(null);
  const [state, setState] = useState<State>('off');
  const [known, setKnown] = useState<Calibration | null | undefined>(undefined);
  const [running, setRunning] = useState<Step | null>(null);
  const [live, setLive] = useState<FaceHeld | null>(null);
  const [a, setA] = useState<Taken | null>(null);
  const [b, setB] = useState<Taken | null>(null);
  const [trouble, setTrouble] = useState<string | null>(null);
  useEffect(() => {
    calibration().then(setKnown, () => setKnown(null));
    return () => motion.current?.stop();
  }, []);

  const start = async () => {
    setState('asking');
    motion.current ??= new Motion();
    const came = await motion.current.start().catch(() => 'missing' as const);
    if (came !== 'listening') {
      setState(came);
      return;
    }
    setState('on');
  };

  // Silence is told after two seconds without a value, at the start and at any time later; values that come back end it.
  useEffect(() => {
    if (state !== 'on' && state !== 'silent') return;
    const timer = setInterval(() => setState(motion.current?.heardWithin(SILENT_MS) ? 'on' : 'silent'), SILENT_MS);
    return () => clearInterval(timer);
  }, [state]);

  // Twice a second is soon enough for the eye; a question that is still being worked on is not asked again.
  useEffect(() => {
    if (running === null) return;
    let ended = false;
    let asking = false;
    const look = async () => {
      const gathered = motion.current?.gathered();
      if (asking || !gathered) return;
      asking = true;
      try {
        const held = await ask<FaceHeld>('tilt.face', running === 'face_up' ? { ...gathered, axis: 'face_up' } : { ...gathered, axis, up_sign: known?.up_sign });
        if (ended) return;
        setTrouble(null);
        if (running !== 'face_up') setLive(held);
        else if (held.up_sign !== null && held.duration_s >= LIE_S) {
          const next: Calibration = { up_sign: held.up_sign, bias: known?.bias ?? {} };
          setKnown(next);
          setRunning(null);
          keepCalibration(next).catch((error: unknown) => setTrouble(t('failed.write', { why: String(error) })));
        }
      } catch (error) {
        if (!ended) {
          setLive(null);
          setTrouble(problemOf(error).message);
          // What lay wrong is lain down anew and pressed again; a face goes on, and drops what was wrong in it.
          if (running === 'face_up') setRunning(null);
        }
      } finally {
        asking = false;
      }
    };
    const timer = setInterval(() => void look(), 500);
    return () => {
      ended = true;
      clearInterval(timer);
    };
  }, [running, axis, known]);

  const begin = (step: Step) => {
    motion.current?.begin(SETTLE_S);
    setLive(null);
    setTrouble(null);
    if (step === 'a') setA(null);
    if (step !== 'face_up') setB(null);
    setRunning(step);
  };
  const takeFace = () => {
    if (!live || (running !== 'a' && running !== 'b')) return;
    (running === 'a' ? setA : setB)({ held: live, at: Date.now() });
    setRunning(null);
    setLive(null);
  };

  if (state === 'off' || state === 'asking') {
    return (
      <div class="stack">
        <p>{say('live.asks')}</p>
        <Button wide busy={state === 'asking'} onPress={() => void start()}>
          {say('live.start')}
        </Button>
      </div>
    );
  }
  if (state === 'denied' || state === 'missing') return <Message tone="warn" live>{say(`live.${state}`)}</Message>;
  if (known === undefined) return null;
  return (
    <div class="stack">
      {state === 'silent' && <Message tone="warn" live>{say('live.silent')}</Message>}
      {known === null ? (
        <>
          <p>{say('live.face-up')}</p>
          <Button wide busy={running === 'face_up'} onPress={() => begin('face_up')}>
            {say(running === 'face_up' ? 'live.lying' : 'live.lies')}
          </Button>
        </>
      ) : (
        (['a', 'b'] as const).map((face) => {
          const taken = face === 'a' ? a : b;
          if (face === 'b' && !a) return null;
          return (
            <fieldset class="stack" key={face}>
              <legend class="field-label">{say(`live.${face}`)}</legend>
              {!taken && <p>{say(`live.lay.${quantity}.${face}`)}</p>}
              {running === face ? (
                <Holding live={live} onTake={takeFace} onAnew={() => begin(face)} />
              ) : (
                <>
                  {taken && <p class="figure">{say('live.taken', { mean: figure(taken.held.mean_deg, 1), n: taken.held.used, s: Math.round(taken.held.duration_s) })}</p>}
                  <Button wide onPress={() => begin(face)}>{say(taken ? 'live.again' : `live.read.${face}`)}</Button>
                </>
              )}
            </fieldset>
          );
        })
      )}
      {trouble && <Message tone="warn" live>{trouble}</Message>}
      {known && a && b && <Answer a={a} b={b} axis={axis} known={known} onTake={onTake} />}
    </div>
  );
}

function Holding({ live, onTake, onAnew }: { live: FaceHeld | null; onTake: () => void; onAnew: () => void }) {
  if (!live) return <p role="status">{say('live.settle')}</p>;
  const shaken = live.rejected > SHAKEN * (live.rejected + live.used);
  const done = Math.min(1, live.duration_s / live.seconds_needed);
  return (
    <>
      <Facts
        facts={[
          { name: say('live.mean'), value: `${figure(live.mean_deg, 1)}°`, large: true },
          { name: say('live.spread'), value: `${figure(live.spread_deg, 2)}°` },
          { name: say('live.drift'), value: `${figure(live.drift_deg, 2)}°` },
          { name: say('live.seconds'), value: say('live.of', { s: Math.floor(live.duration_s), all: live.seconds_needed }) },
          { name: say('live.rejected'), value: say('live.of', { s: live.rejected, all: live.rejected + live.used }) },
        ]}
      />
      <p role="status">{say(live.enough ? 'live.enough' : shaken ? 'live.shaken' : live.still ? 'live.still' : 'live.sways')}</p>
      <svg class="held" height="24" role="progressbar" aria-label={say('live.progress')} aria-valuemin={0} aria-valuemax={100} aria-valuenow={Math.floor(100 * done)}>
        <rect x="0" y="0" width="100%" height="24" class="held-all" />
        <rect x="0" y="0" width={`${100 * done}%`} height="24" class="held-done" />
      </svg>
      <Button wide disabled={!live.enough} onPress={onTake}>
        {say('live.take-face')}
      </Button>
      <Button kind="quiet" onPress={onAnew}>
        {say('live.anew')}
      </Button>
    </>
  );
}

function Answer({ a, b, axis, known, onTake }: { a: Taken; b: Taken; axis: Axis; known: Calibration; onTake: PhoneFacesProps['onTake'] }) {
  const found = useReckoned<TwoFace>(ask, 'tilt.twoface', {
    face_a_deg: a.held.mean_deg,
    spread_a_deg: a.held.spread_deg,
    count_a: a.held.count,
    face_b_deg: b.held.mean_deg,
    spread_b_deg: b.held.spread_deg,
    count_b: b.held.count,
    u_scale: a.held.u_scale,
  });
  if (found.problem) return <Message tone="wrong">{found.problem.message}</Message>;
  const answer = found.answer;
  if (!answer) return null;
  const last = known.bias[axis];
  const take = () => {
    // That the phone's error could not be remembered does not hold up the reading.
    keepCalibration({ ...known, bias: { ...known.bias, [axis]: { deg: answer.bias_deg, at: localTime(new Date()) } } }).catch(() => undefined);
    onTake(answer.tilt_deg, answer.u_deg);
  };
  return (
    <>
      <Facts
        facts={[
          { name: say('live.answer'), value: `${withDoubt(answer.tilt_deg, answer.u_deg)}°`, large: true },
          { name: say('live.bias'), value: `${figure(answer.bias_deg, 1)}°` },
          last ? { name: say('live.last-bias'), value: `${figure(last.deg, 1)}°` } : null,
        ]}
      />
      {b.at - a.at > APART_MS && <Message tone="warn">{say('live.apart')}</Message>}
      {jumped(last?.deg, answer.bias_deg) && <Message tone="warn">{say('live.jump')}</Message>}
      <Button wide onPress={take}>
        {say('faces.take')}
      </Button>
    </>
  );
}
