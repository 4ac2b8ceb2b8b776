// The mount in one state, small enough to stand beside two others.

import { type DrawnSpacing, drawnFrom, drawnRemedy } from '../draw/drawn';
import { MountDrawing } from '../draw/MountDrawing';
import type { Quantity, Sheet, State, Verdict } from '../types';

interface Props {
  sheet: Sheet;
  verdict: Verdict;
  state: State;
  /** Marked as out of place besides what the verdict itself points at. */
  marked?: { antenna: string; quantity: Quantity }[];
  most?: number;
}

export function PlacedMount({ sheet, verdict, state, marked = [], most = 200 }: Props) {
  const antennas = drawnFrom(sheet, verdict, state).map((a) => ({
    ...a,
    // The plan is not a reading that is missing: it is drawn as firmly as what was measured.
    read: state === 'planned' ? { skew: true, tilt: true, azimuth: true, position: true } : a.read,
    off: [...new Set([...a.off, ...marked.filter((m) => m.antenna === a.id).map((m) => m.quantity)])],
  }));
  const remedy = drawnRemedy(verdict, state);
  return (
    <MountDrawing
      antennas={antennas}
      spacings={spacingsIn(verdict, state)}
      remedy={remedy}
      ghost={state !== 'planned'}
      compact
      captionless
      most={remedy === null ? most : most + arrowRoom}
    />
  );
}

/** What the drawing keeps free above the mount for an arrow, so that all three states stand in one scale. */
const arrowRoom = 26;

/** calc states the spacings of the state it judged; of the others the drawing measures its own places. */
function spacingsIn(verdict: Verdict, state: State): DrawnSpacing[] {
  const { geometry } = verdict;
  if (state === verdict.judged) return geometry.spacings;
  const spacings: DrawnSpacing[] = [];
  geometry.antennas.forEach((a, i) => {
    for (const b of geometry.antennas.slice(i + 1)) {
      const p = a[state];
      const q = b[state];
      if (p === null || q === null) continue;
      const mm = Math.hypot(q.right_mm - p.right_mm, q.up_mm - p.up_mm, q.forward_mm - p.forward_mm);
      spacings.push({ from: a.id, to: b.id, mm, wavelengths: mm / geometry.wavelength_mm });
    }
  });
  return spacings;
}
