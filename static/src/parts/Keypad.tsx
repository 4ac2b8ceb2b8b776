// Keys big enough for a glove. They write into the field that has the focus mark; a keyboard works beside them.
import { t } from '../words/words.ts';
import { currentDecimalSign } from '../words/figures.ts';
import { Button } from './Button.tsx';

export interface KeypadProps {
  /** Applies a key to the text of the field in use. */
  onKey: (change: (text: string) => string) => void;
}

export function Keypad({ onKey }: KeypadProps) {
  const put = (sign: string) => () => onKey((text) => text + sign);
  const sign = currentDecimalSign();
  const digit = (d: string) => (
    <Button key={d} onPress={put(d)}>
      {d}
    </Button>
  );
  return (
    // A key must not take the focus from the field: a keyboard goes on typing there.
    <div class="keypad" role="group" aria-label={t('keypad.name')} onMouseDown={(event) => event.preventDefault()}>
      {['1', '2', '3'].map(digit)}
      <Button onPress={() => onKey((text) => text.slice(0, -1))} label={t('keypad.rub')}>
        <svg width="34" height="26" viewBox="0 0 34 26" aria-hidden="true" focusable="false">
          <path d="M11 2 H32 V24 H11 L2 13 Z M16 8 L26 18 M26 8 L16 18" fill="none" stroke="currentColor" stroke-width="3" />
        </svg>
      </Button>
      {['4', '5', '6'].map(digit)}
      <Button onPress={put(sign)} label={sign === ',' ? t('keypad.comma') : t('keypad.point')}>
        {sign}
      </Button>
      {['7', '8', '9', '0'].map(digit)}
    </div>
  );
}
