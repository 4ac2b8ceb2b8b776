// Bearings from the mast, north up: where the target is, the sun and its shadow now, known landmarks, and what was read
// today. Every mark has a form of its own and its word; the figures stand in the list under the picture.
import { say } from '../words/aim.ts';
import { useWidth } from './useWidth.ts';

export interface RoseMark {
  kind: 'target' | 'sun' | 'shadow' | 'landmark' | 'reading';
  /** Short: a word on the picture. */
  label: string;
  /** What stands there instead where the word finds no room, as in the list under the picture. */
  short?: string;
  bearing_deg: number;
  /** Standard uncertainty, drawn as a wedge of twice that to each side. */
  u_deg?: number | null;
}

/** What is drawn later lies on top: the target is never hidden. */
const order: readonly RoseMark['kind'][] = ['shadow', 'landmark', 'sun', 'reading', 'target'];

interface Box {
  left: number;
  right: number;
  top: number;
  bottom: number;
}

export function CompassRose({ marks }: { marks: readonly RoseMark[] }) {
  const [ref, width] = useWidth<HTMLElement>(358);
  // A column that is still unfolding may be narrower than any rose.
  const size = Math.min(Math.max(width, 200), 400);
  const middle = width / 2;
  const r = size / 2 - 34;
  const cy = r + 30;
  const height = 2 * r + 60;
  const at = (bearing: number, radius: number): [number, number] => {
    const a = (bearing * Math.PI) / 180;
    return [middle + radius * Math.sin(a), cy - radius * Math.cos(a)];
  };
  const whole = placeLabels(marks, at, r);
  const labels = whole.every((l) => l.fits) ? whole : placeLabels(marks.map((m) => ({ ...m, label: m.short ?? m.label })), at, r);
  const told = marks.map((m) => say('rose.mark', { name: m.label, bearing: String(Math.round(m.bearing_deg)) })).join(', ');
  return (
    <figure class="aim-drawing" ref={ref}>
      <figcaption>{say('rose.caption')}</figcaption>
      <svg viewBox={`0 0 ${width} ${height}`} height={height} role="img" aria-label={say('rose.drawing', { marks: told })}>
        <circle class="axis" cx={middle} cy={cy} r={r} />
        {Array.from({ length: 36 }, (_, i) => {
          const [x1, y1] = at(i * 10, r);
          const [x2, y2] = at(i * 10, r - (i % 3 === 0 ? 12 : 6));
          return <line key={i} class="axis" x1={x1} y1={y1} x2={x2} y2={y2} />;
        })}
        {[0, 90, 180, 270].map((b, i) => {
          const [x, y] = at(b, r + 16);
          return (
            <text key={b} class="strong" x={x} y={y + 6} text-anchor="middle">
              {say((['rose.n', 'rose.e', 'rose.s', 'rose.w'] as const)[i] ?? 'rose.n')}
            </text>
          );
        })}
        {[...marks].sort((a, b) => order.indexOf(a.kind) - order.indexOf(b.kind)).map((mark, i) => (
          <Mark key={i} mark={mark} at={at} r={r} />
        ))}
        <circle class="point" cx={middle} cy={cy} r="5" />
        {labels.map(
          ({ led, from, box }, i) =>
            led && (
              <line key={i} class="grid led" x1={from[0]} y1={from[1]} x2={Math.max(box.left, Math.min(box.right, from[0]))} y2={Math.max(box.top, Math.min(box.bottom, from[1]))} />
            ),
        )}
        {labels.map(({ mark, x, y }, i) => (
          <text key={i} class={`over${mark.kind === 'target' || mark.kind === 'reading' ? ' strong' : ''}`} x={x} y={y} text-anchor="middle">
            {mark.label}
          </text>
        ))}
      </svg>
    </figure>
  );
}

function Mark({ mark, at, r }: { mark: RoseMark; at: (bearing: number, radius: number) => [number, number]; r: number }) {
  const { bearing_deg: b, kind } = mark;
  const [x, y] = at(b, r);
  const [cx, cy] = at(b, 0);
  const turn = `rotate(${b} ${x} ${y})`;
  switch (kind) {
    case 'target':
      return (
        <>
          <line class="thick" x1={cx} y1={cy} x2={x} y2={y} />
          <path class="point" d={`M${x} ${y - 12} L${x + 9} ${y + 8} H${x - 9} Z`} transform={turn} />
        </>
      );
    case 'reading': {
      const wide = Math.min(90, 2 * (mark.u_deg ?? 0));
      const [x1, y1] = at(b - wide, r - 2);
      const [x2, y2] = at(b + wide, r - 2);
      return (
        <>
          {wide > 0.3 && <path class="zone" d={`M${cx} ${cy} L${x1} ${y1} A${r - 2} ${r - 2} 0 0 1 ${x2} ${y2} Z`} />}
          <line class="steel-line" x1={cx} y1={cy} x2={x} y2={y} />
          <rect class="point left-out" x={x - 8} y={y - 8} width="16" height="16" transform={turn} />
        </>
      );
    }
    case 'sun':
      return (
        <g transform={turn}>
          <circle class="point left-out" cx={x} cy={y} r="8" />
          {Array.from({ length: 8 }, (_, i) => (
            <line key={i} class="axis" x1={x} y1={y - 10} x2={x} y2={y - 15} transform={`rotate(${i * 45} ${x} ${y})`} />
          ))}
        </g>
      );
    case 'shadow':
      return <line class="ghosted" x1={cx} y1={cy} x2={x} y2={y} />;
    case 'landmark':
      return <path class="point left-out" d={`M${x} ${y - 10} L${x + 9} ${y + 7} H${x - 9} Z`} />;
  }
}

/** Words inside the ring, each as near to its mark as the others leave room. */
function placeLabels(marks: readonly RoseMark[], at: (bearing: number, radius: number) => [number, number], r: number) {
  const taken: Box[] = marks.map((mark) => {
    const [x, y] = at(mark.bearing_deg, r);
    return { left: x - 12, right: x + 12, top: y - 12, bottom: y + 12 };
  });
  const [cx, cy] = at(0, 0);
  taken.push({ left: cx - 8, right: cx + 8, top: cy - 8, bottom: cy + 8 });
  return marks.map((mark) => {
    const wide = mark.label.length * 10;
    const [mx, my] = at(mark.bearing_deg, r);
    let best: { x: number; y: number; box: Box; far: number } | null = null;
    for (let radius = r - 22; radius > 10; radius -= 11) {
      for (let turn = -60; turn <= 60; turn += 10) {
        const [px, py] = at(mark.bearing_deg + turn, radius);
        // The word's near edge lies on the point: words left of the middle begin there, words right of it end there.
        const lean = Math.max(-1, Math.min(1, (px - cx) / (r * 0.6)));
        const x = px - (lean * wide) / 2;
        const box = { left: x - wide / 2, right: x + wide / 2, top: py - 12, bottom: py + 10 };
        const inside = [box.left, box.right].every((bx) => [box.top, box.bottom].every((by) => Math.hypot(bx - cx, by - cy) < r - 8));
        if (!inside || taken.some((t) => t.left < box.right && box.left < t.right && t.top < box.bottom && box.top < t.bottom)) continue;
        const nearX = Math.max(box.left, Math.min(box.right, mx));
        const nearY = Math.max(box.top, Math.min(box.bottom, my));
        const far = Math.hypot(nearX - mx, nearY - my);
        if (best === null || far < best.far) best = { x, y: py + 6, box, far };
      }
    }
    const [x, y] = at(mark.bearing_deg, r - 40);
    const found = best ?? { x, y, box: { left: x - wide / 2, right: x + wide / 2, top: y - 12, bottom: y + 10 }, far: 0 };
    taken.push(found.box);
    return { mark, fits: best !== null, x: found.x, y: found.y, led: found.far > 26, from: [mx, my] as const, box: found.box };
  });
}
