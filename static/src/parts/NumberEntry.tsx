// A number with its unit. What was typed stays as it was typed, right or wrong; the answer stands under the field.
import type { Ref } from 'preact';
import { Message } from './Message.tsx';

export interface NumberEntryProps {
  id: string;
  label: string;
  /** The label is spoken only; something beside the field already says it. */
  labelHidden?: boolean;
  /** Text as typed, never reformatted. */
  text: string;
  onText: (text: string) => void;
  unit: string;
  /** Spoken name of the unit, where the sign alone reads badly. */
  unitSpoken?: string;
  error?: string | null;
  hint?: string | null;
  big?: boolean;
  /** "decimal" brings up the phone's own keys; "none" where the page's own keypad is on the screen. */
  keys?: 'decimal' | 'none';
  onFocus?: () => void;
  /** The enter key of a keyboard. */
  onEnter?: () => void;
  /** The page's own keys write into this field. */
  inUse?: boolean;
  inputRef?: Ref<HTMLInputElement>;
  disabled?: boolean;
}

export function NumberEntry(props: NumberEntryProps) {
  const { id, error, hint } = props;
  const described = [error ? `${id}-error` : '', hint ? `${id}-hint` : ''].filter(Boolean).join(' ');
  return (
    <div class="field">
      <label for={id} class={props.labelHidden ? 'spoken' : undefined}>
        {props.label}
        <span class="spoken">, {props.unitSpoken ?? props.unit}</span>
      </label>
      <div class={`entry${props.big ? ' big' : ''}${props.inUse ? ' in-use' : ''}${error ? ' wrong' : ''}`}>
        <input
          id={id}
          ref={props.inputRef}
          type="text"
          inputMode={props.keys ?? 'decimal'}
          autoComplete="off"
          autoCapitalize="off"
          spellcheck={false}
          enterkeyhint="done"
          value={props.text}
          disabled={props.disabled}
          aria-invalid={error ? 'true' : undefined}
          aria-describedby={described || undefined}
          onInput={(event) => props.onText(event.currentTarget.value)}
          onFocus={props.onFocus}
          onKeyDown={(event) => {
            if (event.key === 'Enter') props.onEnter?.();
          }}
        />
        <span class={`unit${props.unit === '°' ? ' raised' : ''}`} aria-hidden="true">
          {props.unit}
        </span>
      </div>
      {hint && (
        <span class="hint" id={`${id}-hint`}>
          {hint}
        </span>
      )}
      {error && (
        <Message tone="wrong" beside live id={`${id}-error`}>
          {error}
        </Message>
      )}
    </div>
  );
}
