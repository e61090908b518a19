import Qty from 'js-quantities/esm';
import { printable } from './text.ts';

/** What a number of a scenario file may measure, with its SI unit and how people are told to write it. */
export const KINDS = {
  length: { unit: 'm', words: 'a length', example: '"5 mm" or 0.005 (metres)' },
  time: { unit: 's', words: 'a time', example: '"0.9 ns" or 9e-10 (seconds)' },
  frequency: { unit: 'Hz', words: 'a frequency', example: '"2.4 GHz" or 2.4e9 (hertz)' },
  rate: { unit: '1/s', words: 'a rate', example: '"4e7 1/s" or 4e7 (per second)' },
  current: { unit: 'A', words: 'a current', example: '"1 A" or 1 (amperes)' },
  wavenumber: { unit: '1/m', words: 'a wavenumber', example: '"62.8 rad/m" or 62.8 (radians per metre)' },
  angle: { unit: 'rad', words: 'an angle', example: '"45 deg" or 0.785 (radians)' },
} as const;
export type Kind = keyof typeof KINDS;

/** js-quantities tells hertz and 1/s apart as little as their dimensions do. */
const KIND_OF_UNIT: Readonly<Record<Kind, string>> = {
  length: 'length',
  time: 'time',
  frequency: 'frequency',
  rate: 'frequency',
  current: 'current',
  wavenumber: 'wavenumber',
  angle: 'angle',
};

/** A number, or why there is none: a predicate that follows the name of the key, without a full stop. */
export type Parsed = { readonly value: number } | { readonly reason: string };

/** Longer texts are no quantity and are not handed to the parser of units. */
const MAX_LENGTH = 64;

const NUMBER = String.raw`[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d+)?`;
const NUMBER_AND_UNIT = new RegExp(String.raw`^\s*(${NUMBER})\s*(\S(?:.*\S)?)\s*$`);
const NUMBER_AND_PERCENT = new RegExp(String.raw`^\s*(${NUMBER})\s*%\s*$`);
const NUMBER_ALONE = new RegExp(String.raw`^\s*${NUMBER}\s*$`);

/**
 * A quantity of a scenario file in its SI unit. A prefix of ten shifts the decimal point, so that "0.9 ns" and 0.9e-9 are
 * the same double.
 * @param given an SI number, or a text of a number and a unit of the right kind; zero, and zero alone, needs none
 */
export function parseQuantity(given: number | string, kind: Kind): Parsed {
  const { words, example } = KINDS[kind];
  const shown = show(given);
  const wanted = `it must be ${words}, such as ${example}`;
  if (typeof given === 'number')
    return Number.isFinite(given) ? { value: given } : { reason: `is ${given}; it must be finite` };
  if (given.length > MAX_LENGTH) return { reason: `is a text of ${given.length} characters; ${wanted}` };
  if (NUMBER_ALONE.test(given) && Number(given) === 0) return { value: 0 };
  if (NUMBER_ALONE.test(given)) return { reason: `is ${shown}, a text without a unit; ${wanted}` };
  const [, number, unit] = NUMBER_AND_UNIT.exec(given) ?? [];
  if (number === undefined || unit === undefined)
    return { reason: `is ${shown}, which does not begin with a number; ${wanted}` };
  let factor: number;
  try {
    // The library counts radians as a dimension.
    const one = Qty(`1 ${kind === 'wavenumber' ? unit.replace(/^rad\//, '1/') : unit}`);
    if (one.kind() !== KIND_OF_UNIT[kind]) return { reason: `is ${shown}, ${article(one.kind())}; ${wanted}` };
    factor = one.to(kind === 'rate' ? '1/s' : KINDS[kind].unit).scalar;
  } catch {
    return { reason: `is ${shown}, whose unit “${unit}” is not known; ${wanted}` };
  }
  const value = scaled(number, factor);
  return Number.isFinite(value) ? { value } : { reason: `is ${shown}, beyond the largest number; ${wanted}` };
}

/** A fraction: 0.05, or "5 %". */
export function parseFraction(given: number | string): Parsed {
  const wanted = 'it must be a fraction, such as 0.05 or "5 %"';
  if (typeof given === 'number')
    return Number.isFinite(given) ? { value: given } : { reason: `is ${given}; it must be finite` };
  const number = given.length <= MAX_LENGTH ? NUMBER_AND_PERCENT.exec(given)?.[1] : undefined;
  if (number === undefined) return { reason: `is ${show(given)}; ${wanted}` };
  const value = scaled(number, 0.01);
  return Number.isFinite(value) ? { value } : { reason: `is ${show(given)}, beyond the largest number; ${wanted}` };
}

/** number × factor, rounded once where the factor is a power of ten. */
function scaled(number: string, factor: number): number {
  // Twelve digits, because the library's own factors carry a few roundings: its 1/ns is 999999999.9999998.
  const [digits, power] = factor.toExponential(11).split('e') as [string, string];
  if (Number(digits) !== 1) return Number(number) * factor;
  const [mantissa, exponent = '0'] = number.toLowerCase().split('e');
  return Number(`${mantissa}e${Number(exponent) + Number(power)}`);
}

function article(kind: string): string {
  if (kind === 'unitless') return 'without a unit of measure';
  const words = kind.replaceAll('_', ' ');
  return `${/^[aeiou]/.test(words) ? 'an' : 'a'} ${words}`;
}

/** A value of a scenario file as a message shows it: short, whatever it is. */
export function show(value: unknown): string {
  if (typeof value === 'string') return printable(JSON.stringify(value.length > 40 ? `${value.slice(0, 40)}…` : value));
  if (Array.isArray(value)) return `a list of ${value.length}`;
  if (typeof value === 'object' && value !== null) return 'an object';
  if (value === undefined) return 'nothing';
  return String(value);
}
