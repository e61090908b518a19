import { parse as parseWithLocations } from '@humanwhocodes/momoa';
import type { z } from 'zod';
import { FACES } from './model.ts';
import { TWO_FORMS } from './schema.ts';
import { printable, unseenIn } from './text.ts';
import { show } from './units.ts';

/** Why a scenario is refused. */
export interface Problem {
  /** keys from the root, `sources.0.current.waveform.sigma`; empty for the file as a whole */
  readonly path: string;
  /** what stands there; undefined where nothing does */
  readonly value: unknown;
  /** one sentence: quantity, value, limit, remedy */
  readonly message: string;
}

/** Characters of a scenario file. */
const MAX_TEXT = 64 * 1024 * 1024;

/** Brackets within brackets: what is known of any file lies within ten. Deeper ones would be too deep for a call stack. */
const MAX_DEPTH = 100;

export type Path = readonly (string | number)[];

export type Report = (path: Path, predicate: string) => void;

/** A problem as one line of text, whatever the file holds. */
export function describeProblem({ path, message }: Problem): string {
  return printable(path === '' ? message : `${path}: ${message}`);
}

/**
 * The object that a file holds.
 * @param input the text of the file, or what JSON.parse made of it
 * @param whole names the object, "The scenario"; `keys` those it needs at least
 */
export function readObject(
  input: unknown,
  whole: string,
  keys: string,
): { readonly file: Record<string, unknown> } | { readonly problems: readonly Problem[] } {
  const refused = (value: unknown, message: string) => ({ problems: [{ path: '', value, message }] });
  let raw = input;
  if (typeof input === 'string') {
    if (input.length > MAX_TEXT)
      return refused(undefined, `The file has ${input.length} characters; the limit is ${MAX_TEXT}. Use fewer points.`);
    try {
      raw = JSON.parse(input);
    } catch {
      return refused(undefined, syntaxError(input));
    }
  }
  if (typeof raw !== 'object' || raw === null || Array.isArray(raw))
    return refused(raw, `${whole} is ${show(raw)}; it must be an object with at least ${keys}.`);
  const problems: Problem[] = [];
  seekUnfit(raw, [], reporter(raw, whole, problems));
  return problems.length > 0 ? { problems } : { file: raw as Record<string, unknown> };
}

/**
 * Reports what no file may hold, whatever its keys mean: brackets too deep for a call stack, and texts that do not show as
 * they are. Names and titles go into reports, tables, terminals and databases, and are to be told apart by looking.
 */
function seekUnfit(value: unknown, path: (string | number)[], report: Report): void {
  if (typeof value === 'string') {
    const unseen = unseenIn(value);
    if (unseen !== undefined) report([...path], `holds ${unseen}, a character that does not show; leave it out`);
  } else if (typeof value === 'object' && value !== null) {
    if (path.length > MAX_DEPTH) {
      report(path.slice(0, 1), `has brackets more than ${MAX_DEPTH} deep; no key goes so deep`);
      return;
    }
    const list = Array.isArray(value);
    for (const [key, inner] of Object.entries(value)) {
      if (typeof inner === 'number') continue;
      path.push(list ? Number(key) : key);
      seekUnfit(inner, path, report);
      path.pop();
    }
  }
}

/** Gathers what is wrong with a file: predicates become sentences about the key at their path. */
export function reporter(file: unknown, whole: string, problems: Problem[]): Report {
  return (path, predicate) =>
    problems.push({
      path: path.join('.'),
      value: valueAt(file, path),
      message: `${path.length === 0 ? whole : subjectOf(path)} ${predicate}.`,
    });
}

/** Where a text stops being JSON. The host's own message differs from one to the next; this one does not. */
function syntaxError(text: string): string {
  try {
    parseWithLocations(text, { mode: 'json' });
  } catch (error) {
    const { line, column } = error as { line?: number; column?: number };
    if (line !== undefined)
      return `The file is not JSON: line ${line}, column ${column} is where it goes wrong; correct the text there.`;
    return 'The file is not JSON and is nested too deeply to say where; check its brackets.';
  }
  return 'The file is not JSON: a text in it holds a control character; write it as \\u followed by four digits.';
}

/** `points.1.2` of a path: from the last key on, so that a message can be read without its path. */
function subjectOf(path: Path): string {
  const last = path.findLastIndex((key) => typeof key === 'string');
  return path.slice(Math.max(0, last)).join('.');
}

export function valueAt(root: unknown, path: Path): unknown {
  let value = root;
  for (const key of path) {
    if (typeof value !== 'object' || value === null || !Object.hasOwn(value, key)) return undefined;
    value = (value as Record<string | number, unknown>)[key];
  }
  return value;
}

/** An issue of the schema as problems: one for each unknown key, and of two forms those of the one that was meant. */
export function reportIssue(issue: z.core.$ZodIssue, parent: Path, file: unknown, report: Report): void {
  const path = [...parent, ...(issue.path as Path)];
  if (issue.code === 'unrecognized_keys') {
    const lines = issue.message.split('\n');
    issue.keys.forEach((key, k) => {
      report([...path, key], lines[k]!);
    });
    return;
  }
  if (issue.code === 'invalid_union' && issue.message === TWO_FORMS) {
    const value = valueAt(file, path);
    const second = Array.isArray(value) || (isObject(value) && FACES.some((face) => Object.hasOwn(value, face)));
    for (const inner of issue.errors[second ? 1 : 0]!) reportIssue(inner, path, file, report);
    return;
  }
  report(path, issue.message);
}

const isObject = (value: unknown): value is object => typeof value === 'object' && value !== null;

/** What a part of the file means, or nothing where the schema has already refused it. */
export function part<S extends z.ZodType>(schema: S, value: unknown): z.output<S> | undefined {
  const parsed = schema.safeParse(value);
  return parsed.success ? parsed.data : undefined;
}

/** A list of parts, those that are sound, with their places in the file. */
export function parts<S extends z.ZodType>(
  schema: S,
  value: unknown,
  most: number,
): { index: number; given: z.output<S> }[] {
  if (!Array.isArray(value) || value.length > most) return [];
  return value.flatMap((item, index) => {
    const given = part(schema, item);
    return given === undefined ? [] : [{ index, given }];
  });
}

/** The names of things, those without one numbered by their sort: “wire 1”, “wire 2”. Names given twice are reported. */
export function uniqueNames<T extends { name?: string | undefined }>(
  things: readonly { index: number; given: T }[],
  sort: (thing: T) => string,
  section: string,
  report: Report,
): string[] {
  const taken = new Map<string, number>();
  for (const { index, given } of things) {
    if (given.name === undefined) continue;
    const first = taken.get(given.name);
    if (first === undefined) taken.set(given.name, index);
    else
      report(
        [section, index, 'name'],
        `is ${show(given.name)}, the name of ${section}.${first} too; names must be unique; choose another`,
      );
  }
  const counts = new Map<string, number>();
  return things.map(({ given }) => {
    if (given.name !== undefined) return given.name;
    const word = sort(given);
    let n = counts.get(word) ?? 0;
    let name: string;
    do name = `${word} ${++n}`;
    while (taken.has(name));
    counts.set(word, n);
    return name;
  });
}
