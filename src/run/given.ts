import { loadScenario } from '../scenario/load.ts';
import type { Scenario } from '../scenario/model.ts';
import { Refusal } from './refusal.ts';

/** A scenario file that has been found sound. */
export interface Given {
  /** as JSON.parse made it: what is sent to workers */
  readonly json: { readonly grid: Readonly<Record<string, unknown>>; readonly [key: string]: unknown };
  readonly scenario: Scenario;
}

/**
 * A scenario as it comes: the text of its file, or what JSON.parse made of it.
 * @throws Refusal naming every problem
 */
export function given(input: unknown): Given {
  const json = jsonOf(input);
  const loaded = loadScenario(json);
  if ('problems' in loaded) throw new Refusal(loaded.problems);
  return { json: json as Given['json'], scenario: loaded.scenario };
}

/** What JSON.parse makes of a text. One that is no JSON stays as it is: the loader tells where it goes wrong. */
export function jsonOf(input: unknown): unknown {
  if (typeof input !== 'string') return input;
  try {
    return JSON.parse(input);
  } catch {
    return input;
  }
}
