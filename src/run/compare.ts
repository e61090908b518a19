import { hostName, memoryLimit, threadsAvailable } from '#platform';
import { bandOf } from '../compare/band.ts';
import { boundaryLevel, budgetAt, budgetOf, type Histories, type Levels } from '../compare/budget.ts';
import { closestDistance } from '../compare/closest.ts';
import { farthestDistance } from '../compare/farthest.ts';
import { FIELDS, FIRST_COMPONENT, type Field, type Level, samplesOf } from '../compare/fields.ts';
import { relativeL1, relativeL2, relativeLinf } from '../compare/norms.ts';
import { observerErrors } from '../compare/observer.ts';
import { pointErrors, pointStatus } from '../compare/pointError.ts';
import { budgetResult, normsResult, type ObserverResult, observerFieldResult, type Result } from '../compare/result.ts';
import { type Spectra, spectraOf } from '../compare/spectrum.ts';
import { stratify } from '../compare/stratify.ts';
import { verdictOf } from '../compare/verdict.ts';
import { wallClearance } from '../compare/wall.ts';
import { decibels } from '../elementary/elementary.ts';
import { formatDecibels, formatQuantity } from '../elementary/quantity.ts';
import { memoryNeeded } from '../fdtd/layout.ts';
import type { GridProblem } from '../fdtd/problem.ts';
import type { GridResult } from '../fdtd/run.ts';
import { prepareSources } from '../retarded/prepare.ts';
import { distanceToSources, lastArrival } from '../scenario/distance.ts';
import { loadScenario, type Problem } from '../scenario/load.ts';
import { type Boundary, FACES, type Observer, type Scenario, type Vec3 } from '../scenario/model.ts';
import { observerCell } from '../scenario/sites.ts';
import { COMPONENTS, type FieldHistory, type Instants, instantsOf, type SamplePoints } from '../trace/trace.ts';
import { dispersionErrorAt, farthestModel } from './farthest.ts';
import { type FreeSpacePlan, planFreeSpace } from './freeSpace.ts';
import { gaugeResidual } from './gauge.ts';
import { runGrid } from './gridRun.ts';
import { exactField, griddedField, type IntegralField } from './integrals.ts';
import { Team } from './pool.ts';
import { type Progress, ProgressMeter } from './progress.ts';
import { boxProblem, type Question, questionOf, sampleInterval } from './question.ts';
import { VERSION } from './version.ts';

export interface CompareOptions {
  /** worker threads; all that the machine has by default */
  readonly threads?: number;
  readonly onProgress?: (progress: Progress) => void;
  /** aborting it ends all workers at once and rejects with its reason */
  readonly signal?: AbortSignal;
}

/** A result with the signals behind it. */
export interface Comparison {
  readonly result: Result;
  /** the fields at observers inside the box, one point an observer in their order; null without any */
  readonly signals: Histories | null;
  /** exact fields of observers outside the box */
  readonly outside: FieldHistory;
  readonly observers: readonly Observer[];
  readonly spectra: readonly { readonly observer: string; readonly field: Field; readonly spectra: Spectra }[];
}

/**
 * Both solvers on one scenario: the grid in its box, the same grid without walls, the exact field of the gridded currents
 * and of the designed ones, over the same places and instants; and what their differences say.
 * @param input a scenario: the text of its file, or what JSON.parse made of it
 * @throws Refusal naming every problem of the scenario; Error where a worker died; the signal's reason when aborted
 */
export async function compareSolvers(input: unknown, options: CompareOptions = {}): Promise<Comparison> {
  const json = typeof input === 'string' ? parsed(input) : input;
  const loaded = loadScenario(json);
  if ('problems' in loaded) throw new Refusal(loaded.problems);
  options.signal?.throwIfAborted();

  const question = questionOf(loaded.scenario);
  const places = placesOf(question);
  const box = boxProblem(question, places.groups);
  const limit = memoryLimit();
  refuseTooLarge(box, limit);
  const free = planFreeSpace(box, limit);

  const team = new Team(options.threads ?? threadsAvailable());
  let abort = () => {};
  const aborted = new Promise<never>((_, reject) => {
    abort = () => {
      reject(options.signal!.reason);
      void team.end();
    };
  });
  aborted.catch(() => {});
  options.signal?.addEventListener('abort', abort, { once: true });
  try {
    const answers = answer(team, question, json, places, box, free, options.onProgress ?? (() => {}));
    // Once aborted, the workers' own ends are of no interest.
    answers.catch(() => {});
    return conclude(question, json, places, await Promise.race([answers, aborted]), free, box, team.threads);
  } finally {
    options.signal?.removeEventListener('abort', abort);
    await team.end();
  }
}

/** JSON.parse of a text that may be no JSON: the loader tells where, so the text itself goes on to it. */
function parsed(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch {
    return text;
  }
}

function refuseTooLarge(box: GridProblem, limit: number): void {
  let bytes: number;
  try {
    bytes = memoryNeeded(box).bytes;
  } catch (error) {
    if (error instanceof RangeError)
      throw new Refusal([{ path: 'grid.cellSize', value: box.cellSize, message: error.message }]);
    throw error;
  }
  if (bytes > limit)
    throw new Refusal([
      {
        path: 'grid.cellSize',
        value: box.cellSize,
        message:
          `The grid needs ${formatQuantity(bytes, 'B')}; this machine has ${formatQuantity(limit, 'B')} to give. ` +
          'Raise grid.cellSize or shrink grid.box.',
      },
    ]);
}

