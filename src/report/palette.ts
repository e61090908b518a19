/**
 * Colours with one meaning each, in both themes. The four parts are from Okabe & Ito's set for every kind of colour
 * vision ("Color Universal Design", 2008); grid and exact lie on the blue–brown axis, which all kinds keep, and are told
 * apart by dash as well. Red means outside the tolerance and nothing else. The choices of a survey (walls, cell sizes) have
 * eight more, by their order.
 */
export const PALETTE = {
  exact: { light: '#3450c8', dark: '#8fa2ff' },
  grid: { light: '#8a4b08', dark: '#d2b48c' },
  boundary: { light: '#e69f00', dark: '#e69f00' },
  lattice: { light: '#56b4e9', dark: '#56b4e9' },
  gridding: { light: '#009e73', dark: '#009e73' },
  quadrature: { light: '#cc79a7', dark: '#cc79a7' },
  outside: { light: '#c4162a', dark: '#ff6b6b' },
  choice1: { light: '#0072b2', dark: '#5fb4e6' },
  choice2: { light: '#d55e00', dark: '#ff9248' },
  choice3: { light: '#00795a', dark: '#35c79b' },
  choice4: { light: '#a8518a', dark: '#e59cc8' },
  choice5: { light: '#7d6a00', dark: '#d8c14a' },
  choice6: { light: '#6247aa', dark: '#b7a2f2' },
  choice7: { light: '#5f636b', dark: '#a3a8b0' },
  choice8: { light: '#8c5a3c', dark: '#c9a184' },
  background: { light: '#fcfcfb', dark: '#131518' },
  ink: { light: '#1b1d21', dark: '#eceef1' },
  muted: { light: '#5f636b', dark: '#a3a8b0' },
  line: { light: '#c9ccd1', dark: '#3a3e45' },
  trusted: { light: '#eef0f2', dark: '#22262b' },
} as const;
export type ColourName = keyof typeof PALETTE;

/** The palette as CSS variables, `--exact` and so on, following the system's theme. */
export function paletteCss(): string {
  const variables = (theme: 'light' | 'dark') =>
    Object.entries(PALETTE)
      .map(([name, colours]) => `--${name}:${colours[theme]}`)
      .join(';');
  return (
    `:root{color-scheme:light dark;${variables('light')}}` +
    `@media (prefers-color-scheme:dark){:root{${variables('dark')}}}` +
    `@media print{:root{color-scheme:light;${variables('light')}}}`
  );
}
