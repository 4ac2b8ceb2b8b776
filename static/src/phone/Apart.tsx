// Own entries that the server set apart, with its reason, in its words: a supervisor sees the same.
import { Button } from '../parts/Button.tsx';
import { needingPerson, sendAgain, useStored } from '../store/index.ts';
import type { Entry } from '../types.ts';
import { when } from '../words/when.ts';
import { t } from '../words/words.ts';
import { Page } from './Page.tsx';

export function Apart() {
  const list = useStored(needingPerson, []);
  return (
    <Page title={t('apart.title')} backHref="#/">
      <p>{t('apart.why')}</p>
      <ul class="stack">
        {list?.map(({ entry, reason }) => (
          <li class="section stack" key={entry.id}>
            <p>
              <strong>{what(entry)}</strong>, {when(entry.at)}
            </p>
            <p>{t('apart.reason', { reason: reason ?? '' })}</p>
            <Button onPress={() => void sendAgain(entry.id)}>{t('apart.again')}</Button>
          </li>
        ))}
      </ul>
    </Page>
  );
}

/** What the entry was, in words. */
function what(entry: Entry): string {
  switch (entry.kind) {
    case 'reading.taken':
      return `${t('kind.reading.taken')}: ${entry.body.antenna} ${t(`quantity.${entry.body.quantity}`)} ${entry.body.typed}`;
    case 'bolt.moved':
      return `${t('kind.bolt.moved')}: ${entry.body.antenna} ${t(`quantity.${entry.body.quantity}`)}`;
    case 'note.added':
      return `${t('kind.note.added')}: ${entry.body.text}`;
    case 'caution.confirmed':
    case 'reading.withdrawn':
    case 'job.handed_in':
      return t(`kind.${entry.kind}`);
    default:
      return t('kind.other');
  }
}
