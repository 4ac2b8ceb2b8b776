// "I turned this bolt": what was read as left before it counts no more. It cannot be taken back, so it asks once more,
// in place.
import { useState } from 'preact/hooks';
import { Button } from '../parts/Button.tsx';
import { Message } from '../parts/Message.tsx';
import { addEntry } from '../store/index.ts';
import type { Quantity } from '../types.ts';
import { t } from '../words/words.ts';

export interface TurnedBoltProps {
  job: string;
  mount: string;
  antenna: string;
  quantity: Quantity;
  onTurned: () => void;
  first?: boolean;
}

export function TurnedBolt(props: TurnedBoltProps) {
  const { antenna, quantity } = props;
  const [asking, setAsking] = useState(false);
  const [busy, setBusy] = useState(false);
  const [trouble, setTrouble] = useState<string | null>(null);
  const named = { antenna, quantity: t(`quantity.${quantity}`) };
  const turned = async () => {
    setBusy(true);
    try {
      await addEntry('bolt.moved', props.job, props.mount, { antenna, quantity });
      setAsking(false);
      props.onTurned();
    } catch (error) {
      setTrouble(t('failed.write', { why: String(error) }));
    }
    setBusy(false);
  };
  if (!asking) {
    return (
      <Button kind={props.first ? 'first' : 'plain'} wide onPress={() => setAsking(true)}>
        {quantity === 'position' ? t('mount.turned-position', named) : t('mount.turned', named)}
      </Button>
    );
  }
  return (
    <div class="stack">
      <Message tone="warn" live>
        {t('mount.turned-ask', named)}
      </Message>
      {trouble && (
        <Message tone="wrong" live>
          {trouble}
        </Message>
      )}
      <div class="buttons">
        <Button extra="grow" onPress={() => setAsking(false)}>
          {t('mount.turned-no')}
        </Button>
        <Button extra="grow" kind="first" busy={busy} onPress={() => void turned()}>
          {t('mount.turned-yes')}
        </Button>
      </div>
    </div>
  );
}
