// An answer of calc to a question that changes: asked again when the question does, the old answer shown until then.
import { useEffect, useRef, useState } from 'preact/hooks';
import type { Problem } from '../types.ts';

/** How a page asks calc: the phone through its Worker, the desk through the server. */
export type Ask = <T>(op: string, input: unknown) => Promise<T>;

export interface Reckoned<T> {
  answer: T | null;
  problem: Problem | null;
  asking: boolean;
}

export function useReckoned<T>(ask: Ask, op: string, question: unknown | null): Reckoned<T> {
  const [state, setState] = useState<Reckoned<T>>({ answer: null, problem: null, asking: question !== null });
  const turn = useRef(0);
  const text = question === null ? null : JSON.stringify(question);
  useEffect(() => {
    const mine = ++turn.current;
    if (text === null) {
      setState({ answer: null, problem: null, asking: false });
      return;
    }
    setState((before) => ({ ...before, asking: true }));
    ask<T>(op, JSON.parse(text)).then(
      (answer) => mine === turn.current && setState({ answer, problem: null, asking: false }),
      (error: unknown) => {
        if (mine === turn.current) setState({ answer: null, problem: problemOf(error), asking: false });
      },
    );
    return () => {
      turn.current += 1;
    };
  }, [op, text]);
  return state;
}

/** The phone's CalcProblem and the desk's ApiProblem carry the same three fields; anything else is told as it comes. */
export function problemOf(error: unknown): Problem {
  const p = error as Partial<Problem> & { detail?: string };
  const message = p.detail ?? p.message ?? String(error);
  return { code: p.code ?? 'internal', field: p.field ?? '', message: sentence(message) };
}

/** calc's messages begin small, as parts of a sentence; alone beside a field they begin large and end with a stop. */
export function sentence(message: string): string {
  const text = message.trim();
  if (text === '') return text;
  const whole = text.charAt(0).toUpperCase() + text.slice(1);
  return /[.!?…]$/.test(whole) ? whole : `${whole}.`;
}
