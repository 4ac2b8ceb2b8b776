// Three themes for three kinds of light. Kept in this browser; sun is the first, because that is where paper fails least.
// Not in the store: it must be there before the first drawing, and it is nobody's record.

export type Theme = 'day' | 'dark' | 'night';
export const themes: readonly Theme[] = ['day', 'dark', 'night'];

const key = 'crossplumb.theme';

export function currentTheme(): Theme {
  let kept: string | null = null;
  try {
    kept = localStorage.getItem(key);
  } catch {
    // Storage shut off for this page: the first theme it is.
  }
  return themes.find((theme) => theme === kept) ?? 'day';
}

export function applyTheme(theme: Theme): void {
  document.documentElement.dataset['theme'] = theme;
  const ground = getComputedStyle(document.documentElement).getPropertyValue('--raw-paper').trim();
  document.querySelector('meta[name="theme-color"]')?.setAttribute('content', ground);
}

export function keepTheme(theme: Theme): void {
  try {
    localStorage.setItem(key, theme);
  } catch {
    // As above; it holds until the page is closed.
  }
  applyTheme(theme);
}
