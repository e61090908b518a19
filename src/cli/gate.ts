import { type Command, InvalidArgumentError } from 'commander';
import { type Baseline, baselineSchema, holdAgainst } from '../compare/baseline.ts';
import { baselineCases, heldText, junitXml, type TestCase } from '../report/junit.ts';
import { printable } from '../scenario/text.ts';
import { parseFraction } from '../scenario/units.ts';
import { InputError, readInput } from './input.ts';
import { writeWhole } from './output.ts';

/** What build servers ask of `compare` and `judge`. */
export interface GateFlags {
  readonly junit?: string;
  readonly baseline?: string;
  readonly allow: number;
}

function allowance(text: string): number {
  const number = text.trim() !== '' && Number.isFinite(Number(text)) ? Number(text) : text;
  const parsed = parseFraction(number);
  if ('value' in parsed && parsed.value >= 0) return parsed.value;
  throw new InvalidArgumentError(`it is “${text}”; give a fraction of 0 or more, such as 0.05 or "5 %".`);
}

/** Adds the options to a command. */
export function withGate(command: Command): Command {
  return command
    .option('--junit <file>', 'write what passed and failed as JUnit-style XML, for build servers')
    .option('--baseline <result.json>', 'an earlier result: status 1 where a figure of error grew beyond --allow')
    .option('--allow <x>', 'growth that is allowed, 0.05 or "5 %"', allowance, 0.05);
}

/**
 * Reads the baseline, before anything is run.
 * @returns what holds a result against it: writes the XML, says what grew, tells whether nothing did
 * @throws InputError for a baseline that is no result
 */
export function gateOf({ junit, baseline, allow }: GateFlags) {
  const before = baseline === undefined ? null : readBaseline(baseline);
  return (now: Baseline, suite: string, cases: readonly TestCase[], seconds: number): boolean => {
    const held = before === null ? [] : holdAgainst(now, before, allow);
    const grown = held.filter(({ grew }) => grew);
    if (junit !== undefined) writeWhole(junit, junitXml(suite, [...cases, ...baselineCases(held)], seconds));
    for (const one of grown) process.stderr.write(`${printable(`Grew: ${heldText(one)}`)}\n`);
    if (before !== null && grown.length === 0)
      process.stderr.write(`None of ${held.length} figures grew beyond what is allowed.\n`);
    return grown.length === 0;
  };
}

function readBaseline(file: string): Baseline {
  let json: unknown;
  try {
    json = JSON.parse(readInput(file, 'the baseline'));
  } catch (error) {
    if (error instanceof SyntaxError) throw new InputError(`the baseline ${file} is no JSON: ${error.message}`);
    throw error;
  }
  const parsed = baselineSchema.safeParse(json);
  if (parsed.success) return parsed.data;
  const [first] = parsed.error.issues;
  throw new InputError(
    `the baseline ${file} is no result of compare or judge: ${first!.path.join('.') || 'it'}: ${first!.message}`,
  );
}
