import { unseenIn } from '../scenario/text.ts';
import { show } from '../scenario/units.ts';
import { COMPONENTS, type Component, FEWEST_SAMPLES, type Trace } from '../trace/trace.ts';
import { MOST_BYTES, type NpyArray, readNpz } from './npyReader.ts';
import {
  componentOf,
  quantityOf,
  type Role,
  roleOf,
  roleOfKey,
  type TraceMap,
  type UnitKind,
  unitFactor,
  withoutUnit,
} from './traceMap.ts';
import { readTraces, TRACE_HEADER } from './traces.ts';
import { csvTable, npyTable, npzColumns, type TableColumn, type TraceTable } from './traceTable.ts';

/** What is known of the places that traces may be told to be at. */
export interface KnownPlaces {
  /** an observer of the scenario by its name: where it was asked for, and where a Yee cell's components lie there */
  readonly observers: readonly {
    readonly name: string;
    readonly at: Place;
    readonly staggered: Readonly<Record<Component, Place>>;
  }[];
  /** μ, H/m: H is B/μ */
  readonly permeability: number;
}

type Place = readonly [number, number, number];

/** Traces, and what should be known of how they were read. */
export interface ReadTraces {
  readonly traces: readonly Trace[];
  readonly notes: readonly string[];
}

/** Bytes of a text at most: read into cells it takes up to twenty times its room. */
const MOST_TEXT = 64e6;

/**
 * Traces from the bytes of a file: our own traces.csv and traces.npz as they are, other CSV texts and NumPy files by their
 * headers and a map. Times are put in order; a time that stands twice with one value counts once.
 * @param name of the file: its ending tells its kind
 * @param known `places` of the question that the traces answer (`judgeQuestion`)
 * @throws RangeError naming row, column and value of what cannot be used
 */
export function readForeignTraces(name: string, bytes: Uint8Array, map: TraceMap, known: KnownPlaces): ReadTraces {
  refuseLarger(bytes, MOST_BYTES, 'file of traces');
  const ending = /\.[^./\\]*$/.exec(name.toLowerCase())?.[0];
  if (ending === '.npz' || (bytes[0] === 0x50 && bytes[1] === 0x4b)) {
    const arrays = readNpz(bytes);
    const own = ownArrays(arrays);
    return own ? ordered(own) : tracesOf(npzColumns(arrays), map, known);
  }
  if (ending === '.npy' || bytes[0] === 0x93) return tracesOf(npyTable(bytes, map.header), map, known);
  refuseLarger(bytes, MOST_TEXT, 'text');
  let text: string;
  try {
    text = new TextDecoder('utf-8', { fatal: true }).decode(bytes);
  } catch {
    throw new RangeError('is no text in UTF-8, and no .npy or .npz file');
  }
  if (text.startsWith(`${TRACE_HEADER.join()}\n`)) return ordered(ownTraces(text));
  return tracesOf(csvTable(text, map.header), map, known);
}

function refuseLarger({ length }: Uint8Array, most: number, what: string): void {
  if (length > most)
    throw new RangeError(
      `has ${Math.round(length / 1e6)} MB; a ${what} has at most ${most / 1e6}. Give fewer samples or observers, or .npz`,
    );
}

/** The grid's traces in our own traces.csv, those of observers that have one. */
function ownTraces(text: string): Trace[] {
  let traces: ReturnType<typeof readTraces>;
  try {
    traces = readTraces(text);
  } catch (error) {
    throw new RangeError((error as Error).message);
  }
  return traces.flatMap(({ observer, component, at, time, signals }) =>
    signals.grid ? [{ observer, component, at, time, values: signals.grid }] : [],
  );
}

/** The grid's traces in our own traces.npz; null for arrays that are something else. */
function ownArrays(arrays: ReadonlyMap<string, NpyArray>): Trace[] | null {
  const [observer, component, position, time, grid] = ['observer', 'component', 'position', 'time', 'grid'].map(
    (name) => arrays.get(name),
  );
  if (!observer || !component || !position || !time || grid?.shape.length !== 3) return null;
  const [points, six, count] = grid.shape as [number, number, number];
  const names = observer.fields[0]!.values;
  const fits =
    six === 6 &&
    names.length === points &&
    position.shape.join() === `${points},6,3` &&
    time.shape.join() === `6,${count}` &&
    component.fields[0]!.values.join() === COMPONENTS.join();
  if (!fits) return null;
  const [at, times, values] = [position, time, grid].map(({ fields }) => fields[0]!.values as Float64Array) as [
    Float64Array,
    Float64Array,
    Float64Array,
  ];
  return Array.from({ length: 6 * points }, (_, n): Trace => {
    const c = n % 6;
    return {
      observer: String(names[(n - c) / 6]),
      component: COMPONENTS[c]!,
      at: [at[3 * n]!, at[3 * n + 1]!, at[3 * n + 2]!],
      time: times.slice(c * count, (c + 1) * count),
      values: values.slice(n * count, (n + 1) * count),
    };
  }).filter((trace) => !trace.values.every(Number.isNaN));
}

/** What our own files hold is checked as well: anyone may have edited them. */
function ordered(traces: readonly Trace[]): ReadTraces {
  const notes: string[] = [];
  const sorted = traces.map((trace) => {
    const where = `${trace.component} at observer “${trace.observer}”`;
    trace.values.forEach((v, n) => {
      if (!Number.isFinite(v) || !Number.isFinite(trace.time[n]!))
        throw new RangeError(`${where}, sample ${n + 1}: ${v} at ${trace.time[n]} s; both must be finite numbers`);
    });
    return inOrder(trace, (n) => `sample ${n + 1}`, where, notes);
  });
  return { traces: refuseEmpty(sorted), notes };
}

function refuseEmpty(traces: readonly Trace[]): readonly Trace[] {
  if (traces.length === 0) throw new RangeError('holds no trace that could be judged');
  for (const { observer, component, time } of traces) {
    const unseen = unseenIn(observer);
    if (unseen !== undefined)
      throw new RangeError(
        `observer ${show(observer)} has ${unseen} in its name, a character that does not show; leave it out`,
      );
    if (time.length < FEWEST_SAMPLES)
      throw new RangeError(
        `${component} at observer “${observer}” has ${time.length} samples; a trace needs at least ${FEWEST_SAMPLES}`,
      );
  }
  return traces;
}

/** A column with what it is for, and the factor to SI. */
interface Assigned {
  readonly column: TableColumn;
  readonly role: Role;
  readonly factor: number;
}

function tracesOf(table: TraceTable, map: TraceMap, known: KnownPlaces): ReadTraces {
  const assigned = assign(table, map, known);
  const one = (kind: Role['kind']) => assigned.find(({ role }) => role.kind === kind);
  const time = one('time');
  const names = table.columns.map(({ name }) => `“${name}”`).join(', ');
  if (!time) throw new RangeError(`no column holds the time; there are ${names}. Name it: --column time=HEADER`);
  const fields = assigned.filter(({ role }) => role.kind === 'field');
  const value = one('value');
  if (fields.length === 0 && !value)
    throw new RangeError(`no column holds a field component; there are ${names}. Name one: --column Ez=HEADER`);
  const groups = new Map<string, Rows>();
  const sources = fields.length > 0 ? fields : [value!];
  for (const source of sources)
    collect(
      table,
      source,
      { time, ...places(one), component: one('component'), observer: one('observer') },
      map,
      known,
      groups,
    );
  const notes: string[] = [];
  const traces = [...groups.values()].map((rows) => traceOf(rows, table, map, notes));
  return { traces: refuseEmpty(traces), notes };
}

type Finder = (kind: Role['kind']) => Assigned | undefined;
const places = (one: Finder) => ({ x: one('x'), y: one('y'), z: one('z') });

/** What each column is for: as the map says, else as its header does. */
function assign({ columns }: TraceTable, map: TraceMap, known: KnownPlaces): Assigned[] {
  const taken = new Map<string, Role>();
  const mapped = Object.entries(map.columns ?? {}).map(([key, header]) => {
    const role = roleOfKey(key);
    const matches = columns.filter(({ name }) => name === header);
    const loose = matches.length > 0 ? matches : columns.filter(({ name }) => withoutUnit(name).name === header);
    if (loose.length !== 1)
      throw new RangeError(
        `columns.${key}: ${loose.length === 0 ? 'no column is' : 'several columns are'} called “${header}”; there are ${columns.map(({ name }) => `“${name}”`).join(', ')}`,
      );
    taken.set(loose[0]!.name, role);
    return { column: loose[0]!, role };
  });
  const has = (kind: Role['kind']) => mapped.some(({ role }) => role.kind === kind);
  const byHeader = columns.flatMap((column) => {
    const role = taken.has(column.name) ? null : roleOf(column.name);
    if (!role || has(role.kind) || (role.kind === 'field' && has('value')) || (role.kind === 'value' && has('field')))
      return [];
    return [{ column, role }];
  });
  const all = [...mapped, ...byHeader];
  for (const kind of ['time', 'observer', 'component', 'value', 'x', 'y', 'z'] as const) {
    const several = all.filter(({ role }) => role.kind === kind);
    if (several.length > 1)
      throw new RangeError(
        `${several.map(({ column }) => `“${column.name}”`).join(' and ')} may both hold the ${kind}; say which: --column ${kind}=HEADER`,
      );
  }
  return all.map(({ column, role }) => ({ column, role, factor: factorOf(column.name, role, map, known) }));
}

function factorOf(header: string, role: Role, { units = {} }: TraceMap, { permeability }: KnownPlaces): number {
  const { unit } = withoutUnit(header);
  const by = (kind: UnitKind) => {
    const told = unit ?? units[kind];
    return told === undefined ? 1 : unitFactor(told, kind, `column “${header}”`);
  };
  switch (role.kind) {
    case 'time':
      return by('time');
    case 'x':
    case 'y':
    case 'z':
      return by('length');
    case 'field':
      if (role.isFlux) return by('B') / permeability;
      return by(role.component[0] as 'E' | 'H');
    default:
      return 1;
  }
}

/** The rows of one trace as they stand in the table. */
interface Rows {
  readonly observer: string;
  readonly component: Component;
  readonly at: Place;
  readonly column: string;
  readonly row: number[];
  readonly time: number[];
  readonly values: number[];
}

interface Columns {
  readonly time: Assigned;
  readonly x: Assigned | undefined;
  readonly y: Assigned | undefined;
  readonly z: Assigned | undefined;
  readonly component: Assigned | undefined;
  readonly observer: Assigned | undefined;
}

/** Adds the samples of one column of values to the traces that its rows belong to. */
function collect(
  table: TraceTable,
  source: Assigned,
  { time, x, y, z, component, observer }: Columns,
  map: TraceMap,
  known: KnownPlaces,
  groups: Map<string, Rows>,
): void {
  const hasPlace = x && y && z;
  if (!hasPlace && (x || y || z))
    throw new RangeError('a place needs all of the columns x, y and z; only some are there');
  for (let row = 0; row < table.rows; row++) {
    const at = (column: Assigned) => `${table.place(row)}, column “${column.column.name}”`;
    const value = source.column.cells[row]!;
    if (typeof value === 'string' && value === '') continue;
    const found = sampleOf(source, component, row, map, known, at);
    const own = source.role.kind === 'field' ? source.role.observer : '';
    const name = own !== '' ? own : observer ? String(observer.column.cells[row]).trim() : (map.observer ?? '');
    const given: Place | null = hasPlace ? [numberOf(x, row, at), numberOf(y, row, at), numberOf(z, row, at)] : null;
    const key = JSON.stringify([name, found.component, given]);
    let rows = groups.get(key);
    if (!rows) {
      const placed = placeOf(name, found.component, given, map, known, at(source));
      rows = { ...placed, component: found.component, column: source.column.name, row: [], time: [], values: [] };
      groups.set(key, rows);
    }
    rows.row.push(row);
    rows.time.push(numberOf(time, row, at));
    rows.values.push(found.value);
  }
}

/** Component and value of a row, the value in SI. */
function sampleOf(
  source: Assigned,
  component: Assigned | undefined,
  row: number,
  map: TraceMap,
  known: KnownPlaces,
  at: (column: Assigned) => string,
): { readonly component: Component; readonly value: number } {
  const value = numberOf(source, row, at);
  if (source.role.kind === 'field') return { component: source.role.component, value };
  if (!component)
    throw new RangeError(
      `column “${source.column.name}” holds values, and no column says of which component; name it: --column Ez=“${source.column.name}”, or --column component=HEADER`,
    );
  const text = String(component.column.cells[row]);
  const found = componentOf(text);
  if (!found)
    throw new RangeError(`${at(component)}: “${text.slice(0, 40)}” is none of ${COMPONENTS.join(', ')}, Bx, By, Bz`);
  const role: Role = { kind: 'field', ...found, observer: '' };
  return { component: found.component, value: value * factorOf(source.column.name, role, map, known) };
}

function numberOf(assigned: Assigned, row: number, at: (column: Assigned) => string): number {
  const cell = assigned.column.cells[row]!;
  const value = typeof cell === 'number' ? cell : cell.trim() === '' ? Number.NaN : Number(cell);
  const scaled = value * assigned.factor;
  if (!Number.isFinite(scaled))
    throw new RangeError(
      `${at(assigned)}: “${String(cell).slice(0, 40)}” is no finite number; correct it, or leave the sample out`,
    );
  return scaled;
}

/** Whose trace it is, and where it was sampled. */
function placeOf(
  name: string,
  component: Component,
  given: Place | null,
  map: TraceMap,
  { observers }: KnownPlaces,
  where: string,
): { readonly observer: string; readonly at: Place } {
  if (given) return { observer: name !== '' ? name : `(${given.join(', ')})`, at: given };
  const only = observers.length === 1 ? observers[0]! : undefined;
  const lower = name.toLowerCase();
  const alike = observers.filter((o) => o.name.toLowerCase() === lower);
  const observer =
    observers.find((o) => o.name === name) ??
    (alike.length === 1 ? alike[0] : undefined) ??
    (name === '' ? only : undefined);
  const own = name === '' ? (only?.name ?? '') : (observer?.name ?? name);
  const told = Object.hasOwn(map.at ?? {}, own) ? map.at![own] : undefined;
  const place = Array.isArray(told) ? told : told?.[component];
  if (place)
    return {
      observer: own,
      at: place.map((x) => quantityOf(x as number | string, 'length', `at.${own}`)) as unknown as Place,
    };
  if (observer)
    return { observer: observer.name, at: map.positions === 'staggered' ? observer.staggered[component] : observer.at };
  const names = observers.map((o) => `“${o.name}”`).join(', ') || 'none';
  throw new RangeError(
    name === ''
      ? `${where}: it is not said whose trace it is, and the scenario has these observers: ${names}. Name one: --observer NAME`
      : `${where}: the scenario has no observer “${name.slice(0, 60)}” (it has ${names}). Say where it is: "at": {"${name.slice(0, 60)}": ["0 mm", "0 mm", "0 mm"]} in the map, or --at`,
  );
}

function traceOf(rows: Rows, table: TraceTable, map: TraceMap, notes: string[]): Trace {
  const { observer, component, at } = rows;
  const field = component[0] as 'E' | 'H';
  const told = typeof map.timeOffset === 'object' ? map.timeOffset[field] : map.timeOffset;
  const offset = told === undefined ? 0 : quantityOf(told, 'time', 'timeOffset');
  const trace = {
    observer,
    component,
    at,
    time: Float64Array.from(rows.time, (t) => t + offset),
    values: Float64Array.from(rows.values),
  };
  return inOrder(
    trace,
    (n) => `${table.place(rows.row[n]!)}, column “${rows.column}”`,
    `${component} at observer “${observer}”`,
    notes,
  );
}

/**
 * A trace with its instants ascending and no two alike.
 * @throws RangeError where one instant has two values
 */
function inOrder(trace: Trace, place: (sample: number) => string, where: string, notes: string[]): Trace {
  const { time, values } = trace;
  const order = [...time.keys()];
  const isAscending = order.every((n) => n === 0 || time[n]! > time[n - 1]!);
  if (isAscending) return trace;
  order.sort((a, b) => time[a]! - time[b]! || a - b);
  const kept: number[] = [];
  for (const n of order) {
    const last = kept.at(-1);
    if (last === undefined || time[n]! > time[last]!) kept.push(n);
    else if (values[n] !== values[last])
      throw new RangeError(
        `${where}: the instant ${time[n]} s stands twice with different values, ${values[last]} (${place(last)}) and ${values[n]} (${place(n)}); leave one out`,
      );
  }
  const doubled = time.length - kept.length;
  notes.push(
    `${where}: instants were not in order${doubled > 0 ? `, and ${doubled} stood twice with the same value` : ''}; they were sorted.`,
  );
  return {
    ...trace,
    time: Float64Array.from(kept, (n) => time[n]!),
    values: Float64Array.from(kept, (n) => values[n]!),
  };
}
