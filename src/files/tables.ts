import Papa from 'papaparse';

/**
 * A scenario with the tables that it names as files read and put in place of their names: `file` of a waveform of type
 * "table" becomes `samples`, `file` of a current of profile "sampled" becomes `positions` and `samples`.
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
  const positions = header.slice(1).map((name) => {
    const s = Number(name);
    if (name.trim() === '' || !Number.isFinite(s))
      throw new RangeError(
        `${key}: ${file} has a column “${name}”; each but the first is headed by its arc length in m, such as 0.05.`,
      );
    return s;
  });
  return { ...rest, positions, samples: rows };
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
          `${where}, row ${n + 2}: ${header[column]} is “${cell.trim()}”; it must be a finite number, ${column === 0 ? 's' : 'A'}.`,
        );
      return value;
    });
  });
  return { header, rows };
}
