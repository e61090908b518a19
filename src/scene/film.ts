import { CHANNELS, type GridFrames } from '../run/planes.ts';
import type { Instants } from '../trace/trace.ts';
import type { ShownSlice } from './slices.ts';

/** Point errors on a slice; NaN where a point does not count or is not known yet. */
export interface TrustMap {
  readonly E: Float32Array;
  readonly H: Float32Array;
  /** index of the part with the largest share of E's error, in the order of PARTS */
  readonly largest: Float32Array;
}

/** What films are of. */
export interface FilmOf {
  readonly slices: readonly ShownSlice[];
  readonly instants: Instants;
  /** steps from one picture to the next */
  readonly every: number;
}

/** The exact field at some cells of a slice: data[(frame·CHANNELS + channel)·cells + cell]. */
export interface ExactCells {
  readonly slice: number;
  readonly cells: readonly number[];
  /** each cell stands for so many along both axes, until they are known themselves */
  readonly coarse: number;
  readonly data: Float32Array;
}

/** Potentials at one picture: φ (V), Ax, Ay, Az (Wb/m) as values[quantity·cells + cell]. */
export interface PotentialFrame {
  readonly slice: number;
  readonly frame: number;
  readonly values: Float32Array;
}

/** What is known so far of the fields on one slice: data[(frame·CHANNELS + channel)·cells + cell]. */
export interface SliceFilm {
  readonly slice: ShownSlice;
  readonly grid: Float32Array;
  readonly exact: Float32Array;
  /** of the exact field at each cell: 0 nothing yet, 1 a neighbour's, 2 its own */
  readonly known: Uint8Array;
  trust: TrustMap | undefined;
  /** φ, Ax, Ay, Az by frame: values[quantity·cells + cell] */
  readonly potentials: Map<number, Float32Array>;
}

/** The films of all slices, filled as the solvers advance. */
export class Film {
  readonly films: readonly SliceFilm[];
  readonly instants: Instants;
  readonly every: number;
  /** pictures that the grid has reached */
  gridFrames = 0;
  /** whether the exact field is known at every cell */
  exactKnown = false;
  /** counts what has come in, so that pictures know when they are out of date */
  revision = 0;

  constructor({ slices, instants, every }: FilmOf) {
    this.instants = instants;
    this.every = every;
    this.films = slices.map((slice) => {
      const cells = slice.nu * slice.nv;
      const size = instants.count * CHANNELS * cells;
      return {
        slice,
        grid: new Float32Array(size),
        exact: new Float32Array(size),
        known: new Uint8Array(cells),
        trust: undefined,
        potentials: new Map(),
      };
    });
  }

  get frames(): number {
    return this.instants.count;
  }

  addGrid({ first, count, slices }: GridFrames): void {
    slices.forEach((data, n) => {
      const { grid, slice } = this.films[n]!;
      grid.set(data, first * CHANNELS * slice.nu * slice.nv);
    });
    this.gridFrames = first + count;
    this.revision++;
  }

  addExact({ slice: index, cells, coarse, data }: ExactCells): void {
    const { slice, exact, known } = this.films[index]!;
    const all = slice.nu * slice.nv;
    // each target, and which of the cells it shows
    const targets = cells.flatMap((p, n) =>
      (coarse === 1 ? [p] : this.around(index, p, coarse)).map((q) => [q, n] as const),
    );
    const to = Int32Array.from(targets, ([q]) => q);
    const from = Int32Array.from(targets, ([, n]) => n);
    for (const q of to) known[q] = coarse === 1 ? 2 : 1;
    for (let line = 0; line < this.frames * CHANNELS; line++) {
      const [target, source] = [line * all, line * cells.length];
      for (let k = 0; k < to.length; k++) exact[target + to[k]!] = data[source + from[k]!]!;
    }
    this.revision++;
  }

  /** The cells that a coarse one stands for: its block, without what is known better. */
  private around(index: number, p: number, coarse: number): number[] {
    const { slice, known } = this.films[index]!;
    const { nu, nv } = slice;
    const [i0, j0] = [Math.floor((p % nu) / coarse) * coarse, Math.floor(p / nu / coarse) * coarse];
    const block: number[] = [];
    for (let j = j0; j < Math.min(nv, j0 + coarse); j++)
      for (let i = i0; i < Math.min(nu, i0 + coarse); i++) if (known[j * nu + i] !== 2) block.push(j * nu + i);
    return block;
  }

  addTrust(slice: number, map: TrustMap): void {
    this.films[slice]!.trust = map;
    this.revision++;
  }

  addPotentials({ slice, frame, values }: PotentialFrame): void {
    this.films[slice]!.potentials.set(frame, values);
    this.revision++;
  }
}
