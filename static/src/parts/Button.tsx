// A press. A real button or a real link, square, ruled; acts when the finger leaves, as the browser does by itself.
import type { ComponentChildren } from 'preact';

export interface ButtonProps {
  children: ComponentChildren;
  onPress?: (() => void) | undefined;
  /** A link instead of a button. */
  href?: string | undefined;
  /** "first": the one thing to do on this page, 64 px. "plain": 56 px. "quiet": underlined, for what is seldom needed. */
  kind?: 'first' | 'plain' | 'quiet';
  type?: 'button' | 'submit';
  wide?: boolean;
  left?: boolean;
  disabled?: boolean;
  busy?: boolean;
  /** Spoken name where the children are a drawing. */
  label?: string | undefined;
  /** Toggle state. */
  pressed?: boolean | undefined;
  expanded?: boolean | undefined;
  controls?: string | undefined;
  extra?: string;
  id?: string;
}

export function Button(props: ButtonProps) {
  const { kind = 'plain', wide, left, extra } = props;
  const classes = ['button'];
  if (kind !== 'plain') classes.push(kind);
  if (wide) classes.push('wide');
  if (left) classes.push('left');
  if (extra) classes.push(extra);
  const name = classes.join(' ');
  if (props.href !== undefined) {
    return (
      <a class={name} href={props.href} aria-label={props.label} id={props.id} onClick={props.onPress}>
        {props.children}
      </a>
    );
  }
  return (
    <button
      class={name}
      id={props.id}
      type={props.type ?? 'button'}
      disabled={props.disabled}
      aria-busy={props.busy ? 'true' : undefined}
      aria-label={props.label}
      aria-pressed={props.pressed}
      aria-expanded={props.expanded}
      aria-controls={props.controls}
      onClick={props.busy ? undefined : props.onPress}
    >
      {props.children}
    </button>
  );
}
