// A verdict's square with its word, in lists and tables.
import { Square, toneOf } from '../draw/Square.tsx';
import type { Word } from '../types.ts';
import { t } from '../words/words.ts';

export function WordMark({ word, size = 24 }: { word: Word; size?: number }) {
  return (
    <span class={`word ${toneOf(word)}`}>
      <Square word={word} size={size} />
      {t(`word.${word}`)}
    </span>
  );
}
