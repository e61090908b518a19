import type { GridProblem, SampleGroup } from '../fdtd/problem.ts';
import type { GriddedSources } from '../gridding/edges.ts';
import { gridSources, nodeGridOf } from '../gridding/gridding.ts';
import type { Face, Scenario } from '../scenario/model.ts';
import { FACES } from '../scenario/model.ts';
import { shortestWavelength } from '../scenario/shortest.ts';
import { stepsOf, timeStepOf } from '../scenario/sites.ts';
import { cellsBehind } from '../scenario/walls.ts';

/** A scenario with what both solvers derive from it alike: the gridded sources, the time step, how many steps. */
export interface Question {
  readonly scenario: Scenario;
  readonly gridded: GriddedSources;
  /** Δt, s */
  readonly timeStep: number;
  readonly steps: number;
  /** highest significant frequency (−40 dB of what radiates), Hz */
  readonly highestFrequency: number;
  /** cells in the shortest significant wavelength, along the coarsest axis */
  readonly cellsPerWavelength: number;
}

export function questionOf(scenario: Scenario): Question {
  const { grid, medium, duration } = scenario;
  const timeStep = timeStepOf(grid, medium);
  const shortest = shortestWavelength(scenario);
  return {
    scenario,
    gridded: gridSources(scenario.sources, nodeGridOf(grid)),
    timeStep,
    steps: Math.max(1, stepsOf(duration, timeStep)),
    highestFrequency: shortest.frequency,
    cellsPerWavelength: shortest.cells,
  };
}

/**
 * How many steps apart the volume samples may be read: five reads a period of the highest significant frequency keep
 * sums of squares, whose spectrum reaches twice as far, free of aliasing.
 */
export function sampleInterval({ highestFrequency, timeStep, steps }: Question): number {
  return Math.min(Math.max(1, Math.floor(1 / (5 * highestFrequency * timeStep))), Math.max(1, Math.floor(steps / 32)));
}

/** The working box with its own walls, as the scenario has it. */
export function boxProblem(question: Question, samples: readonly SampleGroup[], fusedMultiplyAdd = false): GridProblem {
  const { scenario, gridded, timeStep, steps } = question;
  const { grid, medium } = scenario;
  const pad = Object.fromEntries(FACES.map((face) => [face, cellsBehind(grid.boundary[face])])) as Record<Face, number>;
  return {
    boxCells: grid.cells,
    pad,
    cellSize: grid.cellSize,
    timeStep,
    steps,
    medium,
    boundary: grid.boundary,
    precision: grid.precision,
    ...(fusedMultiplyAdd ? { fusedMultiplyAdd } : {}),
    currents: gridded.edges,
    // E beside a filament is about ηI/(2πr): a cell's voltage is about ηI, whatever its size.
    scale: medium.impedance * Math.max(...scenario.sources.map(({ waveform }) => waveform.peak)),
    samples,
  };
}
