import { basename } from 'node:path';
import { type Command, InvalidArgumentError } from 'commander';
import { tracesWithinTolerance } from '../compare/judgeResult.ts';
import { readForeignTraces } from '../files/foreignTraces.ts';
import { parseTraceMap, type TraceMap } from '../files/traceMap.ts';
import { JUDGE_FILES, judgeFile, judgeJson, judgeText } from '../report/judge.ts';
import { judgementCases } from '../report/junit.ts';
import { quoted } from '../report/words.ts';
import { type JudgeQuestion, judge, judgeQuestion } from '../run/judge.ts';
import { type GateFlags, gateOf, withGate } from './gate.ts';
import { InputError, readBytes, readInput, readScenario } from './input.ts';
import { keepAndTell, refuseUnwritable, writeFolder } from './output.ts';
import { progressLine } from './progress.ts';

interface JudgeFlags extends GateFlags {
  readonly traces: string;
  readonly out?: string;
  readonly cell?: string;
  readonly map?: string;
  readonly column?: Pairs;
  readonly unit?: Pairs;
  readonly at?: Pairs;
  readonly header?: string;
  readonly timeOffset?: string;
  readonly observer?: string;
  readonly staggered?: boolean;
  readonly json?: boolean;
}

type Pairs = readonly (readonly [string, string])[];

/** Collects KEY=VALUE options. */
const pairs =
  (example: string) =>
  (text: string, before: Pairs = []): Pairs => {
    const at = text.indexOf('=');
    if (at < 1 || at === text.length - 1) throw new InvalidArgumentError(`it is “${text}”; give ${example}.`);
    return [...before, [text.slice(0, at), text.slice(at + 1)] as const];
  };

/** Adds `judge` to the program. @param end is told whether the traces are within the tolerance */
export function addJudgeCommand(program: Command, signal: AbortSignal, end: (within: boolean) => void): void {
  withGate(
    program
      .command('judge')
      .argument('<scenario>', 'a scenario file or a built-in scenario (see `examples`)')
      .description(
        'the traces of any other solver against the exact field at their own places and instants: how far off, what a sound ' +
          'Yee grid would show, and the likeliest cause',
      )
      .requiredOption('--traces <file>', 'required: CSV (our own traces.csv, or any with named columns), .npy or .npz')
      .option('--out <dir>', `write ${JUDGE_FILES.join(', ')} into this folder`)
      .option('--cell <size>', 'cell size of the solver that is judged, such as "5 mm" (default: the scenario’s)')
      .option(
        '--column <what=header>',
        'which column is what: time=T, Ez="Probe 1", A.Hy=col7, x=X (again for each)',
        pairs('WHAT=HEADER, such as Ez="Probe 1"'),
      )
      .option(
        '--unit <of=unit>',
        'unit of columns whose header tells none: time=ns, length=mm, E=kV/m, H=mA/m, B=nT',
        pairs('OF=UNIT, such as time=ns'),
      )
      .option(
        '--at <observer=place>',
        'where an observer is that the scenario does not have: P1="10 mm, 0 mm, 5 mm"',
        pairs('NAME="10 mm, 0 mm, 5 mm"'),
      )
      .option('--observer <name>', 'whose traces these are, where the file does not say')
      .option('--staggered', 'components were read at their own places in the Yee cell of the observer’s nearest node')
      .option('--time-offset <time>', 'added to the times of the file, such as "0.5 ns"')
      .option('--header <names>', 'names of the columns of a file that has none: "t,Ez,Hy"')
      .option('--map <file>', 'all of this as JSON (see `schema map`)')
      .option('--json', 'print the judgement as JSON on standard output, and nothing else there'),
  )
    .addHelpText(
      'after',
      '\nExit status: 0 every trace within the tolerance (and the baseline), 1 outside it, 2 refused, 3 failed.\n' +
        '\nExample: fieldassay compare bench-cable-pulse --out out && fieldassay judge bench-cable-pulse --traces out/traces.csv --out judged\n' +
        'Example: fieldassay judge mine.json --traces probes.csv --unit time=ns --column A.Ez="Probe 1 [V/m]" --cell "4 mm" --out judged\n',
    )
    .action(async (name: string, flags: JudgeFlags) => {
      refuseUnwritable([flags.out], [flags.junit]);
      const gate = gateOf(flags);
      const question = judgeQuestion(readScenario(name), flags.cell === undefined ? undefined : numberOr(flags.cell));
      const { traces, notes } = readGiven(flags, question);
      const line = progressLine(flags.json === true && !process.stderr.isTTY);
      const judged = await judge(question, traces, {
        file: basename(flags.traces),
        notes,
        signal,
        onProgress: line.show,
      }).finally(line.end);
      const { result } = judged;
      await keepAndTell(
        (written) => {
          if (!flags.out) return;
          const command = commandLine(name, flags);
          writeFolder(
            flags.out,
            Object.fromEntries(JUDGE_FILES.map((file) => [file, judgeFile(file, judged, command)])),
          );
          written.push(...JUDGE_FILES.map((file) => `${flags.out}/${file}`));
        },
        (written) =>
          flags.json
            ? judgeJson(result)
            : judgeText(result, { colour: process.stdout.isTTY === true && !process.env.NO_COLOR, written }),
      );
      const held = gate(result, `judge ${name}`, judgementCases(result), result.timings.seconds);
      end(held && tracesWithinTolerance(result));
    });
}

/** The traces of the file that was named. @throws InputError naming the file, and row and column of what cannot be used */
function readGiven(flags: JudgeFlags, { places }: JudgeQuestion) {
  const bytes = readBytes(flags.traces, 'the traces');
  const map = refusing(flags.map ?? 'options', () => mapOf(flags));
  return refusing(flags.traces, () => readForeignTraces(flags.traces, bytes, map, places));
}

function refusing<T>(what: string, job: () => T): T {
  try {
    return job();
  } catch (error) {
    if (error instanceof RangeError) throw new InputError(`${what}: ${error.message}`);
    throw error;
  }
}

/** The map as the file has it, with what the command line says on top. */
function mapOf(flags: JudgeFlags): TraceMap {
  const { map, column = [], unit = [], at = [], header, timeOffset, observer, staggered } = flags;
  const base = map === undefined ? {} : parseTraceMap(jsonOf(map));
  const places = at.map(([name, place]) => [name, place.split(',').map((x) => numberOr(x.trim()))]);
  return parseTraceMap({
    ...base,
    ...(header === undefined ? {} : { header: header.split(',').map((name) => name.trim()) }),
    ...(column.length === 0 ? {} : { columns: { ...base.columns, ...Object.fromEntries(column) } }),
    ...(unit.length === 0 ? {} : { units: { ...base.units, ...Object.fromEntries(unit) } }),
    ...(at.length === 0 ? {} : { at: { ...base.at, ...Object.fromEntries(places) } }),
    ...(timeOffset === undefined ? {} : { timeOffset: numberOr(timeOffset) }),
    ...(observer === undefined ? {} : { observer }),
    ...(staggered ? { positions: 'staggered' } : {}),
  });
}

/** A bare number is in SI units, as in a scenario file. */
const numberOr = (text: string): number | string =>
  text.trim() !== '' && Number.isFinite(Number(text)) ? Number(text) : text;

function jsonOf(file: string): unknown {
  try {
    return JSON.parse(readInput(file, 'the map'));
  } catch (error) {
    if (error instanceof SyntaxError) throw new InputError(`the map ${file} is no JSON: ${error.message}`);
    throw error;
  }
}

function commandLine(name: string, flags: JudgeFlags): string {
  const { traces, out, cell, column, unit, at, header, timeOffset, observer, staggered, map } = flags;
  const one = (flag: string, value: string | undefined) => (value === undefined ? '' : ` --${flag} ${quoted(value)}`);
  const many = (flag: string, list: Pairs = []) =>
    list.map(([key, value]) => ` --${flag} ${quoted(`${key}=${value}`)}`).join('');
  return (
    `npx fieldassay judge ${quoted(name)}${one('traces', traces)}${one('map', map)}${many('column', column)}` +
    `${many('unit', unit)}${many('at', at)}${one('header', header)}${one('time-offset', timeOffset)}` +
    `${one('observer', observer)}${staggered ? ' --staggered' : ''}${one('cell', cell)}${one('out', out)}`
  );
}
