import Papa from 'papaparse';
import { InputError, readInput } from './input.ts';

/** SI units of the columns that files of places, instants, frequencies and directions may have. */
const UNITS: Readonly<Record<string, string>> = {
  x: 'm',
  y: 'm',
  z: 'm',
  t: 's',
  f: 'Hz',
  thetaDeg: 'degrees',
  phiDeg: 'degrees',
};

/**
 * The numbers of a CSV file whose first row names its columns; other columns are left alone.
 * @param asked names of the columns; `t|f` is one that may be either
 * @returns rows in the order of the file, columns in the order asked, and the names that were found
 * @throws InputError naming file, row, column and value of what cannot be used
 */
export function readRows(file: string, asked: readonly string[]): { names: string[]; rows: number[][] } {
  const { data, errors } = Papa.parse<string[]>(readInput(file, 'the points file').trim(), { skipEmptyLines: true });
  const [found = [], ...records] = data;
  const names = asked.map((name) => name.split('|').find((one) => found.includes(one)));
  if (names.includes(undefined)) {
    const units = [...new Set(asked.flatMap((name) => name.split('|')).map((name) => UNITS[name]))].join(' and ');
    throw new InputError(
      `${file}: the header is “${found.join(',')}”; it must name the columns ${asked.join(',').replace('|', ' or ')} (${units})`,
    );
  }
  // A file of one column has no delimiter to detect.
  const broken = errors.find(({ code }) => code !== 'UndetectableDelimiter');
  if (broken) throw new InputError(`${file}, row ${(broken.row ?? 0) + 2}: ${broken.message}`);
  const columns = names as string[];
  const places = columns.map((name) => {
    const place = found.indexOf(name);
    if (found.includes(name, place + 1)) throw new InputError(`${file}: the header names ${name} twice; leave one out`);
    return place;
  });
  const rows = records.map((record, n) => {
    if (record.length !== found.length)
      throw new InputError(`${file}, row ${n + 2}: has ${record.length} cells; the header has ${found.length}`);
    return columns.map((name, c) => {
      const text = record[places[c]!]!.trim();
      const value = Number(text);
      if (text === '' || !Number.isFinite(value))
        throw new InputError(`${file}, row ${n + 2}: ${name} is “${text}”; it must be a finite number, ${UNITS[name]}`);
      return value;
    });
  });
  return { names: columns, rows };
}
