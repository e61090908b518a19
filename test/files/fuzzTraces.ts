import fc from 'fast-check';
import { strToU8, zipSync } from 'fflate';
import { type KnownPlaces, readForeignTraces } from '../../src/files/foreignTraces.ts';
import { type TraceMap, traceMapSchema } from '../../src/files/traceMap.ts';

const cell = fc.oneof(
  fc.double().map(String),
  fc.integer().map(String),
  fc.constantFrom('', 'nan', 'NaN', '1e999', '-', '=1+1', '"', '1,5', '\u001b[31m', '<script>', '__proto__'),
  fc.string({ maxLength: 8 }),
);
const head = fc.oneof(
  fc.constantFrom(
    't',
    'time (ns)',
    'Ez',
    'A.Ez [kV/m]',
    'far_Hy',
    'Bx',
    'x',
    'y',
    'z',
    'observer',
    'component',
    'value',
  ),
  fc.constantFrom('__proto__', 'constructor', 'E', 't []', '(', 'Ez (', '#t'),
  fc.string({ maxLength: 10 }),
);
const csv = fc
  .tuple(
    fc.constantFrom(',', ';', '\t', ' ', '|'),
    fc.constantFrom('\n', '\r\n'),
    fc
      .integer({ min: 1, max: 5 })
      .chain((n) =>
        fc.tuple(
          fc.array(head, { minLength: n, maxLength: n }),
          fc.array(fc.array(cell, { minLength: n, maxLength: n }), { maxLength: 14 }),
        ),
      ),
  )
  .map(([mark, end, [header, body]]) => strToU8([header, ...body].map((line) => line.join(mark)).join(end)));

/** Tables that are nearly right, so that readers get past the header. */
const nearly = fc
  .tuple(
    fc.array(cell, { minLength: 1, maxLength: 3 }),
    fc.integer({ min: 0, max: 20 }),
    fc.array(fc.double(), { minLength: 10, maxLength: 24 }),
  )
  .map(([odd, at, numbers]) => {
    const lines = numbers.map((v, n) => `${n},${v},${-v}`);
    lines[at % lines.length] = [...odd, '1', '2'].slice(0, 3).join(',');
    return strToU8(['t (ns),A.Ez,far.Hy (mA/m)', ...lines].join('\n'));
  });

const npyHeader = fc
  .tuple(
    fc.constantFrom(
      "'<f8'",
      "'>f4'",
      "'<U3'",
      "'|S2'",
      "'O'",
      "[('t', '<f8'), ('Ez', '<f4')]",
      "[('t', '<f8', (2,))]",
      "''",
      '(',
    ),
    fc.constantFrom('(9,)', '(9, 2)', '()', '(0, 2)', '(1000000000000, 9)', '(3, 3, 3)', '(-1,)', '[', '(9, 2'),
    fc.constantFrom('True', 'False', '0'),
  )
  .map(([descr, shape, fortran]) => `{'descr': ${descr}, 'fortran_order': ${fortran}, 'shape': ${shape}, }\n`);
const npy = fc
  .tuple(npyHeader, fc.constantFrom(1, 2, 3, 9), fc.uint8Array({ maxLength: 160 }), fc.integer({ min: -3, max: 3 }))
  .map(([header, major, data, off]) => {
    const start = major === 1 ? 10 : 12;
    const out = new Uint8Array(start + header.length + data.length);
    const length = Math.max(0, header.length + (off === 3 ? 7 : 0));
    out.set([0x93, 0x4e, 0x55, 0x4d, 0x50, 0x59, major, 0, length % 256, length >> 8]);
    out.set(strToU8(header), start);
    out.set(data, start + header.length);
    return out;
  });
const npz = fc
  .dictionary(fc.constantFrom('t.npy', 'Ez.npy', 'E.npy', 'observer.npy', 'a.txt', '../x.npy'), npy, { maxKeys: 4 })
  .map((files) => zipSync(files));

/** A few bytes of anything replaced. */
const spoilt = fc
  .tuple(fc.oneof(csv, nearly, npy, npz), fc.array(fc.tuple(fc.nat(), fc.nat(255)), { maxLength: 4 }))
  .map(([bytes, changes]) => {
    const out = bytes.slice();
    for (const [at, value] of changes) if (out.length > 0) out[at % out.length] = value;
    return out;
  });

const map = fc.record(
  {
    header: fc.array(head, { maxLength: 3 }),
    columns: fc.dictionary(head, head, { maxKeys: 2 }),
    units: fc.record({ time: fc.constantFrom('ns', 'm', '', 'x'.repeat(99)) }, { requiredKeys: [] }),
    timeOffset: fc.oneof(fc.double({ noNaN: true, noDefaultInfinity: true }), fc.constantFrom('1 ns', '1 m')),
    observer: fc.constantFrom('A', 'far', '__proto__'),
    positions: fc.constantFrom('observer' as const, 'staggered' as const),
  },
  { requiredKeys: [] },
);

/** Every drawn file and map ends in traces of finite numbers, ascending in time, or in a RangeError with words. */
export function fuzzTraceReaders(known: KnownPlaces) {
  return fc.property(
    fc.constantFrom('a.csv', 'a.npy', 'a.npz', 'a', 'traces.csv'),
    fc.oneof(csv, nearly, npy, npz, spoilt, fc.uint8Array({ maxLength: 60 })),
    fc.oneof({ weight: 3, arbitrary: fc.constant({}) }, { weight: 1, arbitrary: map }),
    (name, bytes, mapped) => {
      const parsed = traceMapSchema.safeParse(mapped);
      if (!parsed.success) return;
      try {
        for (const { time, values, at } of readForeignTraces(name, bytes, parsed.data as TraceMap, known).traces) {
          if (time.length !== values.length || !at.every(Number.isFinite)) throw new Error('a broken trace');
          time.forEach((t, n) => {
            if (!Number.isFinite(t) || !Number.isFinite(values[n]!) || (n > 0 && !(t > time[n - 1]!)))
              throw new Error(`sample ${n}: ${values[n]} at ${t}`);
          });
        }
      } catch (error) {
        if (!(error instanceof RangeError) || error.message.length < 10) throw error;
        if (/Maximum call stack|Invalid (array|typed)/.test(error.message)) throw error;
      }
    },
  );
}
