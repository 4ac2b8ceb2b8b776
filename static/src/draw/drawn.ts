// From a mount sheet and what calc made of it to what is drawn. Places and angles come from calc; nothing is worked out
// here but where on the paper they go.
import type { Antenna, Geometry, PlacedAntenna, Quantity, Reading, Remedy, Sheet, State, Verdict } from '../types.ts';

export type Shape = 'panel' | 'omni' | 'dish' | 'point';

export interface DrawnStroke {
  port: string;
  slant_deg: number;
  right_mm: number;
  up_mm: number;
  /** Circular polarization: its hand, drawn as a turn instead of a stroke. */
  hand: 'right' | 'left' | null;
}

export interface DrawnPlace {
  right_mm: number;
  up_mm: number;
  forward_mm: number;
  skew_deg: number;
  tilt_deg: number;
  azimuth_deg: number;
}

export interface DrawnAntenna {
  id: string;
  shape: Shape;
  width_mm: number;
  height_mm: number;
  /** False where the sheet gives no size and a usual one is drawn. */
  sized: boolean;
  strokes: DrawnStroke[];
  /** Where it is, as far as it was read; the plan for what was not. */
  placed: DrawnPlace;
  planned: DrawnPlace;
  /** What has been read in the state that is drawn. */
  read: Record<Quantity, boolean>;
  /** What stands out of its limit: drawn in wine. */
  off: Quantity[];
}

export interface DrawnSpacing {
  from: string;
  to: string;
  mm: number;
  wavelengths: number;
}

export const quantities: readonly Quantity[] = ['skew', 'tilt', 'azimuth', 'position'];

/** Readings of one state as a list, whichever of the three forms the sheet has. */
export function readingsIn<R extends Reading>(states: { as_found?: R | R[] | null; as_left?: R | R[] | null } | null | undefined, state: State): R[] {
  if (!states || state === 'planned') return [];
  const found = states[state];
  if (!found) return [];
  return Array.isArray(found) ? found : [found];
}

export function statesOf(antenna: Antenna, quantity: Quantity) {
  return quantity === 'position' ? antenna.position_mm : antenna[quantity];
}

/** Readings that this antenna takes: no azimuth where the pattern is round, no position for the one that all are measured from. */
export function quantitiesOf(sheet: Sheet, antenna: Antenna): Quantity[] {
  const first = sheet.near.antennas[0]?.id === antenna.id;
  const round = ['omni', 'isotropic', 'dipole'].includes(antenna.pattern.kind);
  return quantities.filter((q) => !(q === 'position' && first) && !(q === 'azimuth' && round));
}

/** Drawn sizes where the sheet gives none: usual ones (common practice), and the drawing says so. */
const usualSize: Record<Shape, { width: number; height: number }> = {
  panel: { width: 300, height: 600 },
  omni: { width: 40, height: 900 },
  dish: { width: 600, height: 600 },
  point: { width: 120, height: 120 },
};

function shapeOf(antenna: Antenna): Shape {
  switch (antenna.pattern.kind) {
    case 'omni':
    case 'dipole':
      return 'omni';
    case 'dish':
      return 'dish';
    case 'isotropic':
      return 'point';
    default:
      return 'panel';
  }
}

function sizeOf(antenna: Antenna, shape: Shape): { width: number; height: number; sized: boolean } {
  if (antenna.size_mm) return { ...antenna.size_mm, sized: true };
  const across = antenna.pattern.diameter_m ? antenna.pattern.diameter_m * 1000 : null;
  if (shape === 'dish' && across) return { width: across, height: across, sized: true };
  return { ...usualSize[shape], sized: false };
}

function plannedPlace(antenna: Antenna): DrawnPlace {
  const at = antenna.position_mm.planned?.value;
  return {
    right_mm: at?.right ?? 0,
    up_mm: at?.up ?? 0,
    forward_mm: at?.forward ?? 0,
    skew_deg: antenna.skew.planned?.value ?? 0,
    tilt_deg: antenna.tilt.planned?.value ?? 0,
    azimuth_deg: antenna.azimuth?.planned?.value ?? 0,
  };
}

function placeOf(placed: PlacedAntenna): DrawnPlace {
  const { right_mm, up_mm, forward_mm, skew_deg, tilt_deg, azimuth_deg } = placed;
  return { right_mm, up_mm, forward_mm, skew_deg, tilt_deg, azimuth_deg };
}

/** What the verdict points at: the reading that its reason names, and the one that the best remedy turns. */
export function offOf(verdict: Verdict | null, state: State): Map<string, Quantity[]> {
  const off = new Map<string, Quantity[]>();
  if (!verdict || verdict.judged !== state || verdict.word === 'go') return off;
  const add = (antenna: string | null, quantity: Quantity | null) => {
    if (!antenna || !quantity) return;
    const list = off.get(antenna) ?? [];
    if (!list.includes(quantity)) list.push(quantity);
    off.set(antenna, list);
  };
  if (verdict.reason.code === 'limit_missed') add(verdict.reason.antenna, verdict.reason.quantity);
  const best = verdict.remedies[0];
  if (best && verdict.word === 'no-go') add(best.antenna, best.quantity);
  return off;
}

/** The antennas of the near mount in one state, ready to be drawn. */
export function drawnFrom(sheet: Sheet, verdict: Verdict | null, state: State): DrawnAntenna[] {
  const geometry: Geometry | null = verdict?.geometry ?? null;
  const off = offOf(verdict, state);
  return sheet.near.antennas.map((antenna, index) => {
    const shape = shapeOf(antenna);
    const size = sizeOf(antenna, shape);
    const found = geometry?.antennas.find((a) => a.id === antenna.id)?.[state] ?? null;
    const planned = plannedPlace(antenna);
    const isRead = (q: Quantity) =>
      (q === 'position' && index === 0) || readingsIn<Reading>(statesOf(antenna, q), state).length > 0;
    return {
      id: antenna.id,
      shape,
      width_mm: size.width,
      height_mm: size.height,
      sized: size.sized,
      strokes: antenna.elements.map((element) => ({
        port: element.port,
        slant_deg: element.slant_deg,
        right_mm: element.offset_mm?.right ?? 0,
        up_mm: element.offset_mm?.up ?? 0,
        hand: element.axial_ratio_db === 0 ? (element.hand ?? null) : null,
      })),
      placed: found ? placeOf(found) : planned,
      planned,
      read: { skew: isRead('skew'), tilt: isRead('tilt'), azimuth: isRead('azimuth'), position: isRead('position') },
      off: off.get(antenna.id) ?? [],
    };
  });
}

/** The one remedy that is drawn: the best, while the mount is not yet right. */
export function drawnRemedy(verdict: Verdict | null, state: State): Remedy | null {
  if (!verdict || verdict.judged !== state || verdict.word === 'go') return null;
  const best = verdict.remedies[0];
  // A turn that leaves "measure again" as it is would only send a climber round in circles.
  return best && (verdict.word === 'no-go' || best.word_after === 'go') ? best : null;
}
