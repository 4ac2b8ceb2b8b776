// The sign of the verdict. Pairs should stand square: go is a true square, no-go one pushed out of square, measure
// again a dashed one. Form alone tells them apart; the word always stands beside it.
import type { Word } from '../types.ts';

export interface SquareProps {
  word: Word;
  /** Edge in CSS pixels. */
  size?: number;
}

export function Square({ word, size = 28 }: SquareProps) {
  return (
    <svg width={size} height={size} viewBox="0 0 28 28" aria-hidden="true" focusable="false">
      {word === 'go' && <rect x="4" y="4" width="20" height="20" fill="none" stroke="currentColor" stroke-width="4" />}
      {word === 'no-go' && (
        <path d="M9.5 4 H27 L18.5 24 H1 Z" fill="none" stroke="currentColor" stroke-width="4" stroke-linejoin="miter" />
      )}
      {word === 'measure again' && (
        <path
          d="M4 10 V4 H10 M18 4 H24 V10 M24 18 V24 H18 M10 24 H4 V18"
          fill="none"
          stroke="currentColor"
          stroke-width="4"
        />
      )}
    </svg>
  );
}

/** Class name that colours a word. */
export function toneOf(word: Word): 'go' | 'no-go' | 'again' {
  return word === 'measure again' ? 'again' : word;
}
