import { decibels } from './elementary.ts';

/**
 * Numbers for people: a unit, and at most three significant digits. Files keep full precision; this is display only.
 * Rounding uses toPrecision and toExponential, which the language specifies exactly.
 */

const PREFIXES: readonly (readonly [number, string])[] = [
  [1e12, 'T'],
  [1e9, 'G'],
  [1e6, 'M'],
  [1e3, 'k'],
  [1, ''],
  [1e-3, 'm'],
  [1e-6, 'µ'],
  [1e-9, 'n'],
  [1e-12, 'p'],
  [1e-15, 'f'],
];

const SUPERSCRIPTS = '⁰¹²³⁴⁵⁶⁷⁸⁹';

function superscript(exponent: number): string {
  const digits = [...String(Math.abs(exponent))].map((d) => SUPERSCRIPTS[Number(d)]).join('');
  return exponent < 0 ? `⁻${digits}` : digits;
}

const withMinus = (text: string): string => text.replace('-', '−');

/** A bare number with at most `digits` significant digits; a power of ten where plain digits would be many zeros. */
export function formatNumber(value: number, digits = 3): string {
  if (Number.isNaN(value)) return '—';
  if (!Number.isFinite(value)) return value > 0 ? '∞' : '−∞';
  const rounded = Number(value.toPrecision(digits));
  const size = Math.abs(rounded);
  if (size !== 0 && (size < 1e-4 || size >= 1e6)) return formatScientific(value, digits);
  return withMinus(String(rounded));
}

/** mantissa·10ⁿ with at most `digits` significant digits: "2.1·10⁻⁷". */
export function formatScientific(value: number, digits = 2): string {
  if (value === 0 || !Number.isFinite(value)) return formatNumber(value);
  const [mantissa, exponent] = value.toExponential(digits - 1).split('e') as [string, string];
  return withMinus(`${Number(mantissa)}·10${superscript(Number(exponent))}`);
}

/** The same with one digit, rounded away from zero, so that a bound stays a bound: 1.3e-7 → "2·10⁻⁷". */
export function formatUpperBound(value: number): string {
  if (value === 0 || !Number.isFinite(value)) return formatNumber(value);
  const exponent = Number(value.toExponential().split('e')[1]);
  const mantissa = Math.ceil(Number(`${value.toExponential().split('e')[0]}`));
  return formatScientific(Number(`${mantissa}e${exponent}`), 1);
}

/** The SI prefix that leaves one to three digits before the point, and its factor; the outermost ones beyond them. */
export function prefixOf(value: number): { readonly factor: number; readonly prefix: string } {
  const [factor, prefix] = PREFIXES.find(([f]) => Math.abs(value) >= f) ?? PREFIXES[PREFIXES.length - 1]!;
  return { factor, prefix };
}

/**
 * A value with its SI unit and a prefix: (2.4e9, 'Hz') → "2.4 GHz". Lengths from 0.1 m to 1 km stay in metres, as people
 * write them. Units that begin with no letter (none at all, 1/s) take no prefix.
 */
export function formatQuantity(value: number, unit: string, digits = 3): string {
  if (value === 0 || !Number.isFinite(value) || !/^[A-Za-zΩ]/.test(unit))
    return `${formatNumber(value, digits)} ${unit}`.trimEnd();
  const rounded = Number(value.toPrecision(digits));
  const isPlainLength = unit === 'm' && Math.abs(rounded) >= 0.1 && Math.abs(rounded) < 1000;
  const { factor, prefix } = isPlainLength ? { factor: 1, prefix: '' } : prefixOf(rounded);
  return `${formatNumber(value / factor, digits)} ${prefix}${unit}`;
}

/** A fraction as a percentage with at most `digits` significant digits: 0.0312 → "3.1 %". */
export function formatPercent(fraction: number, digits = 2): string {
  return `${formatNumber(fraction * 100, digits)} %`;
}

/** A ratio of amplitudes given in decibels, to the decibel: −71.3 → "−71 dB". */
export function formatDecibels(dB: number): string {
  return `${formatNumber(Number.isFinite(dB) ? Math.round(dB) : dB, 12)} dB`;
}

/**
 * A relative error as a percentage, or its floor where it lies below that: "3.1 %", "< −84 dB (floor)". Files keep the
 * raw value.
 */
export function formatAboveFloor(value: number, floor: number, digits = 2): string {
  return value < floor ? `< ${formatDecibels(decibels(floor))} (floor)` : formatPercent(value, digits);
}
