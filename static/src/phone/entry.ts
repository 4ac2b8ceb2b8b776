// What was typed on the reading page, and whether it can be a reading. The typed text is kept as typed; a direction is
// chosen in words, a sign in front of an angle is taken as the direction it stands for.
import type { Quantity, Reading } from '../types.ts';
import { shortest } from '../words/figures.ts';
import { t } from '../words/words.ts';
import { readNumber } from '../parts/number.ts';
import { axes, type Axis } from './manner.ts';

export type Way = 'more' | 'less';
export type FieldName = 'value' | Axis;

export interface TypedField {
  text: string;
  way: Way | null;
}

export interface Draft {
  fields: Partial<Record<FieldName, TypedField>>;
  u: string;
  method: string;
  instrument: string;
  /** Position: the axes beyond the planned one are shown too. */
  more: boolean;
}

export interface Checked {
  errors: Partial<Record<FieldName | 'u' | 'all', string>>;
  /** Direction missing: asked for beside the choice. */
  wayless: Partial<Record<FieldName, boolean>>;
  /** Value and doubt, when all is well. */
  reading: { value: Reading['value']; u: number } | null;
  /** What stood in the fields, for the log. */
  typed: string;
}

export const blank: TypedField = { text: '', way: null };

/** Signs that may still become a number while somebody is typing. */
const begun = /^[+\u2212-]?[.,]?$/;

/** The direction in force: a typed sign wins over the chosen word. */
export function wayOf(field: TypedField): Way | null {
  const first = field.text.trim()[0];
  if (first === '-' || first === '\u2212' || first === '\u2013') return 'less';
  if (first === '+') return 'more';
  return field.way;
}

const most: Record<'skew' | 'tilt' | 'azimuth', number> = { skew: 180, tilt: 90, azimuth: 360 };

/** `asked`: the person pressed keep, so that what is empty is wrong too. */
export function check(quantity: Quantity, draft: Draft, datum: string, asked: boolean): Checked {
  const checked: Checked = { errors: {}, wayless: {}, reading: null, typed: typedOf(quantity, draft) };
  const u = checkDoubt(quantity, draft.u, asked, checked);
  const value = quantity === 'position' ? checkPlace(draft, datum, asked, checked) : checkAngle(quantity, draft, asked, checked);
  const flawless = Object.keys(checked.errors).length === 0 && Object.keys(checked.wayless).length === 0;
  if (flawless && value !== null && u !== null) checked.reading = { value, u };
  return checked;
}

function notNumber(typed: string, why: 'not a number' | 'two signs'): string {
  return t(why === 'two signs' ? 'error.two-signs' : 'error.not-a-number', { typed });
}

function checkAngle(quantity: 'skew' | 'tilt' | 'azimuth', draft: Draft, asked: boolean, to: Checked): number | null {
  const field = draft.fields.value ?? blank;
  if (begun.test(field.text.trim())) {
    if (asked) to.errors.value = t('error.empty');
    return null;
  }
  const number = readNumber(field.text);
  if (!number.ok) {
    to.errors.value = number.why === 'empty' ? t('error.empty') : notNumber(field.text.trim(), number.why);
    return null;
  }
  const size = Math.abs(number.value);
  if (size > most[quantity] || (quantity === 'azimuth' && number.value < 0)) {
    to.errors.value = t(`error.range.${quantity}`, { typed: field.text.trim() });
    return null;
  }
  if (quantity === 'azimuth') return number.value;
  const way = wayOf(field);
  if (size === 0) return 0;
  if (way === null) {
    if (asked) to.wayless.value = true;
    return null;
  }
  return way === 'less' ? -size : size;
}

function checkPlace(draft: Draft, datum: string, asked: boolean, to: Checked): Reading['value'] | null {
  const value: Record<Axis, number | null> = { right: null, up: null, forward: null };
  let any = false;
  let whole = true;
  for (const axis of axes) {
    const field = draft.fields[axis] ?? blank;
    const text = field.text.trim();
    if (text === '') continue;
    if (/^[-\u2212\u2013]/.test(text)) {
      to.errors[axis] = t('error.distance-minus');
      whole = false;
      continue;
    }
    if (begun.test(text)) {
      whole = false;
      if (asked) to.errors[axis] = t('error.not-a-number', { typed: text });
      continue;
    }
    const number = readNumber(text);
    if (!number.ok) {
      if (number.why !== 'empty') to.errors[axis] = notNumber(text, number.why);
      whole = false;
      continue;
    }
    if (number.value > 100_000) {
      to.errors[axis] = t('error.distance-large', { datum });
      whole = false;
      continue;
    }
    if (number.value !== 0 && field.way === null) {
      if (asked) to.wayless[axis] = true;
      whole = false;
      continue;
    }
    any = true;
    value[axis] = field.way === 'less' ? 0 - number.value : number.value;
  }
  if (!any && asked && whole) to.errors.all = t('error.axis-none');
  return any && whole ? value : null;
}

function checkDoubt(quantity: Quantity, text: string, asked: boolean, to: Checked): number | null {
  if (begun.test(text.trim())) {
    if (asked) to.errors.u = t('error.u-empty');
    return null;
  }
  const number = readNumber(text);
  if (!number.ok) {
    to.errors.u = number.why === 'empty' ? t('error.u-empty') : notNumber(text.trim(), number.why);
    return null;
  }
  const mm = quantity === 'position';
  if (number.value <= 0) {
    // While "0," grows into "0,3" it is not wrong yet.
    if (asked || number.value < 0) to.errors.u = t('error.u-none');
    return null;
  }
  if (number.value > (mm ? 10_000 : 180)) {
    to.errors.u = t(mm ? 'error.u-large.mm' : 'error.u-large.deg', { typed: text.trim() });
    return null;
  }
  return number.value;
}

function typedOf(quantity: Quantity, draft: Draft): string {
  if (quantity !== 'position') return (draft.fields.value?.text ?? '').trim();
  return axes
    .map((axis) => (draft.fields[axis]?.text ?? '').trim())
    .join(' / ');
}

/** How far a reading is from the plan, when so far that a slip of the finger is likelier than the mount: in words, else null. */
export function farFromPlan(quantity: Quantity, value: Reading['value'], planned: Reading['value'] | null | undefined): string | null {
  if (planned === null || planned === undefined) return null;
  if (typeof value === 'number' && typeof planned === 'number') {
    const off = quantity === 'azimuth' ? Math.abs(((((value - planned) % 360) + 540) % 360) - 180) : Math.abs(value - planned);
    return off > (quantity === 'azimuth' ? 45 : 25) ? `${shortest(off, 1)}°` : null;
  }
  if (typeof value === 'object' && typeof planned === 'object') {
    for (const axis of axes) {
      const mm = value[axis];
      if (mm === null) continue;
      const off = Math.abs(mm - (planned[axis] ?? 0));
      if (off > Math.max(200, Math.abs(planned[axis] ?? 0) / 2)) return `${shortest(off, 0)} mm`;
    }
  }
  return null;
}
