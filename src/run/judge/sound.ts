import { energy } from '../../compare/budget.ts';
import { FIELDS, type Field } from '../../compare/fields.ts';
import { pointError } from '../../compare/pointError.ts';
import { formatNumber } from '../../elementary/quantity.ts';
import { predictGridField } from '../../lattice/predict.ts';
import { predictGridFieldBySpectrum } from '../../lattice/spectral.ts';
import { exactHistory } from '../../retarded/history.ts';
import { distanceToSources, lastArrival } from '../../scenario/distance.ts';
import type { Scenario } from '../../scenario/model.ts';
import { cellCentre } from '../../scenario/sites.ts';
import { type FieldHistory, type Instants, instantsOf, samplePoints } from '../../trace/trace.ts';
import { type Question, questionOf, sampleInterval } from '../question.ts';
import { sampleAt } from './exactTraces.ts';

/**
 * What a sound Yee solver would show: the lattice's own error, gridding of the source included, at a cell, as closed forms
 * predict it. No walls: they are the solver's own affair.
 */
export interface SoundError {
  readonly instants: Instants;
  /** grid − exact of the six components, each at its own site, V/m and A/m */
  readonly values: readonly Float64Array[];
  /** relative L2 over the window; NaN where the field vanishes */
  readonly relative: Readonly<Record<Field, number>>;
}

/** Why nothing is predicted: a predicate of “the error of a sound grid”. */
export interface NotPredicted {
  readonly reason: string;
}

/** Fewer cells a wavelength, or nearer to a source in cells, and predictions are no measure any more. */
const FEWEST_CELLS = 4;
const NEAREST_CELLS = 2;

/** The time form holds above so many cells a wavelength, and below so large an error; the spectral form is some 30 times dearer. */
const TIME_FORM_CELLS = 8;
const TIME_FORM_ERROR = 0.03;

/** Edge responses times lines that are worth their time: some 1.5 µs each. */
const MOST_RESPONSES = 2e6;

/** Predictions by cell, each made once. */
export class SoundErrors {
  readonly #question: Question;
  readonly #known = new Map<string, SoundError | NotPredicted>();

  constructor(
    readonly scenario: Scenario,
    /** last instant that is asked for, s */
    readonly end: number,
  ) {
    this.#question = questionOf(scenario);
  }

  /** The prediction at a cell. */
  at(cell: readonly [number, number, number]): SoundError | NotPredicted {
    const key = cell.join();
    const known = this.#known.get(key) ?? this.#predict(cell);
    this.#known.set(key, known);
    return known;
  }

  #predict(cell: readonly [number, number, number]): SoundError | NotPredicted {
    const { scenario } = this;
    const { grid, sources, medium } = scenario;
    const { cellsPerWavelength, highestFrequency, timeStep, gridded } = this.#question;
    if (cellsPerWavelength < FEWEST_CELLS)
      return {
        reason: `is predicted from ${FEWEST_CELLS} cells per shortest wavelength on, and there are ${formatNumber(cellsPerWavelength, 2)}`,
      };
    const centre = cellCentre(grid, cell, 0);
    const distance = distanceToSources(sources, centre) / Math.max(...grid.cellSize);
    if (distance < NEAREST_CELLS)
      return {
        reason: `is predicted from ${NEAREST_CELLS} cells off the sources on, and the nearest is ${formatNumber(distance, 2)} away`,
      };
    const steps = Math.max(16, Math.ceil(Math.min(this.end, lastArrival(sources, medium, centre, 1e-6)) / timeStep));
    const every = Math.max(1, Math.floor(sampleInterval({ ...this.#question, steps }) / 2));
    const instants = instantsOf(steps, timeStep, every);
    const points = samplePoints(Int32Array.from(cell), grid.box.from, grid.cellSize);
    const exact = { points, instants, values: exactHistory(sources, medium, points, instants).values };
    const lattice = { cellSize: grid.cellSize, timeStep, medium };
    const history = (values: Float64Array): FieldHistory => ({ points, instants, values });
    const inTime = history(predictGridField(gridded.edges, lattice, points, instants));
    const isSmooth = sources.every(({ waveform }) => waveform.expectedOrder.order >= 2);
    const lines = 4 * highestFrequency * steps * timeStep;
    const wantsSpectrum =
      cellsPerWavelength < TIME_FORM_CELLS || !isSmooth || pointError(inTime, exact, exact, 'E', 0) > TIME_FORM_ERROR;
    const affordable = 6 * gridded.edges.count * lines <= MOST_RESPONSES;
    if (wantsSpectrum && !affordable && !isSmooth)
      return { reason: 'is too dear to predict for a waveform with kinks on so fine a grid' };
    const field =
      wantsSpectrum && affordable
        ? history(predictGridFieldBySpectrum(gridded.edges, lattice, points, instants))
        : inTime;
    const count = instants.count;
    const values = [0, 1, 2, 3, 4, 5].map((c) =>
      field.values.subarray(c * count, (c + 1) * count).map((v, n) => v - exact.values[c * count + n]!),
    );
    const relative = (of: Field) => (energy(exact, of, 0) > 0 ? pointError(field, exact, exact, of, 0) : Number.NaN);
    return {
      instants,
      values,
      relative: Object.fromEntries(FIELDS.map((of) => [of, relative(of)])) as Record<Field, number>,
    };
  }
}

/** The predicted error of a component at instants `of(t)`. */
export function soundAt(
  { instants, values }: SoundError,
  component: number,
  time: Float64Array,
  of: (t: number) => number,
): Float64Array {
  const own = component < 3 ? instants.E : instants.H;
  const step = own[1]! - own[0]!;
  return time.map((t) => sampleAt(values[component]!, (of(t) - own[0]!) / step));
}
