import type { Waveform } from '../scenario/waveform.ts';

/**
 * Currents on grid edges: data that both solvers read. The current of edge e is
 *   I_e(t) = Σ over its pairs of weight · w(t − delay),
 * w the waveform of the pair, so that it is available at any instant. An edge along `axis` runs from node (i, j, k) to
 * the next node along that axis; node (0, 0, 0) is the lower corner of the working box.
 */
export interface EdgeCurrents extends Pairs {
  readonly axis: Uint8Array;
}

/** Charges at grid nodes: Q(t) = Σ over its pairs of weight · q(t − delay), q = ∫w. They follow from the edge currents by continuity. */
export interface NodeCharges extends Pairs {}

export interface Pairs {
  readonly count: number;
  /** i, j, k of each edge's lower node, or of each node: 3 an entry */
  readonly node: Int32Array;
  /** pairs of entry e are pairStart[e] … pairStart[e + 1] − 1 */
  readonly pairStart: Int32Array;
  /** dimensionless (A on the edge for 1 A of waveform) */
  readonly weight: Float64Array;
  /** s */
  readonly delay: Float64Array;
  /** index into `waveforms` */
  readonly waveform: Uint16Array;
  readonly waveforms: readonly Waveform[];
}

export interface GriddedSources {
  readonly edges: EdgeCurrents;
  readonly charges: NodeCharges;
}
