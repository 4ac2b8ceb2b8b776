// Texts by key. A sentence holds its values as {name}; a text that counts has a form for each plural category of its
// language, picked by {n} (Unicode CLDR plural rules, through Intl). Views hold no text of their own.

export type Forms = Partial<Record<Intl.LDMLPluralRule, string>> & { other: string };
export type Texts = Record<string, string | Forms>;
export type Params = Record<string, string | number>;

export type Say<T extends Texts> = (key: keyof T & string, params?: Params) => string;

/**
 * Makes the function that says texts of one language. Both a missing value and an unknown key show themselves on the
 * screen as they are written in the source: an honest gap is found, an empty string is not.
 */
export function sayer<T extends Texts>(texts: T, language: string): Say<T> {
  const plural = new Intl.PluralRules(language);
  return (key, params = {}) => {
    const found: string | Forms | undefined = texts[key];
    if (found === undefined) return key;
    const text =
      typeof found === 'string' ? found : (found[plural.select(Number(params['n']))] ?? found.other);
    return text.replace(/\{(\w+)\}/g, (whole, name: string) => {
      const value = params[name];
      return value === undefined ? whole : String(value);
    });
  };
}
