// Hooks by which views see what store and sync hold, and are drawn again when it changes.
import { useEffect, useState } from 'preact/hooks';
import type { Watchable } from './observable.ts';
import { onChange } from './database.ts';

export function useWatched<T>(watchable: Watchable<T>): T {
  const [value, setValue] = useState(watchable.value);
  useEffect(() => {
    setValue(() => watchable.value); // it may have changed between drawing and this effect
    return watchable.watch((next) => setValue(() => next));
  }, [watchable]);
  return value;
}

/**
 * What a question to the store gives, asked again at each change of the store; undefined until the first answer.
 * `ask` is called anew when one of `inputs` changes.
 */
export function useStored<T>(ask: () => Promise<T>, inputs: readonly unknown[]): T | undefined {
  const [value, setValue] = useState<T | undefined>(undefined);
  useEffect(() => {
    let live = true;
    let asked = 0;
    const refresh = () => {
      const mine = ++asked;
      ask().then(
        (answer) => {
          if (live && mine === asked) setValue(() => answer);
        },
        (error) => console.error('store:', error), // the state of the store itself is shown from storeHealth
      );
    };
    refresh();
    const end = onChange(refresh);
    return () => {
      live = false;
      end();
    };
  }, inputs);
  return value;
}
