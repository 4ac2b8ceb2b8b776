// The page's language and its texts. One language so far; another is one more file of the same keys.
import { en } from './en.ts';
import { setDecimalSign } from './figures.ts';
import { sayer } from './say.ts';

export const language = 'en';

setDecimalSign(decimalSignOf());

/** Says a text that phone and desk share, or the phone's own. */
export const t = sayer(en, language);

/** The decimal sign of this phone's region, English text or not: a crew that writes 6,2 reads 6,2. */
function decimalSignOf(): '.' | ',' {
  const region = typeof navigator === 'undefined' ? language : navigator.language;
  try {
    return new Intl.NumberFormat(region).format(1.5).includes(',') ? ',' : '.';
  } catch {
    return '.';
  }
}
