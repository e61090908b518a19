import type { Waveform } from '../scenario/waveform.ts';
import { COEFFICIENTS } from './elements.ts';

/**
 * A field as a sum of delayed waveforms: term n has 30 coefficients (elements.ts), a delay (R/v included) and a
 * waveform. What can be said in closed form about the field at one point, at every instant, is such a list.
 */
export class TermList {
  count = 0;
  coefficient = new Float64Array(32 * COEFFICIENTS);
  delay = new Float64Array(32);
  waveform = new Uint16Array(32);
  /** relative error of each term's coefficients, from the rounding of its geometry */
  geometry = new Float64Array(32);

  clear(): void {
    this.count = 0;
  }

  /** Appends `element` times `factor`. */
  add(element: Float64Array, factor: number, delay: number, waveform: number, geometry: number): void {
    if (this.count === this.delay.length) this.#grow();
    const base = this.count * COEFFICIENTS;
    for (let m = 0; m < COEFFICIENTS; m++) this.coefficient[base + m] = factor * element[m]!;
    this.delay[this.count] = delay;
    this.waveform[this.count] = waveform;
    this.geometry[this.count] = geometry;
    this.count++;
  }

  #grow(): void {
    const bigger = <T extends Float64Array | Uint16Array>(old: T, fresh: T): T => {
      fresh.set(old);
      return fresh;
    };
    const size = 2 * this.delay.length;
    this.coefficient = bigger(this.coefficient, new Float64Array(size * COEFFICIENTS));
    this.delay = bigger(this.delay, new Float64Array(size));
    this.waveform = bigger(this.waveform, new Uint16Array(size));
    this.geometry = bigger(this.geometry, new Float64Array(size));
  }
}

/** Waveforms equal in specification count as one. */
export class WaveformSet {
  readonly list: Waveform[] = [];
  readonly #known = new Map<string, number>();
  /** by identity, so that a long table is not spelt out for every edge that carries it */
  readonly #met = new Map<Waveform, number>();

  index(waveform: Waveform): number {
    const met = this.#met.get(waveform);
    if (met !== undefined) return met;
    const key = JSON.stringify(waveform.spec);
    const index = this.#known.get(key) ?? this.list.push(waveform) - 1;
    this.#known.set(key, index);
    this.#met.set(waveform, index);
    return index;
  }
}
