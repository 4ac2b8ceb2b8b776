// Head of a page, ruled like the title block of a drawing: where back leads, what this is, where it stands.
import type { ComponentChildren } from 'preact';
import { t } from '../words/words.ts';
import { Button } from './Button.tsx';

export interface TitleBlockProps {
  title: string;
  under?: ComponentChildren;
  backHref?: string;
  aside?: ComponentChildren;
}

export function TitleBlock({ title, under, backHref, aside }: TitleBlockProps) {
  return (
    <header class="title-block">
      {backHref !== undefined && (
        <Button href={backHref} extra="back" label={t('back')}>
          <svg width="22" height="26" viewBox="0 0 22 26" aria-hidden="true" focusable="false">
            <path d="M18 3 L6 13 L18 23" fill="none" stroke="currentColor" stroke-width="4" />
          </svg>
        </Button>
      )}
      <div class="names">
        <h1 tabIndex={-1}>{title}</h1>
        {under && <div class="under">{under}</div>}
      </div>
      {aside && <div class="aside">{aside}</div>}
    </header>
  );
}
