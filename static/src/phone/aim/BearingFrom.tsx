// Beside a typed azimuth: the ways of finding it up here, and what a compass is worth.
import { Button } from '../../parts/Button.tsx';
import { Message } from '../../parts/Message.tsx';
import { say } from '../../words/aim.ts';
import { hrefOf } from '../route.ts';

export function BearingFrom({ job, mount, compass }: { job: string; mount: string; compass: boolean }) {
  return (
    <>
      {compass && (
        <Message tone="warn" live>
          {say('compass.typed')}
        </Message>
      )}
      <p>
        <strong>{say('aim.find-out')}</strong>
      </p>
      <div class="buttons">
        <Button extra="grow" href={hrefOf({ page: 'sun', job, mount })}>
          {say('aim.to-sun')}
        </Button>
        <Button extra="grow" href={hrefOf({ page: 'landmark', job, mount })}>
          {say('aim.to-landmark')}
        </Button>
      </div>
    </>
  );
}
