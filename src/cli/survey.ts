import { existsSync, readdirSync, readFileSync } from 'node:fs';
import { dirname, join, resolve } from 'node:path';
import type { Command } from 'commander';
import type { SurveyResult } from '../compare/surveyResult.ts';
import { surveyFiles } from '../report/surveyFolder.ts';
import { surveyText } from '../report/surveyText.ts';
import { quoted } from '../report/words.ts';
import { Refusal } from '../run/refusal.ts';
import { mergeParts, type Part, runShard, type Shard } from '../run/shards.ts';
import { type CaseStore, runSurvey, type SurveyOptions } from '../run/survey.ts';
import { wholeSurvey } from '../run/surveyCases.ts';
import { EXAMPLES } from '../scenario/examples.ts';
import { loadSurvey, type Survey } from '../scenario/survey.ts';
import { jsonText, printable } from '../scenario/text.ts';
import { folderStore } from './caseStore.ts';
import { InputError, readInput, readNamed, readScenario } from './input.ts';
import { Interrupted } from './interrupted.ts';
import { keepAndTell, refuseUnwritable, sweepParts, writeFolder } from './output.ts';
import { progressLine } from './progress.ts';
import { queueAddress } from './queue.ts';

interface SurveyFlags {
  readonly out?: string;
  readonly json?: boolean;
  readonly threads?: number;
  readonly queue?: string;
  readonly shard?: string;
  readonly merge?: string;
}

const HELP = `
A survey file, with a built-in scenario (a scenario itself, or its file, may stand there); keys are paths into it:
  { "scenario": "bench-cable-pulse", "vary": { "grid.cellSize": ["10 mm", "7.5 mm", "5 mm"] } }
As many cases as there are combinations, or with "combine": "paired" first with first, second with second.

Finished cases are kept in DIR/cases: the same command goes on where it was stopped.

Many machines: \`--queue\` hands the cases to workers (see \`fieldassay work --help\`) and collects what they come to;
stopped, it leaves the cases with them, and the same command goes on collecting. Where a batch scheduler starts the
processes instead, each runs one share with \`--shard\`, and \`--merge\` joins what they wrote.

Exit status: 0 every case was done or refused, 2 the survey itself was refused, 3 a case failed.

Example: fieldassay survey survey.json --out survey
Example: PGPASSWORD=… fieldassay survey survey.json --out survey --queue postgres://surveys@db.example/fieldassay
Example: fieldassay survey survey.json --out parts --shard 3/16
Example: fieldassay survey --merge parts
`;

/**
 * Adds \`survey\`.
 * @param end receives whether every case was done or refused
 */
export function addSurveyCommand(
  program: Command,
  threadCount: (text: string) => number,
  signal: AbortSignal,
  end: (whole: boolean) => void,
): void {
  program
    .command('survey')
    .argument('[survey]', 'a survey file: a scenario and what to vary in it')
    .description('many cases: order of convergence, reflections of walls, what an error costs')
    .option(
      '--out <dir>',
      'required but with --merge: write survey-result.json, survey.csv, survey.html and charts into this folder',
    )
    .option('--json', 'print the result as JSON on standard output, and nothing else there')
    .option('--threads <n>', 'worker threads (default: all that the machine has)', threadCount)
    .option('--queue <url>', 'hand the cases to workers through this PostgreSQL database, postgres://HOST/DB')
    .option('--shard <k/n>', 'run the k-th of n fixed shares alone, and write its part into the folder')
    .option('--merge <dir>', 'join the parts in this folder and the folders in it; name what is missing')
    .addHelpText('after', HELP)
    .action(async (file: string | undefined, flags: SurveyFlags) => {
      try {
        end(flags.merge === undefined ? await surveyCommand(file, flags, signal) : await mergeCommand(file, flags));
      } catch (error) {
        if (error instanceof Interrupted) throw new Interrupted(stopped(flags));
        throw error;
      }
    });
}

const stopped = ({ out, queue }: SurveyFlags): string =>
  queue
    ? `stopped; workers go on with the cases that were handed over, and the same command goes on collecting into ${out}`
    : `stopped; finished cases are kept in ${out}/cases, and the same command goes on from there`;

/** Runs a survey file, or a share of it. */
async function surveyCommand(file: string | undefined, flags: SurveyFlags, signal: AbortSignal): Promise<boolean> {
  const { out, threads, queue } = flags;
  if (file === undefined) throw new InputError('name a survey file, or the folder of its parts with --merge');
  if (out === undefined) throw new InputError('--out is missing: name the folder for the result');
  if (queue !== undefined && flags.shard !== undefined)
    throw new InputError('--queue shares the cases out by itself; leave --shard out');
  if (queue !== undefined && threads !== undefined)
    throw new InputError('with --queue nothing runs here; give --threads to `fieldassay work`');
  const shard = flags.shard === undefined ? null : shardOf(flags.shard);
  const survey = readSurvey(file);
  const folder = join(out, 'cases');
  refuseUnwritable([out, folder], []);
  const address = queue === undefined ? null : await queueAddress(queue);
  const line = progressLine(false);
  const options: SurveyOptions = {
    ...(threads ? { threads } : {}),
    ...(address ? { engine: (await import('../queue/collect.ts')).queueAt(address, line.say) } : {}),
    signal,
    onProgress: line.show,
    store: announcing(folderStore(folder), file, out, survey),
  };
  const came = await (shard ? runShard(survey, shard, options) : runSurvey(survey, options)).finally(line.end);
  sweepParts(folder);
  if ('shard' in came) {
    writeFolder(out, { [partName(came.shard)]: `${JSON.stringify(came)}\n` });
    process.stdout.write(partText(came, out));
    return Object.values(came.cases).every(({ status }) => status !== 'failed');
  }
  await write(came, out, surveyCommandLine(file, flags, address?.url), flags);
  return allWell(came);
}

/** Writes `survey.json` with the first case, so that whoever looks into the folder meanwhile knows what they are of. */
function announcing(store: CaseStore, file: string, out: string, survey: Survey): CaseStore {
  // The survey's own file may lie there under that name.
  let announced = resolve(file) === resolve(out, 'survey.json');
  const announce = () => {
    if (!announced) writeFolder(out, { 'survey.json': jsonText(wholeSurvey(survey)) });
    announced = true;
  };
  return {
    load(hash) {
      const text = store.load(hash);
      if (text !== null) announce();
      return text;
    },
    save(hash, text) {
      announce();
      store.save(hash, text);
    },
  };
}

function readSurvey(file: string): Survey {
  const loaded = loadSurvey(readInput(file, 'the survey'), (name) => scenarioNamed(name, dirname(resolve(file))));
  if ('problems' in loaded) throw new Refusal(loaded.problems);
  return loaded.survey;
}

/** A scenario beside the survey, or a built-in one. */
function scenarioNamed(name: string, folder: string): unknown {
  return structuredClone(readScenario(Object.hasOwn(EXAMPLES, name) ? name : resolve(folder, name), readNamed));
}

function shardOf(text: string): Shard {
  const [index, count] = (/^(\d{1,4})\/(\d{1,4})$/.exec(text)?.slice(1) ?? []).map(Number);
  if (!index || !count || index > count)
    throw new InputError(`--shard is “${text}”; give the share and how many there are, such as 3/16`);
  return { index, count };
}

const partName = ({ index, count }: Shard): string => `part-${index}-of-${count}.json`;

function partText({ shard, cases }: Part, out: string): string {
  const all = Object.values(cases);
  const counts = (['done', 'refused', 'failed'] as const)
    .map((status) => ({ status, n: all.filter((each) => each.status === status).length }))
    .filter(({ n }) => n > 0)
    .map(({ status, n }) => `${n} ${status}`);
  return (
    `Part ${shard.index} of ${shard.count}: ${[`${all.length} cases`, ...counts].join(', ')}\n` +
    `Written: ${printable(out)}/${partName(shard)}\nWhen all are there: npx fieldassay survey --merge ${quoted(out)}\n`
  );
}

/** Joins the parts in a folder. */
async function mergeCommand(file: string | undefined, flags: SurveyFlags): Promise<boolean> {
  const { merge: folder = '', out = folder } = flags;
  if (file !== undefined || flags.queue !== undefined || flags.shard !== undefined)
    throw new InputError('--merge takes the survey from the parts; leave the survey file, --queue and --shard out');
  const folders = foldersOf(folder);
  const parts = folders.flatMap(partsIn);
  if (parts.length === 0)
    throw new InputError(
      `there is no part of a survey in ${folder}; \`fieldassay survey SURVEY.json --out ${folder} --shard 1/2\` writes one`,
    );
  const { result, missing } = await mergeParts(parts, storeOver(folders));
  for (const { shard, cases, part } of missing)
    process.stderr.write(
      `missing: ${cases} case${cases === 1 ? '' : 's'} of part ${shard.index} of ${shard.count}, ` +
        `${part ? 'whose cases folder is not here' : 'which is not here'}\n`,
    );
  await write(result, out, `npx fieldassay survey --merge ${quoted(folder)}`, flags);
  return allWell(result);
}

function foldersOf(folder: string): string[] {
  try {
    const inner = readdirSync(folder, { withFileTypes: true }).filter((entry) => entry.isDirectory());
    return [folder, ...inner.map(({ name }) => join(folder, name))];
  } catch {
    throw new InputError(`there is no folder ${folder}; name one that --shard has written parts into`);
  }
}

function partsIn(folder: string): Part[] {
  return readdirSync(folder)
    .filter((name) => /^part-\d+-of-\d+\.json$/.test(name))
    .map((name) => {
      try {
        return JSON.parse(readFileSync(join(folder, name), 'utf8')) as Part;
      } catch {
        throw new InputError(`${join(folder, name)} is broken; run its share again`);
      }
    });
}

/** The cases of several folders; nothing is added to them. */
function storeOver(folders: readonly string[]): CaseStore {
  const stores = folders
    .map((folder) => join(folder, 'cases'))
    .filter(existsSync)
    .map(folderStore);
  return {
    load: (hash) => stores.map((store) => store.load(hash)).find((text) => text !== null) ?? null,
    save: () => {
      throw new Error('parts are joined, nothing is run');
    },
  };
}

async function write(result: SurveyResult, out: string, command: string, { json }: SurveyFlags): Promise<void> {
  const files = surveyFiles(result, command);
  await keepAndTell(
    (written) => {
      writeFolder(out, files);
      written.push(...Object.keys(files).map((name) => `${out}/${name}`));
    },
    (written) => (json ? files['survey-result.json']! : surveyText(result, written)),
  );
}

const allWell = ({ cases }: SurveyResult): boolean => cases.every(({ status }) => status !== 'failed');

function surveyCommandLine(file: string, { out = '', threads }: SurveyFlags, queue: string | undefined): string {
  return (
    `npx fieldassay survey ${quoted(file)} --out ${quoted(out)}${threads ? ` --threads ${threads}` : ''}` +
    (queue ? ` --queue ${quoted(queue)}` : '')
  );
}
