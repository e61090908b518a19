import type { Result } from '../compare/result.ts';
import type { ObserverTrace } from '../files/traces.ts';
import type { ResultFile } from '../report/folder.ts';
import type { ObserverSpectra } from '../report/report.ts';
import type { Slice } from '../run/planes.ts';
import type { Progress } from '../run/progress.ts';
import type { Problem } from '../scenario/load.ts';
import type { Plane } from '../scenario/model.ts';
import type { Instants } from '../trace/trace.ts';

/** What the page asks of the worker that coordinates one run. Stopping it is ending the worker. */
export type Request =
  | { readonly kind: 'run'; readonly scenario: unknown; readonly planes: readonly Plane[] }
  /** other planes for a run that has ended: films alone, the comparison stands */
  | { readonly kind: 'planes'; readonly planes: readonly Plane[] }
  | { readonly kind: 'file'; readonly file: ResultFile; readonly command: string }
  /** φ and A at one picture of the film */
  | { readonly kind: 'potentials'; readonly slice: number; readonly frame: number };

/** A slice with what the page needs to know of its cells. */
export interface ShownSlice extends Slice {
  /** of each cell's middle from the nearest source, m */
  readonly distance: Float32Array;
}

/** Point errors on a slice; NaN where a point does not count or is not known yet. */
export interface TrustMap {
  readonly E: Float32Array;
  readonly H: Float32Array;
  /** index of the part with the largest share of E's error, in the order of PARTS */
  readonly largest: Float32Array;
}

/** What the worker tells, as it comes to know it. */
export type Report =
  | ({ readonly kind: 'progress' } & Progress)
  | {
      readonly kind: 'film';
      readonly slices: readonly ShownSlice[];
      readonly instants: Instants;
      readonly every: number;
    }
  | { readonly kind: 'grid'; readonly first: number; readonly count: number; readonly slices: readonly Float32Array[] }
  | {
      readonly kind: 'exact';
      readonly slice: number;
      readonly cells: readonly number[];
      /** each cell stands for so many along both axes, until they are known themselves */
      readonly coarse: number;
      readonly data: Float32Array;
    }
  | { readonly kind: 'exactKnown' }
  | { readonly kind: 'traces'; readonly traces: readonly ObserverTrace[] }
  | {
      readonly kind: 'result';
      readonly result: Result;
      readonly traces: readonly ObserverTrace[];
      readonly spectra: readonly ObserverSpectra[];
    }
  | { readonly kind: 'trust'; readonly slice: number; readonly map: TrustMap }
  | {
      readonly kind: 'potentials';
      readonly slice: number;
      readonly frame: number;
      /** φ (V), Ax, Ay, Az (Wb/m): values[quantity·cells + cell] */
      readonly values: Float32Array;
    }
  | { readonly kind: 'file'; readonly file: ResultFile; readonly text: string }
  | { readonly kind: 'refused'; readonly problems: readonly Problem[] }
  | { readonly kind: 'failed'; readonly message: string }
  | { readonly kind: 'done' };
