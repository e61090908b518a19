import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import { binEdge, binOf, MIN_SAMPLES } from './bins.ts';
import { BINS_PER_DECADE } from './closest.ts';
import type { Strata } from './norms.ts';
import { WALL_BINS_PER_DECADE } from './wall.ts';

type Triple = readonly [number, number, number];

/** Cells of the working box. */
export interface BoxOfCells {
  readonly cells: Triple;
  /** position of node (0, 0, 0), m */
  readonly origin: Triple;
  /** dx, dy, dz, m */
  readonly cellSize: Triple;
}

/** Two samples a stratum at least, or its spread cannot be told. */
const MIN_PER_STRATUM = 2;

/** More than the least a bin needs, since some samples will not count. */
const WANTED_PER_BIN = 40;

/** Cells drawn from a box, and what each stands for. */
export interface CellSample {
  /** i, j, k, 3 a sample, in memory order */
  readonly cell: Int32Array;
  /** from the cell's centre to the nearest source, m */
  readonly distance: Float64Array;
  /** from the cell's centre to the nearest wall of the box, m */
  readonly wallDistance: Float64Array;
  /** how many cells of the box each sample stands for */
  readonly weight: Float64Array;
  readonly strata: Strata;
  /** bins whose box has fewer than `MIN_SAMPLES` cells: they will be no evidence */
  readonly underfilled: readonly UnderfilledBin[];
}

export interface UnderfilledBin {
  readonly of: 'distance to the source' | 'distance to the wall';
  /** m */
  readonly from: number;
  /** m */
  readonly to: number;
  readonly cells: number;
}

/**
 * Draws cells from a box, stratified by distance to the source (12 logarithmic bins a decade) and to the wall (6 a
 * decade): cells of one pair of bins are one stratum. Every bin of either kind gets 40 samples, or all its cells; every
 * stratum two, or all its cells; within a bin the strata get samples in proportion to their cells.
 *
 * Two passes over the cells: one to sort them into strata, one to draw. Drawing goes through the cells in order and
 * takes each with probability (still wanted)/(still to come), which gives every subset the same chance (Knuth, TAOCP
 * vol. 2, §3.4.2, algorithm S).
 * @param distanceToSource from a position in m to the nearest source, m
 * @param seed the same seed gives the same cells
 */
export function stratify(
  box: BoxOfCells,
  distanceToSource: (position: Triple) => number,
  seed: number,
  wantedPerBin = WANTED_PER_BIN,
): CellSample {
  const [nx, ny, nz] = box.cells;
  const nearest = Math.min(...box.cellSize) * 0.01;
  const centre = (i: number, j: number, k: number): Triple => [
    box.origin[0] + (i + 0.5) * box.cellSize[0],
    box.origin[1] + (j + 0.5) * box.cellSize[1],
    box.origin[2] + (k + 0.5) * box.cellSize[2],
  ];
  // A source through a cell's very centre is at distance 0, which no logarithmic bin holds.
  const sourceDistance = (i: number, j: number, k: number) => Math.max(nearest, distanceToSource(centre(i, j, k)));
  const wallDistance = (i: number, j: number, k: number) =>
    Math.min(
      (Math.min(i, nx - 1 - i) + 0.5) * box.cellSize[0],
      (Math.min(j, ny - 1 - j) + 0.5) * box.cellSize[1],
      (Math.min(k, nz - 1 - k) + 0.5) * box.cellSize[2],
    );

  // The nearest wall's bin is the lowest of three that depend on one index each.
  const wallBinsOf = (a: 0 | 1 | 2) =>
    Int32Array.from({ length: box.cells[a] }, (_, i) =>
      binOf((Math.min(i, box.cells[a] - 1 - i) + 0.5) * box.cellSize[a], WALL_BINS_PER_DECADE),
    );
  const [wallBinX, wallBinY, wallBinZ] = [wallBinsOf(0), wallBinsOf(1), wallBinsOf(2)];
  const strata: Stratum[] = [];
  const known = new Map<number, number>();
  const stratumOf = new Uint16Array(nx * ny * nz);
  forEachCell(box.cells, (i, j, k, n) => {
    const bin = binOf(sourceDistance(i, j, k), BINS_PER_DECADE);
    const wallBin = Math.min(wallBinX[i]!, wallBinY[j]!, wallBinZ[k]!);
    const key = bin * 4096 + wallBin; // |wallBin| is far below 2048: unique
    let index = known.get(key);
    if (index === undefined) {
      index = strata.push({ bin, wallBin, cells: 0, wanted: 0 }) - 1;
      known.set(key, index);
    }
    strata[index]!.cells++;
    stratumOf[n] = index;
  });
  for (const stratum of strata) stratum.wanted = Math.min(stratum.cells, MIN_PER_STRATUM);
  const sourceBins = groupBy(strata, ({ bin }) => bin);
  const wallBins = groupBy(strata, ({ wallBin }) => wallBin);
  for (const bins of [sourceBins, wallBins]) for (const bin of bins.values()) topUp(bin, wantedPerBin);

  const random = xoroshiro128plus(seed);
  const left = strata.map(({ cells, wanted }) => ({ cells, wanted }));
  const cell: number[] = [];
  const of: number[] = [];
  forEachCell(box.cells, (i, j, k, n) => {
    const index = stratumOf[n]!;
    const stratum = left[index]!;
    if (stratum.wanted > 0 && uniformFloat64(random) * stratum.cells < stratum.wanted) {
      stratum.wanted--;
      cell.push(i, j, k);
      of.push(index);
    }
    stratum.cells--;
  });
  const perSample = (value: (i: number, j: number, k: number) => number) =>
    Float64Array.from(of, (_, p) => value(cell[3 * p]!, cell[3 * p + 1]!, cell[3 * p + 2]!));
  return {
    cell: Int32Array.from(cell),
    distance: perSample(sourceDistance),
    wallDistance: perSample(wallDistance),
    weight: Float64Array.from(of, (s) => strata[s]!.cells / strata[s]!.wanted),
    strata: { of: Int32Array.from(of), cells: Float64Array.from(strata, ({ cells }) => cells) },
    underfilled: [
      ...underfilled(sourceBins, 'distance to the source', BINS_PER_DECADE),
      ...underfilled(wallBins, 'distance to the wall', WALL_BINS_PER_DECADE),
    ],
  };
}

interface Stratum {
  readonly bin: number;
  readonly wallBin: number;
  cells: number;
  wanted: number;
}

/** Every cell in memory order, x slowest, with its running number. */
function forEachCell([nx, ny, nz]: Triple, visit: (i: number, j: number, k: number, n: number) => void): void {
  let n = 0;
  for (let i = 0; i < nx; i++) for (let j = 0; j < ny; j++) for (let k = 0; k < nz; k++) visit(i, j, k, n++);
}

function groupBy(strata: readonly Stratum[], key: (stratum: Stratum) => number): Map<number, Stratum[]> {
  const groups = new Map<number, Stratum[]>();
  for (const stratum of strata) groups.set(key(stratum), [...(groups.get(key(stratum)) ?? []), stratum]);
  return groups;
}

/** Raises what a bin's strata are wanted for, in proportion to their cells, until the bin has what it needs. */
function topUp(bin: readonly Stratum[], wanted: number): void {
  const cells = bin.reduce((sum, s) => sum + s.cells, 0);
  for (const stratum of bin) {
    const share = Math.ceil((wanted * stratum.cells) / cells);
    stratum.wanted = Math.max(stratum.wanted, Math.min(stratum.cells, share));
  }
}

function underfilled(
  bins: ReadonlyMap<number, readonly Stratum[]>,
  of: UnderfilledBin['of'],
  binsPerDecade: number,
): UnderfilledBin[] {
  return [...bins]
    .map(([index, strata]) => ({
      of,
      from: binEdge(index, binsPerDecade),
      to: binEdge(index + 1, binsPerDecade),
      cells: strata.reduce((sum, s) => sum + s.cells, 0),
    }))
    .filter(({ cells }) => cells < MIN_SAMPLES)
    .sort((a, b) => a.from - b.from);
}
