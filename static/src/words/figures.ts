// How numbers are written on a screen: decimal sign of the language, a true minus, as many figures as the doubt allows.

const minus = '\u2212';

/** Set once at start by the words of the page's language. */
let decimalSign: '.' | ',' = '.';

export function setDecimalSign(sign: '.' | ','): void {
  decimalSign = sign;
}

export function currentDecimalSign(): '.' | ',' {
  return decimalSign;
}

/** A number with a fixed count of decimals; what rounds to zero is written without a sign. */
export function figure(value: number, decimals: number): string {
  let text = Math.abs(value).toFixed(decimals);
  if (decimalSign === ',') text = text.replace('.', ',');
  return value < 0 && /[1-9]/.test(text) ? minus + text : text;
}

/** A number as short as it is: up to `most` decimals, none that are only zeros. */
export function shortest(value: number, most: number): string {
  const text = figure(value, most);
  return /[.,]/.test(text) ? text.replace(/0+$/, '').replace(/[.,]$/, '') : text;
}

/** The most decimals that any of these numbers has as it was typed, three at most. */
export function decimalsIn(values: readonly number[]): number {
  return Math.max(0, ...values.map((value) => (/\.(\d+)$/.exec(String(Number(value.toFixed(3))))?.[1] ?? '').length));
}

/**
 * Decimals that a standard uncertainty deserves: one significant figure, two when it begins with 1 (so that rounding
 * never moves it by more than a quarter; JCGM 100:2008, 7.2.6 has two at most, from memory). Not more than three decimals.
 */
export function decimalsFor(u: number): number {
  if (!(u > 0)) return 1;
  const exponent = Math.floor(Math.log10(u));
  const first = Math.floor(u / 10 ** exponent + 1e-9);
  return Math.min(3, Math.max(0, (first === 1 ? 1 : 0) - exponent));
}

/** "19 ± 2": value rounded to its doubt. Without doubt: value with `fallback` decimals. */
export function withDoubt(value: number, u: number | null | undefined, fallback = 1): string {
  if (!u || !(u > 0)) return shortest(value, fallback);
  const decimals = decimalsFor(u);
  const doubt = figure(u, decimals);
  // A doubt below what is ever shown: the value stands alone.
  if (!/[1-9]/.test(doubt)) return shortest(value, fallback);
  return `${figure(value, decimals)} ± ${doubt}`;
}

/** Probability as whole percent, never said to be certainty: it comes from a finite count of draws. Cut, so that 94.9 does not read as 95. */
export function percent(p: number): string {
  if (p >= 0.99) return '> 99';
  if (p < 0.01) return '< 1';
  return String(Math.floor(p * 100));
}
