// The verdict in thumb's reach: mark and word, the figure that decides, the reason in one sentence, the turn that helps
// most with what it buys. The whole strip opens the verdict.
import type { CalcProblem } from '../calc/client.ts';
import { limitDoubted, limitValue } from '../draw/limit.ts';
import { Square, toneOf } from '../draw/Square.tsx';
import type { LimitOutcome, Phase, Quantity, Sheet, Verdict } from '../types.ts';
import { t } from '../words/words.ts';
import { headlineOf, helpful, reasonOf, remedyWithGain } from './sentence.ts';

export interface VerdictStripProps {
  verdict: Verdict | null;
  sheet: Sheet | null;
  problem: CalcProblem | null;
  thinking: boolean;
  /** The state that this step reads; a verdict on another state is not its verdict. */
  phase: Phase;
  href: string;
  /** The reading to begin with, while there is none. */
  begin: { antenna: string; quantity: Quantity } | null;
}

export function VerdictStrip({ verdict, sheet, problem, thinking, phase, href, begin }: VerdictStripProps) {
  if (problem) {
    return (
      <div class="strip plain" role="alert">
        <p class="reason">{t('strip.cannot', { why: problem.message })}</p>
      </div>
    );
  }
  if (!verdict || !sheet) {
    return (
      <div class="strip plain" role="status">
        <p class="reason">{t('strip.thinking')}</p>
      </div>
    );
  }
  if (verdict.judged !== phase) {
    return (
      <a class="strip plain" href={href} aria-busy={thinking} data-word="">
        <p class="reason">
          <strong>{t(`strip.nothing.${phase}`)}</strong>
        </p>
        {begin && <p>{t('strip.begin', { antenna: begin.antenna, quantity: t(`quantity.${begin.quantity}`) })}</p>}
      </a>
    );
  }
  const figures = figuresOf(headlineOf(verdict));
  const best = helpful(verdict);
  const reason = reasonOf(verdict, sheet);
  return (
    <>
      <a class={`strip ${toneOf(verdict.word)}`} href={href} aria-busy={thinking} data-word={verdict.word}>
        <span class="strip-head">
          <Square word={verdict.word} size={38} />
          <strong class="strip-word">{t(`word.${verdict.word}`)}</strong>
          {figures && verdict.word === 'no-go' && (
            <span class="strip-figure">
              <strong class="figure">{figures.value}</strong>
              <span class="figure">{figures.bound}</span>
            </span>
          )}
        </span>
        {figures && verdict.word === 'measure again' && <strong class="figure begins">{t('strip.figure', figures)}</strong>}
        <span class="reason">
          {reason} <u>{t('strip.open')}</u>
        </span>
        {figures && verdict.word === 'go' && <span class="nearest figure">{t('strip.nearest', figures)}</span>}
        {best && <span class="then">{remedyWithGain(best)}</span>}
      </a>
      <p class="spoken" aria-live="polite">
        {`${t(`said.${verdict.word}`)}. ${reason} ${best ? remedyWithGain(best) : ''}`}
      </p>
    </>
  );
}

/** The figure of the limit that is nearest to decide, in the words of the strip. */
function figuresOf(headline: LimitOutcome | null): { brief: string; value: string; bound: string } | null {
  if (!headline || headline.value === null) return null;
  return {
    brief: t(`brief.${headline.name}`),
    value: limitDoubted(headline.name, headline.value, headline.u),
    bound: t(headline.sense === 'at least' ? 'limit.at-least' : 'limit.at-most', { limit: limitValue(headline.name, headline.limit) }),
  };
}
