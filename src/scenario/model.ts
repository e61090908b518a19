/**
 * The question that both solvers are asked, in SI units: what flows where, in which medium, in which box, for how long.
 * A validated scenario file becomes one `Scenario`; nothing below this room reads the file's own spelling again.
 */
import type { Curve } from './curve.ts';
import type { Waveform } from './waveform.ts';

/** x, y, z; metres unless said otherwise. */
export type Vec3 = readonly [number, number, number];

export type Axis = 0 | 1 | 2;

export const FACES = ['x-', 'x+', 'y-', 'y+', 'z-', 'z+'] as const;
export type Face = (typeof FACES)[number];

/** A homogeneous, lossless medium. */
export interface Medium {
  readonly relativePermittivity: number;
  readonly relativePermeability: number;
  /** ε, F/m */
  readonly permittivity: number;
  /** μ, H/m */
  readonly permeability: number;
  /** v = 1/√(εμ), m/s */
  readonly speed: number;
  /** η = √(μ/ε), Ω */
  readonly impedance: number;
}

/**
 * One term of a filament's current: factor · a(s) · w(t − delay − slowness·s), s the arc length from the first point.
 * slowness (s/m) is 0 for a uniform current, +1/v for a forward wave, −1/v for a backward one (whose delay then
 * includes L/v). a is the term's profile, 1 where there is none. By λ̇ = −∂I/∂s its charge per length is
 * factor · (slowness · a w − a′ q), q = ∫w.
 */
export interface WaveTerm {
  readonly factor: number;
  readonly delay: number;
  readonly slowness: number;
  readonly profile?: Profile;
}

/** An amplitude along a filament: continuous in s, its slope but for jumps at `breaks`. */
export interface Profile {
  /** a, dimensionless */
  value(s: number): number;
  /** da/ds, 1/m, between breaks */
  slope(s: number): number;
  /** arc lengths inside the filament at which the slope jumps, ascending, m */
  readonly breaks: readonly number[];
  /** a is 0 outside of these arc lengths, m */
  readonly support: readonly [number, number];
  /** a length over which a varies by about itself, m: how finely it must be sampled */
  readonly scale: number;
}

/** A thin filament, I(s, t) = Σ over its terms; positive current flows towards growing s. */
export interface Filament {
  readonly type: 'wire' | 'loop';
  readonly name: string;
  readonly curve: Curve;
  readonly terms: readonly WaveTerm[];
  readonly waveform: Waveform;
}

/** A point Hertzian element of moment w(t) · length · direction (A·m). */
export interface Dipole {
  readonly type: 'dipole';
  readonly name: string;
  readonly at: Vec3;
  /** unit vector */
  readonly direction: Vec3;
  readonly length: number;
  readonly waveform: Waveform;
}

export type Source = Filament | Dipole;

export type Boundary =
  | { readonly type: 'pec' }
  | { readonly type: 'pmc' }
  | { readonly type: 'mur1' }
  | { readonly type: 'mur2' }
  | {
      readonly type: 'higdon2';
      /** the two angles of incidence that nothing returns from, rad from the normal */
      readonly angles: readonly [number, number];
      /** d of src/fdtd/boundaries/higdon2.ts */
      readonly damping: number;
    }
  | {
      readonly type: 'liao';
      /** d of src/fdtd/boundaries/liao.ts */
      readonly damping: number;
    }
  | {
      readonly type: 'splitPml';
      readonly layers: number;
      /** m of σ = σmax (depth/thickness)^m */
      readonly grading: number;
      /** σmax in units of 0.8 (m + 1)/(η h) */
      readonly sigmaFactor: number;
    }
  | {
      readonly type: 'cpml';
      readonly layers: number;
      /** m of σ = σmax (depth/thickness)^m */
      readonly grading: number;
      /** κ at the outer end (1 at the inner one), graded as σ */
      readonly kappaMax: number;
      /** αmax / (2πε), Hz; falls linearly to 0 at the outer end */
      readonly alphaFrequency: number;
      /** σmax in units of 0.8 (m + 1)/(η h) */
      readonly sigmaFactor: number;
    };

/**
 * How designed currents are put on grid edges: `trilinear` conserves charge and is of second order; `nearest` drops every
 * piece on the nearest edge and leaves charge along the way; `staircase` walks from node to node and conserves charge.
 */
export const GRIDDINGS = ['trilinear', 'nearest', 'staircase'] as const;
export type Gridding = (typeof GRIDDINGS)[number];

export interface Grid {
  /** dx, dy, dz */
  readonly cellSize: Vec3;
  /** S ≤ 1; Δt = S / (v √(1/dx² + 1/dy² + 1/dz²)) */
  readonly courant: number;
  /** the working region; node (0, 0, 0) lies at `from`, `to` is already rounded outwards to whole cells */
  readonly box: { readonly from: Vec3; readonly to: Vec3 };
  /** cells of the working region along each axis */
  readonly cells: readonly [number, number, number];
  readonly boundary: Readonly<Record<Face, Boundary>>;
  readonly precision: 'single' | 'double';
  readonly gridding: Gridding;
  /** samples nearer to a source than this (m) are left out of box norms */
  readonly mask: number;
}

export interface Observer {
  readonly name: string;
  readonly at: Vec3;
  /** false: it lies outside the box and has an exact field but no grid trace */
  readonly inside: boolean;
}

export interface Plane {
  readonly name: string;
  readonly normal: Axis;
  /** coordinate along the normal, m */
  readonly at: number;
}

export interface Scenario {
  readonly title: string;
  readonly medium: Medium;
  readonly sources: readonly Source[];
  readonly grid: Grid;
  /** s */
  readonly duration: number;
  readonly observers: readonly Observer[];
  readonly planes: readonly Plane[];
  /** a fraction, 0.05 for 5 % */
  readonly tolerance: number;
  /** what a user should know though nothing is refused: a small jump at t = 0, `to` rounded outwards, … */
  readonly notes: readonly string[];
}
