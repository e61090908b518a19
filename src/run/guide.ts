import { asin, atan2, cos, sin } from '../elementary/elementary.ts';
import type { GridProblem } from '../fdtd/problem.ts';
import type { EdgeCurrents } from '../gridding/edges.ts';
import { type Axis, type Boundary, FACES, type Face, type Medium, type Scenario } from '../scenario/model.ts';
import { cellsBehind } from '../scenario/walls.ts';
import { makeWaveform } from '../scenario/waveforms.ts';
import { REFLECTION_MARGIN, reflectionFloor } from './freeSpace.ts';
import type { Question } from './question.ts';

/**
 * Reflection of plane waves by their angle, measured in a guide: its side walls are perfect conductors, so that each of its
 * modes is a pair of plane waves that meet the end wall at one angle (any textbook on waveguides). A sheet of current
 * excites all modes at once with one pulse; E along z is read in one cross-section, once with the end wall and once in a
 * guide so long that nothing comes back, and taken apart into modes, which on the lattice are sines exactly.
 *
 *     |R|(θ_m) = |Σ_n (a_m − b_m)(t_n) e^(−jωt_n)| / |Σ_n b_m(t_n) e^(−jωt_n)|,  a_m with the wall and b_m without
 *
 * E lies along the wall and across the plane of incidence.
 */
export interface Guide {
  /** ω/2π, Hz */
  readonly frequency: number;
  /** angles θ_m of the modes, from the wall's normal, rad; m = 1, 2, … */
  readonly angles: readonly number[];
  /** cells across */
  readonly across: number;
  readonly withWall: GridProblem;
  readonly endless: GridProblem;
}

/** Width of the guide in wavelengths: so many modes travel in each half of one. */
const WIDTH = 6;
const CELLS_ACROSS = { least: 16, most: 160 } as const;

/** Cells from the sheet to the cross-section that is read, and from there to the wall. */
const SHEET = 8;
const PROBE = 4;

/** Sigma of the pulse in periods: its spectrum is 1/(2π·2.4), a fifteenth of the frequency, wide. */
const PERIODS = 2.4;

/** Sigmas from the start of the window to the middle of the pulse: its start is below rounding. */
const LEAD = 8.6;

/** Modes nearer to grazing than this travel so slowly that the window would have to be much longer. */
const STEEPEST = (60 * Math.PI) / 180;

/**
 * The guide for one wall of a scenario.
 * @param axis the wall's normal; it becomes x of the guide
 */
export function guideFor(
  question: Pick<Question, 'scenario' | 'timeStep' | 'highestFrequency'>,
  wall: Boundary,
  axis: Axis,
): Guide {
  const { medium, grid } = question.scenario;
  const { timeStep } = question;
  const [dx, dy, dz] = [axis, (axis + 1) % 3, (axis + 2) % 3].map((a) => grid.cellSize[a]!) as [number, number, number];
  const frequency = question.highestFrequency / 2;
  const wavelength = medium.speed / frequency;
  const across = Math.min(CELLS_ACROSS.most, Math.max(CELLS_ACROSS.least, Math.round((WIDTH * wavelength) / dy)));
  const angles: number[] = [];
  for (let m = 1; m < across; m++) {
    const angle = modeAngle(frequency, (m * Math.PI) / (across * dy), { dx, dy, timeStep, medium });
    if (!(angle <= STEEPEST)) break;
    angles.push(angle);
  }
  const sigma = PERIODS / frequency;
  const way = ((SHEET + 2 * PROBE) * dx) / (medium.speed * cos(STEEPEST));
  const steps = Math.ceil((2 * LEAD * sigma + 1.5 * way) / timeStep);
  // Out and back within the window at the speed of the medium, and some cells for what runs ahead on the lattice.
  const long = Math.ceil((medium.speed * steps * timeStep) / (2 * dx)) + 20;
  const waveform = makeWaveform({ type: 'modulatedGaussian', amplitude: 1, delay: LEAD * sigma, sigma, frequency });
  const guide = (end: number, boundary: Boundary): GridProblem => {
    const layers = cellsBehind(boundary);
    const conductor: Boundary = { type: 'pec' };
    return {
      boxCells: [long + SHEET + end, across, 2],
      pad: { 'x-': 0, 'x+': layers, 'y-': 0, 'y+': 0, 'z-': 0, 'z+': 0 },
      cellSize: [dx, dy, dz],
      timeStep,
      steps,
      medium,
      boundary: {
        'x-': conductor,
        'x+': boundary,
        'y-': conductor,
        'y+': conductor,
        'z-': conductor,
        'z+': conductor,
      },
      precision: 'double',
      currents: { ...sheet(long, across, angles.length), waveforms: [waveform] },
      scale: medium.impedance,
      activeRegion: { margin: REFLECTION_MARGIN },
      samples: [
        { cell: Int32Array.from({ length: 3 * (across - 1) }, (_, n) => crossSection(long + SHEET, n)), every: 1 },
      ],
    };
  };
  return {
    frequency,
    angles,
    across,
    withWall: guide(PROBE, wall),
    endless: guide(long, { type: 'pec' }),
  };
}

/** i, j, k of the cells at nodes 1, 2, … across. */
const crossSection = (i: number, n: number): number => [i, Math.floor(n / 3) + 1, 0][n % 3]!;

/** Edges along z in one cross-section, all modes alike: Σ_m sin(mπj/across). */
function sheet(i: number, across: number, modes: number): Omit<EdgeCurrents, 'waveforms'> {
  const places = Array.from({ length: across - 1 }, (_, n) => n + 1).flatMap((j) => [0, 1].map((k) => [i, j, k]));
  const weight = places.map(([, j]) => {
    let sum = 0;
    for (let m = 1; m <= modes; m++) sum += sin((m * Math.PI * j!) / across);
    return sum / modes;
  });
  return {
    count: places.length,
    axis: new Uint8Array(places.length).fill(2),
    node: Int32Array.from(places.flat()),
    pairStart: Int32Array.from({ length: places.length + 1 }, (_, e) => e),
    weight: Float64Array.from(weight),
    delay: new Float64Array(places.length),
    waveform: new Uint16Array(places.length),
  };
}

/** Across the guide's end: cell sizes, m, and what else the lattice's waves depend on. */
interface EndLattice {
  readonly dx: number;
  readonly dy: number;
  readonly timeStep: number;
  readonly medium: Medium;
}

/**
 * kx of a wave of given ky by the dispersion relation of Yee's lattice,
 * [sin(ωΔt/2)/(vΔt)]² = [sin(kx dx/2)/dx]² + [sin(ky dy/2)/dy]² (Taflove & Hagness); NaN where it does not travel.
 */
export function normalWavenumber(frequency: number, ky: number, { dx, dy, timeStep, medium }: EndLattice): number {
  const time = sin(Math.PI * frequency * timeStep) / (medium.speed * timeStep);
  const side = sin((ky * dy) / 2) / dy;
  const square = time * time - side * side;
  return square >= 0 ? (2 / dx) * asin(dx * Math.sqrt(square)) : Number.NaN;
}

function modeAngle(frequency: number, ky: number, lattice: EndLattice): number {
  return atan2(ky, normalWavenumber(frequency, ky, lattice));
}

/** What the modes say. */
export interface AngleMeasurement {
  /** rad */
  readonly angles: readonly number[];
  /** |R|, one an angle */
  readonly reflected: readonly number[];
  /** a ratio that these cannot be told from */
  readonly floor: number;
}

/** Modes whose reflection changes more than this when the end of the window is left out are not told. */
const STEADY = 0.02;

/**
 * |R| of every mode from the samples of the two runs, values[(point·6 + component)·steps + n].
 */
export function angleReflections(
  { frequency, angles, across, withWall }: Guide,
  wall: Float64Array,
  endless: Float64Array,
): AngleMeasurement {
  const { steps, timeStep } = withWall;
  const turn = 2 * Math.PI * frequency * timeStep;
  const cosines = Float64Array.from({ length: steps }, (_, n) => cos(turn * n));
  const sines = Float64Array.from({ length: steps }, (_, n) => sin(turn * n));
  const ratio = (m: number, end: number): number => {
    const line = (of: (index: number) => number): number => {
      let re = 0;
      let im = 0;
      for (let j = 1; j < across; j++) {
        const weight = sin((m * Math.PI * j) / across);
        const start = ((j - 1) * 6 + 2) * steps;
        for (let n = 0; n < end; n++) {
          const v = weight * of(start + n);
          re += v * cosines[n]!;
          im += v * sines[n]!;
        }
      }
      return Math.sqrt(re * re + im * im);
    };
    return line((i) => wall[i]! - endless[i]!) / line((i) => endless[i]!);
  };
  const found = angles.map((angle, m) => {
    const whole = ratio(m + 1, steps);
    return { angle, whole, change: Math.abs(whole - ratio(m + 1, Math.floor(0.95 * steps))) };
  });
  const steady = found.filter(({ whole, change }) => change <= STEADY * whole);
  return {
    angles: steady.map(({ angle }) => angle),
    reflected: steady.map(({ whole }) => whole),
    floor: reflectionFloor(),
  };
}

/** The walls of a scenario that differ, each with the faces it stands on. */
export function distinctWalls({ grid }: Scenario): { wall: Boundary; axis: Axis; faces: Face[] }[] {
  const found = new Map<string, { wall: Boundary; axis: Axis; faces: Face[] }>();
  FACES.forEach((face, f) => {
    const axis = (f >> 1) as Axis;
    const wall = grid.boundary[face];
    const cells = [axis, (axis + 1) % 3, (axis + 2) % 3].map((a) => grid.cellSize[a]);
    const key = JSON.stringify([wall, cells]);
    const known = found.get(key);
    if (known) known.faces.push(face);
    else found.set(key, { wall, axis, faces: [face] });
  });
  return [...found.values()];
}
