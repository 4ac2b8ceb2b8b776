// A number of the plan. What is typed stays as typed; only a text that is a number reaches the sheet.

import { useEffect, useState } from 'preact/hooks';
import { readNumber } from '../parts/number';
import { NumberEntry } from '../parts/NumberEntry';
import { shortest } from '../words/figures';
import { t } from './words';

interface Props {
  id: string;
  label: string;
  unit: string;
  value: number | null;
  onValue: (value: number | null) => void;
  /** Empty is an answer. */
  optional?: boolean;
  /** What to say where nothing is typed; with it the value goes as well when the field is emptied. */
  needed?: string | null;
  hint?: string | null;
  /** What the server says of this field. */
  problem?: string | null;
  /** Told whenever the text stops or starts being a number: a plan with such a text cannot be issued. */
  onUnread?: (id: string, unread: boolean) => void;
}

const asText = (value: number | null) => (value === null ? '' : shortest(value, 9));

export function NumberField({ id, label, unit, value, onValue, optional, needed, hint, problem, onUnread }: Props) {
  const [text, setText] = useState(asText(value));
  const typed = readNumber(text);
  const empty = text.trim() === '';
  const emptyIsFine = optional === true && empty;
  const unread = !typed.ok && !emptyIsFine;

  useEffect(() => {
    // The sheet changed elsewhere (its text, a template): the field follows, unless it says the same already.
    const now = readNumber(text);
    const same = now.ok ? now.value === value : text.trim() === '' && value === null;
    if (!same && (now.ok || text.trim() === '')) setText(asText(value));
    // Only a change from outside counts here, not one's own typing.
  }, [value]);
  useEffect(() => {
    onUnread?.(id, unread);
    return () => onUnread?.(id, false);
  }, [id, unread]);

  return (
    <NumberEntry
      id={id}
      label={label}
      unit={unit}
      text={text}
      onText={(next) => {
        setText(next);
        const read = readNumber(next);
        if (read.ok) onValue(read.value);
        else if ((optional === true || needed) && next.trim() === '') onValue(null);
      }}
      hint={hint ?? null}
      error={unread && empty && needed ? needed : unread ? t(typed.ok ? 'number.empty' : `number.${typed.why}`) : (problem ?? null)}
    />
  );
}
