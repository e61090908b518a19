import Papa from 'papaparse';
import { COMPONENTS, type Component, type FieldHistory } from '../trace/trace.ts';

/**
 * `traces.csv`: one row per instant and observer component, SI units, numbers in shortest round-trip form:
 *
 *     observer,component,x,y,z,t,grid,exact,boundary,lattice,gridding,quadrature
 *
 * x, y, z is where the component lives, t when. boundary + lattice + gridding + quadrature = grid − exact. Cells of a
 * signal that is not known are empty: grid and parts of an observer outside the box, boundary and lattice without the
 * free-space run.
 */
export const SIGNALS = ['grid', 'exact', 'boundary', 'lattice', 'gridding', 'quadrature'] as const;
export type Signal = (typeof SIGNALS)[number];

export const TRACE_HEADER: readonly string[] = ['observer', 'component', 'x', 'y', 'z', 't', ...SIGNALS];

/** The signals of one component at one observer. */
export interface ObserverTrace {
  readonly observer: string;
  readonly component: Component;
  /** m */
  readonly at: readonly [number, number, number];
  /** s */
  readonly time: Float64Array;
  /** V/m or A/m, one value an instant; a signal that is not known is absent */
  readonly signals: Readonly<Partial<Record<Signal, Float64Array>>>;
}

/**
 * A spreadsheet takes a cell that begins like this for a formula (some do so with full-width signs too), so a name that does
 * is written with an apostrophe in front. One that begins with an apostrophe gets another, so that reading takes off exactly what writing put on.
 */
export const FORMULA = /^['=+\-@\t\r\n＝＋－＠]/;

/** The six traces of one observer: a point of fields that all have the same points and instants. */
export function observerTraces(
  observer: string,
  fields: Readonly<Partial<Record<Signal, FieldHistory>>> & { readonly exact: FieldHistory },
  point: number,
): ObserverTrace[] {
  const { points, instants } = fields.exact;
  return COMPONENTS.map((component, c) => {
    const start = (point * 6 + c) * instants.count;
    const signals = SIGNALS.flatMap((signal) => {
      const field = fields[signal];
      return field ? [[signal, field.values.slice(start, start + instants.count)] as const] : [];
    });
    const [x, y, z] = points.position.subarray((point * 6 + c) * 3, (point * 6 + c) * 3 + 3);
    return {
      observer,
      component,
      at: [x!, y!, z!],
      time: c < 3 ? instants.E : instants.H,
      signals: Object.fromEntries(signals),
    };
  });
}

/** The text of `traces.csv`. */
export function writeTraces(traces: readonly ObserverTrace[]): string {
  const rows = traces.flatMap(({ observer, component, at, time, signals }) =>
    Array.from(time, (t, n) => [observer, component, ...at, t, ...SIGNALS.map((signal) => signals[signal]?.[n] ?? '')]),
  );
  return `${Papa.unparse([TRACE_HEADER, ...rows], { newline: '\n', escapeFormulae: FORMULA })}\n`;
}

/**
 * Reads `traces.csv` back; traces in the order of their first rows.
 * @throws Error naming row, column, value and what is expected
 */
export function readTraces(text: string): ObserverTrace[] {
  const { data } = Papa.parse<string[]>(text, { skipEmptyLines: true });
  const [header, ...rows] = data;
  if (header?.join() !== TRACE_HEADER.join())
    throw new Error(`row 1 is "${header?.join() ?? ''}"; the header of a trace file is "${TRACE_HEADER.join()}"`);
  const groups = new Map<string, string[][]>();
  rows.forEach((row, i) => {
    requireRow(row, i + 2);
    const key = JSON.stringify(row.slice(0, 2));
    const group = groups.get(key);
    if (group) group.push(row);
    else groups.set(key, [row]);
  });
  return [...groups.values()].map(traceOf);
}

/** Refuses a row that is not: name, component, five numbers, then numbers or nothing. */
function requireRow(row: readonly string[], number: number): void {
  if (row.length !== TRACE_HEADER.length)
    throw new Error(`row ${number} has ${row.length} cells; a trace file has ${TRACE_HEADER.length} columns`);
  if (!COMPONENTS.includes(row[1] as Component))
    throw new Error(`row ${number}, column component: "${row[1]}" is none of ${COMPONENTS.join(', ')}`);
  row.forEach((cell, c) => {
    if (c < 2 || (cell === '' && c >= 6)) return;
    if (cell.trim() === '' || !Number.isFinite(Number(cell)))
      throw new Error(`row ${number}, column ${TRACE_HEADER[c]}: "${cell}" is not a number`);
  });
}

function traceOf(rows: readonly (readonly string[])[]): ObserverTrace {
  const [name, component, x, y, z] = rows[0]!;
  const column = (c: number) => Float64Array.from(rows, (row) => Number(row[c]));
  const signals = SIGNALS.flatMap((signal, s) => {
    const empty = rows.filter((row) => row[6 + s] === '').length;
    if (empty > 0 && empty < rows.length)
      throw new Error(
        `${signal} of ${component} at observer "${name}" is empty in ${empty} of ${rows.length} rows; fill all or none`,
      );
    return empty === 0 ? [[signal, column(6 + s)] as const] : [];
  });
  return {
    observer: name!.startsWith("'") && FORMULA.test(name!.slice(1)) ? name!.slice(1) : name!,
    component: component as Component,
    at: [Number(x), Number(y), Number(z)],
    time: column(5),
    signals: Object.fromEntries(signals),
  };
}
