// Where to point: true bearing, elevation and distance to the far end with their doubt, beside the plan's own; and what a
// compass would show, as a check on gross errors only.
import { metres } from '../draw/PathProfile.tsx';
import { Message } from '../parts/Message.tsx';
import { say } from '../words/aim.ts';
import { figure } from '../words/figures.ts';
import type { Problem, Sheet } from '../types.ts';
import type { Compass, Target } from './answers.ts';
import { Facts } from './Facts.tsx';
import { bearing, besides, offBy, turned, upDown } from './say.ts';

export interface PointingProps {
  sheet: Sheet;
  target: Target | null;
  problem: Problem | null;
  compass: Compass | null;
}

/** The plan's bearing is taken to differ when it does by more than this and the coordinates' own doubt: plans are written to a tenth. */
const planDiffers = 0.3;

export function Pointing({ sheet, target, problem, compass }: PointingProps) {
  const { path } = sheet;
  const differs = target !== null && Math.abs(offBy(path.bearing_deg, target.true_bearing_deg)) > planDiffers + 2 * target.u_bearing_deg;
  const aim = target?.true_bearing_deg ?? path.bearing_deg;
  return (
    <>
      <Facts
        facts={[
          { name: say('aim.bearing'), value: bearing(aim, target?.u_bearing_deg ?? null), large: true },
          { name: say('aim.elevation'), value: upDown(target?.elevation_deg ?? path.elevation_deg) },
          { name: say('aim.distance'), value: metres(target?.distance_m ?? path.distance_m) },
          target && { name: say('aim.plan-bearing'), value: `${figure(turned(path.bearing_deg), 1)}°` },
          compass && {
            name: say('aim.compass-shows'),
            value: `${figure(turned(aim - compass.declination_deg), 0)}°`,
          },
        ]}
      />
      {problem && <Message tone="wrong">{problem.message}</Message>}
      {!target && !problem && <Message tone="note">{say('aim.no-coordinates')}</Message>}
      {differs && target && (
        <Message tone="warn">{say('aim.plan-differs', { off: besides(path.bearing_deg, target.true_bearing_deg) })}</Message>
      )}
      {target?.remarks.map((remark) => (
        <Message tone="warn" key={remark}>
          {remark}
        </Message>
      ))}
      {compass && <Declination compass={compass} />}
    </>
  );
}

export function Declination({ compass }: { compass: Compass }) {
  const east = compass.declination_deg >= 0;
  return (
    <>
      <p>
        {say('aim.declination', {
          amount: `${figure(Math.abs(compass.declination_deg), 1)}°`,
          way: say(east ? 'aim.east' : 'aim.west'),
          u: `${figure(compass.uncertainty_deg, 1)}°`,
          model: compass.model,
          year: String(compass.valid_until),
        })}
      </p>
      <p>
        <strong>{say('aim.gross-only')}</strong>
      </p>
      {(compass.why_not ?? compass.caution) && <Message tone="warn">{compass.why_not ?? compass.caution}</Message>}
    </>
  );
}
