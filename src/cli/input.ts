import { readFileSync } from 'node:fs';
import { dirname, resolve } from 'node:path';
import { withTables } from '../files/tables.ts';
import { EXAMPLES, type ExampleName } from '../scenario/examples.ts';
import { reasonOf } from './output.ts';

/** The input was refused: what to print, a line a problem. */
export class InputError extends Error {
  constructor(message: string) {
    super(message);
    this.name = 'InputError';
  }
}

/**
 * The text of a file that a person named.
 * @throws InputError where it cannot be read
 */
export function readInput(path: string, what: string): string {
  try {
    return readFileSync(path, 'utf8');
  } catch (error) {
    throw new InputError(`${what} ${path} could not be read: ${reasonOf(error)}`);
  }
}

/**
 * The scenario a person named: a file, with the tables that it names in turn, or else a built-in example; the default one
 * when nothing was named.
 * @throws InputError where a file cannot be read or a table cannot be used
 */
export function readScenario(name: string | undefined): unknown {
  const wanted = name ?? 'bench-cable-pulse';
  if (Object.hasOwn(EXAMPLES, wanted)) return EXAMPLES[wanted as ExampleName];
  let text: string;
  try {
    text = readInput(wanted, 'the scenario');
  } catch (error) {
    const names = Object.keys(EXAMPLES).join(', ');
    throw new InputError(`${(error as Error).message}. Name a file, or one of the built-in scenarios: ${names}`);
  }
  let value: unknown;
  try {
    value = JSON.parse(text);
  } catch {
    // Whoever checks the scenario says where the text goes wrong.
    return text;
  }
  try {
    return withTables(value, (file, key) => readInput(resolve(dirname(wanted), file), key));
  } catch (error) {
    if (error instanceof RangeError) throw new InputError(error.message);
    throw error;
  }
}
