import { CHANNELS } from '../run/planes.ts';
import type { Instants } from '../trace/trace.ts';
import type { Report, ShownSlice, TrustMap } from './messages.ts';

/** What is known so far of the fields on one slice: data[(frame·CHANNELS + channel)·cells + cell]; NaN is not known. */
export interface SliceFilm {
  readonly slice: ShownSlice;
  readonly grid: Float32Array;
  readonly exact: Float32Array;
  /** 1 where the exact field is the cell's own and not a neighbour's */
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

  constructor({ slices, instants, every }: Extract<Report, { kind: 'film' }>) {
    this.instants = instants;
    this.every = every;
    this.films = slices.map((slice) => {
      const cells = slice.nu * slice.nv;
      const size = instants.count * CHANNELS * cells;
      return {
        slice,
        grid: new Float32Array(size).fill(Number.NaN),
        exact: new Float32Array(size).fill(Number.NaN),
        known: new Uint8Array(cells),
        trust: undefined,
        potentials: new Map(),
      };
    });
  }

  get frames(): number {
    return this.instants.count;
  }

  addGrid({ first, count, slices }: Extract<Report, { kind: 'grid' }>): void {
    slices.forEach((data, n) => {
      const { grid, slice } = this.films[n]!;
      grid.set(data, first * CHANNELS * slice.nu * slice.nv);
      slice.hole.forEach((hole, p) => {
        if (hole)
          for (let k = 0; k < count * CHANNELS; k++) grid[(first * CHANNELS + k) * slice.nu * slice.nv + p] = NaN;
      });
    });
    this.gridFrames = first + count;
    this.revision++;
  }

  addExact({ slice: index, cells, coarse, data }: Extract<Report, { kind: 'exact' }>): void {
    const { slice, exact, known } = this.films[index]!;
    const { nu, nv, hole } = slice;
    const all = nu * nv;
    const lines = this.frames * CHANNELS;
    cells.forEach((p, n) => {
      if (coarse === 1) {
        known[p] = 1;
        for (let line = 0; line < lines; line++) exact[line * all + p] = data[line * cells.length + n]!;
        return;
      }
      const [i0, j0] = [Math.floor((p % nu) / coarse) * coarse, Math.floor(p / nu / coarse) * coarse];
      for (let j = j0; j < Math.min(nv, j0 + coarse); j++)
        for (let i = i0; i < Math.min(nu, i0 + coarse); i++) {
          const q = j * nu + i;
          if (hole[q] || known[q]) continue;
          for (let line = 0; line < lines; line++) exact[line * all + q] = data[line * cells.length + n]!;
        }
    });
    this.revision++;
  }

  addTrust({ slice, map }: Extract<Report, { kind: 'trust' }>): void {
    this.films[slice]!.trust = map;
    this.revision++;
  }

  addPotentials({ slice, frame, values }: Extract<Report, { kind: 'potentials' }>): void {
    this.films[slice]!.potentials.set(frame, values);
    this.revision++;
  }
}
