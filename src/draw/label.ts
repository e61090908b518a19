/** A text to be drawn over the image, by a canvas, as SVG, or by `TextPainter`. */
export interface Label {
  /** index of the pane */
  readonly pane: number;
  /** image pixels */
  readonly x: number;
  readonly y: number;
  readonly text: string;
  /** what of the text lies at x, y */
  readonly align: 'left' | 'center' | 'right';
  readonly baseline: 'top' | 'middle' | 'bottom';
  readonly role: 'title' | 'name' | 'tick' | 'scale';
  /** whether a plane hides the point it belongs to */
  readonly hidden: boolean;
}

/** A label and the depth of the point it belongs to; none for the pane's own. */
export interface ImageLabel {
  readonly label: Label;
  readonly anchor?: { readonly x: number; readonly y: number; readonly z: number };
}

/** At most three significant digits, with a true minus sign. */
export function shortNumber(value: number): string {
  return String(Number(value.toPrecision(3))).replace(/-/g, '−');
}

const LENGTH_UNITS: readonly (readonly [string, number])[] = [
  ['km', 1e3],
  ['m', 1],
  ['mm', 1e-3],
  ['µm', 1e-6],
  ['nm', 1e-9],
];

/** The largest unit of which a length is at least one: 0.15 m is told in mm. */
export function lengthUnit(length: number): { readonly name: string; readonly size: number } {
  const [name, size] = LENGTH_UNITS.find(([, unit]) => length >= unit) ?? LENGTH_UNITS.at(-1)!;
  return { name, size };
}
