// One of a few, all in sight: radio buttons drawn as keys.
import type { ComponentChildren } from 'preact';

export interface ChoiceProps<V extends string> {
  legend: string;
  legendHidden?: boolean;
  name: string;
  options: { value: V; label: ComponentChildren; also?: string | undefined }[];
  value: V | null;
  onChoose: (value: V) => void;
  describedBy?: string | undefined;
}

export function Choice<V extends string>(props: ChoiceProps<V>) {
  return (
    <fieldset class="field" aria-describedby={props.describedBy}>
      <legend class={props.legendHidden ? 'spoken' : 'field-label'}>{props.legend}</legend>
      <div class="choice">
        {props.options.map((option) => (
          <label key={option.value}>
            <input
              type="radio"
              name={props.name}
              value={option.value}
              checked={props.value === option.value}
              onChange={() => props.onChoose(option.value)}
            />
            <span>
              {option.label}
              {option.also && <span class="also">{option.also}</span>}
            </span>
          </label>
        ))}
      </div>
    </fieldset>
  );
}
