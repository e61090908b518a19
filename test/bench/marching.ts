/** What the grid benchmark marches; bundled for Node and its threads together with the solver. */
import { fieldAddress, realsOf } from '../../src/fdtd/layout.ts';
import type { GridProblem } from '../../src/fdtd/problem.ts';
import { type GridOptions, type GridSetup, lead, prepareGridRun } from '../../src/fdtd/run.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import { courantStep, cpml, edgesOf, everyFace, plainProblem, type Triple } from '../fdtd/problems.ts';

export { follow } from '../../src/fdtd/run.ts';

const LAYERS = 10;

/** A conducting cube with nothing in it. */
export function bare(cells: number, steps: number, precision: 'single' | 'double' = 'single'): GridProblem {
  return plainProblem([cells, cells, cells], { steps, precision });
}

/** A smooth pulse at one edge in the middle of a conducting cube: its flanks are what denormals are made of. */
export function smoothPulse(cells: number, steps: number): GridProblem {
  const problem = bare(cells, steps);
  const sigma = 12 * problem.timeStep;
  const waveform = makeWaveform({ type: 'gaussian', amplitude: 1, delay: 9 * sigma, sigma });
  const middle = cells >> 1;
  return { ...problem, currents: edgesOf([{ axis: 2, node: [middle, middle, middle] }], waveform) };
}

/**
 * The same cube as a user runs it: CPML of 10 layers on six faces (within the given cells), a wire of 20 edges, 30
 * observers at every step and three planes at every fifth.
 */
export function asUsed(cells: number, steps: number, activeRegion = false): GridProblem {
  const box = cells - 2 * LAYERS;
  const middle = box >> 1;
  const cellSize: Triple = [5e-3, 5e-3, 5e-3];
  const timeStep = courantStep(0.99, cellSize, 299792458);
  const sigma = 12 * timeStep;
  const waveform = makeWaveform({ type: 'gaussianDerivative', amplitude: 1, delay: 6 * sigma, sigma });
  const wire = Array.from({ length: 20 }, (_, n) => ({
    axis: 2,
    node: [middle, middle, middle - 10 + n],
    weight: 1 - Math.abs(n - 9.5) / 10,
  }));
  const observers = Array.from({ length: 30 }, (_, n) => [(n * 7919) % box, (n * 104729) % box, (n * 1299709) % box]);
  const planes = [0, 1, 2].flatMap((axis) =>
    Array.from({ length: box * box }, (_, n) => {
      const across = [n % box, Math.floor(n / box)];
      across.splice(axis, 0, middle + 3);
      return across;
    }),
  );
  return {
    ...plainProblem([box, box, box], {
      cellSize,
      timeStep,
      steps,
      precision: 'single',
      boundary: everyFace(cpml(LAYERS)),
      pad: everyFace(LAYERS),
      currents: edgesOf(wire, waveform),
      samples: [
        { cell: Int32Array.from(observers.flat()), every: 1 },
        { cell: Int32Array.from(planes.flat()), every: 5 },
      ],
    }),
    ...(activeRegion ? { activeRegion: { margin: 6 } } : {}),
  };
}

/** Random fields of size 1, tangential e on the walls left alone. */
function randomStart({ memory, layout }: GridSetup): void {
  const reals = realsOf(layout, memory);
  const [nx, ny, nz] = layout.cells;
  let seed = 2463534242;
  for (let field = 0; field < 6; field++)
    for (let k = 1; k < nz; k++)
      for (let j = 1; j < ny; j++) {
        const row = fieldAddress(layout, field, 0, j, k) / layout.real;
        for (let i = 1; i < nx; i++) {
          seed = (Math.imul(seed, 1664525) + 1013904223) | 0;
          reals[row + i] = seed / 2147483648;
        }
      }
}

export interface Measured {
  /** s from the call until fields and tables were ready */
  readonly startSeconds: number;
  /** s from then until all samples were there */
  readonly seconds: number;
  /** s of that in the kernel */
  readonly marchSeconds: number;
  /** million cells of the lattice by steps a second, over `seconds` */
  readonly rate: number;
  readonly cellUpdates: number;
  readonly checksum: number;
}

/** Runs a problem once. @param help has followers follow a setup; resolved when they have left */
export async function measure(
  problem: GridProblem,
  options: GridOptions & { readonly random?: boolean },
  help: (setup: GridSetup) => Promise<unknown>,
): Promise<Measured> {
  const called = performance.now();
  const run = prepareGridRun(problem, options);
  const left = help(run.setup);
  let started = 0;
  let startSeconds = 0;
  const result = lead(run, {
    onStart(setup) {
      const ready = performance.now();
      if (options.random) randomStart(setup);
      started = performance.now();
      startSeconds = (ready - called) / 1000;
    },
  });
  const seconds = (performance.now() - started) / 1000;
  await left;
  const { layout, memory } = run.setup;
  const [nx, ny, nz] = layout.cells;
  const middle = fieldAddress(layout, 2, nx >> 1, ny >> 1, nz >> 1) / layout.real;
  return {
    startSeconds,
    seconds,
    marchSeconds: result.seconds,
    rate: (1e-6 * nx * ny * nz * problem.steps) / seconds,
    cellUpdates: result.cellUpdates,
    checksum: realsOf(layout, memory)[middle]!,
  };
}
