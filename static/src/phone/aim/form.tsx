// Fields of a page by name: what is typed is kept at every stroke and stays, right or wrong; numbers are read from it,
// and what calc refuses stands beside the field that it names.
import { useEffect, useRef, useState } from 'preact/hooks';
import { readNumber } from '../../parts/number.ts';
import { NumberEntry } from '../../parts/NumberEntry.tsx';
import { dropDraft, getDraft, setDraft } from '../../store/index.ts';
import type { Problem } from '../../types.ts';
import { say } from '../../words/aim.ts';
import { t } from '../../words/words.ts';

export type Texts = Record<string, string>;

export interface Form {
  key: string;
  text: (name: string) => string;
  put: (changes: Texts) => void;
  /** The field that the page's own keys write into. */
  inUse: string;
  use: (name: string) => void;
  /** The person asked to keep: what is empty is told too. */
  asked: boolean;
  ask: (asked: boolean) => void;
  trouble: string | null;
  fail: (trouble: string | null) => void;
  onKey: (change: (text: string) => string) => void;
  /** Empties what was typed, except the names given. */
  clear: (except?: readonly string[]) => void;
}

/** undefined until the draft of an earlier time was looked for. */
export function useForm(key: string, fresh: Texts, first: string): Form | undefined {
  const [texts, setTexts] = useState<Texts | undefined>(undefined);
  const [inUse, setInUse] = useState(first);
  const [asked, setAsked] = useState(false);
  const [trouble, setTrouble] = useState<string | null>(null);
  const latest = useRef<Texts>({});
  useEffect(() => {
    let live = true;
    const start = (kept: Texts | undefined) => {
      if (!live) return;
      latest.current = { ...fresh, ...kept };
      setTexts(latest.current);
    };
    getDraft<Texts>(key).then(start, () => start(undefined));
    return () => {
      live = false;
    };
  }, [key]);
  if (texts === undefined) return undefined;
  const put = (changes: Texts) => {
    latest.current = { ...latest.current, ...changes };
    setTexts(latest.current);
    setTrouble(null);
    setDraft(key, latest.current).catch((error: unknown) => setTrouble(t('failed.write', { why: String(error) })));
  };
  return {
    key,
    text: (name) => texts[name] ?? '',
    put,
    inUse,
    use: setInUse,
    asked,
    ask: setAsked,
    trouble,
    fail: setTrouble,
    onKey: (change) => put({ [inUse]: change(latest.current[inUse] ?? '') }),
    clear: (except = []) => {
      latest.current = { ...fresh, ...Object.fromEntries(except.map((name) => [name, latest.current[name] ?? ''])) };
      setTexts(latest.current);
      setAsked(false);
      dropDraft(key).catch(() => undefined);
    },
  };
}

/** Signs that may still become a number. */
const begun = /^[+\u2212-]?[.,]?$/;

/** The number typed into a field, null where there is none yet or it is none. */
export function numberIn(form: Form, name: string): number | null {
  const typed = readNumber(form.text(name));
  return typed.ok ? typed.value : null;
}

/** Whether a field holds something that is no number, or nothing where something is needed. */
export function errorIn(form: Form, name: string, optional: boolean): string | null {
  const text = form.text(name).trim();
  if (begun.test(text)) return form.asked && !optional ? t('error.empty') : null;
  const typed = readNumber(text);
  if (typed.ok) return null;
  return t(typed.why === 'two signs' ? 'error.two-signs' : 'error.not-a-number', { typed: text });
}

export interface FieldProps {
  form: Form;
  name: string;
  label: string;
  unit: string;
  unitSpoken?: string;
  optional?: boolean;
  big?: boolean;
  hint?: string | null;
  /** What calc says of it. */
  problem?: string | null | undefined;
  /** The page shows its own keys. */
  keyed?: boolean;
}

export function Field({ form, name, label, unit, unitSpoken, optional, big, hint, problem, keyed }: FieldProps) {
  const id = `field-${name}`;
  const spoken = unitSpoken ?? (unit === '°' ? t('reading.degrees') : unit);
  return (
    <NumberEntry
      id={id}
      label={optional ? say('field.optional', { label }) : label}
      text={form.text(name)}
      onText={(text) => form.put({ [name]: text })}
      unit={unit}
      unitSpoken={spoken}
      big={big}
      hint={hint ?? null}
      keys={keyed ? 'none' : 'decimal'}
      inUse={keyed && form.inUse === name}
      onFocus={() => form.use(name)}
      error={errorIn(form, name, optional ?? false) ?? problem ?? null}
    />
  );
}

/** The message of a problem, if it is about one of these calc fields. */
export function told(problem: Problem | null, ...fields: string[]): string | null {
  if (!problem) return null;
  return fields.some((f) => problem.field === f || problem.field.startsWith(`${f}.`) || problem.field.startsWith(`${f}[`)) ? problem.message : null;
}

/** Brings the first field with a complaint in sight. */
export function showFirst(names: readonly string[]): void {
  for (const name of names) {
    const field = document.getElementById(`field-${name}`);
    if (field?.getAttribute('aria-invalid') === 'true') {
      field.focus();
      field.scrollIntoView({ block: 'center' });
      return;
    }
  }
}
