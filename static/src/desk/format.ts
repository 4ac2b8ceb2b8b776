// Figures and times as the desk writes them. Only the look of a number: no formula of the job stands here.

import { decimalsFor, figure, shortest } from '../words/figures.ts';

/** Decimals where no doubt is known. */
function usualDecimals(unit: string): number {
  switch (unit) {
    case 'mm':
    case 'm':
    case 'MHz':
      return 0;
    case 'deg':
    case 'dB':
    case 'dBm':
    case 'dBi':
      return 1;
    default:
      return 2;
  }
}

function withUnit(text: string, unit: string): string {
  if (unit === 'deg') return `${text}°`;
  if (unit === '' || unit === '1') return text;
  return `${text}\u00a0${unit}`;
}

export function amount(value: number, unit: string, u: number | null = null): string {
  const decimals = u !== null && u > 0 ? decimalsFor(u) : usualDecimals(unit);
  return withUnit(figure(value, decimals), unit);
}

/** The doubt alone, as ± one standard uncertainty. */
export function doubt(u: number, unit: string): string {
  return `±\u00a0${withUnit(u > 0 ? figure(u, decimalsFor(u)) : '0', unit)}`;
}

/** A number as it was entered: not rounded, only with its sign and unit. */
export function asGiven(value: number, unit: string): string {
  return withUnit(shortest(value, 6), unit);
}

export function percent(probability: number): string {
  if (probability > 0.999) return '>\u00a099.9\u00a0%';
  if (probability < 0.001) return '<\u00a00.1\u00a0%';
  // Cut, not rounded: 94.96 % must not read as 95 %, where the verdict's threshold lies.
  return `${figure(Math.floor(probability * 1000) / 10, 1)}\u00a0%`;
}

const months = ['Jan', 'Feb', 'Mar', 'Apr', 'May', 'Jun', 'Jul', 'Aug', 'Sep', 'Oct', 'Nov', 'Dec'];
const weekdays = ['Sunday', 'Monday', 'Tuesday', 'Wednesday', 'Thursday', 'Friday', 'Saturday'];

/** "30 Nov 2026" of a date or time text, as written there: the calendar of the place, not of this desk. */
export function day(iso: string): string {
  const m = /^(\d{4})-(\d{2})-(\d{2})/.exec(iso);
  if (!m) return iso;
  return `${Number(m[3])}\u00a0${months[Number(m[2]) - 1] ?? m[2]}\u00a0${m[1]}`;
}

/** "30 Nov 2026 09:12" by the clock of the place where it was written. */
export function placeTime(iso: string): string {
  const m = /T(\d{2}:\d{2})/.exec(iso);
  return m ? `${day(iso)} ${m[1]}` : day(iso);
}

/** "09:12" by the clock of the place. */
export function placeClock(iso: string): string {
  return /T(\d{2}:\d{2})/.exec(iso)?.[1] ?? iso;
}

function two(n: number): string {
  return String(n).padStart(2, '0');
}

/** A moment by this desk's own clock. */
export function deskTime(iso: string): string {
  const d = new Date(iso);
  if (Number.isNaN(d.getTime())) return iso;
  return `${d.getDate()}\u00a0${months[d.getMonth()]}\u00a0${d.getFullYear()} ${two(d.getHours())}:${two(d.getMinutes())}`;
}

/** As short as a list needs it: the time today, "yesterday", a weekday, else the day. `yesterday` is the word for it. */
export function shortWhen(iso: string, now: Date, yesterday: string): string {
  const d = new Date(iso);
  if (Number.isNaN(d.getTime())) return iso;
  const midnight = (x: Date) => new Date(x.getFullYear(), x.getMonth(), x.getDate()).getTime();
  const days = Math.round((midnight(now) - midnight(d)) / 86_400_000);
  if (days === 0) return `${two(d.getHours())}:${two(d.getMinutes())}`;
  if (days === 1) return yesterday;
  if (days > 1 && days < 7) return weekdays[d.getDay()] ?? '';
  const year = d.getFullYear() === now.getFullYear() ? '' : `\u00a0${d.getFullYear()}`;
  return `${d.getDate()}\u00a0${months[d.getMonth()]}${year}`;
}

/** Enough of a hash to compare by eye; the whole stands in its title and on paper. */
export function shortHash(hash: string): string {
  return hash.length > 16 ? `${hash.slice(0, 8)}…${hash.slice(-8)}` : hash;
}
