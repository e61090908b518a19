import { bandOf } from '../compare/band.ts';
import { boundaryText } from '../compare/boundaryWords.ts';
import { energy } from '../compare/budget.ts';
import { pointError } from '../compare/pointError.ts';
import { magnitudes, spectrumOf } from '../compare/spectrum.ts';
import { fromDecibels } from '../elementary/elementary.ts';
import { predictGridField, predictLatticeError } from '../lattice/predict.ts';
import { predictGridFieldBySpectrum, predictLatticeErrorBySpectrum } from '../lattice/spectral.ts';
import { exactHistory } from '../retarded/history.ts';
import { sourceBounds } from '../scenario/distance.ts';
import type { Axis, Boundary, Scenario, Vec3 } from '../scenario/model.ts';
import { type FieldHistory, type Instants, instantsOf, type SamplePoints, samplePoints } from '../trace/trace.ts';
import { questionOf, sampleInterval } from './question.ts';

/**
 * What a grid solver's error will be at some places, without a run. In free space the field that the lattice will show is
 * known (src/lattice/), and the exact one too: their difference is lattice and gridding parts together, with whatever
 * they cancel of each other. What walls send back is a share of what perfect conductors would.
 *
 * An error is a list of relative L2 errors of E: one over the window, or, for a band, one of each sixth-octave band in it.
 */
export type ErrorList = Float64Array;

/** Predicted errors of E at one place. */
export interface PlaceErrors {
  /** lattice and gridding together */
  readonly free: ErrorList;
  readonly lattice: ErrorList;
  readonly gridding: ErrorList;
}

export type Form = 'time' | 'spectrum';

/** Where and how errors are looked at. */
export interface Asked {
  /** the cells of the lattice that are read, 3 a place */
  readonly cells: Int32Array;
  /** Hz; null: the whole signal */
  readonly band: number | null;
}

/** A scenario's fields at cells, as far as predictions need them. */
interface Lookout {
  readonly points: SamplePoints;
  readonly instants: Instants;
  readonly exact: FieldHistory;
}

function lookout(scenario: Scenario, cells: Int32Array, instants: Instants): Lookout {
  const { grid, sources, medium } = scenario;
  const points = samplePoints(cells, grid.box.from, grid.cellSize);
  const { values } = exactHistory(sources, medium, points, instants);
  return { points, instants, exact: { points, instants, values } };
}

/**
 * Predicted errors without walls. The time form is right to 10 % at 8 or more cells per shortest wavelength while the
 * error is below some 4 %; the spectral form to 5 %, and to 15 % from 4 cells on, at some thirty times the cost.
 * @throws RangeError where a cell's sites lie on edges that carry the current
 */
export function predictFree(scenario: Scenario, { cells, band }: Asked, form: Form): PlaceErrors[] {
  const question = questionOf(scenario);
  const { gridded, timeStep, steps } = question;
  const { grid, medium } = scenario;
  const { points, instants, exact } = lookout(scenario, cells, instantsOf(steps, timeStep, sampleInterval(question)));
  const lattice = { cellSize: grid.cellSize, timeStep, medium };
  const [fieldOf, errorOf] =
    form === 'time'
      ? [predictGridField, predictLatticeError]
      : [predictGridFieldBySpectrum, predictLatticeErrorBySpectrum];
  const field = fieldOf(gridded.edges, lattice, points, instants);
  const added = errorOf(gridded.edges, lattice, points, instants);
  const plus = (part: (i: number) => number): FieldHistory => ({
    ...exact,
    values: exact.values.map((v, i) => v + part(i)),
  });
  const withAll = { ...exact, values: field };
  const withLattice = plus((i) => added[i]!);
  const withGridding = plus((i) => field[i]! - exact.values[i]! - added[i]!);
  return Array.from({ length: points.count }, (_, p) => ({
    free: errorsAt(withAll, exact, p, band),
    lattice: errorsAt(withLattice, exact, p, band),
    gridding: errorsAt(withGridding, exact, p, band),
  }));
}

/** What walls are predicted to send back at one place, relative to the exact field. */
export interface WallErrors {
  /** perfect conductors: the root-sum-square of the fields of the source's six images */
  readonly pec: ErrorList;
  /** the same, each image weakened by what Mur's first-order wall absorbs of it */
  readonly mur1: ErrorList;
}

/**
 * What the six walls of the box send back at first. An image's field at p is the mirror image of the source's own at the
 * mirrored p, so that no image needs to be made.
 */
export function predictWalls(scenario: Scenario, { cells, band }: Asked): WallErrors[] {
  const question = questionOf(scenario);
  const { sources, medium, grid } = scenario;
  const instants = instantsOf(question.steps, question.timeStep, sampleInterval(question));
  const { points, exact } = lookout(scenario, cells, instants);
  const centre = middleOf(sources);
  const centres = Array.from({ length: points.count }, (_, p) => (band === null ? [] : bandCentres(exact, p)));
  const squares = Array.from({ length: points.count }, () => ({ pec: [] as number[], mur1: [] as number[] }));
  for (const a of [0, 1, 2] as const)
    for (const wall of [grid.box.from[a], grid.box.to[a]]) {
      const position = points.position.map((x, n) => (n % 3 === a ? 2 * wall - x : x));
      const image = { ...exact, values: exactHistory(sources, medium, { ...points, position }, instants).values };
      const withImage = { ...exact, values: exact.values.map((v, i) => v + image.values[i]!) };
      for (let p = 0; p < points.count; p++) {
        const along = [0, 1, 2].map((b) => position[18 * p + b]! - centre[b]!);
        const distance = Math.sqrt(along.reduce((sum, x) => sum + x * x, 0));
        const share = (frequency: number) =>
          murShare((2 * Math.PI * frequency * distance) / medium.speed, Math.abs(along[a]!) / distance);
        errorsAt(withImage, exact, p, band).forEach((e, m) => {
          const absorbed = band === null ? meanShare(image, p, share) : share(centres[p]![m]!);
          squares[p]!.pec[m] = (squares[p]!.pec[m] ?? 0) + e * e;
          squares[p]!.mur1[m] = (squares[p]!.mur1[m] ?? 0) + e * e * absorbed;
        });
      }
    }
  const roots = (list: readonly number[]) => Float64Array.from(list, Math.sqrt);
  return squares.map(({ pec, mur1 }) => ({ pec: roots(pec), mur1: roots(mur1) }));
}

/** The middle of the box around all sources. */
function middleOf(sources: Scenario['sources']): Vec3 {
  const bounds = sources.map(sourceBounds);
  const at = (a: Axis) => (Math.min(...bounds.map((b) => b.from[a])) + Math.max(...bounds.map((b) => b.to[a]))) / 2;
  return [at(0), at(1), at(2)];
}

/**
 * The share of an image's power that Mur's first-order wall sends back, x = kr at the image's distance and θ its angle
 * of incidence. What radiates meets R = (1 − cos θ)/(1 + cos θ) (Engquist & Majda 1977); what is near field meets nothing
 * that it matches and comes back whole. Of a dipole's |1 + 1/(jx) − 1/x²|², roughly, the part 1/(1 + x⁻² + x⁻⁴) radiates.
 */
function murShare(x: number, cosine: number): number {
  const reflection = (1 - cosine) / (1 + cosine);
  const radiates = x > 0 ? 1 / (1 + 1 / (x * x) + 1 / (x * x * x * x)) : 0;
  return reflection * reflection * radiates + 1 - radiates;
}

/** A share of power by frequency, averaged over the spectrum of E at a point. */
function meanShare(history: FieldHistory, point: number, share: (frequency: number) => number): number {
  const spectrum = spectrumOf(history, 'E', point);
  let power = 0;
  let back = 0;
  magnitudes(spectrum).forEach((magnitude, k) => {
    power += magnitude * magnitude;
    back += magnitude * magnitude * share(k / spectrum.window);
  });
  return power > 0 ? back / power : 0;
}

/** The middles of the sixth-octave bands that count, Hz. */
const bandCentres = (exact: FieldHistory, point: number): number[] =>
  bandOf(exact, exact, 'E', point, 0, 1).bands.map(({ from, to }) => (from + to) / 2);

/**
 * What an absorber sends back, as a share of what perfect conductors do: medians over scenarios with 4 or more cells of
 * clearance, by layers, dB. They hold within a factor of 2 in nine of ten cases with 8 or more layers and in seven of ten
 * with 6, which lets more of grazing waves and of short ones through (test/stress/plan.test.ts).
 */
const CPML_REFLECTION_DB: Readonly<Record<number, number>> = { 6: -71, 8: -83, 10: -89.5, 12: -95 };

/** Whether walls are known well enough to be predicted. */
export const isPredictable = (wall: Wall): boolean =>
  wall.type === 'pec' || wall.type === 'mur1' || reflectionOf(wall) !== undefined;

const reflectionOf = ({ type, layers }: Wall): number | undefined =>
  type === 'cpml' ? CPML_REFLECTION_DB[layers ?? 0] : undefined;

/** The boundary part. @throws RangeError for walls that are not predictable */
export function boundaryErrors({ pec, mur1 }: WallErrors, wall: Wall): ErrorList {
  if (wall.type === 'mur1') return mur1;
  if (wall.type === 'pec') return pec;
  const dB = reflectionOf(wall);
  if (dB === undefined) throw new RangeError(`What ${boundaryText(wall)} sends back was not measured.`);
  const share = fromDecibels(dB);
  return pec.map((e) => share * e);
}

export interface Wall {
  readonly type: Boundary['type'];
  readonly layers?: number | undefined;
}

/** Relative errors of E at one point: over the window, or in the sixth-octave bands that begin below `band`. */
export function errorsAt(grid: FieldHistory, exact: FieldHistory, point: number, band: number | null): ErrorList {
  if (band === null) return Float64Array.of(pointError(grid, exact, exact, 'E', point));
  return Float64Array.from(
    bandOf(grid, exact, 'E', point, 0, 1)
      .bands.filter(({ from }) => from < band)
      .map(({ error }) => error),
  );
}

/** Root mean square of E and of ηH at places, V/m: where fields are strong, and where E vanishes. */
export function strengths(
  scenario: Scenario,
  places: readonly Vec3[],
): { readonly E: number; readonly etaH: number }[] {
  const question = questionOf(scenario);
  const { sources, medium } = scenario;
  const position = Float64Array.from(places.flatMap((at) => [0, 1, 2, 3, 4, 5].flatMap(() => at)));
  const points = { count: places.length, cell: new Int32Array(3 * places.length), position };
  const instants = instantsOf(question.steps, question.timeStep, sampleInterval(question));
  const { values } = exactHistory(sources, medium, points, instants);
  const history = { points, instants, values };
  const amplitude = (field: 'E' | 'H', p: number) => Math.sqrt(energy(history, field, p) / instants.count);
  return places.map((_, p) => ({ E: amplitude('E', p), etaH: medium.impedance * amplitude('H', p) }));
}
