// The frame of every page: a sheet that moves under the thumb (title block, what goes wrong with the store, content, the
// caution at the foot), and below it what stays. The dock stands beside the sheet, not over it: nothing is ever hidden
// behind it, no field and no focus.
import type { ComponentChildren } from 'preact';
import { Button } from '../parts/Button.tsx';
import { Message } from '../parts/Message.tsx';
import { TitleBlock } from '../parts/TitleBlock.tsx';
import { storeHealth, useWatched } from '../store/index.ts';
import { status } from '../sync/index.ts';
import { t } from '../words/words.ts';

export interface PageProps {
  title: string;
  under?: ComponentChildren;
  backHref?: string;
  /** Between title block and content, edge to edge. */
  head?: ComponentChildren;
  children: ComponentChildren;
  /** Stays at the foot of the screen. */
  dock?: ComponentChildren;
  /** For the style of one kind of page. */
  kind?: string;
  statusless?: boolean;
}

export function Page(props: PageProps) {
  return (
    <div class={`page${props.kind ? ` ${props.kind}` : ''}`}>
      <div class="sheet">
        <TitleBlock title={props.title} under={props.under} backHref={props.backHref} aside={props.statusless ? undefined : <Standing />} />
        {props.head}
        <StoreTrouble />
        <main class="content">{props.children}</main>
        <footer class="foot-caution">{t('foot.caution')}</footer>
      </div>
      {props.dock && (
        <section class="dock" aria-label={t('dock.name')}>
          {props.dock}
        </section>
      )}
    </div>
  );
}

/** How many entries wait on this phone, and whether the server answers. */
function Standing() {
  const { state, waiting } = useWatched(status);
  return (
    <div role="status">
      <strong>{waiting > 0 ? t('status.waiting', { n: waiting }) : t('status.none-waiting')}</strong>
      {t(`status.${state}`)}
    </div>
  );
}

function StoreTrouble() {
  const health = useWatched(storeHealth);
  if (health.state === 'ok') return null;
  return (
    <div class="trouble">
      <Message tone="wrong" live>
        {health.state === 'failed' ? t('store.failed', { why: health.why }) : t(`store.${health.state}`)}
      </Message>
      {health.state === 'outdated' && <Button onPress={() => location.reload()}>{t('store.reload')}</Button>}
    </div>
  );
}
