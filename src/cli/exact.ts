import Papa from 'papaparse';
import { fieldOf } from '../retarded/field.ts';
import { prepareSources } from '../retarded/prepare.ts';
import { Refusal } from '../run/compare.ts';
import { loadScenario } from '../scenario/load.ts';
import { InputError, readInput } from './input.ts';
import { progressLine } from './progress.ts';

const ASKED = ['x', 'y', 'z', 't'] as const;

const COLUMNS = [
  ...ASKED,
  ...['Ex', 'Ey', 'Ez', 'Hx', 'Hy', 'Hz', 'Bx', 'By', 'Bz', 'phi', 'Ax', 'Ay', 'Az', 'errorE', 'errorH'],
];

/** Points evaluated before progress is shown and an interruption is looked for. */
const BATCH = 256;

/**
 * The exact field at the points and instants of a CSV file, as CSV in the same order, SI units.
 * @throws Refusal for a scenario with problems; InputError naming row, column and value of a file that cannot be used,
 *   or row and source of a point that lies on one
 */
export async function exactCommand(scenarioInput: unknown, pointsFile: string, signal: AbortSignal): Promise<string> {
  const loaded = loadScenario(scenarioInput);
  if ('problems' in loaded) throw new Refusal(loaded.problems);
  const { sources, medium } = loaded.scenario;
  const rows = readPoints(pointsFile);
  const at = fieldOf(prepareSources(sources, medium, 'best'));
  const line = progressLine(rows.length < 10 * BATCH);
  const out: (readonly (string | number)[])[] = [COLUMNS];
  try {
    for (let n = 0; n < rows.length; n++) {
      if (n % BATCH === 0) {
        line.show({ stage: 'the exact field', fraction: n / rows.length });
        // Lets an interruption be heard.
        await new Promise((next) => setImmediate(next));
        signal.throwIfAborted();
      }
      const [x, y, z, t] = rows[n]!;
      out.push([x, y, z, t, ...fieldRow(() => at([x, y, z], t), n)]);
    }
  } finally {
    line.end();
  }
  return `${Papa.unparse(out as unknown[][], { newline: '\n' })}\n`;
}

function fieldRow(field: () => ReturnType<ReturnType<typeof fieldOf>>, row: number): number[] {
  try {
    const { E, H, B, phi, A, errorE, errorH } = field();
    return [...E, ...H, ...B, phi, ...A, errorE, errorH];
  } catch (error) {
    if (error instanceof RangeError) throw new InputError(`row ${row + 2}: ${error.message}`);
    throw error;
  }
}

function readPoints(file: string): (readonly [number, number, number, number])[] {
  const { data, meta, errors } = Papa.parse<Record<string, string>>(readInput(file, 'the points file').trim(), {
    header: true,
    skipEmptyLines: true,
  });
  const missing = ASKED.filter((name) => !meta.fields?.includes(name));
  if (missing.length > 0)
    throw new InputError(
      `${file}: the header is “${meta.fields?.join(',') ?? ''}”; it must name the columns x,y,z,t (m and s)`,
    );
  const broken = errors[0];
  if (broken) throw new InputError(`${file}, row ${(broken.row ?? 0) + 2}: ${broken.message}`);
  return data.map((record, n) => {
    const numbers = ASKED.map((name) => {
      const text = (record[name] ?? '').trim();
      const value = Number(text);
      if (text === '' || !Number.isFinite(value))
        throw new InputError(
          `${file}, row ${n + 2}: ${name} is “${text}”; it must be a finite number, ${name === 't' ? 's' : 'm'}`,
        );
      return value;
    });
    return numbers as unknown as readonly [number, number, number, number];
  });
}
