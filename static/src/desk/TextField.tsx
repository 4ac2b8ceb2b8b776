// A line or a few lines of text with its label, hint and complaint.

import { Message } from '../parts/Message';

interface Props {
  id: string;
  label: string;
  text: string;
  onText: (text: string) => void;
  hint?: string | null;
  error?: string | null;
  /** More than one line. */
  lines?: number;
  type?: 'text' | 'date';
  /** A number is wanted; the text is still kept as typed. */
  numeric?: boolean;
  /** Offered while typing; anything else may be typed. */
  known?: string[];
}

export function TextField({ id, label, text, onText, hint, error, lines, type = 'text', numeric, known }: Props) {
  const described = [error ? `${id}-error` : '', hint ? `${id}-hint` : ''].filter(Boolean).join(' ');
  const shared = {
    id,
    class: 'text-entry',
    value: text,
    'aria-invalid': error ? ('true' as const) : undefined,
    'aria-describedby': described || undefined,
  };
  return (
    <div class="field" data-lines={lines}>
      <label for={id}>{label}</label>
      {lines !== undefined ? (
        <textarea {...shared} rows={lines} onInput={(e) => onText(e.currentTarget.value)} />
      ) : (
        <input
          {...shared}
          type={type}
          inputMode={numeric ? 'decimal' : undefined}
          list={known && known.length > 0 ? `${id}-known` : undefined}
          autoComplete="off"
          onInput={(e) => onText(e.currentTarget.value)}
        />
      )}
      {known && known.length > 0 && (
        <datalist id={`${id}-known`}>
          {known.map((k) => (
            <option key={k} value={k} />
          ))}
        </datalist>
      )}
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
