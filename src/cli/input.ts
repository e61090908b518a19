import { closeSync, fstatSync, openSync, readSync, statSync } from 'node:fs';
import { dirname, resolve } from 'node:path';
import { withTables } from '../files/tables.ts';
import { EXAMPLES, type ExampleName } from '../scenario/examples.ts';
import { reasonOf } from './output.ts';

/** The input was refused: what to print. */
export class InputError extends Error {
  constructor(message: string) {
    super(message);
    this.name = 'InputError';
  }
}

/** Bytes of a file that is read at most. */
const MOST_BYTES = 4e8;

/** Bytes that are read at once from what does not tell its size. */
const PIECE = 1 << 16;

/**
 * The bytes of a file, or of a pipe, that a person named.
 * @throws InputError where it cannot be read, or is larger than 400 MB: a device that never ends is not read for ever
 */
export function readBytes(path: string, what: string): Buffer {
  const refuse = (reason: string) => new InputError(`${what} ${path} could not be read: ${reason}`);
  try {
    const file = openSync(path, 'r');
    try {
      const pieces: Buffer[] = [];
      let length = 0;
      for (;;) {
        const piece = Buffer.allocUnsafe(Math.max(PIECE, Math.min(fstatSync(file).size - length + 1, MOST_BYTES)));
        const count = readSync(file, piece);
        if (count === 0) return Buffer.concat(pieces, length);
        pieces.push(piece.subarray(0, count));
        length += count;
        if (length > MOST_BYTES) throw refuse(`it is larger than ${MOST_BYTES / 1e6} MB`);
      }
    } finally {
      closeSync(file);
    }
  } catch (error) {
    throw error instanceof InputError ? error : refuse(reasonOf(error));
  }
}

/**
 * The text of a file that a person named.
 * @throws InputError where it cannot be read, or is larger than 400 MB
 */
export const readInput = (path: string, what: string): string => readBytes(path, what).toString('utf8');

/**
 * The text of a file that another file named: of a file only, since whoever wrote it may not have this reader's good in mind.
 * @throws InputError where it is none, cannot be read, or is larger than 400 MB
 */
export function readNamed(path: string, what: string): string {
  if (statSync(path, { throwIfNoEntry: false })?.isFile() === false)
    throw new InputError(`${what} ${path} could not be read: it is no file`);
  return readInput(path, what);
}

/**
 * The scenario a person named: a file, with the tables that it names in turn, or else a built-in example; the default one
 * when nothing was named.
 * @param read the text of the scenario's file
 * @throws InputError where a file cannot be read or a table cannot be used
 */
export function readScenario(name: string | undefined, read = readInput): unknown {
  const wanted = name ?? 'bench-cable-pulse';
  if (Object.hasOwn(EXAMPLES, wanted)) return EXAMPLES[wanted as ExampleName];
  let text: string;
  try {
    text = read(wanted, 'the scenario');
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
    return withTables(value, (file, key) => readNamed(resolve(dirname(wanted), file), key));
  } catch (error) {
    if (error instanceof RangeError) throw new InputError(error.message);
    throw error;
  }
}
