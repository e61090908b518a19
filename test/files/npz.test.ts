import { load } from 'npyjs';
import { describe, expect, test } from 'vitest';
import { npy, npz, writeTracesNpz } from '../../src/files/npz.ts';
import { observerTraces } from '../../src/files/traces.ts';
import { type FieldHistory, instantsOf, samplePoints } from '../../src/trace/trace.ts';
import { unzipped } from './unzipped.ts';

/** Numbers by a reader of `.npy` files that is not the writer. */
const numbers = async (bytes: Uint8Array) => {
  const { data, shape, fortranOrder } = await load(Uint8Array.from(bytes).buffer);
  expect(fortranOrder).toBe(false);
  return { data: data as Float64Array, shape };
};

/** Strings, from the description of the format: u32 code points, padded with zeros. */
function words(bytes: Uint8Array): string[] {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  expect([...bytes.subarray(0, 8)]).toEqual([0x93, ...Buffer.from('NUMPY'), 1, 0]);
  const start = 10 + view.getUint16(8, true);
  expect(start % 64).toBe(0);
  const header = Buffer.from(bytes.subarray(10, start)).toString('latin1');
  const [, width, count] = /^\{'descr': '<U(\d+)', 'fortran_order': False, 'shape': \((\d+),\), \} *\n$/.exec(header)!;
  return Array.from({ length: Number(count) }, (_, n) =>
    Array.from({ length: Number(width) }, (_, c) => view.getUint32(start + 4 * (n * Number(width) + c), true))
      .filter((code) => code !== 0)
      .map((code) => String.fromCodePoint(code))
      .join(''),
  );
}

describe('.npy', () => {
  test('numbers come back bit for bit, with their shape', async () => {
    const data = Float64Array.of(0, -0, 1 / 3, 5e-324, -1.7976931348623157e308, Number.NaN);
    expect(await numbers(npy({ shape: [2, 3], data }))).toEqual({ data, shape: [2, 3] });
    expect(await numbers(npy({ shape: [6], data }))).toEqual({ data, shape: [6] });
    expect((await numbers(npy({ shape: [0, 4], data: new Float64Array(0) }))).shape).toEqual([0, 4]);
  });

  test('strings come back, beyond the basic plane too', () => {
    expect(words(npy({ shape: [3], data: ['A', 'Größe', '𝔼 field'] }))).toEqual(['A', 'Größe', '𝔼 field']);
  });

  test('a shape that does not fit is refused', () => {
    expect(() => npy({ shape: [2, 2], data: new Float64Array(3) })).toThrow('holds 4 values; 3 were given');
  });
});

describe('traces.npz', () => {
  const points = samplePoints(Int32Array.of(0, 0, 0, 3, 4, 5), [-0.1, -0.1, -0.1], [0.005, 0.006, 0.007]);
  const instants = instantsOf(7, 9.53e-12);
  const field = (seed: number): FieldHistory => ({
    points,
    instants,
    values: Float64Array.from({ length: 2 * 6 * 7 }, (_, i) => Math.sqrt(seed + i) - 3),
  });
  const traces = [
    ...observerTraces('inside', { exact: field(3), grid: field(5) }, 0),
    ...observerTraces('=outside', { exact: field(3) }, 1),
  ];

  test('holds every signal at its place, NaN where it is not known', async () => {
    const files = await unzipped(writeTracesNpz(traces));
    expect([...files.keys()].sort()).toEqual(
      [
        'boundary',
        'component',
        'exact',
        'grid',
        'gridding',
        'lattice',
        'observer',
        'position',
        'quadrature',
        'time',
      ].map((name) => `${name}.npy`),
    );
    expect(words(files.get('observer.npy')!)).toEqual(['inside', '=outside']);
    expect(words(files.get('component.npy')!)).toEqual(['Ex', 'Ey', 'Ez', 'Hx', 'Hy', 'Hz']);
    expect(await numbers(files.get('exact.npy')!)).toEqual({ shape: [2, 6, 7], data: field(3).values });
    const grid = await numbers(files.get('grid.npy')!);
    expect(grid.data.slice(0, 42)).toEqual(field(5).values.slice(0, 42));
    expect([...grid.data.slice(42)].every(Number.isNaN)).toBe(true);
    expect((await numbers(files.get('position.npy')!)).data).toEqual(points.position);
    const time = await numbers(files.get('time.npy')!);
    expect(time.data).toEqual(
      Float64Array.of(...[0, 1, 2].flatMap(() => [...instants.E]), ...[0, 1, 2].flatMap(() => [...instants.H])),
    );
  });

  test('the same traces give the same bytes; none at all are an archive too', async () => {
    expect(writeTracesNpz(traces)).toEqual(writeTracesNpz(traces));
    expect((await unzipped(writeTracesNpz([]))).size).toBe(10);
    expect((await unzipped(npz({ a: { shape: [1], data: ['x'] } }))).size).toBe(1);
  });

  test('traces that do not fit together are refused by name', () => {
    expect(() => writeTracesNpz(traces.slice(0, 9))).toThrow('traces of observer');
    const short = traces.map((trace, n) => (n === 8 ? { ...trace, time: trace.time.slice(1) } : trace));
    expect(() => writeTracesNpz(short)).toThrow('observer "=outside" are not its six components at 7 instants');
  });
});
