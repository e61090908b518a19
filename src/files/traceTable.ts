import Papa from 'papaparse';
import { type NpyArray, readNpy, readNpz } from './npyReader.ts';

/** What a file of traces holds before anyone knows what its columns mean: named columns of equal length. */
export interface TraceTable {
  readonly columns: readonly TableColumn[];
  readonly rows: number;
  /** how a message names row n: "row 17", or "element 3" of an array */
  readonly place: (row: number) => string;
}

export interface TableColumn {
  readonly name: string;
  /** texts as they stand in a CSV file, or numbers of an array */
  readonly cells: readonly string[] | Float64Array;
}

const isNumber = (cell: string): boolean => cell.trim() !== '' && Number.isFinite(Number(cell));

/** Longest name of a column that a message shows in full. */
const shownName = (name: string): string => (name.length > 60 ? `${name.slice(0, 60)}…` : name);

/**
 * The columns of a text: comma, semicolon, tab or bar between them, or blanks. Lines that begin with # or % are comments;
 * where the first other line is numbers alone, the last comment before it names the columns.
 * @param header names of the columns of a text that has none
 * @throws RangeError naming row and column of what is not as it should be
 */
export function csvTable(text: string, header?: readonly string[]): TraceTable {
  const lines = text.replace(/^\ufeff/, '').split(/\r\n|\n|\r/);
  const isComment = (line: string) => /^\s*[#%]/.test(line);
  const first = lines.findIndex((line) => line.trim() !== '' && !isComment(line));
  if (first < 0) throw new RangeError('holds no rows');
  const delimiter = delimiterOf(lines[first]!);
  const cellsOf = (line: string) =>
    delimiter === ' '
      ? line.trim().split(/\s+/)
      : (Papa.parse<string[]>(line, { delimiter }).data[0] ?? []).map((cell) => cell.trim());
  const opening = cellsOf(lines[first]!);
  const numbersFirst = opening.every((cell) => cell === '' || isNumber(cell));
  const comment = lines.slice(0, first).findLast((line) => line.trim() !== '');
  let names: readonly string[];
  let start = first;
  if (header) {
    names = header;
    if (!numbersFirst) start = first + 1;
  } else if (!numbersFirst) {
    names = opening;
    start = first + 1;
  } else if (comment !== undefined) {
    const words = comment.replace(/^\s*[#%]+\s*/, '');
    names =
      Papa.parse<string[]>(words, { delimiter: delimiterOf(words) === ' ' ? ' ' : delimiterOf(words) }).data[0] ?? [];
    if (delimiterOf(words) === ' ') names = words.trim().split(/\s+/);
  } else
    throw new RangeError(
      `row ${first + 1} begins with numbers; the first row must name the columns, such as t,Ez (or give their names: "header" in the map)`,
    );
  names = names.map((name) => name.trim());
  if (names.length !== opening.length)
    throw new RangeError(`row ${first + 1} has ${opening.length} columns; ${names.length} are named`);
  const columns = names.map(() => [] as string[]);
  const numbers: number[] = [];
  for (let n = start; n < lines.length; n++) {
    const line = lines[n]!;
    if (line.trim() === '' || isComment(line)) continue;
    const cells = cellsOf(line);
    if (cells.length !== names.length)
      throw new RangeError(`row ${n + 1} has ${cells.length} columns; ${names.length} are named`);
    cells.forEach((cell, c) => {
      columns[c]!.push(cell);
    });
    numbers.push(n + 1);
  }
  return {
    columns: names.map((name, c) => ({ name, cells: columns[c]! })),
    rows: numbers.length,
    place: (row) => `row ${numbers[row]}`,
  };
}

/** What stands between the columns of a line. */
function delimiterOf(line: string): string {
  return [',', ';', '\t', '|'].find((mark) => line.includes(mark)) ?? ' ';
}

/**
 * The columns of a `.npy` file: fields of a structured type, or the columns of a matrix, which `header` names.
 * @throws RangeError saying what of the file is not as it should be
 */
export function npyTable(bytes: Uint8Array, header?: readonly string[]): TraceTable {
  return tableOf(columnsOf(readNpy(bytes), '', header));
}

/**
 * The columns of a `.npz` file: arrays of one dimension under their names, of two with one name a column: those of an array
 * named E, H or B are its x, y and z components.
 * @throws RangeError saying what of the file is not as it should be
 */
export function npzTable(bytes: Uint8Array): TraceTable {
  return npzColumns(readNpz(bytes));
}

/** The same of arrays that were read already. */
export function npzColumns(arrays: ReadonlyMap<string, NpyArray>): TraceTable {
  return tableOf([...arrays].flatMap(([name, array]) => columnsOf(array, name)));
}

function tableOf(columns: readonly TableColumn[]): TraceTable {
  const rows = columns[0]?.cells.length ?? 0;
  for (const { name, cells } of columns)
    if (cells.length !== rows)
      throw new RangeError(
        `“${shownName(name)}” has ${cells.length} elements, “${shownName(columns[0]!.name)}” has ${rows}; all columns must be equally long`,
      );
  return { columns, rows, place: (row) => `element ${row}` };
}

/** Most columns that an array may have: what is judged is traces. */
const MOST_COLUMNS = 10_000;

function columnsOf({ shape, fields }: NpyArray, name: string, header?: readonly string[]): TableColumn[] {
  const shown = name === '' ? 'the array' : `array “${shownName(name)}”`;
  if (shape.length !== 1 && shape.length !== 2)
    throw new RangeError(`${shown} has ${shape.length} dimensions; columns have one, a table has two (rows, columns)`);
  const [rows, width = 1] = shape as [number, number?];
  if (width > MOST_COLUMNS) throw new RangeError(`${shown} has ${width} columns; at most ${MOST_COLUMNS} are read`);
  if (fields.length > 1 || fields[0]?.name) {
    if (shape.length !== 1) throw new RangeError(`${shown} is a table of structures; give one row of them`);
    return fields.map((field) => ({ name: name === '' ? field.name : `${name}.${field.name}`, cells: field.values }));
  }
  const values = fields[0]!.values;
  if (shape.length === 1) return [{ name: header?.[0] ?? name, cells: values }];
  if (header && header.length !== width)
    throw new RangeError(`${shown} has ${width} columns; ${header.length} are named`);
  if (!header && name === '')
    throw new RangeError(`${shown} has ${width} columns without names; name them: "header" in the map, or --header`);
  const isVector = /(^|[^A-Za-z])[EHB]$/.test(name) && width === 3;
  return Array.from({ length: width }, (_, c) => ({
    name: header?.[c] ?? (isVector ? `${name}${'xyz'[c]}` : `${name}.${c}`),
    cells:
      values instanceof Float64Array
        ? Float64Array.from({ length: rows }, (_, n) => values[n * width + c]!)
        : Array.from({ length: rows }, (_, n) => values[n * width + c]!),
  }));
}
