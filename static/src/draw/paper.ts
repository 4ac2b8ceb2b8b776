// Where things go on the paper: millimetres of the mount, as seen from behind, to CSS pixels.
import type { DrawnAntenna, DrawnPlace } from './drawn.ts';

export interface Paper {
  width: number;
  height: number;
  /** Pixels per millimetre. */
  scale: number;
  x: (right_mm: number) => number;
  y: (up_mm: number) => number;
}

export interface Margins {
  top: number;
  bottom: number;
  left: number;
  right: number;
}

interface Box {
  left: number;
  right: number;
  low: number;
  high: number;
}

/** Box round an antenna turned by its skew. */
function boxOf(antenna: DrawnAntenna, place: DrawnPlace): Box {
  const a = (place.skew_deg * Math.PI) / 180;
  const round = antenna.shape === 'dish' || antenna.shape === 'point';
  const w = antenna.width_mm / 2;
  const h = antenna.height_mm / 2;
  const across = round ? w : Math.abs(w * Math.cos(a)) + Math.abs(h * Math.sin(a));
  const along = round ? h : Math.abs(w * Math.sin(a)) + Math.abs(h * Math.cos(a));
  return {
    left: place.right_mm - across,
    right: place.right_mm + across,
    low: place.up_mm - along,
    high: place.up_mm + along,
  };
}

/** Fits the mount, measured and planned, into a width and at most a height; the same scale both ways. */
export function paperFor(antennas: DrawnAntenna[], width: number, most: number, margins: Margins): Paper {
  const boxes = antennas.flatMap((antenna) => [boxOf(antenna, antenna.placed), boxOf(antenna, antenna.planned)]);
  const left = Math.min(...boxes.map((b) => b.left));
  const right = Math.max(...boxes.map((b) => b.right));
  const low = Math.min(...boxes.map((b) => b.low));
  const high = Math.max(...boxes.map((b) => b.high));
  const across = Math.max(1, right - left);
  const along = Math.max(1, high - low);
  const scale = Math.min((width - margins.left - margins.right) / across, (most - margins.top - margins.bottom) / along);
  const height = Math.round(margins.top + margins.bottom + along * scale);
  const middle = (left + right) / 2;
  return {
    width,
    height,
    scale,
    x: (mm) => (margins.left + width - margins.right) / 2 + (mm - middle) * scale,
    y: (mm) => margins.top + (high - mm) * scale,
  };
}

/** A length of the kind 1, 2, 5 × 10ⁿ mm that is between 45 and 130 px long at this scale. */
export function scaleBar(scale: number): { mm: number; px: number; text: string } {
  const wanted = 90 / scale;
  const decade = 10 ** Math.floor(Math.log10(wanted));
  let mm = decade;
  for (const step of [1, 2, 5]) if (step * decade <= wanted * 1.1) mm = step * decade;
  return { mm, px: mm * scale, text: mm >= 1000 ? `${mm / 1000} m` : `${mm} mm` };
}

/** How antennas stand to each other: which neighbours a dimension line joins, and in which direction. */
export type Layout = 'one' | 'row' | 'column' | 'field';

export function layoutOf(antennas: DrawnAntenna[]): Layout {
  if (antennas.length < 2) return 'one';
  const rights = antennas.map((a) => a.placed.right_mm);
  const ups = antennas.map((a) => a.placed.up_mm);
  const acrossSpan = Math.max(...rights) - Math.min(...rights);
  const upSpan = Math.max(...ups) - Math.min(...ups);
  const half = Math.max(...antennas.map((a) => Math.min(a.height_mm, a.width_mm))) / 2;
  if (upSpan <= Math.max(half, acrossSpan * 0.25)) return 'row';
  if (acrossSpan <= Math.max(half, upSpan * 0.25)) return 'column';
  return 'field';
}
