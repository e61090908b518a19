import Qty from 'js-quantities/esm';
import { z } from 'zod';
import { parseQuantity, show } from '../scenario/units.ts';
import { COMPONENTS, type Component } from '../trace/trace.ts';

/**
 * How the columns of somebody's file are to be understood: what each holds, in which unit, at which observer and where.
 * Whatever the file's own headers tell ("Ez (kV/m)", "A.Hy [mA/m]", "t [ns]") need not be said again.
 */
const length = z.union([z.number(), z.string()]).describe('m, or a text with a unit, such as "5 mm"');
const time = z.union([z.number(), z.string()]).describe('s, or a text with a unit, such as "0.5 ns"');
const place = z.tuple([length, length, length]);

export const traceMapSchema = z.strictObject({
  header: z
    .array(z.string())
    .optional()
    .describe('names of the columns of a file that has none, in order (a matrix in a .npy file, a CSV of numbers)'),
  columns: z
    .record(z.string(), z.string())
    .optional()
    .describe(
      'what is to be read from which column: keys "time", "observer", "component", "value", "x", "y", "z", or a component ' +
        'such as "Ez", "Hy", "Bx", with its observer in front where there are several ("A.Ez"); values are headers of the file. ' +
        'Where a component is named here, components recognised by their headers are not read',
    ),
  units: z
    .strictObject({
      time: z.string().optional(),
      length: z.string().optional(),
      E: z.string().optional(),
      H: z.string().optional(),
      B: z.string().optional(),
    })
    .optional()
    .describe('units of columns whose header tells none; SI where nothing is said. H is B/μ where B is given'),
  timeOffset: z
    .union([time, z.strictObject({ E: time.optional(), H: time.optional() })])
    .optional()
    .describe('added to the times of the file; by field where E and H do not start together'),
  observer: z.string().optional().describe('whose traces these are, where the file does not say'),
  at: z
    .record(z.string(), z.union([place, z.partialRecord(z.enum(COMPONENTS), place)]))
    .optional()
    .describe('where observers are, or each of their components; those of the scenario are known'),
  positions: z
    .enum(['observer', 'staggered'])
    .optional()
    .describe(
      'where the components of the scenario’s observers were sampled: all at the observer itself, or each at its own place ' +
        'in the Yee cell of the observer’s nearest node',
    ),
});

export type TraceMap = z.infer<typeof traceMapSchema>;

/** The published description of a map (JSON Schema 2020-12). */
export const traceMapJsonSchema = (): object => z.toJSONSchema(traceMapSchema);

/**
 * A map as JSON.parse gives it.
 * @throws RangeError naming each key that is not as it should be
 */
export function parseTraceMap(json: unknown): TraceMap {
  const parsed = traceMapSchema.safeParse(json);
  if (parsed.success) return parsed.data;
  const problems = parsed.error.issues.map(({ path, message }) => `${path.join('.') || 'the map'}: ${message}`);
  throw new RangeError(problems.join('; '));
}

/** What a column holds. */
export type Role =
  | { readonly kind: 'time' | 'observer' | 'component' | 'value' | 'x' | 'y' | 'z' }
  | { readonly kind: 'field'; readonly component: Component; readonly isFlux: boolean; readonly observer: string };

const WORDS: Readonly<Record<string, Exclude<Role['kind'], 'field'>>> = {
  t: 'time',
  time: 'time',
  observer: 'observer',
  probe: 'observer',
  monitor: 'observer',
  component: 'component',
  comp: 'component',
  value: 'value',
  grid: 'value',
  x: 'x',
  y: 'y',
  z: 'z',
};

const FIELD = /^([EHB])[ _-]?([xyz])$/i;

/** A component by its name: Ez, H_y, bx; null for anything else. */
export function componentOf(text: string): { readonly component: Component; readonly isFlux: boolean } | null {
  const [, field, axis] = FIELD.exec(text.trim()) ?? [];
  if (field === undefined || axis === undefined) return null;
  const letter = field.toUpperCase();
  return {
    component: `${letter === 'B' ? 'H' : letter}${axis.toLowerCase()}` as Component,
    isFlux: letter === 'B',
  };
}

/** A header without its unit, and the unit: "Ez (kV/m)", "t [ns]". */
export function withoutUnit(header: string): { readonly name: string; readonly unit: string | null } {
  const [, name, round, square] = /^(.*?)\s*(?:\(([^()]*)\)|\[([^[\]]*)\])\s*$/.exec(header) ?? [];
  return name === undefined ? { name: header.trim(), unit: null } : { name, unit: (round ?? square)!.trim() };
}

/** What a header says by itself; null for one that means nothing here. */
export function roleOf(header: string): Role | null {
  const { name } = withoutUnit(header);
  const word = name.trim().toLowerCase();
  if (Object.hasOwn(WORDS, word)) return { kind: WORDS[word]! };
  const alone = componentOf(name);
  if (alone) return { kind: 'field', ...alone, observer: '' };
  // "A.Ez", "A Ez", "A_Ez", "A/Ez", "A:Ez", or the component in front: "Ez@A", "Ez at A", "Ez_A".
  const behind = /^(.+?)\s*[\s./:_-]\s*([EHB]_?[xyz])$/i.exec(name);
  const front = /^([EHB]_?[xyz])\s*(?:@|\bat\b|[\s./:_-])\s*(.+)$/i.exec(name);
  const [component, observer] = behind ? [behind[2]!, behind[1]!] : front ? [front[1]!, front[2]!] : ['', ''];
  const found = componentOf(component);
  return found ? { kind: 'field', ...found, observer: observer.trim() } : null;
}

/**
 * What a key of `columns` asks for.
 * @throws RangeError for a key that names nothing
 */
export function roleOfKey(key: string): Role {
  const role = roleOf(key);
  if (role === null || withoutUnit(key).unit !== null)
    throw new RangeError(
      `columns: ${show(key)} is nothing that can be read; give time, observer, component, value, x, y, z, or a component such as Ez or A.Ez`,
    );
  return role;
}

/** Units in SI of what columns hold. */
const SI = { time: 's', length: 'm', E: 'V/m', H: 'A/m', B: 'T' } as const;
export type UnitKind = keyof typeof SI;
const EXAMPLES: Readonly<Record<UnitKind, string>> = { time: 'ns', length: 'mm', E: 'kV/m', H: 'mA/m', B: 'nT' };

/**
 * The factor that brings numbers in a unit to SI.
 * @throws RangeError for a unit that measures something else, or is not known
 */
export function unitFactor(unit: string, kind: UnitKind, where: string): number {
  const refuse = () =>
    new RangeError(
      `${where}: the unit ${show(unit)} is not known for ${kind}; give one such as ${EXAMPLES[kind]} or ${SI[kind]}`,
    );
  if (unit === '' || unit === SI[kind]) return 1;
  if (unit.length > 24) throw refuse();
  try {
    const { scalar } = Qty(`1 ${unit.replaceAll('μ', 'µ')}`).to(SI[kind]);
    // Twelve digits: the library's own factors carry a few roundings.
    if (scalar > 0 && Number.isFinite(scalar)) return Number(scalar.toPrecision(12));
  } catch {}
  throw refuse();
}

/** @throws RangeError naming key and value of what is no length (or time) */
export function quantityOf(given: number | string, kind: 'length' | 'time', where: string): number {
  const parsed = parseQuantity(given, kind);
  if ('reason' in parsed) throw new RangeError(`${where} ${parsed.reason}`);
  return parsed.value;
}
