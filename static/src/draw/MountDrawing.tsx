// The mount as seen from behind, to scale: the form that readings are entered through. White sheets with ink outlines are
// antennas where they were measured, dashed ones are not read yet, thick strokes are polarizations, a dashed ghost is the
// plan, wine is what is off, with the turn that helps.
import type { Quantity, Remedy } from '../types.ts';
import { figure, shortest } from '../words/figures.ts';
import { t } from '../words/words.ts';
import type { DrawnAntenna, DrawnPlace, DrawnSpacing } from './drawn.ts';
import { type Layout, type Paper, layoutOf, paperFor, scaleBar } from './paper.ts';
import { amountOf, leans, turnAmount, wayOf } from './turn.ts';
import { useWidth } from './useWidth.ts';

export interface MountDrawingProps {
  antennas: DrawnAntenna[];
  spacings?: DrawnSpacing[];
  /** The turn that helps most, drawn as an arrow. */
  remedy?: Remedy | null;
  /** Show the plan as a ghost where it differs from what was measured. */
  ghost: boolean;
  selected?: string | null;
  /** A part was touched. Without it the drawing is a picture. */
  onTouch?: (antenna: string, quantity: Quantity) => void;
  /** Small, for the three states side by side: no scale bar, no wavelengths, smaller letters. */
  compact?: boolean;
  /** Greatest height in CSS pixels. */
  most?: number;
  /** No line "seen from behind" above the drawing, where a heading already says it. */
  captionless?: boolean;
}

export function MountDrawing(props: MountDrawingProps) {
  const { antennas, remedy, ghost, selected, onTouch, compact, captionless } = props;
  const [ref, width] = useWidth<HTMLElement>(compact ? 280 : 358);
  if (antennas.length === 0) return null;
  const layout = layoutOf(antennas);
  const dimensions = layout !== 'one' && (props.spacings?.length ?? 0) > 0;
  const most = props.most ?? (compact ? 190 : 380);
  const callout = remedy ? calloutFor(remedy, antennas, layout) : null;
  const margins = marginsFor(antennas, layout, dimensions, callout, compact ?? false);
  const paper = paperFor(antennas, width, most, margins);
  const unsized = antennas.filter((a) => !a.sized).map((a) => a.id);
  return (
    <figure class={`mount-drawing${compact ? ' compact' : ''}`} ref={ref}>
      {!captionless && (
        <figcaption>
          <span>{t('drawing.from-behind')}</span>
          {onTouch && <span>{t('drawing.touch')}</span>}
        </figcaption>
      )}
      <svg
        viewBox={`0 0 ${width} ${paper.height}`}
        height={paper.height}
        role={onTouch ? 'group' : 'img'}
        aria-label={describe(antennas)}
      >
        <Structure antennas={antennas} layout={layout} paper={paper} />
        {antennas.map((antenna) => (
          <Drawn
            key={antenna.id}
            antenna={antenna}
            paper={paper}
            selected={selected === antenna.id}
            compact={compact ?? false}
            room={labelRoom(antenna, antennas, layout, paper)}
          />
        ))}
        {ghost &&
          antennas.filter((antenna) => differs(antenna, paper.scale)).map((antenna) => <Ghost key={`ghost-${antenna.id}`} antenna={antenna} paper={paper} />)}
        {dimensions && (
          <Dimensions antennas={antennas} spacings={props.spacings ?? []} layout={layout} paper={paper} callout={callout} compact={compact ?? false} />
        )}
        {remedy && callout && <Turn remedy={remedy} callout={callout} antennas={antennas} paper={paper} compact={compact ?? false} />}
        {!compact && <ScaleBar paper={paper} />}
        {onTouch &&
          antennas.map((antenna) => (
            <TouchPart key={`touch-${antenna.id}`} antenna={antenna} antennas={antennas} layout={layout} paper={paper} onTouch={onTouch} />
          ))}
      </svg>
      {!compact && unsized.length > 0 && <p class="under-drawing">{t('drawing.unsized', { antennas: unsized.join(', ') })}</p>}
    </figure>
  );
}

// ---- Room -------------------------------------------------------------------------------------------------------

/** Where arrow and amount of the turn stand: over, under or left of the antenna that it turns. */
type Callout = 'over' | 'under' | 'left';

function calloutFor(remedy: Remedy, antennas: DrawnAntenna[], layout: Layout): Callout | null {
  const antenna = antennas.find((a) => a.id === remedy.antenna);
  if (!antenna) return null;
  if (layout === 'column') return 'left';
  if (layout !== 'field') return 'over';
  const beside = antennas.filter((a) => a !== antenna && Math.abs(a.placed.right_mm - antenna.placed.right_mm) < antenna.width_mm);
  if (!beside.some((a) => a.placed.up_mm > antenna.placed.up_mm)) return 'over';
  return beside.some((a) => a.placed.up_mm < antenna.placed.up_mm) ? 'over' : 'under';
}

const line = 21;

function marginsFor(antennas: DrawnAntenna[], layout: Layout, dimensions: boolean, callout: Callout | null, compact: boolean) {
  const across = dimensions && (layout === 'row' || layout === 'field');
  const upright = dimensions && (layout === 'column' || layout === 'field');
  if (compact) {
    return { top: callout === 'over' ? 40 : 18, bottom: across ? 40 : 14, left: 16, right: upright ? 72 : 16 };
  }
  const letters = antennas.some((a) => a.shape === 'omni' || a.shape === 'point') ? 28 : 8;
  const labels = line + 6;
  const figures = across ? 2 * line + 22 : 0;
  const over = callout === 'over' ? (letters > 8 ? 58 : 78) : 0; // a letter may have to stand outside its sheet
  const under = callout === 'under' ? 56 : 0;
  const swapped = callout === 'under' ? figures : 0;
  const room = callout === 'over' && layout !== 'one' ? 40 : 18;
  return {
    top: letters + over + swapped,
    bottom: labels + (swapped ? 0 : figures) + under + 34,
    left: callout === 'left' ? 128 : room,
    right: upright ? 92 : room,
  };
}

// ---- What is said of it -----------------------------------------------------------------------------------------

function describe(antennas: DrawnAntenna[]): string {
  return `${t('drawing.from-behind')}. ${antennas.map(describeOne).join('. ')}`;
}

function describeOne(antenna: DrawnAntenna): string {
  const parts: string[] = [t('drawing.antenna', { antenna: antenna.id })];
  parts.push(
    antenna.read.skew
      ? `${t('quantity.skew')} ${figure(antenna.placed.skew_deg, 1)}°`
      : `${t('quantity.skew')} ${t('reading.none')}`,
  );
  if (antenna.off.length > 0) parts.push(t('drawing.off', { quantities: antenna.off.map((q) => t(`quantity.${q}`)).join(', ') }));
  return parts.join(', ');
}

/** The plan shows as a ghost as soon as an eye can tell it from what was measured; nearer it would only blur the ink. */
function differs(antenna: DrawnAntenna, scale: number): boolean {
  const { placed, planned } = antenna;
  const arm = Math.hypot(antenna.width_mm, antenna.height_mm) / 2;
  const turned = (Math.abs(placed.skew_deg - planned.skew_deg) * Math.PI * arm) / 180;
  const moved = Math.hypot(placed.right_mm - planned.right_mm, placed.up_mm - planned.up_mm);
  return Math.max(turned, moved) * scale >= 4;
}

// ---- Antennas ---------------------------------------------------------------------------------------------------

function there(paper: Paper, at: DrawnPlace): string {
  return `translate(${paper.x(at.right_mm)} ${paper.y(at.up_mm)})`;
}

function Outline({ antenna, scale }: { antenna: DrawnAntenna; scale: number }) {
  const w = Math.max(6, antenna.width_mm * scale);
  const h = Math.max(6, antenna.height_mm * scale);
  if (antenna.shape === 'dish' || antenna.shape === 'point') {
    return (
      <>
        <circle class="body" r={w / 2} />
        {antenna.shape === 'dish' && <line class="index" y1={-w / 2} y2={-w / 2 + Math.min(14, w / 5)} />}
      </>
    );
  }
  return <rect class="body" x={-w / 2} y={-h / 2} width={w} height={h} rx={antenna.shape === 'omni' ? w / 2 : 3} />;
}

function Strokes({ antenna, scale, half }: { antenna: DrawnAntenna; scale: number; half: number }) {
  return (
    <>
      {antenna.strokes.map((stroke) => {
        const x = stroke.right_mm * scale;
        const y = -stroke.up_mm * scale;
        if (stroke.hand) {
          const sweep = stroke.hand === 'right' ? 1 : 0;
          const r = half * 0.7;
          return <path key={stroke.port} class="stroke" d={`M${x - r} ${y} A${r} ${r} 0 1 ${sweep} ${x} ${y + r}`} />;
        }
        const a = (stroke.slant_deg * Math.PI) / 180;
        const dx = half * Math.sin(a);
        const dy = half * Math.cos(a);
        return <line key={stroke.port} class="stroke" x1={x - dx} y1={y + dy} x2={x + dx} y2={y - dy} />;
      })}
    </>
  );
}

/** Half the length of a polarization stroke: inside a panel, along an omni. */
function strokeHalf(antenna: DrawnAntenna, scale: number): number {
  const w = antenna.width_mm * scale;
  const h = antenna.height_mm * scale;
  if (antenna.shape === 'omni') return Math.max(14, h * 0.3);
  const count = Math.max(1, new Set(antenna.strokes.map((s) => `${s.right_mm} ${s.up_mm}`)).size);
  return Math.min(62, Math.max(9, (Math.min(w, h / count) / 2) * 0.54));
}

function Drawn(props: { antenna: DrawnAntenna; paper: Paper; selected: boolean; compact: boolean; room: number }) {
  const { antenna, paper, selected, compact, room } = props;
  const { scale } = paper;
  const w = antenna.width_mm * scale;
  const h = antenna.height_mm * scale;
  const read = antenna.read.skew;
  const off = antenna.off.length > 0;
  const half = strokeHalf(antenna, scale);
  const classes = `antenna${read ? '' : ' unread'}${off ? ' off' : ''}${selected ? ' selected' : ''}`;
  // The drawing shows which way; the figure says how much.
  const skew = read ? `${shortest(Math.abs(antenna.placed.skew_deg), 1)}°` : '';
  const letter = compact ? 16 : 22;
  const round = antenna.shape === 'dish' || antenna.shape === 'point';
  const inside = letterInside(antenna, scale, letter);
  const a = (antenna.placed.skew_deg * Math.PI) / 180;
  const cx = paper.x(antenna.placed.right_mm);
  const cy = paper.y(antenna.placed.up_mm);
  // The letter keeps upright at the head of the body, however that is turned.
  const reach = inside ? h / 2 - letter * 0.62 - (antenna.shape === 'dish' ? 18 : 8) : (round ? w : turnedHeight(antenna) * scale) / 2 + letter * 0.65;
  const lx = cx + reach * Math.sin(a);
  const ly = inside ? cy - reach * Math.cos(a) : cy - reach;
  const long = `${t('quantity.skew')} ${skew}`;
  const skewInside = antenna.shape === 'panel' && w >= 96 && h / 2 - half >= 34;
  const below = (turnedHeight(antenna) * scale) / 2 + line * 0.6 + 4;
  return (
    <g class={classes}>
      <g transform={there(paper, antenna.placed)}>
        <g class="turned" style={{ transform: `rotate(${antenna.placed.skew_deg}deg)` }}>
          <Outline antenna={antenna} scale={scale} />
          <Strokes antenna={antenna} scale={scale} half={half} />
        </g>
      </g>
      <text class={`id over${inside ? ' on-sheet' : ''}`} x={inside ? lx : cx} y={ly} text-anchor="middle" dominant-baseline="central">
        {antenna.id}
      </text>
      {skew && !compact && skewInside && (
        <text class="over on-sheet" x={cx - (h / 2 - 20) * Math.sin(a)} y={cy + (h / 2 - 20) * Math.cos(a)} text-anchor="middle" dominant-baseline="central">
          {long}
        </text>
      )}
      {skew && !compact && !skewInside && room >= 52 && (
        <text class="over" x={cx} y={cy + below} text-anchor="middle" dominant-baseline="central">
          {room >= 104 ? long : skew}
        </text>
      )}
    </g>
  );
}

/** Whether the letter fits between the head of the sheet and the polarization strokes. */
function letterInside(antenna: DrawnAntenna, scale: number, letter: number): boolean {
  if (antenna.shape === 'omni' || antenna.width_mm * scale < 34) return false;
  return (antenna.height_mm * scale) / 2 - strokeHalf(antenna, scale) >= letter + (antenna.shape === 'dish' ? 26 : 10);
}

function Ghost({ antenna, paper }: { antenna: DrawnAntenna; paper: Paper }) {
  return (
    <g class="ghost" transform={`${there(paper, antenna.planned)} rotate(${antenna.planned.skew_deg})`}>
      <Outline antenna={antenna} scale={paper.scale} />
      {antenna.shape !== 'omni' && <Strokes antenna={antenna} scale={paper.scale} half={strokeHalf(antenna, paper.scale)} />}
    </g>
  );
}

// ---- Mast, arm and clamps ---------------------------------------------------------------------------------------

function Structure({ antennas, layout, paper }: { antennas: DrawnAntenna[]; layout: Layout; paper: Paper }) {
  const xs = antennas.map((a) => paper.x(a.planned.right_mm));
  const ys = antennas.map((a) => paper.y(a.planned.up_mm));
  const left = Math.min(...xs);
  const right = Math.max(...xs);
  const middle = (left + right) / 2;
  const pole = Math.min(18, Math.max(10, 70 * paper.scale));
  const rows = layout === 'field' ? [...new Set(ys.map((y) => Math.round(y)))] : [ys.reduce((a, b) => a + b, 0) / ys.length];
  return (
    <g aria-hidden="true">
      <rect class="mast" x={middle - pole / 2} y="0" width={pole} height={paper.height} />
      {(layout === 'row' || layout === 'field') &&
        rows.map((y) => (
          <g key={y}>
            <rect class="steel" x={left} y={y - 5} width={Math.max(0, right - left)} height="10" />
            <rect class="steel" x={middle - pole / 2 - 6} y={y - 14} width={pole + 12} height="28" />
          </g>
        ))}
      {(layout === 'one' || layout === 'column') &&
        antennas.flatMap((antenna) => {
          const y = paper.y(antenna.planned.up_mm);
          const third = (antenna.height_mm * paper.scale) / 3;
          const w = Math.max(pole + 12, Math.min(antenna.width_mm * paper.scale + 16, pole + 40));
          return [-third, third].map((dy) => (
            <rect key={`${antenna.id}${dy}`} class="steel" x={middle - w / 2} y={y + dy - 6} width={w} height="12" />
          ));
        })}
    </g>
  );
}

// ---- Dimensions -------------------------------------------------------------------------------------------------

interface Joined {
  from: DrawnAntenna;
  to: DrawnAntenna;
  spacing: DrawnSpacing;
}

/** Neighbours along one direction, each with the spacing that calc gave for the pair. */
function neighbours(antennas: DrawnAntenna[], spacings: DrawnSpacing[], along: 'right_mm' | 'up_mm'): Joined[] {
  const sorted = [...antennas].sort((a, b) => a.placed[along] - b.placed[along]);
  const joined: Joined[] = [];
  for (let i = 1; i < sorted.length; i++) {
    const from = sorted[i - 1];
    const to = sorted[i];
    if (!from || !to) continue;
    const spacing = spacingOf(spacings, from.id, to.id);
    if (spacing) joined.push({ from, to, spacing });
  }
  return joined;
}

function spacingOf(spacings: DrawnSpacing[], a: string, b: string): DrawnSpacing | undefined {
  return spacings.find((s) => (s.from === a && s.to === b) || (s.from === b && s.to === a));
}

/** First and last along one direction, where the neighbours stand too close for their figures. */
function ends(antennas: DrawnAntenna[], spacings: DrawnSpacing[], along: 'right_mm' | 'up_mm'): Joined[] {
  const sorted = [...antennas].sort((a, b) => a.placed[along] - b.placed[along]);
  const from = sorted[0];
  const to = sorted[sorted.length - 1];
  if (!from || !to || from === to) return [];
  const spacing = spacingOf(spacings, from.id, to.id);
  return spacing ? [{ from, to, spacing }] : [];
}

function Dimensions(props: {
  antennas: DrawnAntenna[];
  spacings: DrawnSpacing[];
  layout: Layout;
  paper: Paper;
  callout: Callout | null;
  compact: boolean;
}) {
  const { antennas, spacings, layout, paper, callout, compact } = props;
  const across: Joined[] = [];
  const upwards: Joined[] = [];
  const above = callout === 'under';
  let inRow = antennas;
  let inColumn = antennas;
  if (layout === 'row') across.push(...neighbours(antennas, spacings, 'right_mm'));
  if (layout === 'column') upwards.push(...neighbours(antennas, spacings, 'up_mm'));
  if (layout === 'field') {
    const slack = Math.max(...antennas.map((a) => Math.max(a.width_mm, a.height_mm))) / 2;
    const row = above ? Math.max(...antennas.map((a) => a.placed.up_mm)) : Math.min(...antennas.map((a) => a.placed.up_mm));
    const column = Math.max(...antennas.map((a) => a.placed.right_mm));
    inRow = antennas.filter((a) => Math.abs(a.placed.up_mm - row) <= slack);
    inColumn = antennas.filter((a) => Math.abs(a.placed.right_mm - column) <= slack);
    across.push(...neighbours(inRow, spacings, 'right_mm'));
    upwards.push(...neighbours(inColumn, spacings, 'up_mm'));
  }
  const tooClose = (list: Joined[], along: 'right_mm' | 'up_mm', least: number) =>
    list.some(({ from, to }) => Math.abs(to.placed[along] - from.placed[along]) * paper.scale < least);
  const acrossShown = tooClose(across, 'right_mm', 76) ? ends(inRow, spacings, 'right_mm') : across;
  const upShown = tooClose(upwards, 'up_mm', 2 * line + 4) ? ends(inColumn, spacings, 'up_mm') : upwards;
  const low = Math.max(...antennas.map((a) => paper.y(a.placed.up_mm) + (turnedHeight(a) * paper.scale) / 2));
  const high = Math.min(...antennas.map((a) => paper.y(a.placed.up_mm) - (turnedHeight(a) * paper.scale) / 2));
  const far = Math.max(...antennas.map((a) => paper.x(a.placed.right_mm) + (turnedWidth(a) * paper.scale) / 2)) + 18;
  const y = above ? high - 40 : low + (compact ? 18 : line + 20);
  return (
    <g aria-hidden="true">
      {acrossShown.map(({ from, to, spacing }) => {
        const x1 = paper.x(from.placed.right_mm);
        const x2 = paper.x(to.placed.right_mm);
        const middle = (x1 + x2) / 2;
        // The figure is the distance from middle to middle, so the line runs parallel to it.
        const lean = (paper.y(to.placed.up_mm) - paper.y(from.placed.up_mm)) / 2;
        const y1 = y - lean;
        const y2 = y + lean;
        const long = `${millimetres(spacing)} \u00b7 ${waves(spacing)}`;
        // In the line where it fits, as on a drawing; else under it.
        const size = compact ? 15 : 18;
        const inLine = compact ? millimetres(spacing) : long;
        const fits = x2 - x1 >= inLine.length * size * 0.56 + 40;
        return (
          <g key={`${from.id}${to.id}`}>
            <path class="dimension" d={`M${x1} ${y1 - 9} V${y1 + 9} M${x2} ${y2 - 9} V${y2 + 9} M${x1} ${y1} L${x2} ${y2}`} />
            {fits ? (
              <text class="over in-line strong" x={middle} y={y} text-anchor="middle" dominant-baseline="central">
                {inLine}
              </text>
            ) : (
              <>
                <text class="over strong" x={middle} y={y + line * (above ? -1.75 : 0.8)} text-anchor="middle" dominant-baseline="central">
                  {millimetres(spacing)}
                </text>
                {!compact && (
                  <text class="over" x={middle} y={y + line * (above ? -0.8 : 1.75)} text-anchor="middle" dominant-baseline="central">
                    {waves(spacing)}
                  </text>
                )}
              </>
            )}
          </g>
        );
      })}
      {upShown.map(({ from, to, spacing }) => {
        const y1 = paper.y(from.placed.up_mm);
        const y2 = paper.y(to.placed.up_mm);
        const lean = (paper.x(to.placed.right_mm) - paper.x(from.placed.right_mm)) / 2;
        const x1 = far - lean;
        const x2 = far + lean;
        return (
          <g key={`${from.id}${to.id}`}>
            <path class="dimension" d={`M${x1 - 9} ${y1} H${x1 + 9} M${x2 - 9} ${y2} H${x2 + 9} M${x1} ${y1} L${x2} ${y2}`} />
            <text class="over strong" x={far + 8} y={(y1 + y2) / 2 - (compact ? 0 : line / 2)} dominant-baseline="central">
              {millimetres(spacing)}
            </text>
            {!compact && (
              <text class="over" x={far + 8} y={(y1 + y2) / 2 + line / 2} dominant-baseline="central">
                {waves(spacing)}
              </text>
            )}
          </g>
        );
      })}
    </g>
  );
}

function millimetres(spacing: DrawnSpacing): string {
  return `${shortest(spacing.mm, 0)} mm`;
}

function waves(spacing: DrawnSpacing): string {
  return `${figure(spacing.wavelengths, spacing.wavelengths < 10 ? 2 : 1)} \u03bb`;
}

function turnedHeight(antenna: DrawnAntenna): number {
  if (antenna.shape === 'dish' || antenna.shape === 'point') return antenna.height_mm;
  const a = (antenna.placed.skew_deg * Math.PI) / 180;
  return Math.abs(antenna.height_mm * Math.cos(a)) + Math.abs(antenna.width_mm * Math.sin(a));
}

function turnedWidth(antenna: DrawnAntenna): number {
  if (antenna.shape === 'dish' || antenna.shape === 'point') return antenna.width_mm;
  const a = (antenna.placed.skew_deg * Math.PI) / 180;
  return Math.abs(antenna.width_mm * Math.cos(a)) + Math.abs(antenna.height_mm * Math.sin(a));
}

function ScaleBar({ paper }: { paper: Paper }) {
  const bar = scaleBar(paper.scale);
  const y = paper.height - 14;
  return (
    <g aria-hidden="true">
      <path class="scale" d={`M2 ${y - 7} V${y + 7} M2 ${y} H${2 + bar.px} M${2 + bar.px} ${y - 7} V${y + 7}`} />
      <text class="scale-text over" x={bar.px + 12} y={y} dominant-baseline="central">
        {bar.text}
      </text>
    </g>
  );
}

// ---- The turn that helps ----------------------------------------------------------------------------------------

function Turn(props: { remedy: Remedy; callout: Callout; antennas: DrawnAntenna[]; paper: Paper; compact: boolean }) {
  const { remedy, callout, antennas, paper, compact } = props;
  const antenna = antennas.find((a) => a.id === remedy.antenna);
  if (!antenna) return null;
  const cx = paper.x(antenna.placed.right_mm);
  const cy = paper.y(antenna.placed.up_mm);
  const half = (turnedHeight(antenna) * paper.scale) / 2;
  const size = compact ? 15 : 18;
  if (callout === 'left') {
    const x = cx - (turnedWidth(antenna) * paper.scale) / 2 - 14;
    return (
      <g aria-hidden="true">
        <TurnSign remedy={remedy} x={x - 44} y={cy - 30} under={false} />
        <text class="over off" x={x} y={cy + 2} text-anchor="end" dominant-baseline="central">
          {amountOf(remedy)}
        </text>
        <text class="over off" x={x} y={cy + 2 + line} text-anchor="end" dominant-baseline="central">
          {wayOf(remedy)}
        </text>
      </g>
    );
  }
  const text = turnAmount(remedy);
  const halfText = text.length * size * 0.27;
  const tx = Math.min(paper.width - halfText - 2, Math.max(halfText + 2, cx));
  const letter = letterInside(antenna, paper.scale, compact ? 16 : 22) ? 0 : 26;
  const under = callout === 'under';
  const y = under ? cy + half + line + 18 : cy - half - letter - 14;
  return (
    <g aria-hidden="true">
      <TurnSign remedy={remedy} x={cx} y={y} under={under} />
      <text class="over off" x={tx} y={under ? y + 26 : Math.max(size * 0.6, y - (remedy.quantity === 'tilt' ? 36 : 26))} text-anchor="middle" dominant-baseline="central">
        {text}
      </text>
    </g>
  );
}

/** The arrow alone. Under the antenna a turn in the plane of the paper runs the other way than over it. */
function TurnSign({ remedy, x, y, under }: { remedy: Remedy; x: number; y: number; under: boolean }) {
  const sign = remedy.change < 0 ? -1 : 1;
  switch (remedy.quantity) {
    case 'skew':
      return <Arc cx={x} y={y} turn={under ? 180 : 0} sign={sign} />;
    case 'azimuth':
      return <Swing cx={x} y={y} sign={sign} />;
    case 'tilt':
      return leans(remedy) ? <Straight x={x} y={y} {...heading(remedy)} /> : <Straight x={x} y={under ? y : y - 6} dx={0} dy={-sign} />;
    case 'position':
      return <Straight x={x} y={y} {...heading(remedy)} />;
  }
}

/** Direction on the paper of a move of position; forward and back are drawn as none. */
function heading(remedy: Remedy): { dx: number; dy: number } {
  switch (remedy.direction) {
    case 'left':
      return { dx: -1, dy: 0 };
    case 'right':
      return { dx: 1, dy: 0 };
    case 'up':
      return { dx: 0, dy: -1 };
    case 'down':
      return { dx: 0, dy: 1 };
    default:
      return { dx: 0, dy: 0 };
  }
}

/** Turn in the plane of the paper, over the head of the antenna. */
function Arc({ cx, y, sign, turn }: { cx: number; y: number; sign: number; turn: number }) {
  const w = 34;
  return (
    <g style={{ transform: `translate(${cx}px, ${y}px) rotate(${turn}deg) scaleX(${sign})` }}>
      <path class="arrow" d={`M${-w} 6 Q0 -16 ${w - 14} -1`} />
      <path class="arrow-head" d={`M${w + 2} 8 L${w - 20} 6 L${w - 9} -12 Z`} />
    </g>
  );
}

/** Turn about the mast, seen from behind: an ellipse lying flat; the near side moves the other way. */
function Swing({ cx, y, sign }: { cx: number; y: number; sign: number }) {
  return (
    <g style={{ transform: `translate(${cx}px, ${y}px) scaleX(${sign})` }}>
      <path class="arrow" d="M-20 4 C-40 -2 -26 -12 0 -12 C18 -12 30 -8 31 -2" />
      <path class="arrow-head" d="M28 13 L20 -4 L41 -5 Z" />
    </g>
  );
}

function Straight({ x, y, dx, dy }: { x: number; y: number; dx: number; dy: number }) {
  if (dx === 0 && dy === 0) return null;
  const angle = (Math.atan2(dy, dx) * 180) / Math.PI;
  const length = dy !== 0 ? 14 : 28;
  return (
    <g style={{ transform: `translate(${x}px, ${y}px) rotate(${angle}deg)` }}>
      <path class="arrow" d={`M${-length} 0 H${length - 8}`} />
      <path class="arrow-head" d={`M${length + 6} 0 L${length - 12} -11 V11 Z`} />
    </g>
  );
}

// ---- Touch ------------------------------------------------------------------------------------------------------

/** Pixels between this antenna's middle and its neighbours': what text and fingers have. */
function roomFor(antenna: DrawnAntenna, antennas: DrawnAntenna[], layout: Layout, paper: Paper): number {
  if (layout === 'one' || layout === 'column') return paper.width;
  const others = antennas.filter((a) => a !== antenna && Math.abs(a.placed.up_mm - antenna.placed.up_mm) < (a.height_mm + antenna.height_mm) / 2);
  const gaps = others.map((a) => Math.abs(a.placed.right_mm - antenna.placed.right_mm) * paper.scale);
  return gaps.length > 0 ? Math.min(...gaps) : paper.width;
}

/** Room across for the figure under an antenna; none where the next one below leaves less than two lines. */
function labelRoom(antenna: DrawnAntenna, antennas: DrawnAntenna[], layout: Layout, paper: Paper): number {
  const foot = antenna.placed.up_mm - turnedHeight(antenna) / 2;
  const gaps = antennas
    .filter((a) => a !== antenna && a.placed.up_mm < antenna.placed.up_mm && Math.abs(a.placed.right_mm - antenna.placed.right_mm) < (a.width_mm + antenna.width_mm) / 2)
    .map((a) => (foot - (a.placed.up_mm + turnedHeight(a) / 2)) * paper.scale);
  if (gaps.length > 0 && Math.min(...gaps) < 2.4 * line) return 0;
  return roomFor(antenna, antennas, layout, paper);
}

/** A part to touch: the antenna and the paper round it, up to half way to its neighbours, at least a gloved fingertip where there is room. */
function TouchPart(props: { antenna: DrawnAntenna; antennas: DrawnAntenna[]; layout: Layout; paper: Paper; onTouch: (antenna: string, quantity: Quantity) => void }) {
  const { antenna, antennas, layout, paper, onTouch } = props;
  const cx = paper.x(antenna.placed.right_mm);
  const cy = paper.y(antenna.placed.up_mm);
  const fingertip = 64;
  const room = roomFor(antenna, antennas, layout, paper);
  const above = antennas
    .filter((a) => a !== antenna && Math.abs(a.placed.right_mm - antenna.placed.right_mm) * paper.scale < fingertip)
    .map((a) => Math.abs(paper.y(a.placed.up_mm) - cy))
    .filter((dy) => dy > 12);
  const roomUp = above.length > 0 ? Math.min(...above) : Infinity;
  const w = Math.min(Math.max(12, room - 4), Math.max(fingertip, turnedWidth(antenna) * paper.scale + 12));
  const h = Math.min(Math.max(12, roomUp - 4), Math.max(fingertip, turnedHeight(antenna) * paper.scale + 12));
  const first: Quantity = antenna.off[0] ?? (antenna.read.skew ? (antenna.read.tilt ? 'skew' : 'tilt') : 'skew');
  const press = () => onTouch(antenna.id, first);
  return (
    <g
      role="button"
      tabIndex={0}
      aria-label={t('drawing.measure', { what: describeOne(antenna) })}
      onClick={press}
      onKeyDown={(event) => {
        if (event.key === 'Enter' || event.key === ' ') {
          event.preventDefault();
          press();
        }
      }}
    >
      <rect class="touch" x={cx - w / 2} y={cy - h / 2} width={w} height={h} />
    </g>
  );
}
