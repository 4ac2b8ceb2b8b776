// The verdict in thumb's reach: mark and word, the figure that decides, the reason in one sentence, the turn that helps
// most with what it buys. The whole strip opens the verdict.
import type { CalcProblem } from '../calc/client';
import { limitDoubted, limitValue } from '../draw/limit';
import { Square, toneOf } from '../draw/Square';
import type { Phase, Quantity, Sheet, Verdict } from '../types';
import { t } from '../words/words';
import { headlineOf, helpful, reasonOf, remedyWithGain } from './sentence';

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
  const headline = headlineOf(verdict);
  const best = helpful(verdict);
  const reason = reasonOf(verdict, sheet);
  return (
    <>
      <a class={`strip ${toneOf(verdict.word)}`} href={href} aria-busy={thinking} data-word={verdict.word}>
        <span class="strip-head">
          <Square word={verdict.word} size={38} />
          <strong class="strip-word">{t(`word.${verdict.word}`)}</strong>
          {headline && headline.value !== null && (
            <span class="strip-figure">
              <strong class="figure">{limitDoubted(headline.name, headline.value, headline.u)}</strong>
              <span class="figure">
                {t(headline.sense === 'at least' ? 'strip.needs' : 'strip.allows', { limit: limitValue(headline.name, headline.limit) })}
              </span>
            </span>
          )}
        </span>
        <span class="reason">
          {reason} <u>{t('strip.open')}</u>
        </span>
        {best && <span class="then">{remedyWithGain(best)}</span>}
      </a>
      <p class="spoken" aria-live="polite">
        {`${t(`said.${verdict.word}`)}. ${reason} ${best ? remedyWithGain(best) : ''}`}
      </p>
    </>
  );
}
