// Planned, as found and as left side by side, seen from behind.

import { WordMark } from '../parts/WordMark';
import type { Sheet, State, Verdict, Word } from '../types';
import { PlacedMount } from './PlacedMount';
import type { MoveLine } from './record';
import { t } from './words';

interface Props {
  sheet: Sheet;
  verdict: Verdict;
  moves: MoveLine[];
}

const states: readonly State[] = ['planned', 'as_found', 'as_left'];

export function StateDrawings({ sheet, verdict, moves }: Props) {
  return (
    <section class="drawings" aria-label={t('desk.drawings')}>
      {states.map((state) => {
        const word = wordOf(verdict, state);
        const there = state === 'planned' || verdict.geometry.antennas.some((a) => a[state] !== null);
        const moved = state === 'as_found' ? moves : [];
        return (
          <figure key={state} class="drawing" data-state={state}>
            <figcaption>
              <strong>{t(`desk.state.${state}`)}</strong>
              {word !== null && <WordMark word={word} size={18} />}
            </figcaption>
            {there ? (
              <PlacedMount sheet={sheet} verdict={verdict} state={state} marked={moved} />
            ) : (
              <p class="drawing-empty">{t('desk.drawing.none')}</p>
            )}
            <p class="drawing-note">
              {t('drawing.from-behind')}
              {moved.length > 0 && <> · {t('desk.drawing.moved', { parts: parts(moved) })}</>}
            </p>
          </figure>
        );
      })}
    </section>
  );
}

function parts(moves: MoveLine[]): string {
  return [...new Set(moves.map((m) => `${m.antenna}\u00a0${t(`quantity.${m.quantity}`)}`))].join(', ');
}

/** The plan is not judged by itself. */
function wordOf(verdict: Verdict, state: State): Word | null {
  return state === 'planned' ? null : (verdict.states[state]?.word ?? null);
}
