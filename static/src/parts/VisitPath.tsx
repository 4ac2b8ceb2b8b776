// The path of the visit: a row of squares, filled when done, open when not, a dash where nothing is to do, heavy where the person stands. Every one of
// them can be opened at any time.
import { t } from '../words/words.ts';

export interface VisitStep {
  key: string;
  label: string;
  href: string;
  done: boolean;
  needless?: boolean;
  here: boolean;
}

export function VisitPath({ steps }: { steps: VisitStep[] }) {
  return (
    <nav aria-label={t('path.name')}>
      <ol class="path">
        {steps.map((step) => (
          <li key={step.key}>
            <a href={step.href} aria-current={step.here ? 'step' : undefined}>
              <PathSquare done={step.done} needless={step.needless ?? false} here={step.here} />
              <span>{step.label}</span>
              <span class="spoken">{t(step.needless ? 'path.needless' : step.done ? 'path.done' : 'path.open')}</span>
            </a>
          </li>
        ))}
      </ol>
    </nav>
  );
}

function PathSquare({ done, needless, here }: { done: boolean; needless: boolean; here: boolean }) {
  return (
    <svg width="24" height="24" viewBox="0 0 24 24" aria-hidden="true" focusable="false">
      {here ? (
        <rect x="2.5" y="2.5" width="19" height="19" fill="none" stroke="currentColor" stroke-width="5" />
      ) : needless ? (
        <path d="M5 12 H19" stroke="currentColor" stroke-width="2.5" />
      ) : (
        <rect x="5" y="5" width="14" height="14" fill="none" stroke="currentColor" stroke-width="2.5" />
      )}
      {done && <rect x={here ? 7 : 5} y={here ? 7 : 5} width={here ? 10 : 14} height={here ? 10 : 14} fill="currentColor" />}
    </svg>
  );
}
