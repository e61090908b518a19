import type { Command } from 'commander';
import { InvalidArgumentError } from 'commander';
import type { Plan } from '../compare/planResult.ts';
import { PLAN_FILES, planFile, planJson, planText } from '../report/plan.ts';
import { quoted } from '../report/words.ts';
import { planScenario } from '../run/plan.ts';
import { type Kind, parseFraction, parseQuantity } from '../scenario/units.ts';
import { readScenario } from './input.ts';
import { keepAndTell, refuseUnwritable, writeFolder } from './output.ts';
import { progressLine } from './progress.ts';

interface PlanFlags {
  readonly tolerance?: number;
  readonly at?: string;
  readonly distance?: number;
  readonly band?: number;
  readonly rate?: number;
  readonly run: boolean;
  readonly out?: string;
  readonly json?: boolean;
  readonly threads?: number;
}

function tolerance(text: string): number {
  const parsed = parseFraction(asNumber(text));
  if ('value' in parsed && parsed.value > 0 && parsed.value <= 1) return parsed.value;
  throw new InvalidArgumentError(`it is “${text}”; give a fraction above 0 and at most 1, such as 0.02 or "2 %".`);
}

const positive = (kind: Kind, example: string) => (text: string) => {
  const parsed = parseQuantity(asNumber(text), kind);
  if ('value' in parsed && parsed.value > 0) return parsed.value;
  throw new InvalidArgumentError(`it is “${text}”; give a value above 0, such as ${example}.`);
};

/** A bare number is in SI units, as in a scenario file. */
const asNumber = (text: string): number | string =>
  text.trim() !== '' && Number.isFinite(Number(text)) ? Number(text) : text;

function cellRate(text: string): number {
  const n = Number(text);
  if (!(n > 0 && Number.isFinite(n)))
    throw new InvalidArgumentError(`it is “${text}”; give a number above 0, such as 3e8.`);
  return n;
}

/** Adds `plan` to the program. @param end is told whether a set-up is predicted to meet the tolerance */
export function addPlanCommand(
  program: Command,
  threads: (text: string) => number,
  signal: AbortSignal,
  end: (met: boolean) => void,
): void {
  program
    .command('plan')
    .argument('<scenario>', 'a scenario file or a built-in scenario (see `examples`)')
    .description(
      'the cheapest cells, boundary and clearance predicted to meet a tolerance, checked by a run when short',
    )
    .option('--tolerance <x>', 'largest relative error of E, 0.02 or "2 %" (default: the scenario’s)', tolerance)
    .option('--at <observer>', 'where it must hold: this observer (default: all of them)')
    .option('--distance <d>', 'or: at this distance from the sources, "80 mm"', positive('length', '"80 mm"'))
    .option('--band <f>', 'in every sixth-octave band up to this frequency, "2 GHz"', positive('frequency', '"2 GHz"'))
    .option('--rate <n>', 'cell updates a second of your own solver, to tell its time', cellRate)
    .option('--no-run', 'do not check the plan by a run')
    .option('--out <dir>', `write ${PLAN_FILES.join(', ')} into this folder`)
    .option('--json', 'print the plan as JSON on standard output, and nothing else there')
    .option('--threads <n>', 'worker threads (default: all that the machine has)', threads)
    .addHelpText(
      'after',
      '\nExit status: 0 a set-up is predicted to meet it, 1 none is, 2 refused, 3 failed.\n\nExample: fieldassay plan bench-cable-pulse --tolerance "2 %" --out plan\n',
    )
    .action(async (name: string, flags: PlanFlags) => {
      refuseUnwritable([flags.out], []);
      const plan = await planned(name, flags, signal);
      await keepAndTell(
        (written) => {
          if (!flags.out) return;
          writeFolder(flags.out, filesOf(plan, commandLine(name, flags)));
          written.push(...PLAN_FILES.map((file) => `${flags.out}/${file}`));
        },
        (written) =>
          flags.json
            ? planJson(plan)
            : planText(plan, { colour: process.stdout.isTTY === true && !process.env.NO_COLOR, written }),
      );
      end(plan.met);
    });
}

async function planned(name: string, flags: PlanFlags, signal: AbortSignal): Promise<Plan> {
  const { run, rate, ...options } = flags;
  const line = progressLine(false);
  try {
    return await planScenario(readScenario(name), {
      ...options,
      check: run,
      ...(rate === undefined ? {} : { ownRate: rate }),
      signal,
      onProgress: line.show,
    });
  } finally {
    line.end();
  }
}

const filesOf = (plan: Plan, command: string): Record<string, string> =>
  Object.fromEntries(PLAN_FILES.map((file) => [file, planFile(file, plan, command)]));

function commandLine(name: string, { tolerance, at, distance, band, rate, out }: PlanFlags): string {
  const option = (flag: string, value: number | string | undefined) =>
    value === undefined ? '' : ` --${flag} ${quoted(String(value))}`;
  return (
    `npx fieldassay plan ${quoted(name)}${option('tolerance', tolerance)}${option('at', at)}` +
    `${option('distance', distance)}${option('band', band)}${option('rate', rate)}${option('out', out)}`
  );
}
