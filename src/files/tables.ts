import Papa from 'papaparse';

/**
 * A scenario with the tables that it names as files read and put in place of their names: `file` of a waveform of type
 * "table" becomes `samples`, `file` of a current of profile "sampled" becomes `positions` and `samples` or, where its first
 * column is `f`, `phasors`.
 * @param scenario the value of a scenario file; what is not as it should be is left to whoever checks scenarios
 * @param read the text of a file named in the scenario
 * @throws RangeError naming key, file, row, column and value of a table that cannot be used; what `read` throws
 */
export function withTables(scenario: unknown, read: (file: string, key: string) => string): unknown {
  if (!isRecord(scenario) || !Array.isArray(scenario.sources)) return scenario;
  const sources = scenario.sources.map((source: unknown, n) => {
    if (!isRecord(source) || !isRecord(source.current)) return source;
    const { current } = source;
    const key = `sources.${n}.current`;
    if (current.profile === 'sampled') return { ...source, current: withRows(current, `${key}.file`, read, true) };
    if (!isRecord(current.waveform) || current.waveform.type !== 'table') return source;
    const waveform = withRows(current.waveform, `${key}.waveform.file`, read, false);
    return { ...source, current: { ...current, waveform } };
  });
  return { ...scenario, sources };
}

const isRecord = (value: unknown): value is Record<string, unknown> =>
  typeof value === 'object' && value !== null && !Array.isArray(value);

function withRows(
  owner: Record<string, unknown>,
  key: string,
  read: (file: string, key: string) => string,
  sampled: boolean,
): Record<string, unknown> {
  const { file, ...rest } = owner;
  if (typeof file !== 'string' || 'samples' in owner) return owner;
  const { header, rows } = numbersOf(read(file, key), `${key}: ${file}`);
  if (!sampled) {
    if (header.length !== 2)
      throw new RangeError(`${key}: ${file} has ${header.length} columns; a table has two, t and I (s and A).`);
    return { ...rest, samples: rows };
  }
  const where = `${key}: ${file}`;
  return header[0]!.trim() === 'f'
    ? { ...rest, positions: phasorPositions(header, where), phasors: rows }
    : { ...rest, positions: header.slice(1).map((name) => arcLength(name, name, where)), samples: rows };
}

/** Arc lengths of a header such as f,0Re,0Im,0.05Re,0.05Im. */
function phasorPositions(header: readonly string[], where: string): number[] {
  const positions: number[] = [];
  header.slice(1).forEach((name, n) => {
    const part = n % 2 === 0 ? 'Re' : 'Im';
    const text = name.trim();
    const s = text.endsWith(part) ? arcLength(text.slice(0, -2), name, where) : Number.NaN;
    if (part === 'Re' && !Number.isNaN(s)) positions.push(s);
    else if (s !== positions.at(-1))
      throw new RangeError(
        `${where} has a column “${name}” where ${part === 'Re' ? 'a real part' : `the imaginary part at ${positions.at(-1)} m`} is due; after f come two columns for each arc length in m, such as 0.05Re,0.05Im.`,
      );
  });
  if (header.length % 2 === 0)
    throw new RangeError(`${where} ends with a real part; its imaginary part, ${positions.at(-1)}Im, is missing.`);
  return positions;
}

function arcLength(text: string, name: string, where: string): number {
  const s = Number(text);
  if (text.trim() === '' || !Number.isFinite(s))
    throw new RangeError(
      `${where} has a column “${name}”; each but the first is headed by its arc length in m, such as 0.05 (by frequency 0.05Re, 0.05Im).`,
    );
  return s;
}

/** Header and numbers of a CSV text. */
function numbersOf(text: string, where: string): { header: string[]; rows: number[][] } {
  const { data } = Papa.parse<string[]>(text.trim(), { skipEmptyLines: true });
  const [header = [], ...lines] = data;
  if (header.every((name) => name.trim() !== '' && Number.isFinite(Number(name))))
    throw new RangeError(`${where} begins with numbers; its first row must name the columns, such as t,I.`);
  const rows = lines.map((line, n) => {
    if (line.length !== header.length)
      throw new RangeError(`${where}, row ${n + 2}: has ${line.length} columns; the header has ${header.length}.`);
    return line.map((cell, column) => {
      const value = Number(cell);
      if (cell.trim() === '' || !Number.isFinite(value))
        throw new RangeError(
          `${where}, row ${n + 2}: ${header[column]} is “${cell.trim()}”; it must be a finite number, ${column > 0 ? 'A' : header[0]!.trim() === 'f' ? 'Hz' : 's'}.`,
        );
      return value;
    });
  });
  return { header, rows };
}
