// The path from the side: the earth's bulge, both ends at their heights, the line between them with its first Fresnel
// zone, obstacles standing on the bulge. Heights are drawn taller than lengths, and it says by how much.
import type { PathAnswer } from '../aim/answers.ts';
import { figure } from '../words/figures.ts';
import { say } from '../words/aim.ts';
import { useWidth } from './useWidth.ts';

export interface PathProfileProps {
  path: PathAnswer;
  nearHeight: number;
  farHeight: number;
  /** What stands at the two ends, in words. */
  near: string;
  far: string;
  most?: number;
}

const top = 34;
const foot = 54;
const side = 16;

/** Share of the first Fresnel zone that has to be free: beyond it nothing is lost (calc/aim says the same). */
const freeShare = 0.6;

export function PathProfile({ path, nearHeight, farHeight, near, far, most = 300 }: PathProfileProps) {
  const [ref, width] = useWidth<HTMLElement>(358);
  const { profile, obstacles } = path;
  const last = profile[profile.length - 1];
  if (!last) return null;
  const length = last.at_m;
  const highs = [...profile.map((p) => p.line_m + p.fresnel_radius_m), ...obstacles.map((o) => o.top_m + o.bulge_m), nearHeight, farHeight];
  const lows = [...profile.map((p) => p.line_m - p.fresnel_radius_m), ...obstacles.map((o) => o.top_m + o.bulge_m)];
  const high = Math.max(...highs);
  const low = Math.min(...lows);
  const room = Math.max(5, (high - low) * 0.25);
  // Down to the heights' zero where that is near, else to a floor a little below everything.
  const floor = low >= 0 && low < 4 * (high - low) ? Math.min(0, low - room) : low - room - Math.max(...profile.map((p) => p.bulge_m));
  const height = Math.max(210, Math.min(most, Math.round(width * 0.66)));
  const across = (width - 2 * side) / length;
  const up = (height - top - foot) / (high - floor || 1);
  const x = (m: number) => side + m * across;
  const y = (m: number) => top + (high - m) * up;
  const line = (points: [number, number][]) => points.map(([a, b], i) => `${i === 0 ? 'M' : 'L'}${x(a).toFixed(1)} ${y(b).toFixed(1)}`).join(' ');
  const zone = (share: number) =>
    `${line(profile.map((p) => [p.at_m, p.line_m + share * p.fresnel_radius_m]))} ${line([...profile].reverse().map((p) => [p.at_m, p.line_m - share * p.fresnel_radius_m])).replace('M', 'L')} Z`;
  const earth = `${line(profile.map((p) => [p.at_m, floor + p.bulge_m]))} L${x(length)} ${height - foot + 8} L${x(0)} ${height - foot + 8} Z`;
  const taller = Math.round(up / across);
  const told = say('path.drawing', { length: metres(length), near, far, n: obstacles.length, state: path.clear === null ? say('path.unlisted') : say(path.clear ? 'path.clear' : 'path.not-clear') });
  return (
    <figure class="aim-drawing" ref={ref}>
      <figcaption>{taller > 1 ? say('path.taller', { n: figure(taller, 0) }) : say('path.side')}</figcaption>
      <svg viewBox={`0 0 ${width} ${height}`} height={height} role="img" aria-label={told}>
        <path class="earth" d={earth} />
        <path class="zone" d={zone(1)} />
        <path class="ghosted" d={zone(freeShare)} />
        {obstacles.map((o, i) => (
          <Standing key={i} n={i + 1} x={x(o.at_m)} foot={y(floor + o.bulge_m)} top={y(o.top_m + o.bulge_m)} bad={o.clearance_share < freeShare} />
        ))}
        <path class="thick" d={line([[0, nearHeight], [length, farHeight]])} />
        <path class="mast-line" d={line([[0, floor], [0, nearHeight]])} />
        <path class="mast-line" d={line([[length, floor], [length, farHeight]])} />
        <text class="over strong" x={x(0) - side + 2} y={Math.max(18, y(nearHeight) - 10)}>
          {metres(nearHeight)}
        </text>
        <text class="over strong" x={x(length) + side - 2} y={Math.max(18, y(farHeight) - 10)} text-anchor="end">
          {metres(farHeight)}
        </text>
        <text x={2} y={height - foot + 30}>
          {near}
        </text>
        <text x={width - 2} y={height - foot + 30} text-anchor="end">
          {far}
        </text>
        <text class="quiet-text" x={width / 2} y={height - 4} text-anchor="middle">
          {metres(length)}
        </text>
        <path class="axis" d={`M${x(0)} ${height - 10} H${width / 2 - 46} M${width / 2 + 46} ${height - 10} H${x(length)} M${x(0)} ${height - 15} v10 M${x(length)} ${height - 15} v10`} />
      </svg>
    </figure>
  );
}

/** One obstacle, numbered as in the list under the picture. One that takes something is crossed through, not only coloured. */
function Standing({ n, x, foot, top: head, bad }: { n: number; x: number; foot: number; top: number; bad: boolean }) {
  const w = 10;
  return (
    <>
      <path class={`post ${bad ? 'bad' : 'steel-line'}`} d={`M${x - w} ${foot} V${head} H${x + w} V${foot}`} />
      {bad && <path class="bad" d={`M${x - w} ${head} L${x + w} ${foot} M${x + w} ${head} L${x - w} ${foot}`} />}
      <text class={`over strong${bad ? ' off' : ''}`} x={x} y={foot - head > 34 ? foot - 10 : head - 8} text-anchor="middle">
        {n}
      </text>
    </>
  );
}

/** "61 m", "1.9 km". */
export function metres(m: number): string {
  if (Math.abs(m) >= 10_000) return `${figure(m / 1000, 1)} km`;
  if (Math.abs(m) >= 1000) return `${figure(m / 1000, 2)} km`;
  return `${figure(m, Math.abs(m) < 10 ? 1 : 0)} m`;
}
