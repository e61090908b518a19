import type { Scale, Theme } from './colour.ts';
import type { Box, Camera, Facet, Rectangle, Vec3 } from './projection.ts';

/**
 * A regular grid of values on a rectangle in space, each sample in the middle of its own nu-th × nv-th of it. NaN is
 * transparent.
 */
export interface Plane extends Facet {
  readonly name: string;
  readonly nu: number;
  readonly nv: number;
  /** nu·nv of them, first edge fastest; a new array, or a new `revision`, whenever they change */
  readonly values: Float32Array;
  readonly revision?: number;
  readonly scale: Scale;
}

/**
 * The plane of samples at `first` + i·stepU + j·stepV: half a step wider than they are on every side.
 * @param first position of sample (0, 0), m
 * @param stepU, stepV from a sample to its neighbours, m
 */
export function planeOfSamples(
  name: string,
  first: Vec3,
  stepU: Vec3,
  stepV: Vec3,
  nu: number,
  nv: number,
  values: Float32Array,
  scale: Scale,
): Plane {
  const at = (f: (axis: 0 | 1 | 2) => number): Vec3 => [f(0), f(1), f(2)];
  return {
    name,
    origin: at((k) => first[k] - (stepU[k] + stepV[k]) / 2),
    u: at((k) => stepU[k] * nu),
    v: at((k) => stepV[k] * nv),
    nu,
    nv,
    values,
    scale,
  };
}

/** A line in space. */
export interface Stroke {
  /** vertices, three coordinates each, m */
  readonly points: ArrayLike<number>;
  /** a line through all vertices, or separate segments of two vertices each */
  readonly form: 'line' | 'segments';
  /** packed; one for all, or one a vertex */
  readonly colour: number | Uint32Array;
  /** CSS pixels */
  readonly width: number;
  /** drawn and left out in turn, CSS pixels */
  readonly dash?: readonly [number, number];
  /** weight of hidden parts, 0…1; faint without */
  readonly ghost?: number;
}

/** A point with a name: a disc where seen, a hollow ring where hidden. */
export interface Marker {
  readonly at: Vec3;
  readonly name: string;
  readonly colour: number;
}

/** One picture of the scene. */
export interface Pane {
  /** image pixels; whole numbers keep panes apart cleanly */
  readonly area: Rectangle;
  readonly title: string;
  readonly camera: Camera;
  readonly planes: readonly Plane[];
  /** other planes on the right of a divider, which stands at this fraction of the view's width */
  readonly overlay?: { readonly divider: number; readonly planes: readonly Plane[] };
  readonly strokes: readonly Stroke[];
  readonly markers: readonly Marker[];
  /** the box that carries axes with ticks and lengths */
  readonly axes?: Box;
  /** the scale of the colour bar below; without, none is drawn */
  readonly scale?: Scale;
  /** keeps the colour bar's room free where there is no scale, so that views of several panes agree */
  readonly barRoom?: boolean;
}

/** All panes of one image. Several may share a camera, planes and strokes. */
export interface Scene {
  readonly theme: Theme;
  /** image pixels to a CSS pixel: widths, text and margins follow it */
  readonly pixelRatio: number;
  readonly panes: readonly Pane[];
}
