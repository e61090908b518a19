import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import type { GriddedSources } from '../../src/gridding/edges.ts';
import { gridSources } from '../../src/gridding/gridding.ts';
import type { Lattice } from '../../src/lattice/lattice.ts';
import { mediumOf } from '../../src/scenario/constants.ts';
import { polyline } from '../../src/scenario/curve.ts';
import type { Axis, Dipole, Filament, Vec3 } from '../../src/scenario/model.ts';
import { timeStepOf } from '../../src/scenario/sites.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import { type Instants, instantsOf, type SamplePoints, samplePoints } from '../../src/trace/trace.ts';
import { dipoleField, historyOf, wireField } from './exactFields.ts';

/** One source on one lattice, with a few observers around it. */
export interface LatticeCase {
  readonly label: string;
  readonly lattice: Lattice;
  readonly source: Dipole | Filament;
  readonly gridded: GriddedSources;
  readonly points: SamplePoints;
  /** distance of each point from the source, in cells (their longest side) */
  readonly distances: readonly number[];
  readonly instants: Instants;
}

export interface CaseSpec {
  readonly source: 'edge' | 'dipole' | 'axisWire' | 'tiltedWire';
  readonly cellSize: Vec3;
  readonly relativePermittivity: number;
  readonly relativePermeability: number;
  readonly courant: number;
  /** largest cells per shortest wavelength, where |ω W| is −40 dB of its peak */
  readonly cellsPerWavelength: number;
  /** speed of the current along a wire, relative to the medium's */
  readonly speed: number;
  /** in cells */
  readonly wireLength: number;
  readonly waveform: 'gaussian' | 'gaussianDerivative';
  /** from t = 0 to the middle of the pulse, in sigma: at 5 a jump of 10⁻⁵ is left at t = 0, at 9 none */
  readonly lead: number;
  /** offsets of the observers' cells from the source's cell */
  readonly observers: readonly (readonly [number, number, number])[];
}

/** The source's cell; edges may lie anywhere in a grid twice as long. */
const HOME = 60;

export function latticeCase(spec: CaseSpec): LatticeCase {
  const medium = mediumOf(spec.relativePermittivity, spec.relativePermeability);
  const { cellSize, speed } = spec;
  const wavelength = spec.cellsPerWavelength * Math.max(...cellSize);
  const unit = makeWaveform({ type: spec.waveform, amplitude: 1, delay: 5, sigma: 1 });
  const sigma = unit.highestFrequency(0.01) / (medium.speed / wavelength);
  const waveform = makeWaveform({ type: spec.waveform, amplitude: 1, delay: spec.lead * sigma, sigma });
  const place = (x: number, y: number, z: number): Vec3 => [
    (HOME + x) * cellSize[0],
    (HOME + y) * cellSize[1],
    (HOME + z) * cellSize[2],
  ];
  const source = sourceOf(spec, waveform, place, medium.speed * speed);
  const gridded = gridSources([source], { origin: [0, 0, 0], cellSize, cells: [2 * HOME, 2 * HOME, 2 * HOME] });
  const lattice = { cellSize, timeStep: timeStepOf({ cellSize, courant: spec.courant }, medium), medium };
  const points = samplePoints(
    Int32Array.from(spec.observers.flatMap((o) => o.map((n) => n + HOME))),
    [0, 0, 0],
    cellSize,
  );
  const longest = Math.max(...cellSize);
  const distances = spec.observers.map((o) => distanceTo(source, place(o[0] + 0.5, o[1] + 0.5, o[2] + 0.5)) / longest);
  const wire = source.type === 'dipole' ? 0 : source.curve.length;
  const duration =
    (spec.lead + 5) * sigma +
    wire / (medium.speed * speed) +
    ((Math.max(...distances) + 3) * longest + wire) / medium.speed;
  return {
    label: [
      spec.source.padEnd(10),
      `cells ${cellSize.map((d) => (d * 1e3).toFixed(2)).join('×')}`,
      `εr ${spec.relativePermittivity}`,
      `S ${spec.courant.toFixed(2)}`,
      `N ${spec.cellsPerWavelength.toFixed(1).padStart(4)}`,
      `v ${speed}`,
      spec.waveform,
    ].join('  '),
    lattice,
    source,
    gridded,
    points,
    distances,
    instants: instantsOf(Math.ceil(duration / lattice.timeStep), lattice.timeStep),
  };
}

function sourceOf(
  spec: CaseSpec,
  waveform: ReturnType<typeof makeWaveform>,
  place: (x: number, y: number, z: number) => Vec3,
  speed: number,
): Dipole | Filament {
  const dipole = { type: 'dipole', name: 'dipole', length: 1e-3, waveform } as const;
  if (spec.source === 'edge') return { ...dipole, at: place(0, 0, 0.5), direction: [0, 0, 1] };
  if (spec.source === 'dipole') return { ...dipole, at: place(0.3, -0.2, 0.15), direction: [0.48, 0.36, 0.8] };
  const half = spec.wireLength / 2;
  const ends =
    spec.source === 'axisWire'
      ? [place(0, 0, -half), place(0, 0, half)]
      : [
          place(0.2 - 0.48 * half, -0.3 - 0.36 * half, 0.1 - 0.8 * half),
          place(0.2 + 0.48 * half, -0.3 + 0.36 * half, 0.1 + 0.8 * half),
        ];
  return {
    type: 'wire',
    name: 'wire',
    curve: polyline(ends),
    terms: [{ factor: 1, delay: 0, slowness: 1 / speed }],
    waveform,
  };
}

function distanceTo(source: Dipole | Filament, place: Vec3): number {
  return source.type === 'dipole'
    ? Math.hypot(...place.map((x, a) => x - source.at[a]!))
    : source.curve.pieces[0]!.distance(place);
}

/** The designed source's field at the case's points and instants. */
export function designedField({ source, lattice, points, instants }: LatticeCase): Float64Array {
  const field = source.type === 'dipole' ? dipoleField(source, lattice.medium) : wireField(source, lattice.medium);
  return historyOf(field, points, instants);
}

/** Euclidean norm of a point's E (first = 0) or H (first = 3) over components and instants. */
export function normOf(values: Float64Array, count: number, point: number, first: 0 | 3): number {
  let sum = 0;
  for (let n = (point * 6 + first) * count; n < (point * 6 + first + 3) * count; n++) sum += values[n]! * values[n]!;
  return Math.sqrt(sum);
}

export const minus = (a: Float64Array, b: Float64Array) => a.map((x, n) => x - b[n]!);

/**
 * Seeded random cases: dipoles and wires on and off axes, `fewest` to `most` cells per shortest wavelength (log-uniform),
 * 5 to 40 cells away, Courant number 0.7 to 0.99, cubic and unequal cells, εr 1 and 4, waves at v and v/2.
 */
export function randomCases(seed: number, runs: number, observers: number, fewest: number, most: number): CaseSpec[] {
  const generator = xoroshiro128plus(seed);
  const uniform = (low: number, high: number) => low + (high - low) * uniformFloat64(generator);
  const pick = <T>(list: readonly T[]): T => list[Math.floor(uniform(0, list.length))]!;
  const sources = ['edge', 'dipole', 'axisWire', 'tiltedWire'] as const;
  return Array.from({ length: runs }, (_, run) => {
    const equal = pick([true, false]);
    const side = () => 1e-3 * (equal ? 1 : uniform(0.6, 1.4));
    const source = sources[run % 4]!;
    const wireLength = Math.round(uniform(4, 16));
    const cellSize: Vec3 = [side(), side(), side()];
    return {
      source,
      cellSize,
      relativePermittivity: pick([1, 4]),
      relativePermeability: 1,
      courant: uniform(0.7, 0.99),
      cellsPerWavelength: fewest * (most / fewest) ** uniform(0, 1),
      speed: source.endsWith('Wire') ? pick([1, 0.5]) : 1,
      wireLength,
      waveform: pick(['gaussian', 'gaussianDerivative'] as const),
      lead: 5,
      observers: Array.from({ length: observers }, () => {
        const distance = 5 * 8 ** uniform(0, 1) + (source.endsWith('Wire') ? wireLength / 2 : 0);
        const z = uniform(-1, 1);
        const turn = uniform(0, 2 * Math.PI);
        const across = Math.sqrt(1 - z * z);
        const cells = (length: number, a: Axis) => Math.round((length * Math.max(...cellSize)) / cellSize[a]);
        return [
          cells(distance * across * Math.cos(turn), 0),
          cells(distance * across * Math.sin(turn), 1),
          cells(distance * z, 2),
        ] as const;
      }),
    };
  });
}
