import { strFromU8, unzipSync } from 'fflate';

/**
 * NumPy's `.npy` (format versions 1 to 3, "numpy.lib.format") and `.npz` (a zip of them), as far as sampled fields come in
 * them: real numbers of any width and either byte order, texts (names of observers), and structured types of both. A
 * reader of our own, since those on offer bring a client of the network along and know no structured types.
 */
export interface NpyArray {
  readonly shape: readonly number[];
  /** one without a name, or one for each field of a structured type; elements in C order */
  readonly fields: readonly { readonly name: string; readonly values: NpyValues }[];
}

export type NpyValues = Float64Array | readonly string[];

/**
 * What is judged is traces, not volumes: the largest number of values in a file, whatever it claims, and of bytes that an
 * archive unpacks to. So a file takes 8·MOST_VALUES + MOST_BYTES beside itself at most, 560 MB.
 */
const MOST_VALUES = 2e7;
export const MOST_BYTES = 4e8;

/** A text counts as so many values: that is the room it takes. */
const VALUES_A_TEXT = 8;

/** Characters of a text at most: it is a name. */
const LONGEST_TEXT = 1000;

/** Dimensions at most, and bytes of a header: what version 1 can announce. */
const MOST_DIMENSIONS = 3;
const LONGEST_HEADER = 65_535;

/** A scalar type: its letter, its size in bytes, and how one element is read. */
interface Scalar {
  readonly size: number;
  readonly isText: boolean;
  read(view: DataView, at: number): number | string;
}

/**
 * An array from the bytes of a `.npy` file.
 * @throws RangeError saying what of the file is not as it should be
 */
export function readNpy(bytes: Uint8Array): NpyArray {
  return readArray(bytes, { values: MOST_VALUES });
}

/** @param room for values that is left, from which it takes its own */
function readArray(bytes: Uint8Array, room: { values: number }): NpyArray {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  if (bytes.length < 12 || strFromU8(bytes.subarray(0, 6), true) !== '\x93NUMPY')
    throw new RangeError('is no .npy file: it does not begin with \\x93NUMPY');
  const major = view.getUint8(6);
  if (major < 1 || major > 3) throw new RangeError(`is of .npy version ${major}; versions 1 to 3 can be read`);
  const start = major === 1 ? 10 : 12;
  const length = major === 1 ? view.getUint16(8, true) : view.getUint32(8, true);
  if (start + length > bytes.length) throw new RangeError('ends within its header');
  if (length > LONGEST_HEADER)
    throw new RangeError(`has a header of ${length} bytes; at most ${LONGEST_HEADER} are read`);
  const header = literal(strFromU8(bytes.subarray(start, start + length), major < 3));
  if (!isRecord(header)) throw new RangeError('has a header that is no dictionary');
  const { descr, fortran_order: fortran, shape } = header;
  if (!Array.isArray(shape) || !shape.every((n): n is number => Number.isSafeInteger(n) && (n as number) >= 0))
    throw new RangeError('has a header without a shape');
  if (shape.length > MOST_DIMENSIONS)
    throw new RangeError(`has ${shape.length} dimensions; at most ${MOST_DIMENSIONS} are read`);
  const count = shape.reduce((product, n) => product * n, 1);
  const layout = layoutOf(descr);
  const values = layout.fields.reduce((sum, { scalar }) => sum + (scalar.isText ? VALUES_A_TEXT : 1), 0) * count;
  if (values > room.values)
    throw new RangeError(
      `has ${count} elements; at most ${MOST_VALUES} are read, over all columns and arrays, and each text counts as ${VALUES_A_TEXT}`,
    );
  const needed = count * layout.size;
  const data = start + length;
  if (data + needed > bytes.length)
    throw new RangeError(`holds ${bytes.length - data} bytes of data; its header announces ${needed}`);
  room.values -= values;
  const order = fortran === true && shape.length > 1 ? fortranOrder(shape, count) : undefined;
  const fields = layout.fields.map(({ name, offset, scalar }) => {
    const read = (n: number) => scalar.read(view, data + (order ? order[n]! : n) * layout.size + offset);
    const values = scalar.isText
      ? Array.from({ length: count }, (_, n) => read(n) as string)
      : Float64Array.from({ length: count }, (_, n) => read(n) as number);
    return { name, values };
  });
  return { shape, fields };
}

/**
 * The arrays of a `.npz` file by their names.
 * @throws RangeError saying what of the file is not as it should be
 */
export function readNpz(bytes: Uint8Array): Map<string, NpyArray> {
  let unpacked = 0;
  let files: Record<string, Uint8Array>;
  try {
    files = unzipSync(bytes, {
      filter: ({ name, originalSize }) => {
        if (!name.endsWith('.npy')) return false;
        unpacked += originalSize;
        if (unpacked > MOST_BYTES)
          throw new RangeError(`unpacks to more than ${MOST_BYTES} bytes; give the traces that are to be judged alone`);
        return true;
      },
    });
  } catch (error) {
    if (error instanceof RangeError && error.message.startsWith('unpacks')) throw error;
    throw new RangeError(`is no .npz file that can be unpacked: ${(error as Error).message}`);
  }
  const arrays = new Map<string, NpyArray>();
  const room = { values: MOST_VALUES };
  for (const [file, content] of Object.entries(files)) {
    const name = file.slice(0, -'.npy'.length);
    try {
      arrays.set(name, readArray(content, room));
    } catch (error) {
      throw new RangeError(`array “${name}” ${(error as Error).message}`);
    }
  }
  if (arrays.size === 0) throw new RangeError('is a .npz file without arrays');
  return arrays;
}

const isRecord = (value: unknown): value is Record<string, unknown> =>
  typeof value === 'object' && value !== null && !Array.isArray(value);

/** Where element n in C order lies in Fortran order. */
function fortranOrder(shape: readonly number[], count: number): Uint32Array {
  const order = new Uint32Array(count);
  const index = new Uint32Array(shape.length);
  for (let n = 0; n < count; n++) {
    let at = 0;
    for (let d = shape.length - 1; d >= 0; d--) at = at * shape[d]! + index[d]!;
    order[n] = at;
    for (let d = shape.length - 1; d >= 0; d--) {
      index[d]!++;
      if (index[d]! < shape[d]!) break;
      index[d] = 0;
    }
  }
  return order;
}

interface Layout {
  readonly size: number;
  readonly fields: readonly { readonly name: string; readonly offset: number; readonly scalar: Scalar }[];
}

function layoutOf(descr: unknown): Layout {
  if (typeof descr === 'string') {
    const scalar = scalarOf(descr);
    return { size: scalar.size, fields: [{ name: '', offset: 0, scalar }] };
  }
  if (!Array.isArray(descr) || descr.length === 0) throw new RangeError('has a header without a type');
  let size = 0;
  const fields = descr.map((entry: unknown) => {
    if (!Array.isArray(entry) || entry.length !== 2 || typeof entry[0] !== 'string' || typeof entry[1] !== 'string')
      throw new RangeError('has a structured type with nested fields; give columns of numbers');
    const scalar = scalarOf(entry[1]);
    const offset = size;
    size += scalar.size;
    return { name: entry[0], offset, scalar };
  });
  return { size, fields: fields.filter(({ name }) => name !== '') };
}

function scalarOf(descr: string): Scalar {
  const [, order, kind, digits] = /^([<>=|]?)([a-zA-Z?])(\d*)$/.exec(descr) ?? [];
  const refuse = () =>
    new RangeError(
      `is of type “${descr.slice(0, 20)}”; real numbers and texts can be read (float, int, uint, bool, U, S)`,
    );
  if (kind === undefined) throw refuse();
  const little = order !== '>';
  const width = digits === '' ? 1 : Number(digits);
  const words = (bytes: number, codeAt: (view: DataView, at: number) => number): Scalar => {
    if (width < 1 || width > LONGEST_TEXT)
      throw new RangeError(`has texts of ${width} characters; those of 1 to ${LONGEST_TEXT} are read`);
    return { size: bytes * width, isText: true, read: (v, at) => text(width, (n) => codeAt(v, at + bytes * n)) };
  };
  const numeric = (size: number, read: (view: DataView, at: number) => number): Scalar => {
    if (width !== size) throw refuse();
    return { size, isText: false, read };
  };
  switch (`${kind}${'fiu'.includes(kind) ? width : ''}`) {
    case 'f8':
      return numeric(8, (v, at) => v.getFloat64(at, little));
    case 'f4':
      return numeric(4, (v, at) => v.getFloat32(at, little));
    case 'f2':
      return numeric(2, (v, at) => half(v.getUint16(at, little)));
    case 'i1':
      return numeric(1, (v, at) => v.getInt8(at));
    case 'i2':
      return numeric(2, (v, at) => v.getInt16(at, little));
    case 'i4':
      return numeric(4, (v, at) => v.getInt32(at, little));
    case 'i8':
      return numeric(8, (v, at) => Number(v.getBigInt64(at, little)));
    case 'u1':
      return numeric(1, (v, at) => v.getUint8(at));
    case 'u2':
      return numeric(2, (v, at) => v.getUint16(at, little));
    case 'u4':
      return numeric(4, (v, at) => v.getUint32(at, little));
    case 'u8':
      return numeric(8, (v, at) => Number(v.getBigUint64(at, little)));
    case 'b':
    case '?':
      return numeric(1, (v, at) => v.getUint8(at));
    case 'S':
      return words(1, (v, at) => v.getUint8(at));
    case 'U':
      return words(4, (v, at) => v.getUint32(at, little));
    default:
      throw refuse();
  }
}

/** Characters up to the zeros that fill the element up; what is no character is shown as one. */
function text(width: number, codeAt: (n: number) => number): string {
  const codes = Array.from({ length: width }, (_, n) => codeAt(n));
  while (codes.at(-1) === 0) codes.pop();
  return codes.map((code) => (code <= 0x10ffff ? String.fromCodePoint(code) : '\ufffd')).join('');
}

/** IEEE 754 binary16. */
function half(bits: number): number {
  const sign = bits & 0x8000 ? -1 : 1;
  const exponent = (bits >> 10) & 0x1f;
  const fraction = bits & 0x3ff;
  if (exponent === 0x1f) return fraction === 0 ? sign * Number.POSITIVE_INFINITY : Number.NaN;
  let scale = 2 ** -24;
  for (let n = 1; n < exponent; n++) scale *= 2;
  return sign * scale * (exponent === 0 ? fraction : fraction + 0x400);
}

/** Nested brackets deeper than this are no header. */
const DEEPEST = 8;

/**
 * The Python literal that a header is: a dictionary of texts, whole numbers, True, False, tuples and lists.
 * @throws RangeError where it is none
 */
function literal(source: string): unknown {
  const broken = () => new RangeError('has a header that cannot be read');
  const tokens: string[] = [];
  // One after the other, so that a text without an end is looked through once.
  const token = /\s*('(?:[^'\\]|\\.)*'|"(?:[^"\\]|\\.)*"|[()[\]{},:]|[^\s()[\]{},:'"]+)/y;
  for (const end = source.trimEnd().length; token.lastIndex < end; ) {
    const [, found] = token.exec(source) ?? [];
    if (found === undefined) throw broken();
    tokens.push(found);
  }
  let next = 0;
  const list = (close: string, depth: number): unknown[] => {
    const items: unknown[] = [];
    while (tokens[next] !== close) {
      items.push(value(depth));
      if (tokens[next] === ',') next++;
      else if (tokens[next] !== close) throw broken();
    }
    next++;
    return items;
  };
  const value = (depth: number): unknown => {
    const token = tokens[next++];
    if (token === undefined || depth > DEEPEST) throw broken();
    if (token === '(') return list(')', depth + 1);
    if (token === '[') return list(']', depth + 1);
    if (token === '{') {
      const entries: [string, unknown][] = [];
      while (tokens[next] !== '}') {
        const key = value(depth + 1);
        if (typeof key !== 'string' || tokens[next++] !== ':') throw broken();
        entries.push([key, value(depth + 1)]);
        if (tokens[next] === ',') next++;
        else if (tokens[next] !== '}') throw broken();
      }
      next++;
      return Object.fromEntries(entries);
    }
    if (token[0] === "'" || token[0] === '"') return token.slice(1, -1).replace(/\\(.)/g, '$1');
    if (token === 'True' || token === 'False') return token === 'True';
    if (/^\d{1,15}L?$/.test(token)) return Number.parseInt(token, 10);
    throw broken();
  };
  return value(0);
}
