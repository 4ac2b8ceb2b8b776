// Times as people of the trade say them. The clock of the place counts, so a time with its offset is read as written.
import { language } from './words.ts';

/** "09:12" of an RFC 3339 time, by the clock of the place where it was written. */
export function clock(at: string): string {
  return /T(\d\d:\d\d)/.exec(at)?.[1] ?? at;
}

/** "30 November" of a date. */
export function day(date: string): string {
  const [year, month, dayOfMonth] = date.slice(0, 10).split('-').map(Number);
  if (!year || !month || !dayOfMonth) return date;
  const format = new Intl.DateTimeFormat(language === 'en' ? 'en-GB' : language, { day: 'numeric', month: 'long', timeZone: 'UTC' });
  return format.format(new Date(Date.UTC(year, month - 1, dayOfMonth)));
}

/** The day of this phone's clock, as a date. */
export function today(now: Date = new Date()): string {
  const two = (n: number) => String(n).padStart(2, '0');
  return `${now.getFullYear()}-${two(now.getMonth() + 1)}-${two(now.getDate())}`;
}

/** "09:12" today, "30 November 09:12" on another day. */
export function when(at: string): string {
  return at.slice(0, 10) === today() ? clock(at) : `${day(at)} ${clock(at)}`;
}
