// A name and its figure a line.
import type { ComponentChildren } from 'preact';

export interface Fact {
  name: string;
  value: ComponentChildren;
  large?: boolean;
}

export function Facts({ facts }: { facts: (Fact | null)[] }) {
  return (
    <dl class="facts figure">
      {facts.map(
        (fact) =>
          fact && (
            <div key={fact.name} class={fact.large ? 'large' : undefined}>
              <dt>{fact.name}</dt>
              <dd>{fact.value}</dd>
            </div>
          ),
      )}
    </dl>
  );
}
