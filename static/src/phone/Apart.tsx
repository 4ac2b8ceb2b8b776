// Own entries that the server set apart, with its reason, in its words: a supervisor sees the same.
import { Button } from '../parts/Button';
import { needingPerson, sendAgain, useStored } from '../store';
import { when } from '../words/when';
import { t } from '../words/words';
import { Page } from './Page';

export function Apart() {
  const list = useStored(needingPerson, []);
  return (
    <Page title={t('apart.title')} backHref="#/">
      <p>{t('apart.why')}</p>
      <ul class="stack">
        {list?.map(({ entry, reason }) => (
          <li class="section stack" key={entry.id}>
            <p>
              <strong>{entry.kind}</strong>, {when(entry.at)}
            </p>
            <p>{t('apart.reason', { reason: reason ?? '' })}</p>
            <Button onPress={() => void sendAgain(entry.id)}>{t('apart.again')}</Button>
          </li>
        ))}
      </ul>
    </Page>
  );
}
