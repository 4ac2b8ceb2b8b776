// Value, doubt and limit on one line: a track, a band from the 2.5 % to the 97.5 % point, a tick at the value, the limit
// as a flag that points to where it is kept, and hatching, as on a section drawing, where it is not.
import { useId } from 'preact/hooks';
import type { LimitOutcome } from '../types.ts';
import { t } from '../words/words.ts';
import { limitDoubted, limitScale, limitTitle, limitValue, standingOf } from './limit.ts';

export interface LimitLineProps {
  outcome: LimitOutcome;
  /** The track alone, for a table whose columns hold the words. */
  bare?: boolean;
}

export function LimitLine({ outcome, bare }: LimitLineProps) {
  const { name, value } = outcome;
  if (!outcome.applicable || value === null) {
    if (bare) return <span>{t('limit.not-judged')}</span>;
    return (
      <div class="limit-line">
        <div class="head">
          <span>{limitTitle(name)}</span>
          <span>{t('limit.not-judged')}</span>
        </div>
        {outcome.why_not && <div class="under">{outcome.why_not}</div>}
      </div>
    );
  }
  const standing = standingOf(outcome);
  const track = <LimitTrack outcome={outcome} />;
  if (bare) return track;
  const scale = limitScale(outcome);
  const atLeast = outcome.sense === 'at least';
  return (
    <div class="limit-line">
      <div class="head">
        <span>{limitTitle(name)}</span>
        <span class="figure">{limitDoubted(name, value, outcome.u)}</span>
      </div>
      {track}
      <div class="under figure">
        <span aria-hidden="true">{scale.fromText}</span>
        <span>
          {t(atLeast ? 'limit.at-least' : 'limit.at-most', { limit: limitValue(name, outcome.limit) })}
          {' \u00b7 '}
          <strong>{t(`standing.${standing}`)}</strong>
        </span>
        <span aria-hidden="true">{scale.toText}</span>
      </div>
    </div>
  );
}

/** The track alone. Widths are in percent, so it fits any column without being measured. */
export function LimitTrack({ outcome }: { outcome: LimitOutcome }) {
  const hatch = `hatch-${useId()}`;
  const { value, low, high, limit } = outcome;
  if (value === null) return null;
  const scale = limitScale(outcome);
  const percent = (x: number) => `${(100 * scale.at(x)).toFixed(2)}%`;
  const from = 100 * scale.at(low ?? value);
  const to = 100 * scale.at(high ?? value);
  const atLimit = 100 * scale.at(limit);
  const atLeast = outcome.sense === 'at least';
  const middle = 26;
  return (
    <svg class={`limit-track ${standingOf(outcome)}`} aria-hidden="true" focusable="false" height="44">
      <defs>
        <pattern id={hatch} width="8" height="8" patternUnits="userSpaceOnUse" patternTransform="rotate(-45)">
          <line class="forbidden" x1="0" y1="0" x2="8" y2="0" />
        </pattern>
      </defs>
      <rect
        x={atLeast ? '0%' : `${atLimit.toFixed(2)}%`}
        width={`${(atLeast ? atLimit : 100 - atLimit).toFixed(2)}%`}
        y={middle}
        height="10"
        fill={`url(#${hatch})`}
      />
      <rect class="band" x={`${from.toFixed(2)}%`} width={`${Math.max(0.6, to - from).toFixed(2)}%`} y={middle - 11} height="22" />
      <line class="track" x1="0%" x2="100%" y1={middle} y2={middle} />
      <line class="end" x1="0%" x2="0%" y1={middle - 6} y2={middle + 6} />
      <line class="end" x1="100%" x2="100%" y1={middle - 6} y2={middle + 6} />
      <line class="tick" x1={percent(value)} x2={percent(value)} y1={middle - 14} y2={middle + 14} />
      <line class="limit" x1={percent(limit)} x2={percent(limit)} y1="2" y2="44" />
      <svg x={percent(limit)} y="0" overflow="visible">
        <path class="flag" d={atLeast ? 'M0 2 H14 L9 7.5 L14 13 H0 Z' : 'M0 2 H-14 L-9 7.5 L-14 13 H0 Z'} />
      </svg>
    </svg>
  );
}
