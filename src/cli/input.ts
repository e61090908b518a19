import { readFileSync } from 'node:fs';
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

/** The scenario a person named: a file, or else a built-in example; the default one when nothing was named. */
export function readScenario(name: string | undefined): unknown {
  const wanted = name ?? 'bench-cable-pulse';
  if (Object.hasOwn(EXAMPLES, wanted)) return EXAMPLES[wanted as ExampleName];
  try {
    return readInput(wanted, 'the scenario');
  } catch (error) {
    const names = Object.keys(EXAMPLES).join(', ');
    throw new InputError(`${(error as Error).message}. Name a file, or one of the built-in scenarios: ${names}`);
  }
}
