/** Problems to run in tests: plain ones by hand, and random ones by seed. */
import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { uniformInt } from 'pure-rand/distribution/uniformInt';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import type { GridProblem, SampleGroup } from '../../src/fdtd/problem.ts';
import type { Schedule } from '../../src/fdtd/schedule.ts';
import type { EdgeCurrents } from '../../src/gridding/edges.ts';
import { mediumOf } from '../../src/scenario/constants.ts';
import { type Boundary, FACES, type Face } from '../../src/scenario/model.ts';
import { cellsBehind, cellsRead } from '../../src/scenario/walls.ts';
import type { Waveform } from '../../src/scenario/waveform.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';

export type Triple = [number, number, number];

/** The Courant limit divided into `courant`: Δt = S / (v √(Σ 1/d²)). */
export function courantStep(courant: number, cellSize: readonly number[], speed: number): number {
  return courant / (speed * Math.sqrt(cellSize.reduce((sum, d) => sum + 1 / (d * d), 0)));
}

/** The same boundary, or the same number, on all six faces. */
export function everyFace<T>(value: T): Record<Face, T> {
  return Object.fromEntries(FACES.map((face) => [face, value])) as Record<Face, T>;
}

export const PEC: Boundary = { type: 'pec' };
export const MUR: Boundary = { type: 'mur1' };

export function cpml(layers: number, parameters: object = {}): Boundary {
  return {
    type: 'cpml',
    layers,
    grading: 3,
    kappaMax: 1,
    alphaFrequency: 0.5e9,
    sigmaFactor: 1,
    ...parameters,
  };
}

export const PULSE: Waveform = makeWaveform({ type: 'gaussianDerivative', amplitude: 1, delay: 0.9e-9, sigma: 0.1e-9 });

/** Edges with one pair each. */
export function edgesOf(
  edges: readonly { axis: number; node: readonly number[]; weight?: number; delay?: number }[],
  waveform: Waveform = PULSE,
): EdgeCurrents {
  return {
    count: edges.length,
    axis: Uint8Array.from(edges.map((e) => e.axis)),
    node: Int32Array.from(edges.flatMap((e) => [...e.node])),
    pairStart: Int32Array.from([0, ...edges.map((_, n) => n + 1)]),
    weight: Float64Array.from(edges.map((e) => e.weight ?? 1)),
    delay: Float64Array.from(edges.map((e) => e.delay ?? 0)),
    waveform: new Uint16Array(edges.length),
    waveforms: [waveform],
  };
}

export const NO_CURRENTS = edgesOf([]);

/** A cube in vacuum with nothing in it; `changes` says what is different. */
export function plainProblem(cells: Triple, changes: Partial<GridProblem> = {}): GridProblem {
  const medium = mediumOf(1, 1);
  const cellSize: Triple = [5e-3, 5e-3, 5e-3];
  return {
    boxCells: cells,
    pad: everyFace(0),
    cellSize,
    timeStep: courantStep(0.99, changes.cellSize ?? cellSize, (changes.medium ?? medium).speed),
    steps: 10,
    medium,
    boundary: everyFace(PEC),
    precision: 'double',
    currents: NO_CURRENTS,
    scale: 1,
    samples: [],
    ...changes,
  };
}

/** A source of random numbers; the same seed gives the same numbers. */
export class Dice {
  private readonly generator;
  constructor(seed: number) {
    this.generator = xoroshiro128plus(seed);
  }
  whole(from: number, to: number): number {
    return uniformInt(this.generator, from, to);
  }
  real(from: number, to: number): number {
    return from + (to - from) * uniformFloat64(this.generator);
  }
  pick<T>(values: readonly T[]): T {
    return values[this.whole(0, values.length - 1)]!;
  }
}

function randomBoundary(dice: Dice, most: number): Boundary {
  const type = dice.pick(['pec', 'pmc', 'mur1', 'mur2', 'mur2', 'higdon2', 'liao', 'cpml', 'splitPml'] as const);
  const layers = dice.whole(1, most);
  const grading = dice.real(2, 4);
  const sigmaFactor = dice.real(0.5, 1.5);
  switch (type) {
    case 'cpml':
      return cpml(layers, { grading, kappaMax: dice.real(1, 6), alphaFrequency: dice.real(0, 2e9), sigmaFactor });
    case 'splitPml':
      return { type, layers, grading, sigmaFactor };
    case 'higdon2':
      return { type, angles: [dice.real(0, 1.4), dice.real(0, 1.4)], damping: dice.real(0, 0.05) };
    case 'liao':
      return { type, damping: dice.real(0, 0.05) };
    default:
      return { type };
  }
}

/** A random problem of some thousand cells: odd sizes, unequal cells, another boundary on every face. */
export function randomProblem(seed: number): GridProblem {
  const dice = new Dice(seed);
  const cellSize: Triple = [dice.real(1e-3, 4e-3), dice.real(1e-3, 4e-3), dice.real(1e-3, 4e-3)];
  const medium = mediumOf(dice.real(1, 5), dice.real(1, 2));
  const boxCells: Triple = [dice.whole(2, 15), dice.whole(2, 10), dice.whole(2, 10)];
  const same = dice.pick([undefined, undefined, undefined, cpml(dice.whole(1, 10)), randomBoundary(dice, 10)]);
  const boundary = Object.fromEntries(FACES.map((face) => [face, same ?? randomBoundary(dice, 7)])) as Record<
    Face,
    Boundary
  >;
  const pad = Object.fromEntries(
    FACES.map((face, f) => {
      const b = boundary[face];
      // Room for what the wall reads, however small the box.
      const room = cellsRead(b) + 1 - boxCells[f >> 1]!;
      return [face, dice.whole(0, 2) + Math.max(cellsBehind(b), room)];
    }),
  ) as Record<Face, number>;
  const axisName = ['x', 'y', 'z'] as const;
  // Lattice cells of the box's node 0, and inside the outer walls.
  const within = (a: 0 | 1 | 2, lowest: number) =>
    dice.whole(lowest - pad[`${axisName[a]}-`], boxCells[a] + pad[`${axisName[a]}+`] - 1);
  const edges = Array.from({ length: dice.whole(0, 12) }, () => {
    const axis = dice.whole(0, 2);
    const node = ([0, 1, 2] as const).map((a) => within(a, a === axis ? 0 : 1));
    return { axis, node, weight: dice.real(-1, 1), delay: dice.real(0, 1e-10) };
  });
  const steps = dice.whole(1, 24);
  const samples: SampleGroup[] = Array.from({ length: dice.whole(0, 3) }, () => ({
    cell: Int32Array.from(
      Array.from({ length: dice.whole(1, 30) }, () => ([0, 1, 2] as const).map((a) => within(a, 0))).flat(),
    ),
    every: dice.whole(1, 7),
  }));
  const waveform = makeWaveform({ type: 'gaussian', amplitude: 1, delay: 2e-11, sigma: 2e-11 });
  return {
    boxCells,
    pad,
    cellSize,
    timeStep: courantStep(dice.real(0.5, 1), cellSize, medium.speed),
    steps,
    medium,
    boundary,
    precision: dice.pick(['single', 'double']),
    currents: edgesOf(edges, waveform),
    scale: 1,
    samples,
  };
}

/** A random way to run a problem. */
export function randomSchedule(seed: number): Schedule & { readonly threads: number } {
  const dice = new Dice(seed);
  const blockSteps = dice.whole(1, 12);
  return {
    order: dice.pick(['wavefront', 'wavefront', 'wavefront', 'sweep']),
    threads: dice.whole(1, 3),
    blockSteps,
    tileRows: dice.whole(1, 12),
    batchSteps: dice.pick([1, 3, blockSteps, 4 * blockSteps, 1000]),
  };
}

/** A random start for the six fields: values of the size of the scale. */
export function randomFields(problem: GridProblem, nodes: number, seed: number): Float64Array[] {
  const dice = new Dice(seed);
  const round = problem.precision === 'single' ? Math.fround : (x: number) => x;
  return Array.from({ length: 6 }, () => Float64Array.from({ length: nodes }, () => round(dice.real(-1, 1))));
}
