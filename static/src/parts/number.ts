// What a person types as a number: comma or point as decimal sign, any of the dashes as minus.

export type Typed = { ok: true; value: number } | { ok: false; why: 'empty' | 'not a number' | 'two signs' };

/**
 * Reads typed text. Two decimal signs are refused instead of guessed: "1.234,5" may be meant as thousands, and a
 * reading that is wrong by a thousand is worse than one that is asked for again.
 */
export function readNumber(text: string): Typed {
  const trimmed = text.trim().replace(/[\u2212\u2013\u2010\u2011]/g, '-').replace(/\s+/g, '');
  if (trimmed === '') return { ok: false, why: 'empty' };
  if ((trimmed.match(/[.,]/g) ?? []).length > 1) return { ok: false, why: 'two signs' };
  if (!/^[+-]?(\d+[.,]?\d*|[.,]\d+)$/.test(trimmed)) return { ok: false, why: 'not a number' };
  const value = Number(trimmed.replace(',', '.'));
  return Number.isFinite(value) ? { ok: true, value } : { ok: false, why: 'not a number' };
}
