/**
 * The time dependence w(t) of a prescribed current. Both solvers see w(t) = 0 for t < 0.
 */
export type WaveformSpec =
  | {
      readonly type: 'gaussian' | 'gaussianDerivative';
      readonly amplitude: number;
      readonly delay: number;
      readonly sigma: number;
    }
  | {
      readonly type: 'modulatedGaussian';
      readonly amplitude: number;
      readonly delay: number;
      readonly sigma: number;
      readonly frequency: number;
    }
  | { readonly type: 'doubleExponential'; readonly amplitude: number; readonly alpha: number; readonly beta: number }
  | { readonly type: 'heidler'; readonly terms: readonly HeidlerTerm[] }
  | {
      readonly type: 'rampedSine';
      readonly amplitude: number;
      readonly frequency: number;
      /** periods that the ramps up and down each take, and periods between them */
      readonly ramp: number;
      readonly hold: number;
    }
  | { readonly type: 'table'; readonly times: readonly number[]; readonly currents: readonly number[] }
  | {
      readonly type: 'phasors';
      /** Hz, ascending, 0 or more */
      readonly frequencies: readonly number[];
      /** peak amplitudes of e^(+jωt) at them, A */
      readonly re: readonly number[];
      readonly im: readonly number[];
      /** the largest |w| anywhere along the same wire, A: what a jump is small or large against */
      readonly scale: number;
    };

/** (amplitude/η) xⁿ/(1 + xⁿ) e^(−t/tau2), x = t/tau1, η = exp(−(tau1/tau2)(n tau2/tau1)^(1/n)). */
export interface HeidlerTerm {
  readonly amplitude: number;
  readonly tau1: number;
  readonly tau2: number;
  readonly n: number;
}

export interface Waveform {
  /** as in the scenario file, in SI units (A, s, Hz, 1/s) */
  readonly spec: WaveformSpec;
  /** largest |w|, A */
  readonly peak: number;
  /**
   * w and its charge and derivatives at t: out[0] = q = ∫₀ᵗ w (A·s), out[1] = w (A), out[2] = w′ (A/s), … up to
   * out[orders] = w^(orders−1); orders from 1 to 5. All zero for t < 0.
   */
  at(t: number, orders: number, out: Float64Array): void;
  /** q, w and w′ alone; the same numbers as `at` */
  charge(t: number): number;
  value(t: number): number;
  slope(t: number): number;
  /** instants where a derivative jumps (none for smooth pulses whose jump at 0 is below rounding) */
  readonly kinks: readonly number[];
  /** further instants, ascending, where a derivative beyond w″ jumps: samples of a table, which integrals are cut at */
  readonly seams: readonly number[];
  /** |w(0⁺)| / peak: a jump radiates a front that no grid resolves */
  readonly jump: number;
  /** order of error to be expected of a second-order grid, and why (2 for smooth pulses) */
  readonly expectedOrder: { readonly order: number; readonly reason: string };
  /** last instant at which |w′| is at least `level` of its peak, s: when what radiates has left the source */
  lastActivity(level: number): number;
  /** total charge q(∞), A·s */
  readonly finalCharge: number;
  /** highest frequency (Hz) at which |ω W(ω)| is `level` of its peak (level −40 dB = 0.01) */
  highestFrequency(level: number): number;
  /** a time scale of the pulse (sigma, or the rise time): what sets how finely it must be sampled, s */
  readonly timeScale: number;
}
