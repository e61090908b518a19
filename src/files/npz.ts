import { zipSync } from 'fflate';
import { COMPONENTS } from '../trace/trace.ts';
import { type ObserverTrace, SIGNALS } from './traces.ts';

/** An array of NumPy: its data with the last index fastest. */
export interface NumpyArray {
  readonly shape: readonly number[];
  readonly data: Float64Array | readonly string[];
}

/**
 * The bytes of a `.npy` file, format version 1.0: numbers as `<f8`, strings as `<U…` (four bytes a character).
 * Source: NumPy manual, "NPY format" (numpy.lib.format), from memory.
 * @throws RangeError where the shape holds another number of values than there are
 */
export function npy({ shape, data }: NumpyArray): Uint8Array {
  const size = shape.reduce((product, n) => product * n, 1);
  if (size !== data.length)
    throw new RangeError(
      `a NumPy array of shape (${shape.join(', ')}) holds ${size} values; ${data.length} were given`,
    );
  const { descr, bytes } = data instanceof Float64Array ? numbers(data) : strings(data);
  const tuple = shape.length === 1 ? `${shape[0]},` : shape.join(', ');
  const header = `{'descr': '${descr}', 'fortran_order': False, 'shape': (${tuple}), }`;
  const before = 10;
  const padded = header.padEnd(Math.ceil((before + header.length + 1) / 64) * 64 - before - 1, ' ');
  const out = new Uint8Array(before + padded.length + 1 + bytes.length);
  out.set([0x93, 0x4e, 0x55, 0x4d, 0x50, 0x59, 1, 0]);
  new DataView(out.buffer).setUint16(8, padded.length + 1, true);
  out.set(new TextEncoder().encode(`${padded}\n`), before);
  out.set(bytes, before + padded.length + 1);
  return out;
}

function numbers(data: Float64Array): { descr: string; bytes: Uint8Array } {
  const bytes = new Uint8Array(8 * data.length);
  const view = new DataView(bytes.buffer);
  data.forEach((value, n) => {
    view.setFloat64(8 * n, value, true);
  });
  return { descr: '<f8', bytes };
}

function strings(data: readonly string[]): { descr: string; bytes: Uint8Array } {
  const characters = data.map((text) => Array.from(text, (c) => c.codePointAt(0)!));
  const width = Math.max(1, ...characters.map(({ length }) => length));
  const bytes = new Uint8Array(4 * width * data.length);
  const view = new DataView(bytes.buffer);
  characters.forEach((codes, n) => {
    codes.forEach((code, c) => {
      view.setUint32(4 * (n * width + c), code, true);
    });
  });
  return { descr: `<U${width}`, bytes };
}

/** The bytes of a `.npz` archive; the same arrays give the same bytes. */
export function npz(arrays: Readonly<Record<string, NumpyArray>>): Uint8Array {
  // The earliest day that a zip archive knows, in place of the day of writing.
  const mtime = new Date(1980, 0, 1);
  return zipSync(
    Object.fromEntries(Object.entries(arrays).map(([name, array]) => [`${name}.npy`, [npy(array), { mtime }]])),
  );
}

/**
 * `traces.npz`: what `traces.csv` holds, as arrays in SI units. For P observers at T instants: `observer` (P names),
 * `component` (Ex to Hz), `position` (P × 6 × 3, m), `time` (6 × T, s: E and H are half a step apart), and P × 6 × T values
 * (V/m, A/m) of each signal: `grid`, `exact`, `boundary`, `lattice`, `gridding`, `quadrature`. NaN stands where a signal is
 * not known.
 * @param traces the six of one observer after those of another, all at the same instants
 * @throws RangeError naming the observer whose traces are not so
 */
export function writeTracesNpz(traces: readonly ObserverTrace[]): Uint8Array {
  const count = traces[0]?.time.length ?? 0;
  const observers = traces.length / 6;
  traces.forEach(({ observer, component, time }, n) => {
    const whole = component === COMPONENTS[n % 6] && observer === traces[n - (n % 6)]!.observer;
    if (!whole || time.length !== count || !Number.isInteger(observers))
      throw new RangeError(
        `the traces of observer "${observer}" are not its six components at ${count} instants, as those before`,
      );
  });
  const time = new Float64Array(6 * count);
  const position = new Float64Array(18 * observers);
  traces.slice(0, 6).forEach((trace, c) => {
    time.set(trace.time, c * count);
  });
  traces.forEach(({ at }, n) => {
    position.set(at, 3 * n);
  });
  const signals = SIGNALS.map((signal) => {
    const data = new Float64Array(traces.length * count).fill(Number.NaN);
    traces.forEach(({ signals }, n) => {
      data.set(signals[signal] ?? [], n * count);
    });
    return [signal, { shape: [observers, 6, count], data }] as const;
  });
  return npz({
    observer: { shape: [observers], data: traces.filter((_, n) => n % 6 === 0).map(({ observer }) => observer) },
    component: { shape: [6], data: COMPONENTS },
    position: { shape: [observers, 6, 3], data: position },
    time: { shape: [6, count], data: time },
    ...Object.fromEntries(signals),
  });
}
