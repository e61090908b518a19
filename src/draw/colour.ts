import { clampRgb, modeOklch, modeRgb, useMode } from 'culori/fn';
import { decibels } from '../elementary/elementary.ts';

/**
 * Colours: packed RGBA, colour maps as tables, and scales from values to colours.
 *
 * A packed colour is one 32-bit number whose bytes in memory are R, G, B, A (little-endian hosts, as WebAssembly also
 * presumes), so that an image is one `Uint32Array` and the same memory serves an `ImageData`.
 */
export type Theme = 'light' | 'dark';

/** The neutral colours of a theme, packed. Text (`ink`, `muted`) has a contrast of at least 4.5 on `background`. */
export interface Neutrals {
  readonly background: number;
  readonly ink: number;
  readonly muted: number;
  /** outlines of planes, box and axes */
  readonly line: number;
}

/** The packed colour of `#rrggbb`, opaque. */
export function packed(hex: string): number {
  const rgb = Number.parseInt(hex.slice(1), 16);
  return fromBytes(rgb >>> 16, (rgb >>> 8) & 255, rgb & 255);
}

/** The packed colour of bytes 0…255. */
export function fromBytes(r: number, g: number, b: number, a = 255): number {
  return ((a << 24) | (b << 16) | (g << 8) | r) >>> 0;
}

/** Red, green, blue, alpha of a packed colour, 0…255. */
export function toBytes(colour: number): [r: number, g: number, b: number, a: number] {
  return [colour & 255, (colour >>> 8) & 255, (colour >>> 16) & 255, colour >>> 24];
}

export const NEUTRALS: Readonly<Record<Theme, Neutrals>> = {
  light: {
    background: packed('#fcfcfb'),
    ink: packed('#1b1d21'),
    muted: packed('#5f636b'),
    line: packed('#7a7e86'),
  },
  dark: { background: packed('#131518'), ink: packed('#eceef1'), muted: packed('#a3a8b0'), line: packed('#7b8089') },
};

/** A colour map: colours at equal steps of its argument, all different, so that a colour tells its place. */
export interface ColourMap {
  readonly table: Uint32Array;
  /** place in the table of each of its colours */
  readonly places: ReadonlyMap<number, number>;
}

/** A colour in OKLab's polar form: lightness 0…1, chroma, hue in degrees (Ottosson 2020, “A perceptual color space”). */
interface Oklch {
  readonly l: number;
  readonly c: number;
  readonly h: number;
}

useMode(modeOklch);
const toSrgb = useMode(modeRgb);

function packedOklch({ l, c, h }: Oklch): number {
  const { r, g, b } = clampRgb(toSrgb({ mode: 'oklch', l, c, h }));
  return fromBytes(Math.round(r * 255), Math.round(g * 255), Math.round(b * 255));
}

function tabulate(size: number, colourAt: (s: number) => Oklch): ColourMap {
  const table = Uint32Array.from({ length: size }, (_, n) => packedOklch(colourAt(n / (size - 1))));
  return { table, places: new Map(Array.from(table, (colour, n) => [colour, n])) };
}

/** Lightness at zero and at the limit; both arms share them, and so their slope. */
const DIVERGING: Record<Theme, { zero: number; limit: number; chroma: number }> = {
  light: { zero: 0.93, limit: 0.6, chroma: 0.14 },
  dark: { zero: 0.27, limit: 0.75, chroma: 0.13 },
};
const BLUE = 255;
const ORANGE = 55;

/**
 * Blue (negative) over grey to orange (positive), for −1 ≤ s ≤ 1: L = L₀ + (L₁ − L₀)|s|, C = C₁|s|, in OKLab. Of odd
 * length, so that zero has a colour of its own.
 */
function diverging(theme: Theme): ColourMap {
  const { zero, limit, chroma } = DIVERGING[theme];
  return tabulate(255, (n) => {
    const s = 2 * n - 1;
    const m = Math.abs(s);
    return { l: zero + (limit - zero) * m, c: chroma * m, h: s < 0 ? BLUE : ORANGE };
  });
}

/** Least and largest error: away from the page's lightness as the error grows, from green over teal to violet. */
const SEQUENTIAL: Record<Theme, { least: Oklch; largest: Oklch }> = {
  light: { least: { l: 0.95, c: 0.05, h: 130 }, largest: { l: 0.3, c: 0.13, h: 300 } },
  dark: { least: { l: 0.25, c: 0.09, h: 300 }, largest: { l: 0.94, c: 0.1, h: 125 } },
};

/** Linear in OKLab lightness, chroma and hue from the least error to the largest. */
function sequential(theme: Theme): ColourMap {
  const { least, largest } = SEQUENTIAL[theme];
  const between = (key: keyof Oklch, s: number) => least[key] + (largest[key] - least[key]) * s;
  return tabulate(256, (s) => ({ l: between('l', s), c: between('c', s), h: between('h', s) }));
}

/** The two maps in the two themes, built once. */
export const MAPS: Readonly<Record<Theme, { readonly signed: ColourMap; readonly decibels: ColourMap }>> = {
  light: { signed: diverging('light'), decibels: sequential('light') },
  dark: { signed: diverging('dark'), decibels: sequential('dark') },
};

/** A symmetric scale: −limit … +limit, `limit` > 0 in the values' own unit. */
export interface SignedScale {
  readonly kind: 'signed';
  readonly limit: number;
  /** of sizes, which have no sign: the colour bar shows the upper half alone, the colours stay what they are */
  readonly sizes?: boolean;
  /** what the values are and their unit, for the colour bar: “Ez, V/m” */
  readonly label: string;
}

/** A scale for errors: 20 log₁₀(|value| / reference) from `from` to `to`, dB. */
export interface DecibelScale {
  readonly kind: 'decibels';
  /** in the values' own unit; > 0 */
  readonly reference: number;
  readonly from: number;
  readonly to: number;
  /** for the colour bar: “error, dB of the exact peak” */
  readonly label: string;
}

/** Kinds instead of amounts, such as which part of the error is the largest: a value is the index of its kind. */
export interface KindScale {
  readonly kind: 'kinds';
  readonly kinds: readonly { readonly name: string; readonly colour: number }[];
  /** for the colour bar: “largest part” */
  readonly label: string;
}

/** How values become colours. Scales are never changed in place: a new scale is a new object. */
export type Scale = SignedScale | DecibelScale | KindScale;

/** The colours of a scale, from its lower end to its upper. */
export function coloursOf(scale: Scale, theme: Theme): ArrayLike<number> {
  return scale.kind === 'kinds' ? scale.kinds.map(({ colour }) => colour) : MAPS[theme][scale.kind].table;
}

/** What a colour bar shows of a scale: its colours from left to right, and the values at its ends. */
export function barOf(
  scale: Scale,
  theme: Theme,
): { readonly colours: ArrayLike<number>; readonly ends: readonly [from: number, to: number] } {
  const [from, to] = endsOf(scale);
  if (scale.kind !== 'signed' || !scale.sizes) return { colours: coloursOf(scale, theme), ends: [from, to] };
  const { table } = MAPS[theme].signed;
  return { colours: table.subarray(table.length >> 1), ends: [0, to] };
}

/** The values at the lower and the upper end of a scale; dB on a decibel scale. */
export function endsOf(scale: Scale): readonly [from: number, to: number] {
  if (scale.kind === 'kinds') return [0, scale.kinds.length - 1];
  return scale.kind === 'signed' ? [-scale.limit, scale.limit] : [scale.from, scale.to];
}

/** The place of a value on its scale, 0…1; values beyond the ends take the ends. NaN for NaN. */
export function placeOn(scale: Scale, value: number): number {
  const [from, to] = endsOf(scale);
  const shown = scale.kind === 'decibels' ? decibels(Math.abs(value) / scale.reference) : value;
  // a single kind has its ends in one place
  return to > from ? Math.min(1, Math.max(0, (shown - from) / (to - from))) : 0 * shown;
}

/** The colour of one value, packed; 0 (transparent) for NaN. */
export function colourOf(value: number, scale: Scale, theme: Theme): number {
  return Number.isNaN(value) ? 0 : colourAt(coloursOf(scale, theme), placeOn(scale, value));
}

function colourAt(colours: ArrayLike<number>, place: number): number {
  return colours[Math.round(place * (colours.length - 1))]!;
}

/**
 * The value whose colour this is, to half a step of the table; dB on a decibel scale. The inverse of `colourOf` inside
 * the scale.
 * @returns undefined for a colour that is not of the scale
 */
export function valueAt(colour: number, scale: Scale, theme: Theme): number | undefined {
  const n =
    scale.kind === 'kinds'
      ? scale.kinds.findIndex((one) => one.colour === colour)
      : (MAPS[theme][scale.kind].places.get(colour) ?? -1);
  const [from, to] = endsOf(scale);
  const steps = coloursOf(scale, theme).length - 1;
  return n < 0 ? undefined : from + (steps > 0 ? (n / steps) * (to - from) : 0);
}

/** Colours of all values, into `colours` (of the same length): `colourOf` for each, without a call for each. */
export function paint(values: ArrayLike<number>, scale: Scale, theme: Theme, colours: Uint32Array): void {
  const table = coloursOf(scale, theme);
  if (scale.kind !== 'signed') {
    for (let n = 0; n < values.length; n++)
      colours[n] = Number.isNaN(values[n]) ? 0 : colourAt(table, placeOn(scale, values[n]!));
    return;
  }
  const last = table.length - 1;
  const half = last / 2;
  const slope = half / scale.limit;
  for (let n = 0; n < values.length; n++) {
    const value = values[n]!;
    const place = Math.min(last, Math.max(0, value * slope + half));
    // NaN would round to place 0; it must stay transparent
    colours[n] = Number.isNaN(value) ? 0 : table[(place + 0.5) | 0]!;
  }
}

/** `under` covered by `over` with weight 0…1; the result is opaque. Blended in sRGB, as a canvas does. */
export function blend(under: number, over: number, weight: number): number {
  const w = (weight * 256) | 0;
  const v = 256 - w;
  const r = ((under & 255) * v + (over & 255) * w) >>> 8;
  const g = (((under >>> 8) & 255) * v + ((over >>> 8) & 255) * w) >>> 8;
  const b = (((under >>> 16) & 255) * v + ((over >>> 16) & 255) * w) >>> 8;
  return ((255 << 24) | (b << 16) | (g << 8) | r) >>> 0;
}
