import type { Theme } from '../draw/colour.ts';
import { PALETTE } from '../report/palette.ts';
import type { Store } from './store.ts';

/** Borders of controls stand at 3 : 1 against the page, as WCAG 2.2, 1.4.11 asks. */
const CONTROL: Readonly<Record<Theme, string>> = { light: '#85898f', dark: '#71767f' };

const KEPT = 'fieldassay theme';

/** The theme chosen before, or the system's. */
export function firstTheme(): Theme {
  try {
    const kept = localStorage.getItem(KEPT);
    if (kept === 'light' || kept === 'dark') return kept;
  } catch {
    // A browser that keeps nothing follows the system.
  }
  return matchMedia('(prefers-color-scheme: dark)').matches ? 'dark' : 'light';
}

/** Sets the page's colours by the store's theme, now and whenever it changes. */
export function followTheme(store: Store): void {
  const apply = () => {
    const { theme } = store.state;
    const { style } = document.documentElement;
    style.setProperty('color-scheme', theme);
    style.setProperty('--control', CONTROL[theme]);
    for (const [name, colours] of Object.entries(PALETTE)) style.setProperty(`--${name}`, colours[theme]);
  };
  store.on(['theme'], apply);
  apply();
}

export function switchTheme(store: Store): void {
  store.state.theme = store.state.theme === 'light' ? 'dark' : 'light';
  try {
    localStorage.setItem(KEPT, store.state.theme);
  } catch {
    // Kept for this visit only.
  }
  store.tell('theme');
}
