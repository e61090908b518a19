import { Argument, type Command, InvalidArgumentError } from 'commander';
import Papa from 'papaparse';
import { DERIVED, type Derived, type DerivedName, derivedSchema, type Quantity } from '../derived/catalogue.ts';
import { formatQuantity } from '../elementary/quantity.ts';
import { Refusal } from '../run/compare.ts';
import { loadScenario } from '../scenario/load.ts';
import { jsonText } from '../scenario/text.ts';
import { InputError, readScenario } from './input.ts';
import { refuseUnwritable, writeWhole } from './output.ts';
import { readRows } from './rows.ts';
import { Walk } from './walk.ts';

interface DeriveFlags {
  readonly at: string;
  readonly out?: string;
  readonly steady?: boolean;
  readonly instants: number;
  readonly json?: boolean;
}

const NAMES = Object.keys(DERIVED) as DerivedName[];

/** Instants of a voltage or a flux. */
const INSTANTS = 200;
const MOST_INSTANTS = 100_000;

function instantCount(text: string): number {
  const n = Number(text);
  if (!Number.isInteger(n) || n < 1 || n > MOST_INSTANTS)
    throw new InvalidArgumentError(`it is “${text}”; give a whole number from 1 to ${MOST_INSTANTS}.`);
  return n;
}

/** Adds `derive` to the program. */
export function addDeriveCommand(program: Command, signal: AbortSignal): void {
  program
    .command('derive')
    .argument('<scenario>', 'a scenario file or a built-in scenario (see `examples`)')
    .addArgument(new Argument('<quantity>', 'what to derive').choices(NAMES))
    .description('what follows from the exact field: far field, radiation, pulse, spectrum, voltage, flux, parts')
    .requiredOption('--at <file>', 'required: CSV whose header names the columns that the quantity asks for (below)')
    .option('--out <file>', 'CSV to write, each column headed by its name and unit (default: standard output)')
    .option(
      '--steady',
      'where frequencies are asked for: the steady state, every waveform amplitude · e^(+jωt), a current given by frequency its phasor',
    )
    .option('--instants <n>', 'instants of voltage and flux, evenly over the duration', instantCount, INSTANTS)
    .option('--json', 'print columns, rows and findings as JSON on standard output, and nothing else there')
    .addHelpText(
      'after',
      `\nQuantities, the columns they ask for (m, s, Hz, degrees), and what they give:\n${quantityLines().join('\n')}\n` +
        '\nExample: fieldassay derive small-loop far-field --at directions.csv --out far.csv' +
        '\nExample: fieldassay derive centre-fed-wire radiation --at frequencies.csv --steady\n',
    )
    .action(async (name: string, quantity: DerivedName, flags: DeriveFlags) => {
      refuseUnwritable([], [flags.out]);
      const derived = await deriveCommand(readScenario(name), quantity, flags, signal);
      if (flags.out) writeWhole(flags.out, derivedCsv(derived));
      if (flags.json) process.stdout.write(jsonText(derivedSchema.parse(derived)));
      else if (!flags.out) process.stdout.write(derivedCsv(derived));
      process.stderr.write(findingLines(derived));
    });
}

function quantityLines(): string[] {
  return Object.entries<Quantity>(DERIVED).map(
    ([name, { asks, about }]) => `  ${name.padEnd(11)}${asks.join(',').replace('|', ' or ').padEnd(25)}${about}`,
  );
}

/**
 * One derived quantity of a scenario as a table.
 * @throws Refusal for a scenario with problems; InputError naming row, column and value of a file that cannot be used, or
 *   what of it lies on a source
 */
export async function deriveCommand(
  scenarioInput: unknown,
  name: DerivedName,
  { at, steady, instants }: DeriveFlags,
  signal: AbortSignal,
): Promise<Derived> {
  const quantity: Quantity = DERIVED[name];
  const { names, rows: asked } = readRows(at, quantity.asks);
  const steadyAlone = steady === true && names.at(-1) === 'f';
  const loaded = loadScenario(scenarioInput, steadyAlone ? 'frequency' : 'time');
  if ('problems' in loaded) throw new Refusal(loaded.problems);
  if (asked.length < quantity.least)
    throw new InputError(`${at} has ${asked.length} rows; ${name} needs at least ${quantity.least}.`);
  const drive = steady ? 'steady' : 'pulse';
  const walk = new Walk(signal);
  try {
    const work = guarded(() => quantity.begin(loaded.scenario, asked, names.at(-1)!, { drive, instants }));
    const rows = await walk.map(`${name}, row by row`, work.items, (item) => work.row(item), work.items === asked);
    const findings = guarded(() => work.findings(rows));
    return { quantity: name, drive, columns: work.columns, rows, findings };
  } finally {
    walk.end();
  }
}

/** What a quantity refuses as a whole: a path across a source, a current that jumps. */
function guarded<T>(make: () => T): T {
  try {
    return make();
  } catch (error) {
    if (error instanceof RangeError) throw new InputError(error.message);
    throw error;
  }
}

/** The table as CSV, columns headed by name and unit: `peak [V/m]`; empty cells where there is no value. */
export function derivedCsv({ columns, rows }: Derived): string {
  const header = columns.map(({ name, unit }) => (unit === '' ? name : `${name} [${unit}]`));
  return `${Papa.unparse([header, ...rows] as unknown[][], { newline: '\n' })}\n`;
}

/** What is said of all rows together, a line each. */
function findingLines({ findings }: Derived): string {
  return findings
    .map(
      ({ name, unit, value, meaning }) =>
        `${name}: ${value === null ? '—' : formatQuantity(value, unit, 6)}  (${meaning})\n`,
    )
    .join('');
}
