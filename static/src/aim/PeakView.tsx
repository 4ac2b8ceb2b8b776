// What a peak search shows so far: picture, peak with its doubt, how far to go back, which lobe with the odds, what more
// to take.
import { PeakPlot } from '../draw/PeakPlot.tsx';
import { Message } from '../parts/Message.tsx';
import { say } from '../words/aim.ts';
import { figure, percent, shortest } from '../words/figures.ts';
import type { PeakAnswer } from './answers.ts';
import { Facts } from './Facts.tsx';
import type { Axis, Step } from './questions.ts';
import { bearing, level } from './say.ts';

export interface PeakViewProps {
  axis: Axis;
  steps: readonly Step[];
  answer: PeakAnswer | null;
  expected: { level: number; u: number } | null;
}

export function PeakView({ axis, steps, answer, expected }: PeakViewProps) {
  if (steps.length === 0) return <p>{say('peak.no-steps')}</p>;
  return (
    <>
      <PeakPlot steps={steps} answer={answer} expected={expected} />
      {answer && (
        <>
          <Facts
            facts={[
              { name: say('peak.at'), value: answer.peak_deg === null ? say('peak.not-yet') : peakAngle(axis, answer), large: true },
              answer.from_last_deg === null ? null : { name: say('peak.back'), value: goBack(axis, answer.from_last_deg) },
              { name: say('peak.level'), value: level(answer.peak_level_dbm, answer.peak_level_u_db) },
              expected && { name: say('peak.expected'), value: level(expected.level, expected.u) },
              {
                name: say('peak.lobe'),
                value: say(`peak.lobe.${answer.lobe}`, { percent: percent(answer.lobe === 'side' ? 1 - answer.odds_main : answer.odds_main) }),
              },
            ]}
          />
          {answer.lobe === 'side' && <Message tone="warn">{say('peak.side-warning')}</Message>}
          {answer.left_out.length > 0 && (
            <div>
              <p>
                <strong>{say('peak.left-out')}</strong>
              </p>
              <ul class="plain-list figure">
                {answer.left_out.map((step, i) => (
                  <li key={i}>{say('peak.left-out-step', { angle: `${shortest(step.angle_deg, 2)}°`, level: `${shortest(step.level_dbm, 1)} dBm`, why: step.why })}</li>
                ))}
              </ul>
            </div>
          )}
          {answer.take_more.length > 0 ? (
            <div>
              <p>
                <strong>{say('peak.take-more')}</strong>
              </p>
              <ul class="numbered">
                {answer.take_more.map((want) => (
                  <li key={want.code}>{want.text}</li>
                ))}
              </ul>
            </div>
          ) : (
            <p>{say('peak.enough')}</p>
          )}
        </>
      )}
    </>
  );
}

export function peakAngle(axis: Axis, answer: PeakAnswer): string {
  const deg = answer.peak_deg ?? 0;
  if (axis === 'azimuth') return bearing(deg, answer.peak_u_deg);
  return `${figure(deg, 1)}° ± ${figure(answer.peak_u_deg ?? 0, 1)}°`;
}

/** "1.8° left", from where the last step stands. */
export function goBack(axis: Axis, deg: number): string {
  if (Math.abs(deg) < 0.05) return say('peak.stay');
  const amount = `${figure(Math.abs(deg), 1)}°`;
  const way = axis === 'azimuth' ? (deg > 0 ? 'off.right' : 'off.left') : deg > 0 ? 'off.up' : 'off.down';
  return say(way, { amount });
}
