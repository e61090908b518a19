import type { PlannedPlace, PlannedSetup } from '../compare/planResult.ts';
import type { Bounds } from '../scenario/distance.ts';
import { distanceToSources } from '../scenario/distance.ts';
import type { Axis, Scenario, Vec3 } from '../scenario/model.ts';
import { shortestWavelength } from '../scenario/shortest.ts';
import { CELL_SLACK, observerCell, stepsOf, timeStepOf } from '../scenario/sites.ts';
import {
  boundaryErrors,
  type ErrorList,
  type PlaceErrors,
  predictFree,
  predictWalls,
  type Wall,
  type WallErrors,
} from './predict.ts';
import { questionOf } from './question.ts';

/** Where which error is wanted. */
export interface Goal {
  readonly tolerance: number;
  readonly places: readonly { readonly name: string; readonly at: Vec3 }[];
  /** Hz; null: the whole signal */
  readonly band: number | null;
}

/** Absorbers of six layers and more, and the simplest wall. */
export const WALLS: readonly Wall[] = [
  ...[6, 8, 10, 12].map((layers) => ({ type: 'cpml' as const, layers })),
  { type: 'mur1' },
];

/** What a search may choose from. */
export interface Frame {
  /** what the box must hold, m */
  readonly holds: Bounds;
  /** a place that is to be a node, m */
  readonly anchor: Vec3;
  /** ascending, in cells; the first leaves room for the edges of sources: 1 or more where one ends on what is held */
  readonly clearances: readonly number[];
  readonly walls: readonly Wall[];
  /** cells no coarser than the scenario's own, which are tried too: else round ones as coarse as predictions hold for */
  readonly keepsCells: boolean;
}

/** What a search found; `places` and `curve` are of `chosen`. */
export interface Found {
  readonly met: boolean;
  readonly chosen: PlannedSetup | null;
  readonly places: readonly PlannedPlace[];
  readonly alternatives: readonly PlannedSetup[];
  readonly curve: readonly PlannedSetup[];
  /** why no coarser or finer cells were tried, and the like */
  readonly notes: readonly string[];
}

/** Limits of the prediction (src/lattice/): cells per shortest wavelength, cells from the source. */
export const FEWEST_CELLS = 4;
export const NEAREST_CELLS = 3;

/** The same for a waveform with a kink: cells that its wave passes in its rise time, some 5 time steps. */
export const CELLS_PER_RISE = 3;

/** What predictions are allowed to be off: lattice and gridding, sharply resolved or coarsely, and with a kink; walls. */
const ALLOWED = { sharp: 1.05, coarse: 1.15, kinked: 1.3, walls: 2 };
const SHARP_CELLS = 8;

/** Errors above this want the spectral form: the time form leaves out half of the error's square. */
export const MOST_FOR_TIME_FORM = 0.04;

/** Cells with absorber beyond which no plan is made. */
const MOST_CELLS = 1e12;

/** Responses of edges at sites, in the spectral form times lines, that one prediction may take: some 1.5 µs each. */
export const MOST_RESPONSES = 1e6;

/** Round cell sizes tried below the first guess: down to a third of it or less. */
const MOST_STEPS = 25;

/**
 * The cheapest set-up (cells × steps, absorber included) whose predicted error meets the goal at every place. For each
 * boundary and clearance the largest cells that do are looked for among round ones of two digits; set-ups that cannot be
 * cheaper than the best so far are passed over.
 */
export function searchPlan(scenario: Scenario, goal: Goal, frame: Frame, memory = new PlanMemory()): Found {
  return new Search(scenario, goal, frame, memory).run();
}

/**
 * Predictions that searches have made: kept, another search with the same scenario, places, band and box has them at
 * once, whatever its tolerance and walls.
 */
export class PlanMemory {
  readonly free = new Map<number, PlaceErrors[]>();
  readonly rough = new Map<number, number>();
  /** by cell size and clearance */
  readonly walls = new Map<string, WallErrors[]>();
}

/** A set-up that was predicted on the way of a search. */
export interface KnownSetup {
  readonly setup: PlannedSetup;
  readonly places: readonly PlannedPlace[];
  /** the least tolerance for which a search takes it: its predicted error with what predictions are allowed to be off */
  readonly meets: number;
}

/** Every set-up whose parts a memory holds, in no order: what is known so far of error against work. */
export function knownSetups(scenario: Scenario, goal: Goal, frame: Frame, memory: PlanMemory): KnownSetup[] {
  return new Search(scenario, goal, frame, memory).known();
}

class Search {
  readonly #base: number;
  readonly #kinked: boolean;
  readonly #coarsest: number;
  readonly #limit: string;
  readonly #free: PlanMemory['free'];
  readonly #rough: PlanMemory['rough'];
  readonly #walls: PlanMemory['walls'];

  constructor(
    readonly scenario: Scenario,
    readonly goal: Goal,
    readonly frame: Frame,
    memory: PlanMemory,
  ) {
    this.#free = memory.free;
    this.#rough = memory.rough;
    this.#walls = memory.walls;
    this.#base = Math.max(...scenario.grid.cellSize);
    this.#kinked = scenario.sources.some(({ waveform }) => waveform.expectedOrder.order < 2);
    const { wavelength } = shortestWavelength(scenario);
    const nearest = Math.min(...goal.places.map(({ at }) => distanceToSources(scenario.sources, at)));
    const rise = Math.min(...scenario.sources.map(({ waveform }) => waveform.timeScale));
    // A kink's spectrum has no end to be resolved.
    const byWave = this.#kinked ? (scenario.medium.speed * rise) / CELLS_PER_RISE : wavelength / FEWEST_CELLS;
    const byPlace = nearest / NEAREST_CELLS;
    this.#limit =
      byWave < byPlace
        ? this.#kinked
          ? `${CELLS_PER_RISE} cells in the rise of the current`
          : `${FEWEST_CELLS} cells per shortest wavelength`
        : `${NEAREST_CELLS} cells between source and observer`;
    const limit = roundDown(Math.min(byWave, byPlace));
    this.#coarsest = frame.keepsCells ? Math.min(this.#base, limit) : limit;
  }

  run(): Found {
    const first = this.#largest(this.#coarsest, () => 0);
    if (first === null) return { met: false, ...this.#best(), alternatives: [], notes: [] };
    const best = new Map<string, PlannedSetup>();
    let cheapest: PlannedSetup | null = null;
    for (const wall of this.frame.walls) {
      let own: PlannedSetup | null = null;
      for (const clearance of this.frame.clearances) {
        const least = this.#setup(first, wall, clearance).work;
        // Every wider clearance costs more still.
        if (own !== null && least >= own.work) break;
        if (cheapest !== null && least >= DEAREST * cheapest.work) break;
        const h = this.#largest(first, (size) => ALLOWED.walls * this.#boundaryError(size, wall, clearance));
        if (h === null) continue;
        const setup = this.#setup(h, wall, clearance);
        if (own === null || setup.work < own.work) own = setup;
      }
      if (own === null) continue;
      best.set(JSON.stringify(wall), own);
      if (cheapest === null || own.work < cheapest.work) cheapest = own;
    }
    if (cheapest === null) return { met: false, ...this.#best(), alternatives: [], notes: [] };
    return {
      met: true,
      chosen: cheapest,
      places: this.#places(cheapest),
      alternatives: [...best.values()].sort((a, b) => a.work - b.work),
      curve: this.#curve(cheapest),
      notes:
        Math.max(...cheapest.cellSize) >= this.#coarsest / NEXT
          ? [`Coarser cells were not tried: predictions hold from ${this.#limit} on.`]
          : [],
    };
  }

  known(): KnownSetup[] {
    const pairs = [...this.#walls.keys()].map((key) => key.split(' ').map(Number) as [number, number]);
    return pairs.flatMap(([size, clearance]) =>
      this.#free.has(size)
        ? this.frame.walls.map((wall) => {
            const setup = this.#setup(size, wall, clearance);
            const walls = ALLOWED.walls * this.#boundaryError(size, wall, clearance);
            const meets = this.#allowance(size) * this.#freeError(size) + walls;
            return { setup, places: this.#places(setup), meets };
          })
        : [],
    );
  }

  /** The best that there is where nothing meets the goal: the finest cells tried, behind the best walls. */
  #best(): Pick<Found, 'chosen' | 'places' | 'curve'> {
    const finest = Math.min(...this.#rough.keys());
    const { walls, clearances } = this.frame;
    const setups = walls.flatMap((wall) => clearances.slice(0, 4).map((n) => this.#setup(finest, wall, n)));
    const chosen = setups.reduce((a, b) => (b.predicted < a.predicted ? b : a));
    return { chosen, places: this.#places(chosen), curve: this.#curve(chosen) };
  }

  /** The largest cells from `start` down whose error, with what walls are to be allowed, meets the tolerance; or null. */
  #largest(start: number, walls: (size: number) => number): number | null {
    const { tolerance } = this.goal;
    const excess = (size: number, free: number, of: number) => (this.#allowance(size) * free + of) / tolerance;
    const meets = (size: number) => excess(size, this.#freeError(size), walls(size)) <= 1;
    // By the second order of the error, in the cheap form, to where it is nearly met; the rest in single steps.
    let size = start;
    for (let rough = excess(size, this.#roughError(size), 0); rough > 1.2; ) {
      size = Math.min(below(size), roundDown(size / Math.sqrt(0.9 * rough)));
      if (this.#isTooFine(size)) return null;
      rough = excess(size, this.#roughError(size), 0);
    }
    for (let step = 0; step < MOST_STEPS; step++) {
      // Finer cells bring walls nearer, so that what walls alone exceed is not mended by them.
      if (walls(size) > tolerance) return null;
      if (meets(size)) return this.#climb(size, start, meets);
      size = below(size);
      if (this.#isTooFine(size)) return null;
    }
    return null;
  }

  /**
   * From cells that meet the goal up to the largest near by that do. Places snap to nodes and sources to edges, so that
   * errors do not simply grow with the cells: a few that fail are stepped over.
   */
  #climb(size: number, start: number, meets: (size: number) => boolean): number {
    let best = size;
    for (let next = above(size), failed = 0; next <= start * (1 + 1e-9) && failed < STEPPED_OVER; next = above(next)) {
      if (meets(next)) {
        best = next;
        failed = 0;
      } else failed++;
    }
    return best;
  }

  #allowance(size: number): number {
    if (this.#kinked) return ALLOWED.kinked;
    return shortestWavelength(this.scenario).wavelength / size >= SHARP_CELLS ? ALLOWED.sharp : ALLOWED.coarse;
  }

  /** The largest error without walls, in the time form; of waveforms with kinks, which it cannot tell, in the other. */
  #roughError(size: number): number {
    let error = this.#rough.get(size);
    if (error === undefined) {
      const errors = predictFree(...this.#inFreeSpace(size), this.#kinked ? 'spectrum' : 'time');
      error = largestOf(errors.map(({ free }) => free));
      this.#rough.set(size, error);
      if (this.#kinked || error <= MOST_FOR_TIME_FORM) this.#free.set(size, errors);
    }
    return error;
  }

  #errors(size: number): PlaceErrors[] {
    this.#roughError(size);
    let errors = this.#free.get(size);
    if (!errors) {
      errors = predictFree(...this.#inFreeSpace(size), 'spectrum');
      this.#free.set(size, errors);
    }
    return errors;
  }

  /** The largest error without walls, in the cheaper form that suffices. */
  #freeError(size: number): number {
    return largestOf(this.#errors(size).map(({ free }) => free));
  }

  #wallsAt(size: number, clearance: number): WallErrors[] {
    const key = `${size} ${clearance}`;
    let walls = this.#walls.get(key);
    if (!walls) {
      walls = predictWalls(...this.#asked(size, clearance));
      this.#walls.set(key, walls);
    }
    return walls;
  }

  /** The largest boundary part. */
  #boundaryError(size: number, wall: Wall, clearance: number): number {
    return largestOf(this.#wallsAt(size, clearance).map((errors) => boundaryErrors(errors, wall)));
  }

  /** Walls play no part, but the box must hold all the edges of a source that ends on what it is to hold. */
  #inFreeSpace(size: number) {
    return this.#asked(size, this.frame.clearances[0]!);
  }

  #asked(size: number, clearance: number) {
    const scenario = gridded(this.scenario, size / this.#base, this.frame, clearance);
    const cells = Int32Array.from(this.goal.places.flatMap(({ at }) => observerCell(scenario.grid, at)));
    return [scenario, { cells, band: this.goal.band }] as const;
  }

  /** Whether cells are so small that predicting them, let alone running them, is out of the question. */
  #isTooFine(size: number): boolean {
    const question = questionOf(gridded(this.scenario, size / this.#base, this.frame, this.frame.clearances[0]!));
    const [nx, ny, nz] = question.scenario.grid.cells;
    const responses = 6 * this.goal.places.length * question.gridded.edges.count;
    // A kink has lines up to what the time step resolves, over a period longer than the run.
    return nx * ny * nz > MOST_CELLS || responses * (this.#kinked ? 2 * question.steps : 1) > MOST_RESPONSES;
  }

  #setup(size: number, wall: Wall, clearance: number): PlannedSetup {
    const { grid } = gridded(this.scenario, size / this.#base, this.frame, clearance);
    const places = this.#errors(size);
    const walls = this.#wallsAt(size, clearance);
    const predicted = Math.max(...places.map(({ free }, p) => totalOf(free, boundaryErrors(walls[p]!, wall))));
    const timeStep = timeStepOf(grid, this.scenario.medium);
    const steps = Math.max(1, stepsOf(this.scenario.duration, timeStep));
    const layers = wall.layers ?? 0;
    const sides = grid.cells.map((n) => n + 2 * layers);
    const cells = sides.reduce((product, n) => product * n, 1);
    const real = grid.precision === 'single' ? 4 : 8;
    // Four memory variables in every cell of a layer, two for E and two for H.
    const layered = sides.reduce((sum, n) => sum + (2 * layers * cells) / n, 0);
    return {
      cellSize: grid.cellSize,
      boundary: { ...wall },
      clearance,
      box: grid.box,
      shape: grid.cells,
      cells,
      steps,
      timeStep,
      work: cells * steps,
      memoryBytes: real * (6 * cells + 4 * layered),
      predicted,
    };
  }

  #places({ cellSize, clearance, boundary }: PlannedSetup): PlannedPlace[] {
    const size = Math.max(...cellSize);
    const [{ grid }, { cells }] = this.#asked(size, clearance);
    const errors = this.#errors(size);
    const walls = this.#wallsAt(size, clearance);
    return this.goal.places.map(({ name, at }, p) => {
      const { free, lattice, gridding } = errors[p]!;
      const sentBack = boundaryErrors(walls[p]!, boundary);
      const node = (a: Axis) => grid.box.from[a] + cells[3 * p + a]! * grid.cellSize[a];
      return {
        name,
        at,
        snapped: [node(0), node(1), node(2)],
        total: totalOf(free, sentBack),
        free: Math.max(...free),
        lattice: Math.max(...lattice),
        gridding: Math.max(...gridding),
        boundary: Math.max(...sentBack),
        measured: null,
      };
    });
  }

  /** The same walls and clearance with cells up to twice and down to 0.6 of the chosen ones. */
  #curve({ cellSize, clearance, boundary }: PlannedSetup): PlannedSetup[] {
    const chosen = Math.max(...cellSize);
    const sizes = CURVE.map((factor) => roundDown(factor * chosen)).filter(
      (size) => size <= this.#coarsest && !this.#isTooFine(size),
    );
    return [...new Set([...sizes, chosen])].sort((a, b) => b - a).map((size) => this.#setup(size, boundary, clearance));
  }
}

/** Failing cell sizes between ones that meet the goal. */
const STEPPED_OVER = 3;

/** Multiples of the chosen cells at which the trade-off is shown. */
const CURVE = [2, 1.6, 1.25, 0.8, 0.65];

/** A boundary whose cheapest set-up costs so many times the best is not followed up. */
const DEAREST = 30;

/** The largest ratio between neighbouring round numbers of two digits. */
const NEXT = 1.1;

/** Errors of two parts whose signs towards each other are unknown, added: the largest over places and bands. */
export const totalOf = (free: ErrorList, boundary: ErrorList): number =>
  free.reduce((most, e, m) => Math.max(most, e + boundary[m]!), 0);

const largestOf = (lists: readonly ErrorList[]): number => Math.max(...lists.map((list) => Math.max(...list)));

/** The scenario on a lattice of its own cells times a factor, in the smallest box with that many cells of clearance. */
export function gridded(scenario: Scenario, factor: number, { holds, anchor }: Frame, clearance: number): Scenario {
  const { grid } = scenario;
  const cellSize = grid.cellSize.map((d) => Number((d * factor).toPrecision(12))) as unknown as Vec3;
  const below = (a: Axis) => Math.ceil((anchor[a] - holds.from[a]) / cellSize[a] - CELL_SLACK) + clearance;
  const above = (a: Axis) => Math.ceil((holds.to[a] - anchor[a]) / cellSize[a] - CELL_SLACK) + clearance;
  const along = <T>(of: (a: Axis) => T): [T, T, T] => [of(0), of(1), of(2)];
  const place = (a: Axis, cells: number) => Number((anchor[a] + cells * cellSize[a]).toPrecision(12));
  return {
    ...scenario,
    grid: {
      ...grid,
      cellSize,
      box: { from: along((a) => place(a, -below(a))), to: along((a) => place(a, above(a))) },
      cells: along((a) => below(a) + above(a)),
    },
  };
}

/** The largest number of two digits that is not above x. */
function roundDown(x: number): number {
  const { digits, power } = twoDigits(x * (1 + 1e-12));
  return Number(`${digits}e${power}`);
}

/** The largest number of two digits below x. */
function below(x: number): number {
  const rounded = roundDown(x);
  if (rounded < x * (1 - 1e-9)) return rounded;
  const { digits, power } = twoDigits(rounded);
  return digits > 10 ? Number(`${digits - 1}e${power}`) : Number(`99e${power - 1}`);
}

/** The smallest number of two digits above x. */
function above(x: number): number {
  const { digits, power } = twoDigits(roundDown(x));
  return Number(`${digits + 1}e${power}`);
}

/** Two digits, cut off and not rounded, and the power of ten that goes with them. */
function twoDigits(x: number): { readonly digits: number; readonly power: number } {
  const [mantissa, exponent] = x.toExponential(14).split('e') as [string, string];
  return { digits: Math.floor(10 * Number(mantissa) + 1e-9), power: Number(exponent) - 1 };
}
