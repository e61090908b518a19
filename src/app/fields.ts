import type { Controller, GUI } from 'lil-gui';
import { type Kind, parseQuantity } from '../scenario/units.ts';
import type { Draft } from './store.ts';

/** A place in a scenario file: keys from the root. */
export type Path = readonly (string | number)[];

export function valueAt(root: Draft, path: Path): unknown {
  return path.reduce<Draft>((value, key) => value?.[key], root);
}

/** Puts a value at a place, making what lies between; undefined takes the key out. */
export function setAt(root: Draft, path: Path, value: unknown): void {
  let at = root;
  path.slice(0, -1).forEach((key, n) => {
    if (typeof at[key] !== 'object' || at[key] === null) at[key] = typeof path[n + 1] === 'number' ? [] : {};
    at = at[key];
  });
  const last = path.at(-1)!;
  if (value === undefined) delete at[last];
  else at[last] = value;
}

/** Units that controls use, by what they measure: what one of them is in SI. */
const UNITS: Readonly<Record<string, { readonly kind: Kind; readonly size: number }>> = {
  mm: { kind: 'length', size: 1e-3 },
  ns: { kind: 'time', size: 1e-9 },
  GHz: { kind: 'frequency', size: 1e9 },
  A: { kind: 'current', size: 1 },
  '1/ns': { kind: 'rate', size: 1e9 },
  deg: { kind: 'angle', size: Math.PI / 180 },
};
export type UnitName = keyof typeof UNITS & string;

/** Digits that a control keeps: enough for any length a person types. */
const DIGITS = 9;

/** How a quantity is edited. */
export interface QuantityField {
  readonly path: Path;
  readonly name: string;
  /** a unit of `UNITS`, or '' for plain numbers */
  readonly unit: UnitName | '';
  readonly help: string;
  /** in that unit */
  readonly min?: number;
  readonly max?: number;
  readonly step?: number;
  /** shown where the file says nothing */
  readonly fallback?: number;
}

/** The number that a control shows for what stands in the file. */
export function shownNumber(given: unknown, { unit, fallback = 0 }: QuantityField): number {
  if (given === undefined) return fallback;
  const known = UNITS[unit];
  if (!known) return typeof given === 'number' ? given : fallback;
  if (typeof given !== 'number' && typeof given !== 'string') return fallback;
  const parsed = parseQuantity(given, known.kind);
  return 'value' in parsed ? Number((parsed.value / known.size).toPrecision(DIGITS)) : fallback;
}

/** What is written into the file for a number of a control. */
export function writtenNumber(shown: number, { unit }: QuantityField): number | string {
  const digits = Number(shown.toPrecision(DIGITS));
  return unit === '' ? digits : `${digits} ${unit}`;
}

/** Adds a control for a quantity; `change` is given what is to be written. */
export function addQuantity(
  gui: GUI,
  field: QuantityField,
  given: unknown,
  change: (written: number | string) => void,
): Controller {
  const { name, unit, min, max, step } = field;
  const value = { shown: shownNumber(given, field) };
  const inRange = min !== undefined && max !== undefined && value.shown >= min && value.shown <= max;
  const controller = inRange ? gui.add(value, 'shown', min, max, step) : gui.add(value, 'shown').step(step ?? 0.01);
  return asTyped(controller.name(unit === '' ? name : `${name}, ${unit}`)).onChange((shown: number) => {
    if (Number.isFinite(shown)) change(writtenNumber(shown, field));
  });
}

/** A number that is typed counts as it stands: range and step are those of the slider and of the arrow keys alone. */
export function asTyped(controller: Controller): Controller {
  const input = controller.domElement.querySelector('input')!;
  const take = (event: Event) => {
    const typed = Number(input.value);
    event.stopImmediatePropagation();
    if (input.value.trim() !== '' && Number.isFinite(typed)) controller.setValue(typed);
  };
  input.addEventListener('input', take, { capture: true });
  return controller;
}
