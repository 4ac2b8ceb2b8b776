// The path in a picture and in words: each obstacle with how far it clears, and the level that each chain should receive.
import { metres, PathProfile } from '../draw/PathProfile.tsx';
import { Message } from '../parts/Message.tsx';
import { say } from '../words/aim.ts';
import { figure } from '../words/figures.ts';
import type { Sheet } from '../types.ts';
import type { PathAnswer, PathObstacle } from './answers.ts';
import { Facts } from './Facts.tsx';
import { portsOf } from './questions.ts';
import { decibels, level } from './say.ts';

export function PathView({ sheet, path, near, far }: { sheet: Sheet; path: PathAnswer; near: string; far: string }) {
  const { near_at, far_at } = sheet.path;
  return (
    <>
      {near_at && far_at ? (
        <>
          <PathProfile path={path} nearHeight={near_at.height_m} farHeight={far_at.height_m} near={near} far={far} />
          <p class="quiet">{say('path.legend', { datum: sheet.path.height_datum ?? '' })}</p>
        </>
      ) : (
        <Message tone="note">{say('path.no-heights')}</Message>
      )}
      {path.remarks.map((remark) => (
        <Message tone="warn" key={remark}>
          {remark}
        </Message>
      ))}
      <Facts
        facts={[
          { name: say('path.free-space'), value: decibels(path.free_space_loss_db) },
          path.obstacles.length > 0 ? { name: say('path.obstacle-loss'), value: decibels(path.diffraction_loss_db) } : null,
          { name: say('path.k'), value: figure(path.k_factor, 2) },
        ]}
      />
    </>
  );
}

export function ExpectedLevels({ sheet, path }: { sheet: Sheet; path: PathAnswer }) {
  const ports = portsOf(sheet.near.antennas);
  const levels = path.expected_levels_dbm;
  if (!levels || path.u_db === null) return <p>{say('path.no-level')}</p>;
  return (
    <>
      <Facts facts={levels.map((dbm, i) => ({ name: say('path.chain', { port: ports[i] ?? String(i + 1) }), value: level(dbm, path.u_db) }))} />
      <p class="quiet">{say('path.level-how')}</p>
    </>
  );
}

/** "700 m out, top 52 m: clears the line by 9.6 m, 1.5 of the first Fresnel radius". */
export function obstacleSaid(o: PathObstacle): string {
  const clear = o.clearance_share >= 0.6;
  return say(o.clearance_m < 0 ? 'obstacle.over' : clear ? 'obstacle.clears' : 'obstacle.in-zone', {
    at: metres(o.at_m),
    top: metres(o.top_m),
    amount: metres(Math.abs(o.clearance_m)),
    share: figure(Math.abs(o.clearance_share), 1),
    loss: decibels(o.knife_edge_loss_db),
  });
}
