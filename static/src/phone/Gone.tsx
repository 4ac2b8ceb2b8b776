// Where a job should be and is not, or is not looked up yet.
import { Button } from '../parts/Button.tsx';
import { t } from '../words/words.ts';
import { Page } from './Page.tsx';

export function Gone({ looking }: { looking: boolean }) {
  if (looking) return <p class="opening">{t('loading')}</p>;
  return (
    <Page title={t('jobs.title')} backHref="#/">
      <p>{t('job.gone')}</p>
      <Button href="#/" kind="first" wide>
        {t('job.to-jobs')}
      </Button>
    </Page>
  );
}
