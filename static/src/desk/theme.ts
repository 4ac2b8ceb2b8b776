// Day, dark and night at the desk. The choice is kept in this browser; without one the system's choice stands.

export type Theme = 'day' | 'dark' | 'night';

export const themes: readonly Theme[] = ['day', 'dark', 'night'];

const key = 'crossplumb.desk.theme';

export function keptTheme(): Theme | null {
  try {
    return themes.find((t) => t === localStorage.getItem(key)) ?? null;
  } catch {
    // Storage may be shut off for this site; the page works without a kept theme.
    return null;
  }
}

export function keepTheme(theme: Theme): void {
  try {
    localStorage.setItem(key, theme);
  } catch {
    // As above.
  }
}

export function applyTheme(theme: Theme | null): void {
  if (theme === null) document.documentElement.removeAttribute('data-theme');
  else document.documentElement.setAttribute('data-theme', theme);
}
