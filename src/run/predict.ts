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

/** One of the source's six images in perfect walls, as seen from one place. */
interface Image {
  /** its field, relative to the exact one, in every band that is asked for */
  readonly error: ErrorList;
  /** the share of its power that is near field, in the same bands */
  readonly near: Float64Array;
  /** (kh)², h the cell along the wall's normal: mean over its power, in the same bands */
  readonly coarseness: Float64Array;
  /** of its angle of incidence on the wall */
  readonly cosine: number;
}

/** What walls are predicted to send back at one place: how much of each image, `boundaryErrors` says. */
export type WallErrors = readonly Image[];

/**
 * The images that the six walls of the box make. An image's field at p is the mirror image of the source's own at the
 * mirrored p, so that no image needs to be made.
 */
export function predictWalls(scenario: Scenario, { cells, band }: Asked): WallErrors[] {
  const question = questionOf(scenario);
  const { sources, medium, grid } = scenario;
  const instants = instantsOf(question.steps, question.timeStep, sampleInterval(question));
  const { points, exact } = lookout(scenario, cells, instants);
  const centre = middleOf(sources);
  const centres = Array.from({ length: points.count }, (_, p) => (band === null ? [] : bandCentres(exact, p)));
  const images: Image[][] = Array.from({ length: points.count }, () => []);
  for (const a of [0, 1, 2] as const)
    for (const wall of [grid.box.from[a], grid.box.to[a]]) {
      const position = points.position.map((x, n) => (n % 3 === a ? 2 * wall - x : x));
      const image = { ...exact, values: exactHistory(sources, medium, { ...points, position }, instants).values };
      const withImage = { ...exact, values: exact.values.map((v, i) => v + image.values[i]!) };
      for (let p = 0; p < points.count; p++) {
        const along = [0, 1, 2].map((b) => position[18 * p + b]! - centre[b]!);
        const distance = Math.sqrt(along.reduce((sum, x) => sum + x * x, 0));
        const wavenumber = (frequency: number) => (2 * Math.PI * frequency) / medium.speed;
        const error = errorsAt(withImage, exact, p, band);
        const inBands = (of: (k: number) => number): Float64Array => {
          const mean = band === null ? meanOver(image, p, (frequency) => of(wavenumber(frequency))) : 0;
          return error.map((_, m) => (band === null ? mean : of(wavenumber(centres[p]![m]!))));
        };
        images[p]!.push({
          error,
          near: inBands((k) => nearShare(k * distance)),
          coarseness: inBands((k) => k * k * grid.cellSize[a] * grid.cellSize[a]),
          cosine: Math.abs(along[a]!) / distance,
        });
      }
    }
  return images;
}

/** The middle of the box around all sources. */
function middleOf(sources: Scenario['sources']): Vec3 {
  const bounds = sources.map(sourceBounds);
  const at = (a: Axis) => (Math.min(...bounds.map((b) => b.from[a])) + Math.max(...bounds.map((b) => b.to[a]))) / 2;
  return [at(0), at(1), at(2)];
}

/**
 * The share of a source's power that is near field, at x = kr. Of a dipole's |1 + 1/(jx) − 1/x²|² some 1/(1 + x⁻² + x⁻⁴)
 * radiates; the weight of x⁻² is that at which the walls below are told best.
 */
function nearShare(x: number): number {
  return x > 0 ? 1 - 1 / (1 + NEAR_WEIGHT / (x * x) + 1 / (x * x * x * x)) : 1;
}
const NEAR_WEIGHT = 0.1;

/** A function of frequency, averaged over the power of E at a point. */
function meanOver(history: FieldHistory, point: number, of: (frequency: number) => number): number {
  const spectrum = spectrumOf(history, 'E', point);
  let power = 0;
  let sum = 0;
  magnitudes(spectrum).forEach((magnitude, k) => {
    power += magnitude * magnitude;
    sum += magnitude * magnitude * of(k / spectrum.window);
  });
  return power > 0 ? sum / power : 0;
}

/** The middles of the sixth-octave bands that count, Hz. */
const bandCentres = (exact: FieldHistory, point: number): number[] =>
  bandOf(exact, exact, 'E', point, 0, 1).bands.map(({ from, to }) => (from + to) / 2);

/**
 * What a wall sends back of an image's power: of what radiates, |R|² of plane waves, and of what is near field, which no
 * absorber is made for, a constant share. Conditions on the wall return the published R(θ) (src/fdtd/boundaries/). Layers
 * return what the lattice makes of them, at any angle in the same way: |R| goes as kh. The factors were fitted to 60 places
 * in 40 scenarios with 4 or more cells of clearance; test/stress/plan.test.ts tries them on others.
 */
interface Share {
  /** of a plane wave, by cos θ and (kh)² */
  readonly plane: (cosine: number, coarseness: number) => number;
  readonly near: number;
}

const squared = (x: number): number => x * x;
const firstOrder = (cosine: number): number => (1 - cosine) / (1 + cosine);
/** Higdon's for 0° and 45°. */
const higdon = (cosine: number): number => (firstOrder(cosine) * (Math.SQRT1_2 - cosine)) / (Math.SQRT1_2 + cosine);

/** @param plane |R|/(kh) of plane waves, dB @param near |R| of the near field, dB */
function layered(plane: number, near: number): Share {
  const share = squared(fromDecibels(plane));
  return { plane: (_, coarseness) => share * coarseness, near: squared(fromDecibels(near)) };
}

const SHARES: Readonly<Record<string, Share>> = {
  // Between conductors the images have images: twice the field.
  pec: { plane: () => 4.5, near: 4.5 },
  pmc: { plane: () => 4.5, near: 4.5 },
  mur1: { plane: (cosine) => 1.83 * squared(firstOrder(cosine)), near: 2.4 },
  // Its rims, which are of first order, outweigh the rest.
  mur2: { plane: (cosine) => 1.93 * squared(firstOrder(cosine)), near: 4.2 },
  higdon2: { plane: (cosine) => 1.33 * squared(higdon(cosine)), near: 0.16 },
  liao: { plane: (cosine) => squared(squared(firstOrder(cosine))), near: 0.09 },
  'cpml 6': layered(-62.7, -63),
  'cpml 8': layered(-77.4, -74.5),
  'cpml 10': layered(-83.8, -81),
  'cpml 12': layered(-88.7, -86.1),
  'splitPml 6': layered(-69.2, -55.7),
  'splitPml 8': layered(-79.5, -66.4),
  'splitPml 10': layered(-85.2, -74.4),
  'splitPml 12': layered(-89.8, -79.2),
};

const shareOf = ({ type, layers }: Wall): Share | undefined =>
  SHARES[layers === undefined ? type : `${type} ${layers}`];

/** Whether walls are known well enough to be predicted. */
export const isPredictable = (wall: Wall): boolean => shareOf(wall) !== undefined;

/** The boundary part: the root-sum-square of what comes back of the six images. @throws RangeError for walls that are not predictable */
export function boundaryErrors(images: WallErrors, wall: Wall): ErrorList {
  const share = shareOf(wall);
  if (!share) throw new RangeError(`What comes back of ${boundaryText(wall)} was not measured.`);
  return images[0]!.error.map((_, m) =>
    Math.sqrt(
      images.reduce((sum, { error, near, coarseness, cosine }) => {
        const back = share.plane(cosine, coarseness[m]!) * (1 - near[m]!) + share.near * near[m]!;
        return sum + error[m]! * error[m]! * back;
      }, 0),
    ),
  );
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
