// A sentence that stands beside its cause. Its mark tells the tone without colour.
import type { ComponentChildren } from 'preact';

export interface MessageProps {
  /** "wrong": what was typed or done cannot be used. "warn": may go on, but look. "note": for information. */
  tone: 'wrong' | 'warn' | 'note';
  children: ComponentChildren;
  /** Under a field, without a frame. */
  beside?: boolean;
  id?: string;
  /** Spoken as soon as it appears. */
  live?: boolean;
}

export function Message({ tone, children, beside, id, live }: MessageProps) {
  return (
    <div
      class={`message ${tone}${beside ? ' beside' : ''}`}
      id={id}
      role={live ? (tone === 'wrong' ? 'alert' : 'status') : undefined}
    >
      <Mark tone={tone} />
      <div class="says">{children}</div>
    </div>
  );
}

function Mark({ tone }: { tone: MessageProps['tone'] }) {
  return (
    <svg class="mark" width="22" height="22" viewBox="0 0 22 22" aria-hidden="true" focusable="false">
      {tone === 'wrong' && <path d="M3 3 L19 19 M19 3 L3 19" stroke="currentColor" stroke-width="4" fill="none" />}
      {tone === 'warn' && (
        <>
          <path d="M11 2 L21 20 H1 Z" stroke="currentColor" stroke-width="2.5" fill="none" />
          <path d="M11 8 V13 M11 15.5 V18" stroke="currentColor" stroke-width="2.5" />
        </>
      )}
      {tone === 'note' && (
        <>
          <rect x="2" y="2" width="18" height="18" stroke="currentColor" stroke-width="2.5" fill="none" />
          <path d="M11 9 V17 M11 5 V7.5" stroke="currentColor" stroke-width="2.5" />
        </>
      )}
    </svg>
  );
}
