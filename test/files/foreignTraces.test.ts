import { zipSync } from 'fflate';
import { describe, expect, it } from 'vitest';
import { type KnownPlaces, readForeignTraces } from '../../src/files/foreignTraces.ts';
import { parseTraceMap } from '../../src/files/traceMap.ts';
import { observerTraces, writeTraces } from '../../src/files/traces.ts';
import { COMPONENTS, type Component, instantsOf, samplePoints } from '../../src/trace/trace.ts';
import { drawn } from '../hostile/drawn.ts';
import { fuzzTraceReaders } from './fuzzTraces.ts';

const staggered = Object.fromEntries(COMPONENTS.map((c, n) => [c, [n, n, n] as const])) as Record<
  Component,
  readonly [number, number, number]
>;
const MU = 1.25663706127e-6;
const known: KnownPlaces = {
  observers: [
    { name: 'A', at: [0.1, 0.02, 0.035], staggered },
    { name: 'far', at: [0.3, 0, 0], staggered },
  ],
  permeability: MU,
};
const alone: KnownPlaces = { ...known, observers: [known.observers[0]!] };

const bytes = (text: string) => new TextEncoder().encode(text);
const read = (text: string, map: object = {}, places = known, name = 'probes.csv') =>
  readForeignTraces(name, bytes(text), parseTraceMap(map), places);

const rows = (...lines: readonly string[]) =>
  [...lines, ...Array.from({ length: 8 }, (_, n) => `${n + 1},${n * n},${-n}`)].join('\n');

describe('CSV of other solvers', () => {
  it('is read by its headers: units in brackets, observers beside components', () => {
    const { traces } = read(rows('t [ns],A.Ez (kV/m),far_Hy [mA/m]'));
    expect(traces.map(({ observer, component }) => `${observer} ${component}`)).toEqual(['A Ez', 'far Hy']);
    const [Ez, Hy] = traces;
    expect(Ez!.time[2]).toBeCloseTo(3e-9, 20);
    expect(Ez!.values[3]).toBe(9000);
    expect(Hy!.values[3]).toBe(-3e-3);
    expect(Ez!.at).toEqual([0.1, 0.02, 0.035]);
  });

  it('takes the scenario’s only observer where the file names none, and its Yee cell where asked to', () => {
    expect(read(rows('time,Ez,Hy'), {}, alone).traces.map(({ at }) => at)).toEqual([
      [0.1, 0.02, 0.035],
      [0.1, 0.02, 0.035],
    ]);
    const { traces } = read(rows('time,Ez,Hy'), { positions: 'staggered' }, alone);
    expect(traces.map(({ at }) => at[0])).toEqual([2, 4]);
  });

  it('is read by a map: columns, units, offset, places', () => {
    const { traces } = read(rows('clock;p 1;p 2').replaceAll(',', ';'), {
      columns: { time: 'clock', 'P.Ez': 'p 1', 'P.Bx': 'p 2' },
      units: { time: 'ps', B: 'nT' },
      timeOffset: { H: '0.5 ps' },
      at: { P: ['10 mm', 0, '5 mm'] },
    });
    const [Ez, Hx] = traces;
    expect(Ez!.at).toEqual([0.01, 0, 0.005]);
    expect(Ez!.time[0]).toBeCloseTo(1e-12, 24);
    expect(Hx!.component).toBe('Hx');
    expect(Hx!.time[0]).toBeCloseTo(1.5e-12, 24);
    expect(Hx!.values[2]).toBeCloseTo(-2e-9 / MU, 12);
  });

  it('is read in rows of one value, with places; in any order, doubled instants once', () => {
    const lines = Array.from({ length: 10 }, (_, n) => {
      const t = [3, 1, 2, 0, 4, 5, 6, 7, 8, 8][n]!;
      return `probe one,Ey,10,20,30,${t},${t * t}`;
    });
    const { traces, notes } = read(
      ['observer,component,x (mm),y (mm),z (mm),t (ns),value (mV/m)', ...lines].join('\n'),
    );
    expect(traces).toHaveLength(1);
    const [{ observer, at, time, values }] = traces as [(typeof traces)[number]];
    expect(observer).toBe('probe one');
    expect(at.map((x) => x.toPrecision(6))).toEqual(['0.0100000', '0.0200000', '0.0300000']);
    expect([...time].map((t) => Math.round(t * 1e9))).toEqual([0, 1, 2, 3, 4, 5, 6, 7, 8]);
    expect(values[8]).toBeCloseTo(0.064, 15);
    expect(notes[0]).toMatch(/not in order, and 1 stood twice/);
  });

  it('may be blank-separated with a commented header, or have no header at all', () => {
    const body = Array.from({ length: 9 }, (_, n) => `  ${n}e-12   ${n}.5`).join('\n');
    expect(read(`% solver output\n# t Ez\n${body}`, {}, alone).traces[0]!.values[4]).toBe(4.5);
    expect(read(body, { header: ['t', 'Ez'] }, alone).traces[0]!.values[4]).toBe(4.5);
  });

  it('leaves out samples whose cell is empty: columns may be sampled differently', () => {
    const text = rows('t,A.Ez,far.Ez').replace('3,4,-2', '3,,-2');
    const { traces } = read(text.replace(/$/, '\n9,64,-8'));
    expect(traces.map(({ time }) => time.length)).toEqual([8, 9]);
  });

  it.each([
    ['', /holds no rows/],
    [rows('1,2,3'), /row 1 begins with numbers/],
    [rows('a,b,c'), /no column holds the time; there are “a”, “b”, “c”/],
    [rows('t,b,c'), /no column holds a field component/],
    [rows('t,time,Ez'), /“t” and “time” may both hold the time/],
    [rows('t,Q.Ez,A.Ez'), /row 2, column “Q.Ez”: the scenario has no observer “Q”/],
    [rows('t,Ez,Ey'), /it is not said whose trace it is, and the scenario has these observers: “A”, “far”/],
    [rows('t,A.Ez (parsec),A.Ey'), /column “A.Ez \(parsec\)”: the unit "parsec" is not known for E/],
    [rows('t,A.Ez,A.Ey').replace('3,4,', '3,nan,'), /row 4, column “A.Ez”: “nan” is no finite number/],
    [rows('t,A.Ez,A.Ey').replace('3,4,', '3,Infinity,'), /row 4, column “A.Ez”: “Infinity” is no finite number/],
    [rows('t,A.Ez,A.Ey').replace('3,4,', '3,4'), /row 4 has 2 columns; 3 are named/],
    [rows('t,A.Ez,A.Ey').replace('3,4,', '2,4,'), /the instant 2 s stands twice with different values, 1 \(row 3/],
    ['t,A.Ez\n1,2\n2,3', /Ez at observer “A” has 2 samples; a trace needs at least 8/],
  ])('is refused with its place: case %#', (text, message) => {
    expect(() => read(text)).toThrow(message);
  });

  it('refuses a map that means nothing', () => {
    expect(() => parseTraceMap({ columms: {} })).toThrow(/columms/);
    expect(() => read(rows('t,u,v'), { columns: { Eq: 'u' } })).toThrow(/"Eq" is nothing that can be read/);
    expect(() => read(rows('t,u,v'), { columns: { Ez: 'w' } })).toThrow(/columns.Ez: no column is called “w”/);
    expect(() => read(rows('t,u,v'), { columns: { 'P.Ez': 'u' }, at: { P: ['1 s', 0, 0] } })).toThrow(
      /at\.P .* a time/,
    );
  });
});

/** Traces of a NumPy file. */
const from = (name: string, data: Uint8Array, map: object = {}) =>
  readForeignTraces(name, data, parseTraceMap(map), alone).traces;

/** A .npy file, by NumPy's description of the format, version 1.0. */
function npy(descr: string, shape: string, data: Uint8Array, fortran = 'False'): Uint8Array {
  const header = `{'descr': ${descr}, 'fortran_order': ${fortran}, 'shape': ${shape}, }\n`;
  const out = new Uint8Array(10 + header.length + data.length);
  out.set([0x93, 0x4e, 0x55, 0x4d, 0x50, 0x59, 1, 0, header.length % 256, header.length >> 8]);
  out.set(bytes(header), 10);
  out.set(data, 10 + header.length);
  return out;
}
const doubles = (values: readonly number[]) => new Uint8Array(Float64Array.from(values).buffer);
const range = (n: number, f: (n: number) => number) => Array.from({ length: n }, (_, i) => f(i));

describe('NumPy files', () => {
  it('are read as matrices in either order of elements, and as structured arrays', () => {
    const rowMajor = npy("'<f8'", '(9, 2)', doubles(range(18, (n) => (n % 2 === 0 ? n / 2 : 10 + n))));
    const columnMajor = npy(
      "'<f8'",
      '(9, 2)',
      doubles([...range(9, (n) => n), ...range(9, (n) => 11 + 2 * n)]),
      'True',
    );
    const structured = npy(
      "[('t', '<f8'), ('Ez', '<f8')]",
      '(9,)',
      doubles(range(18, (n) => (n % 2 === 0 ? n / 2 : 10 + n))),
    );
    const header = { header: ['t', 'Ez'] };
    for (const traces of [
      from('a.npy', rowMajor, header),
      from('a.npy', columnMajor, header),
      from('a.npy', structured),
    ]) {
      expect([...traces[0]!.time]).toEqual(range(9, (n) => n));
      expect([...traces[0]!.values]).toEqual(range(9, (n) => 11 + 2 * n));
    }
  });

  it('are read in every width and byte order of real numbers', () => {
    const numbers = range(9, (n) => n);
    const kinds: [string, Uint8Array][] = [
      ['<f4', new Uint8Array(Float32Array.from(numbers).buffer)],
      ['<i4', new Uint8Array(Int32Array.from(numbers).buffer)],
      ['<u2', new Uint8Array(Uint16Array.from(numbers).buffer)],
      ['|i1', new Uint8Array(Int8Array.from(numbers).buffer)],
      ['<i8', new Uint8Array(BigInt64Array.from(numbers.map(BigInt)).buffer)],
      // 0 to 8 as IEEE half floats
      ['<f2', new Uint8Array(Uint16Array.of(0, 0x3c00, 0x4000, 0x4200, 0x4400, 0x4500, 0x4600, 0x4700, 0x4800).buffer)],
      ['>f8', doubles(numbers).slice().reverse()],
    ];
    for (const [descr, data] of kinds) {
      const expected = descr === '>f8' ? [...numbers].reverse() : numbers;
      const files = { 't.npy': npy("'<f8'", '(9,)', doubles(numbers)), 'Ez.npy': npy(`'${descr}'`, '(9,)', data) };
      expect([...from('a.npz', zipSync(files))[0]!.values], descr).toEqual(expected);
    }
  });

  it('are read from an archive: vectors of E and H, names of observers', () => {
    const files = {
      't.npy': npy("'<f8'", '(9,)', doubles(range(9, (n) => n))),
      'E.npy': npy("'<f8'", '(9, 3)', doubles(range(27, (n) => n))),
    };
    const traces = from('a.npz', zipSync(files));
    expect(traces.map(({ component }) => component)).toEqual(['Ex', 'Ey', 'Ez']);
    expect(traces[1]!.values[2]).toBe(7);
  });

  it.each([
    ['a.npy', bytes('nothing of the kind'), /is no .npy file/],
    ['a.npy', npy("'<c16'", '(9,)', doubles(range(18, Number))), /is of type “<c16”/],
    ['a.npy', npy("'<f8'", '(90, 2)', doubles([1])), /holds 8 bytes of data; its header announces 1440/],
    ['a.npy', npy("'<f8'", '(900000000, 2)', doubles([1])), /has 1800000000 elements; at most/],
    ['a.npy', npy("'<f8'", '(9, 2)', doubles(range(18, Number))), /2 columns without names/],
    ['a.npy', npy("'<f8'", '(2, 3, 3)', doubles(range(18, Number))), /has 3 dimensions/],
    ['a.npz', bytes('PK nothing of the kind'), /is no .npz file that can be unpacked/],
    ['a.npz', zipSync({ 'a.txt': bytes('x') }), /is a .npz file without arrays/],
    ['a.npz', zipSync({ 'Ez.npy': npy("'O'", '(9,)', doubles([1])) }), /array “Ez” is of type “O”/],
  ])('are refused: case %#', (name, data, message) => {
    expect(() => from(name, data)).toThrow(message);
  });
});

describe('headers that lie', () => {
  const manyFields = (type: string, count: number) =>
    `[${Array.from({ length: count }, (_, n) => `('a${n}', '${type}')`).join(', ')}]`;
  const zeros = (count: number) => new Uint8Array(count);
  /** Version 2 announces headers of up to 4 GB. */
  const version2 = (header: string) => {
    const out = new Uint8Array(12 + header.length);
    out.set([0x93, ...bytes('NUMPY'), 2, 0]);
    new DataView(out.buffer).setUint32(8, header.length, true);
    out.set(bytes(header), 12);
    return out;
  };

  it.each<[string, () => Uint8Array, RegExp]>([
    ['10¹² elements', () => npy("'<f8'", '(1000000000000,)', zeros(8)), /has 1000000000000 elements; at most/],
    [
      'a product beyond all numbers, times 0',
      () => npy("'<f8'", `(${'100000000000000, '.repeat(30)}0)`, zeros(8)),
      /has 31 dimensions; at most 3/,
    ],
    ['many dimensions of 1', () => npy("'|u1'", `(9, ${'1, '.repeat(900)})`, zeros(9)), /has 901 dimensions/],
    ['elements without data', () => npy("'|S0'", '(20000000,)', zeros(0)), /has texts of 0 characters/],
    ['columns without data', () => npy(manyFields('S0', 99), '(20000000,)', zeros(0)), /has texts of 0 characters/],
    ['many columns', () => npy(manyFields('|u1', 99), '(300000,)', zeros(0)), /has 300000 elements; at most/],
    ['a text as long as the file', () => npy("'|S30000000'", '(1,)', zeros(3e7)), /has texts of 30000000 characters/],
    ['many texts', () => npy("'|S1'", '(3000000,)', zeros(3e6)), /has 3000000 elements; at most/],
    ['a header of megabytes', () => version2('('.repeat(3e6)), /has a header of 3000000 bytes; at most 65535/],
    ['texts without end', () => version2("'\\".repeat(32_000)), /has a header that cannot be read/],
    ['brackets without end', () => version2('['.repeat(60_000)), /has a header that cannot be read/],
  ])('%s: refused at once, and takes no memory', (_, make, message) => {
    const data = make();
    const before = process.memoryUsage();
    const started = performance.now();
    expect(() => from('a.npy', data, { header: ['t'] })).toThrow(message);
    const after = process.memoryUsage();
    expect(performance.now() - started).toBeLessThan(500);
    expect(after.arrayBuffers - before.arrayBuffers).toBeLessThan(1e6);
    expect(after.heapUsed - before.heapUsed).toBeLessThan(30e6);
  });

  it('an archive that is small packed and large in memory is refused by what all of it takes', () => {
    const one = npy("'|u1'", '(9000000,)', zeros(9e6));
    const archive = zipSync({ 'a.npy': one, 'b.npy': one, 'c.npy': one });
    expect(archive.length).toBeLessThan(2e5);
    expect(() => from('a.npz', archive)).toThrow(/array “c” has 9000000 elements; at most 20000000/);
  });

  it('a name that would not show is refused', () => {
    const text = ['t,A\u200b.Ez', ...Array.from({ length: 9 }, (_, n) => `${n},1`)].join('\n');
    expect(() => read(text, { at: { 'A\u200b': [0, 0, 0] } }, known)).toThrow('has U+200B in its name');
  });
});

describe('our own traces', () => {
  it('need no map, and keep every bit', () => {
    const points = samplePoints(Int32Array.of(3, 4, 5), [-0.1, -0.1, -0.1], [0.005, 0.005, 0.005]);
    const instants = instantsOf(40, 9.53e-12);
    const field = { points, instants, values: Float64Array.from({ length: 240 }, (_, i) => Math.sqrt(i) * 1e-3) };
    const own = observerTraces('=A', { grid: field, exact: field }, 0);
    const { traces } = read(
      writeTraces([...own, ...observerTraces('outside', { exact: field }, 0)]),
      {},
      known,
      'traces.csv',
    );
    expect(traces).toEqual(own.map(({ signals, ...trace }) => ({ ...trace, values: signals.grid })));
  });
});

it('whatever a file holds, it is read or refused in words: 1000 drawn files', () => {
  drawn(fuzzTraceReaders(known), 11, 1000);
});
