// What readings are taken with, what doubt is usual for it, and how each quantity is typed: size and direction, as a
// level, a compass and a tape give them, instead of signs.
import type { Antenna, Quantity, Reading, Sheet } from '../types.ts';
import { shortest } from '../words/figures.ts';
import { t } from '../words/words.ts';

export interface Method {
  /** As it goes into the reading. */
  name: 'level' | 'phone' | 'tape' | 'rule' | 'landmark' | 'sun' | 'compass' | 'eye';
  /** Standard uncertainty that is usual for it: common practice, said so on the screen, changed by whoever knows better. */
  u: number;
}

/**
 * The first of each is what a climber carries. Doubts: common practice. A phone at rest is better than its 0.5° (static rms
 * under 0.3° over several phones, Sensors 2015, PMC4610531); held by hand on a mast it is not at rest.
 */
export const methods: Record<Quantity, readonly Method[]> = {
  skew: [
    { name: 'level', u: 0.3 },
    { name: 'phone', u: 0.5 },
    { name: 'eye', u: 5 },
  ],
  tilt: [
    { name: 'level', u: 0.3 },
    { name: 'phone', u: 0.5 },
    { name: 'eye', u: 3 },
  ],
  azimuth: [
    { name: 'landmark', u: 0.5 },
    { name: 'sun', u: 0.5 },
    { name: 'compass', u: 5 },
    { name: 'eye', u: 10 },
  ],
  position: [
    { name: 'tape', u: 3 },
    { name: 'rule', u: 1 },
    { name: 'eye', u: 50 },
  ],
};

export type Axis = 'right' | 'up' | 'forward';
export const axes: readonly Axis[] = ['right', 'up', 'forward'];

/** What a direction is chosen for; a lean of a rod goes by other words than a turn of a panel. */
export type Directed = 'skew' | 'skew-omni' | 'tilt' | 'tilt-omni' | Axis;

export function directedOf(quantity: 'skew' | 'tilt', antenna: Antenna): Directed {
  const rod = antenna.pattern.kind === 'omni' || antenna.pattern.kind === 'dipole';
  return rod ? `${quantity}-omni` : quantity;
}

export function wayName(directed: Directed, way: 'more' | 'less'): string {
  return t(`reading.way.${directed}.${way}`);
}

export function datumOf(sheet: Sheet): string {
  return sheet.near.antennas[0]?.id ?? '';
}

/** Size and direction in words, the figures as they were read: "6.2° clockwise", "3° down", "47.3°", "412 mm right". */
export function saidReading(quantity: Quantity, antenna: Antenna, reading: Pick<Reading, 'value'>): string {
  const { value } = reading;
  const size = (x: number, most: number) => shortest(Math.abs(x), most);
  if (typeof value === 'number') {
    if (quantity === 'azimuth') return `${size(value, 2)}°`;
    const directed = directedOf(quantity === 'tilt' ? 'tilt' : 'skew', antenna);
    if (value === 0) return '0°';
    return `${size(value, 2)}° ${wayName(directed, value > 0 ? 'more' : 'less')}`;
  }
  const parts = axes.flatMap((axis) => {
    const mm = value[axis];
    if (mm === null || mm === undefined) return [];
    return [`${size(mm, 1)} mm ${mm === 0 ? '' : wayName(axis, mm > 0 ? 'more' : 'less')}`.trim()];
  });
  const told = parts.filter((part) => !/^0 mm$/.test(part));
  return (told.length > 0 ? told : parts.slice(0, 1)).join(', ');
}
