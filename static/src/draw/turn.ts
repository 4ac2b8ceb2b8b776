// A remedy in words, from its numbers: how much, which way.
import type { Remedy } from '../types.ts';
import { shortest } from '../words/figures.ts';
import { t } from '../words/words.ts';

/** "clockwise", "up", "left" …: the sign of the change tells it for angles, calc names it for places. */
export function wayOf(remedy: Remedy): string {
  if (leans(remedy)) return placeWay(remedy.direction);
  const more = remedy.change >= 0;
  switch (remedy.quantity) {
    case 'skew':
      return t(more ? 'way.clockwise' : 'way.anticlockwise');
    case 'tilt':
      return t(more ? 'way.up' : 'way.down');
    case 'azimuth':
      return t(more ? 'way.right' : 'way.left');
    case 'position':
      return placeWay(remedy.direction);
  }
}

/** A rod has no boresight: it leans to a side, forward or back, where a panel turns and tilts. */
export function leans(remedy: Remedy): boolean {
  return (remedy.quantity === 'skew' || remedy.quantity === 'tilt') && ['left', 'right', 'forward', 'back'].includes(remedy.direction);
}

function placeWay(direction: string): string {
  switch (direction) {
    case 'left':
    case 'right':
    case 'up':
    case 'down':
    case 'forward':
    case 'back':
    case 'farther':
    case 'nearer':
      return t(`way.${direction}`);
    default:
      return direction;
  }
}

/** "6.2°", "12 mm": whole millimetres, tenths of a degree below ten. */
export function amountOf(remedy: Remedy): string {
  const size = Math.abs(remedy.change);
  return remedy.unit === 'mm' ? `${shortest(size, 0)} mm` : `${shortest(size, size < 10 ? 1 : 0)}°`;
}

/** Beside the arrow: "6.2° anticlockwise". */
export function turnAmount(remedy: Remedy): string {
  return t('turn.amount', { amount: amountOf(remedy), way: wayOf(remedy) });
}

/** The whole instruction: "Turn B 6.2° anticlockwise". */
export function turnSentence(remedy: Remedy): string {
  return t(leans(remedy) ? 'turn.lean' : `turn.${remedy.quantity}`, { antenna: remedy.antenna, amount: amountOf(remedy), way: wayOf(remedy) });
}
