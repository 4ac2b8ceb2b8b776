// Sentences made from the codes and numbers of a verdict, so that every language makes its own.
import { limitDoubted, limitTitle, limitValue } from '../draw/limit.ts';
import { turnSentence } from '../draw/turn.ts';
import type { LimitOutcome, Quantity, Remedy, Sheet, Verdict } from '../types.ts';
import { figure, percent, shortest } from '../words/figures.ts';
import { t } from '../words/words.ts';
import { readingsIn, statesOf } from '../draw/drawn.ts';

/** The best turn, where it helps: always while the word is no-go, else only if the word gets better by it. */
export function helpful(verdict: Verdict): Remedy | null {
  const best = verdict.remedies[0];
  if (!best || verdict.word === 'go') return null;
  return verdict.word === 'no-go' || best.word_after === 'go' ? best : null;
}

export function unitSign(unit: 'deg' | 'mm'): string {
  return unit === 'deg' ? '°' : ' mm';
}

/** The limit that the headline shows: the one that the reason names, else the one that is least sure to be kept. */
export function headlineOf(verdict: Verdict): LimitOutcome | null {
  // What was not read is taken as hung by eye: figures made of that would only look like readings.
  if (verdict.reason.code === 'missing_reading') return null;
  const judged = verdict.limits.filter((l) => l.applicable && l.value !== null);
  if (verdict.word === 'go') return nearest(judged);
  const named = judged.find((l) => l.name === verdict.reason.limit);
  if (named) return named;
  if (verdict.reason.code === 'doubt' && verdict.reason.limit !== null) return null; // its limit has no figure
  return nearest(judged);
}

/** Least sure first; among the equally sure, by how many doubts away the limit is. */
function nearest(judged: LimitOutcome[]): LimitOutcome | null {
  const doubts = (l: LimitOutcome) => Math.abs(l.margin ?? 0) / (l.u && l.u > 0 ? l.u : 1e-9);
  return [...judged].sort((a, b) => (a.probability ?? 1) - (b.probability ?? 1) || doubts(a) - doubts(b))[0] ?? null;
}

export function reasonOf(verdict: Verdict, sheet: Sheet): string {
  const { code, limit, antenna, quantity } = verdict.reason;
  switch (code) {
    case 'all_met':
      return t('reason.all-met', { percent: percent(verdict.probability) });
    case 'surroundings_decide':
      return t('reason.surroundings');
    case 'missing_reading':
      return missingReason(verdict);
    case 'doubt':
      return doubtReason(verdict, sheet);
    case 'limit_missed': {
      const outcome = verdict.limits.find((l) => l.name === limit);
      if (!limit || !outcome || outcome.value === null) return t('reason.doubt-bare');
      const params = {
        antenna: antenna ?? '',
        quantity: quantity ? t(`quantity.${quantity}`) : '',
        value: limitValue(limit, outcome.value, outcome.u),
        limit: limitValue(limit, outcome.limit),
      };
      const ofAntenna = antenna !== null && quantity !== null;
      return ofAntenna ? t(`missed.${limit}.of`, params) : t(`missed.${limit}`, params);
    }
  }
}

function missingReason(verdict: Verdict): string {
  const named = verdict.reason.antenna && verdict.reason.quantity ? { antenna: verdict.reason.antenna, quantity: verdict.reason.quantity } : null;
  const first = named ?? verdict.missing[0];
  if (!first) return t('reason.missing-bare');
  const steel = verdict.missing.some((m) => m.antenna === first.antenna && m.quantity === first.quantity && m.why === 'compass only');
  if (steel) return t('reason.missing-compass', { antenna: first.antenna });
  const params = { antenna: first.antenna, quantity: t(`quantity.${first.quantity}`) };
  const more = verdict.missing.length - 1;
  return more > 0 ? t('reason.missing-more', { ...params, n: more }) : t('reason.missing', params);
}

function doubtReason(verdict: Verdict, sheet: Sheet): string {
  const { deciding } = verdict;
  if (!deciding) {
    const { limit } = verdict.reason;
    const outcome = verdict.limits.find((l) => l.name === limit);
    if (!limit || !outcome) return t('reason.doubt-bare');
    if (outcome.value === null) return t('reason.unjudged', { limit: limitTitle(limit) });
    return t(verdict.far_from_plan ? 'reason.doubt-far' : 'reason.doubt-limit', { limit: limitTitle(limit), value: limitDoubted(limit, outcome.value, outcome.u) });
  }
  const sign = unitSign(deciding.unit);
  const params = {
    antenna: deciding.antenna,
    quantity: t(`quantity.${deciding.quantity}`),
    u: doubt(deciding.u) + sign,
  };
  if (deciding.u_needed === null) return t('reason.doubt-more', params);
  return t('reason.doubt', {
    ...params,
    needed: doubt(deciding.u_needed) + sign,
    method: methodOfLast(sheet, verdict, deciding.antenna, deciding.quantity),
  });
}

/** Doubts as they are asked for: cut down, never up, so that what is said to do really does. */
export function doubt(u: number): string {
  if (u >= 10) return figure(Math.floor(u), 0);
  if (u >= 1) return shortest(Math.floor(u * 10) / 10, 1);
  return shortest(Math.floor(u * 100) / 100, 2);
}

function methodOfLast(sheet: Sheet, verdict: Verdict, antenna: string, quantity: Quantity): string {
  const found = sheet.near.antennas.find((a) => a.id === antenna);
  const readings = found ? readingsIn(statesOf(found, quantity) as Parameters<typeof readingsIn>[0], verdict.judged) : [];
  const method = readings[readings.length - 1]?.method;
  return method ? methodName(method) : t('reading.u');
}

const knownMethods = ['level', 'phone', 'tape', 'rule', 'landmark', 'sun', 'compass', 'eye', 'plan', 'typed'] as const;

export function methodName(method: string): string {
  const known = knownMethods.find((m) => m === method);
  return known ? t(`method.${known}`) : method;
}

/** "Turn B 6.2° anticlockwise → 31 dB, go" */
export function remedyWithGain(remedy: Remedy): string {
  const turn = turnSentence(remedy);
  const word = t(`said.${remedy.word_after}`);
  if (remedy.limit === null || remedy.to === null) return `${turn} \u2192 ${word}`;
  return t('strip.then', { turn, to: limitValue(remedy.limit, remedy.to), word });
}

/** What the turn buys, for the opened verdict: "Cross-talk 19 → 31 dB, then go". */
export function remedyGain(remedy: Remedy): string {
  const word = t(`said.${remedy.word_after}`);
  if (remedy.limit === null || remedy.from === null || remedy.to === null) return t('verdict.turn-then', { word });
  return t('verdict.turn-buys', {
    limit: limitTitle(remedy.limit),
    from: limitValue(remedy.limit, remedy.from),
    to: limitValue(remedy.limit, remedy.to),
    word,
  });
}

/** "+45° here faces −45° there", where a polarization of this mount changes its hand in the mirror; else null. */
export function mirrorFact(sheet: Sheet): string | null {
  for (const antenna of sheet.near.antennas) {
    for (const element of antenna.elements) {
      const slant = ((((element.slant_deg + 90) % 180) + 180) % 180) - 90; // −90 to 90, as the trade writes it
      if (Math.abs(slant) > 0.5 && Math.abs(slant) < 89.5) {
        const here = Math.abs(slant);
        return t('mount.mirror', { here: `+${shortest(here, 1)}°`, there: `\u2212${shortest(here, 1)}°` });
      }
    }
  }
  return null;
}
