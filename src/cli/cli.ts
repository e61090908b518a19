import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { type Argument, Command, CommanderError, InvalidArgumentError, Option } from 'commander';
import { threadsAvailable } from '#platform';
import { judgeJsonSchema } from '../compare/judgeResult.ts';
import { type Result, withinTolerance } from '../compare/result.ts';
import { derivedJsonSchema } from '../derived/catalogue.ts';
import { writeTracesNpz } from '../files/npz.ts';
import { traceMapJsonSchema } from '../files/traceMap.ts';
import { chartFiles, RESULT_FILES, resultFile, tracesOf } from '../report/folder.ts';
import { resultJson } from '../report/json.ts';
import { comparisonCases } from '../report/junit.ts';
import { resultText } from '../report/text.ts';
import { quoted } from '../report/words.ts';
import { type Comparison, compareSolvers, Refusal, withTeam } from '../run/compare.ts';
import type { Team } from '../run/pool.ts';
import type { Progress } from '../run/progress.ts';
import { VERSION } from '../run/version.ts';
import { EXAMPLES, type ExampleName } from '../scenario/examples.ts';
import { scenarioJsonSchema } from '../scenario/schema.ts';
import { surveyJsonSchema } from '../scenario/survey.ts';
import { jsonText, printable, textOf } from '../scenario/text.ts';
import { currentsCommand } from './currents.ts';
import { addDeriveCommand } from './derive.ts';
import { disagreementText, type ExactOptions, exactCommand, ROUTES } from './exact.ts';
import { frameFiles } from './frames.ts';
import { type GateFlags, gateOf, withGate } from './gate.ts';
import { InputError, readScenario } from './input.ts';
import { Interrupted } from './interrupted.ts';
import { addJudgeCommand } from './judge.ts';
import { keepAndTell, refuseUnwritable, unwritable, writeFolder, writeWhole } from './output.ts';
import { addPlanCommand } from './plan.ts';
import { progressLine } from './progress.ts';
import { addWorkCommand } from './queue.ts';
import { servePage } from './serve.ts';
import { SNAPSHOT_FORMATS, SNAPSHOT_REGIONS, type SnapshotOptions, writeSnapshots } from './snapshots.ts';
import { addSurveyCommand } from './survey.ts';

/** Exit statuses: 0 done and within tolerance, 1 done and outside it, 2 the input was refused, 3 something failed. */
const DONE = 0;
const OUTSIDE = 1;
const REFUSED = 2;
const FAILED = 3;
/** Ended by Ctrl-C, as shells number it. */
const INTERRUPTED = 130;

/**
 * Runs one command line and says with which status the process is to end. Results go to standard output, everything else
 * to standard error.
 */
export async function runCli(args: readonly string[]): Promise<number> {
  let status = DONE;
  const interrupt = new AbortController();
  const onSignal = () => interrupt.abort(new Interrupted());
  process.on('SIGINT', onSignal);
  process.on('SIGTERM', onSignal);
  let unprinted: Error | undefined;
  const onUnprinted = (error: NodeJS.ErrnoException) => {
    // Whoever reads a pipe may have read enough.
    if (error.code !== 'EPIPE') unprinted = unwritable('standard output', error);
  };
  // It stays: a pipe tells of its reader's end at any time.
  process.stdout.on('error', onUnprinted);
  const program = commands(interrupt.signal, (code) => {
    status = code;
  });
  try {
    await program.parseAsync(args, { from: 'user' });
  } catch (error) {
    status = statusOf(error);
  } finally {
    process.off('SIGINT', onSignal);
    process.off('SIGTERM', onSignal);
  }
  // A file tells of its errors a turn later.
  await new Promise((next) => setImmediate(next));
  return unprinted ? statusOf(unprinted) : status;
}

/** Tells of an error what is not told yet, and with which status the process is to end. */
function statusOf(error: unknown): number {
  if (error instanceof CommanderError) return error.exitCode === 0 ? DONE : REFUSED;
  // A problem a line; whatever else a message quotes makes no further lines, and no escapes.
  const lines = error instanceof Refusal ? error.message.split('\n') : [String((error as Error)?.message ?? error)];
  process.stderr.write(`${lines.map(printable).join('\n')}\n`);
  if (error instanceof Interrupted) return INTERRUPTED;
  return error instanceof Refusal || error instanceof InputError ? REFUSED : FAILED;
}

const SCHEMAS = {
  scenario: scenarioJsonSchema,
  survey: surveyJsonSchema,
  derived: derivedJsonSchema,
  judge: judgeJsonSchema,
  map: traceMapJsonSchema,
} as const;

const wholeNumber =
  (least: number, most: number) =>
  (text: string): number => {
    const n = Number(text);
    if (text.trim() === '' || !Number.isInteger(n) || n < least || n > most)
      throw new InvalidArgumentError(`it is “${text}”; give a whole number from ${least} to ${most}.`);
    return n;
  };

const threadCount = wholeNumber(1, 64);

function portNumber(text: string): number {
  const n = Number(text);
  if (!Number.isInteger(n) || n < 0 || n > 65535)
    throw new InvalidArgumentError(`it is “${text}”; give a port from 0 (any free one) to 65535.`);
  return n;
}

const HELP = `
Exit status: 0 done, and within the tolerance where one applies; 1 done and outside it; 2 the input was refused, and nothing
is written; 3 something failed; 130 ended by Ctrl-C.

Example: fieldassay examples centre-fed-wire > mine.json && fieldassay compare mine.json --out out
`;

const argumentTerm = (argument: Argument): string =>
  argument.required ? `<${argument.name()}>` : `[${argument.name()}]`;

/** An option for the port that a page is served at. */
const portOption = (words: string): Option =>
  new Option('--port <n>', words).argParser(portNumber).default(0, 'any free one');

function commands(signal: AbortSignal, end: (status: number) => void): Command {
  const program = new Command('fieldassay')
    .description(
      'How far can a time-domain field solver be trusted, and where? The same prescribed currents through a Yee grid and ' +
        'through exact retarded integrals, and what their differences say.',
    )
    .configureHelp({
      minWidthToWrap: 24,
      subcommandTerm: (command) => [command.name(), ...command.registeredArguments.map(argumentTerm)].join(' '),
    })
    .addHelpText('after', HELP)
    .version(VERSION)
    .exitOverride()
    .configureOutput({
      outputError: (text, write) =>
        write(
          `${text
            .trimEnd()
            .split(/\n(?=\(Did you mean )/)
            .map(printable)
            .join('\n')}\n`,
        ),
    })
    .showHelpAfterError('(see --help)');

  withGate(
    program
      .command('compare')
      .argument('[scenario]', 'a scenario file or a built-in scenario (see `examples`)', 'bench-cable-pulse')
      .description('run both solvers on a scenario: error budget and verdict')
      .option('--out <dir>', 'write result.json, traces.csv and report.html into this folder')
      .option(
        '--frames <dir>',
        'write pictures of grid, exact field and difference into this folder: PNG files and a film',
      )
      .option('--npz', 'with --out: the traces as NumPy arrays too, traces.npz')
      .option('--charts', 'with --out: the charts of the report as SVG files too, in charts/')
      .addOption(
        new Option('--snapshots <format>', 'with --out: both fields over time, for other programs').choices(
          SNAPSHOT_FORMATS,
        ),
      )
      .addOption(new Option('--region <region>', 'with --snapshots: where').choices(SNAPSHOT_REGIONS).default('planes'))
      .option('--instants <n>', 'with --snapshots: how many, evenly over the run', wholeNumber(1, 10_000), 24)
      .option(
        '--stride <n>',
        'with --snapshots: every n-th cell (default: as many as make handy files)',
        wholeNumber(1, 1000),
      )
      .option('--json', 'print the result as JSON on standard output, and nothing else there')
      .option('--threads <n>', 'worker threads (default: all that the machine has)', threadCount)
      .option('--pattern', 'the grid’s far field too: its error by direction, from its fields on a surface in the box')
      .option('--fused', 'one rounding a multiply-add, where the runtime has it: faster, last bits differ')
      .option('--serve', 'with --out: serve the page and the report on the loopback address until Ctrl-C')
      .addOption(portOption('with --serve: the port')),
  )
    .addHelpText(
      'after',
      '\nExit status: 0 within the tolerance (and the baseline), 1 outside it, 2 refused, 3 failed.\n' +
        '\nExample: fieldassay compare bench-cable-pulse --out out' +
        '\nExample: fieldassay compare small-loop --out loop --snapshots hdf5 --region box --instants 8 --stride 4\n',
    )
    .action(async (name: string, options: CompareFlags) => {
      requireOut(options);
      refuseUnwritable([options.out, options.frames], [options.junit]);
      const gate = gateOf(options);
      const comparison = await compared(name, options, signal);
      const { result } = comparison;
      await keepAndTell(
        async (written) => await writeAll(comparison, name, options, signal, written),
        (written) =>
          options.json
            ? resultJson(result)
            : resultText(result, { colour: process.stdout.isTTY === true && !process.env.NO_COLOR, written }),
      );
      const held = gate(result, `compare ${name}`, comparisonCases(result), secondsOf(result));
      end(held && withinTolerance(result) ? DONE : OUTSIDE);
      if (options.serve && options.out)
        await served(
          options.out,
          options.port,
          signal,
          (url) => `\nThe page:   ${url}#results\nThe report: ${url}report.html   (Ctrl-C ends)\n`,
        );
    });

  addPlanCommand(program, threadCount, signal, (met) => end(met ? DONE : OUTSIDE));
  addJudgeCommand(program, signal, (within) => end(within ? DONE : OUTSIDE));

  program
    .command('exact')
    .argument('<scenario>', 'a scenario file or a built-in scenario (see `examples`)')
    .description('the exact field alone, at any points and instants, inside the box or out')
    .requiredOption('--points <file>', 'required: CSV with the header x,y,z,t (m and s), or x,y,z,f (m and Hz)')
    .requiredOption(
      '--out <file>',
      'required: CSV to write: x,y,z,t, then E, H, B, φ, A and bounds of their errors, SI units',
    )
    .addOption(
      new Option('--route <route>', 'spectral: by spectra and back, held against the integrals')
        .choices(ROUTES)
        .default('retarded'),
    )
    .option(
      '--frequencies',
      'the steady state at frequencies: every waveform is amplitude · e^(+jωt), a current given by frequency its phasor',
    )
    .addHelpText(
      'after',
      '\nExample: fieldassay exact small-loop --points points.csv --out field.csv' +
        '\nExample: fieldassay exact small-loop --points lines.csv --frequencies --out phasors.csv\n',
    )
    .action(async (name: string, options: ExactOptions & { points: string; out: string }) => {
      refuseUnwritable([], [options.out]);
      const { csv, routes } = await exactCommand(readScenario(name), options.points, options, signal);
      writeWhole(options.out, csv);
      if (routes) process.stderr.write(disagreementText(routes));
    });

  addDeriveCommand(program, signal);

  program
    .command('currents')
    .argument('<scenario>', 'a scenario file or a built-in scenario (see `examples`)')
    .description('the currents on grid edges, instant by instant: to drive another solver with the very same source')
    .requiredOption(
      '--out <file>',
      'required: CSV to write: axis,i,j,k,x,y,z,length, then the current at each instant that the header names, SI units',
    )
    .addHelpText(
      'after',
      '\nThe current at (n+½)Δt drives E from nΔt to (n+1)Δt: −(Δt/ε) · current/(area of the face that the edge pierces).\n' +
        '\nExample: fieldassay currents tilted-wire --out edges.csv\n',
    )
    .action((name: string, { out }: { out: string }) => writeWhole(out, currentsCommand(readScenario(name))));

  program
    .command('view')
    .argument(
      '[dir]',
      'a result folder: its scenario is opened, its report served at /report.html, its files under /results/',
    )
    .description('serve the page on the loopback address, until Ctrl-C')
    .addOption(portOption('the port'))
    .addHelpText('after', '\nExample: fieldassay view out\n')
    .action(async (folder: string | undefined, { port }: { port: number }) => {
      const holds = (file: string) => folder !== undefined && existsSync(join(folder, file));
      const surveys = holds('survey.json') || holds('survey-result.json');
      const place = holds('result.json') ? '#results' : surveys ? '#at=ladders&survey=results' : '';
      await served(folder ?? null, port, signal, (url) => `${url}${place}\n`);
    });

  addSurveyCommand(program, threadCount, signal, (whole) => end(whole ? DONE : FAILED));
  addWorkCommand(program, threadCount, signal);

  program
    .command('schema')
    .argument('[of]', `what to describe: ${Object.keys(SCHEMAS).join(', ')}`, 'scenario')
    .description(
      'print the JSON Schema of scenario and survey files, of what `judge` writes and `derive --json` prints, or of a map of traces',
    )
    .addHelpText('after', '\nExample: fieldassay schema > scenario.schema.json\n')
    .action((of: string) => {
      if (!Object.hasOwn(SCHEMAS, of))
        throw new InputError(`there is no schema of “${of}”; there are ${Object.keys(SCHEMAS).join(', ')}`);
      process.stdout.write(jsonText(SCHEMAS[of as keyof typeof SCHEMAS]()));
    });

  program
    .command('examples')
    .argument('[name]', 'print this one as JSON')
    .description('list the built-in scenarios, or print one to start from')
    .addHelpText('after', '\nExample: fieldassay examples small-loop > my-loop.json\n')
    .action((name?: string) => {
      if (name === undefined) {
        for (const [key, { title }] of Object.entries(EXAMPLES)) process.stdout.write(`${key.padEnd(22)}${title}\n`);
        return;
      }
      if (!Object.hasOwn(EXAMPLES, name))
        throw new InputError(`there is no built-in scenario “${name}”; there are ${Object.keys(EXAMPLES).join(', ')}`);
      process.stdout.write(textOf(EXAMPLES[name as ExampleName]));
    });
  return program;
}

/** What the solvers and the comparison took. */
function secondsOf({ timings }: Result): number {
  const { box, rounding, free, exact, comparison } = timings;
  return [box, rounding, free, exact, comparison].reduce((sum, part) => sum + (part?.seconds ?? 0), 0);
}

interface CompareFlags extends GateFlags {
  readonly out?: string;
  readonly frames?: string;
  readonly npz?: boolean;
  readonly charts?: boolean;
  readonly snapshots?: SnapshotOptions['format'];
  readonly region: SnapshotOptions['region'];
  readonly instants: number;
  readonly stride?: number;
  readonly json?: boolean;
  readonly threads?: number;
  readonly fused?: boolean;
  readonly pattern?: boolean;
  readonly serve?: boolean;
  readonly port: number;
}

/** Options that say what to put into a folder need one. */
function requireOut(options: CompareFlags): void {
  if (options.out) return;
  if (options.serve) throw new InputError('--serve needs --out: the folder that is to be served');
  for (const name of ['npz', 'charts', 'snapshots'] as const)
    if (options[name]) throw new InputError(`--${name} needs --out: the folder to write into`);
}

/** Writes what was asked for, what is there already first. @param written what and where, for a person, as it is done */
async function writeAll(
  comparison: Comparison,
  name: string,
  options: CompareFlags,
  signal: AbortSignal,
  written: string[],
): Promise<void> {
  const { out, frames: folder, snapshots: format } = options;
  const { scenario } = comparison.result;
  if (out) {
    const files = {
      ...filesOf(comparison, commandLine(name, options)),
      ...(options.npz ? { 'traces.npz': writeTracesNpz(tracesOf(comparison)) } : {}),
    };
    writeFolder(out, files);
    written.push(...Object.keys(files).map((file) => `${out}/${file}`));
  }
  if (out && options.charts) {
    const charts = chartFiles({ ...comparison, traces: tracesOf(comparison) });
    writeFolder(join(out, 'charts'), charts);
    written.push(`${Object.keys(charts).length} charts in ${join(out, 'charts')}`);
  }
  if (folder) {
    // All pictures are there before any of them is written.
    const frames = await inTeam(options, signal, (team, show) => frameFiles(team, scenario, show));
    writeFolder(folder, frames);
    written.push(`${Object.keys(frames).length} pictures in ${folder}`);
  }
  if (out && format) {
    const { region, instants, stride } = options;
    const asked = { format, region, instants, ...(stride ? { stride } : {}) };
    written.push(await inTeam(options, signal, (team, show) => writeSnapshots(out, team, scenario, asked, show)));
  }
}

async function compared(name: string, options: CompareFlags, signal: AbortSignal): Promise<Comparison> {
  const line = progressLine(false);
  try {
    return await compareSolvers(readScenario(name), {
      ...(options.threads ? { threads: options.threads } : {}),
      ...(options.fused ? { fusedMultiplyAdd: true } : {}),
      ...(options.pattern ? { pattern: true } : {}),
      signal,
      onProgress: line.show,
    });
  } finally {
    line.end();
  }
}

/** Does a job with a team of its own, showing how far it is. */
async function inTeam<T>(
  { threads = threadsAvailable() }: CompareFlags,
  signal: AbortSignal,
  job: (team: Team, show: (progress: Progress) => void) => Promise<T>,
): Promise<T> {
  const line = progressLine(false);
  try {
    return await withTeam(threads, signal, (team) => job(team, line.show));
  } finally {
    line.end();
  }
}

const filesOf = (comparison: Comparison, command: string): Record<string, string> =>
  Object.fromEntries(RESULT_FILES.map((file) => [file, resultFile(file, comparison, command)]));

function commandLine(name: string, { out, threads, pattern }: CompareFlags): string {
  return (
    `npx fieldassay compare ${quoted(name)}${out ? ` --out ${quoted(out)}` : ''}${pattern ? ' --pattern' : ''}` +
    `${threads ? ` --threads ${threads}` : ''}`
  );
}

async function served(
  folder: string | null,
  port: number,
  signal: AbortSignal,
  say: (url: string) => string,
): Promise<void> {
  const { server, url } = await servePage(folder, port);
  process.stdout.write(say(url));
  await new Promise<void>((done) => {
    const close = () => {
      server.closeAllConnections();
      server.close(() => done());
    };
    if (signal.aborted) close();
    else signal.addEventListener('abort', close, { once: true });
  });
}
