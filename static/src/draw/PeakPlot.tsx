// A peak search: each level over its angle, the lobe that fits them, the peak with its doubt, where the mount stands now
// and how far it has to go back, and the level that the path should give.
import type { PeakAnswer } from '../aim/answers.ts';
import { figure, shortest } from '../words/figures.ts';
import { say } from '../words/aim.ts';
import { useWidth } from './useWidth.ts';

export interface PeakPlotProps {
  steps: readonly { angle_deg: number; level_dbm: number }[];
  answer: PeakAnswer | null;
  expected: { level: number; u: number } | null;
}

const left = 48;
const right = 14;
const top = 34;
const foot = 46;

export function PeakPlot({ steps, answer, expected }: PeakPlotProps) {
  const [ref, width] = useWidth<HTMLElement>(358);
  const first = steps[0];
  const lastStep = steps[steps.length - 1];
  if (!first || !lastStep) return null;
  // A search across north runs on past 360.
  const near = (a: number) => first.angle_deg + ((((a - first.angle_deg + 180) % 360) + 360) % 360) - 180;
  const points = steps.map((s, i) => ({ a: near(s.angle_deg), level: s.level_dbm, used: answer?.used[i] ?? true }));
  const curve = (answer?.curve ?? []).map((c) => ({ a: near(c.angle_deg), level: c.level_dbm })).sort((p, q) => p.a - q.a);
  const peak = answer?.peak_deg === null || answer?.peak_deg === undefined ? null : near(answer.peak_deg);
  const angles = [...points.map((p) => p.a), ...(peak === null ? [] : [peak])];
  let from = Math.min(...angles);
  let to = Math.max(...angles);
  const pad = Math.max(0.5, (to - from) * 0.12);
  from -= pad;
  to += pad;
  const levels = [...points.map((p) => p.level), ...(answer ? [answer.peak_level_dbm] : []), ...(expected ? [expected.level] : [])];
  const high = Math.ceil(Math.max(...levels) + 1);
  const low = Math.floor(Math.min(...levels) - 2);
  const height = Math.max(230, Math.min(320, Math.round(width * 0.7)));
  const x = (a: number) => left + ((a - from) / (to - from)) * (width - left - right);
  const y = (l: number) => top + ((high - l) / (high - low)) * (height - top - foot);
  const seen = curve.filter((c) => c.a >= from && c.a <= to && c.level >= low);
  const levelStep = stepOf(high - low, 5);
  const angleStep = stepOf(to - from, width < 340 ? 4 : 6);
  const rows = marks(low, high, levelStep);
  const columns = marks(from, to, angleStep);
  const u = answer?.peak_u_deg ?? null;
  const here = points[points.length - 1];
  const peakAt = peak === null ? null : x(peak);
  return (
    <figure class="aim-drawing" ref={ref}>
      <figcaption>{say('peak.drawing-caption')}</figcaption>
      <svg viewBox={`0 0 ${width} ${height}`} height={height} role="img" aria-label={describe(steps.length, answer)}>
        {rows.map((l) => (
          <g key={l}>
            <path class="grid" d={`M${left} ${y(l)} H${width - right}`} />
            <text class="quiet-text" x={left - 6} y={y(l) + 6} text-anchor="end">
              {figure(l, 0)}
            </text>
          </g>
        ))}
        {columns.map((a) => (
          <g key={a}>
            <path class="axis" d={`M${x(a)} ${height - foot} v6`} />
            <text class="quiet-text" x={x(a)} y={height - foot + 26} text-anchor="middle">
              {`${shortest(((a % 360) + 360) % 360 > 180 && from < 0 ? a : a < 0 && from >= 0 ? a + 360 : a >= 360 ? a - 360 : a, 2)}°`}
            </text>
          </g>
        ))}
        {expected && (
          <>
            <path class="ghosted" d={`M${left} ${y(expected.level)} H${width - right}`} />
            <text class="over quiet-text" x={width - right} y={y(expected.level) - 6} text-anchor="end">
              {say('peak.expected-short')}
            </text>
          </>
        )}
        {peakAt !== null && u !== null && (
          <rect class={`band${answer?.lobe === 'main' ? '' : ' doubtful'}`} x={peakAt - Math.max(2, x(from + 2 * u) - x(from))} y={top} width={2 * Math.max(2, x(from + 2 * u) - x(from))} height={height - top - foot} />
        )}
        {seen.length > 1 && <path class="thick" d={seen.map((c, i) => `${i === 0 ? 'M' : 'L'}${x(c.a).toFixed(1)} ${y(c.level).toFixed(1)}`).join(' ')} />}
        {peakAt !== null && <path class="axis" d={`M${peakAt} ${top} V${height - foot}`} />}
        {points.map((p, i) => (
          <circle key={i} class={`point${p.used ? '' : ' left-out'}`} cx={x(p.a)} cy={y(p.level)} r={p.used ? 6 : 5.5} />
        ))}
        {here && (
          <>
            <path class="axis" d={`M${x(here.a)} ${y(here.level) + 9} V${height - foot}`} stroke-dasharray="2 4" />
            <rect class="bad" x={x(here.a) - 9} y={y(here.level) - 9} width="18" height="18" />
          </>
        )}
        <path class="axis" d={`M${left} ${top} V${height - foot} H${width - right}`} />
        <text class="strong" x={2} y={18}>
          dBm
        </text>
        {peak !== null && peakAt !== null && (
          <text class="over strong" x={Math.min(width - 60, Math.max(110, peakAt))} y={20} text-anchor="middle">
            {say('peak.here', { angle: `${shortest(answer?.peak_deg ?? peak, 1)}°` })}
          </text>
        )}
        <text class="quiet-text" x={width - 2} y={height - 1} text-anchor="end">
          {say('peak.now-mark')}
        </text>
      </svg>
    </figure>
  );
}

function describe(n: number, answer: PeakAnswer | null): string {
  if (!answer || answer.peak_deg === null) return say('peak.drawing-none', { n });
  return say('peak.drawing', { n, angle: shortest(answer.peak_deg, 1), level: shortest(answer.peak_level_dbm, 1) });
}

/** The smallest step of the kind 1, 2, 5 × 10ⁿ that gives at most `most` marks. */
function stepOf(span: number, most: number): number {
  const wanted = span / most;
  const decade = 10 ** Math.floor(Math.log10(wanted));
  for (const step of [1, 2, 5]) if (step * decade >= wanted) return step * decade;
  return 10 * decade;
}

function marks(from: number, to: number, step: number): number[] {
  const list: number[] = [];
  for (let i = Math.ceil(from / step - 1e-9); i * step <= to + 1e-9; i++) list.push(Number((i * step).toFixed(6)));
  return list;
}
