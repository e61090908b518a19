import { CHANNELS, staggeredAlong } from '../run/planes.ts';
import { COMPONENTS, STAGGER } from '../trace/trace.ts';
import type { Film, SliceFilm } from './film.ts';

/**
 * What a pane can show. A component is shown as it is, at its own place and instant. A magnitude or the Poynting vector
 * needs several components at one point: they are averaged there, alike on both sides and for display only. Potentials
 * exist on the exact side alone, since the grid has none.
 */
export const QUANTITIES = [
  ...COMPONENTS.map((key) => ({ key, label: key, unit: key[0] === 'E' ? 'V/m' : 'A/m', kind: 'component' as const })),
  { key: 'E', label: '|E|', unit: 'V/m', kind: 'average' },
  { key: 'H', label: '|H|', unit: 'A/m', kind: 'average' },
  { key: 'Sx', label: 'Sx', unit: 'W/m²', kind: 'average' },
  { key: 'Sy', label: 'Sy', unit: 'W/m²', kind: 'average' },
  { key: 'Sz', label: 'Sz', unit: 'W/m²', kind: 'average' },
  { key: 'S', label: '|S|', unit: 'W/m²', kind: 'average' },
  { key: 'phi', label: 'φ', unit: 'V', kind: 'potential' },
  { key: 'Ax', label: 'Ax', unit: 'Wb/m', kind: 'potential' },
  { key: 'Ay', label: 'Ay', unit: 'Wb/m', kind: 'potential' },
  { key: 'Az', label: 'Az', unit: 'Wb/m', kind: 'potential' },
  { key: 'A', label: '|A|', unit: 'Wb/m', kind: 'potential' },
] as const;

export type Quantity = (typeof QUANTITIES)[number];
export type QuantityKey = Quantity['key'];

export const quantityOf = (key: QuantityKey): Quantity => QUANTITIES.find((q) => q.key === key)!;

/** Samples of a quantity on a slice, and where the first one lies relative to the slice's first node, in cells. */
export interface Layer {
  readonly nu: number;
  readonly nv: number;
  /** along x, y, z */
  readonly offset: readonly [number, number, number];
}

export function layerOf({ slice }: Pick<SliceFilm, 'slice'>, { kind, key }: Quantity): Layer {
  const { nu, nv, axes } = slice;
  if (kind === 'component') return { nu, nv, offset: STAGGER[COMPONENTS.indexOf(key as never)]! };
  const offset: [number, number, number] = [0, 0, 0];
  for (const axis of axes) offset[axis] = 0.5;
  return kind === 'average' ? { nu: nu - 1, nv: nv - 1, offset } : { nu, nv, offset };
}

/** The field of one solver at one picture, as `quantity` into `out` (nu·nv of its layer). NaN where it is not known. */
export function sampleQuantity(
  film: SliceFilm,
  side: 'grid' | 'exact',
  frame: number,
  every: number,
  { kind, key }: Quantity,
  out: Float32Array,
): void {
  const { slice } = film;
  const cells = slice.nu * slice.nv;
  if (kind === 'potential') {
    samplePotential(film, side, frame, key, out);
    return;
  }
  const data = film[side];
  if (kind === 'component') {
    const from = (frame * CHANNELS + COMPONENTS.indexOf(key as never)) * cells;
    out.set(data.subarray(from, from + cells));
    blank(film, side, slice.nu, slice.nv, [0], out);
    return;
  }
  const field = (first: number, component: number) => averaged(film, data, frame, every, first + component);
  const [E, H] = [key !== 'H', key !== 'E'].map((needed, f) => (needed ? [0, 1, 2].map((c) => field(3 * f, c)) : []));
  for (let n = 0; n < out.length; n++) out[n] = fromComponents(key, E!, H!, n);
  blank(film, side, slice.nu - 1, slice.nv - 1, [0, 1, slice.nu, slice.nu + 1], out);
}

/** NaN where one of the cells that a sample is made of has no field to show: on a source, or not known yet. */
function blank(
  { slice, known }: SliceFilm,
  side: 'grid' | 'exact',
  nu: number,
  nv: number,
  neighbours: readonly number[],
  out: Float32Array,
): void {
  for (let j = 0; j < nv; j++)
    for (let i = 0; i < nu; i++)
      for (const neighbour of neighbours) {
        const p = j * slice.nu + i + neighbour;
        if (slice.hole[p] || (side === 'exact' && !known[p])) out[j * nu + i] = Number.NaN;
      }
}

/** |E|, |H|, the Poynting vector S = E × H or its magnitude. */
function fromComponents(key: string, E: readonly Float32Array[], H: readonly Float32Array[], n: number): number {
  const size = (v: readonly Float32Array[]) => Math.sqrt(v.reduce((sum, component) => sum + component[n]! ** 2, 0));
  if (key === 'E') return size(E);
  if (key === 'H') return size(H);
  const flow = (axis: number) => {
    const [b, c] = [(axis + 1) % 3, (axis + 2) % 3];
    return E[b]![n]! * H[c]![n]! - E[c]![n]! * H[b]![n]!;
  };
  if (key !== 'S') return flow(['Sx', 'Sy', 'Sz'].indexOf(key));
  return Math.sqrt(flow(0) ** 2 + flow(1) ** 2 + flow(2) ** 2);
}

/**
 * A component at the points (i+½, j+½) of the plane (in cells), at the instants of E: linear between its neighbours along
 * both axes, the mean of the layers above and below the plane, and H linear between its own instants, half a step apart.
 */
function averaged(
  { slice }: SliceFilm,
  data: Float32Array,
  frame: number,
  every: number,
  component: number,
): Float32Array {
  const { nu, nv, axes, normal, stride } = slice;
  const cells = nu * nv;
  const [du, dv] = axes.map((axis) => (STAGGER[component]![axis]! > 0 ? 0 : 1 / (2 * stride))) as [number, number];
  const lower = staggeredAlong(normal).indexOf(component);
  const back = component < 3 ? 0 : 1 / (2 * every);
  const read = (at: number, p: number): number => {
    const here = data[(at * CHANNELS + component) * cells + p]!;
    return lower < 0 ? here : (here + data[(at * CHANNELS + 6 + lower) * cells + p]!) / 2;
  };
  const inTime = (p: number): number => {
    if (back === 0) return read(frame, p);
    return (1 - back) * read(frame, p) + (frame > 0 ? back * read(frame - 1, p) : 0);
  };
  const out = new Float32Array((nu - 1) * (nv - 1));
  for (let j = 0; j < nv - 1; j++)
    for (let i = 0; i < nu - 1; i++) {
      const p = j * nu + i;
      const low = du === 0 ? inTime(p) : (1 - du) * inTime(p) + du * inTime(p + 1);
      const high = dv === 0 ? 0 : du === 0 ? inTime(p + nu) : (1 - du) * inTime(p + nu) + du * inTime(p + nu + 1);
      out[j * (nu - 1) + i] = (1 - dv) * low + dv * high;
    }
  return out;
}

function samplePotential(
  { potentials, slice }: SliceFilm,
  side: 'grid' | 'exact',
  frame: number,
  key: string,
  out: Float32Array,
): void {
  const values = potentials.get(frame);
  const cells = slice.nu * slice.nv;
  if (side === 'grid' || !values) {
    out.fill(Number.NaN);
    return;
  }
  const index = ['phi', 'Ax', 'Ay', 'Az'].indexOf(key);
  for (let p = 0; p < cells; p++)
    out[p] =
      index >= 0
        ? values[index * cells + p]!
        : Math.sqrt(values[cells + p]! ** 2 + values[2 * cells + p]! ** 2 + values[3 * cells + p]! ** 2);
}

/** The component of E that is the largest, by the exact field, anywhere on the film beyond the mask (m). */
export function strongestComponent({ films, frames }: Film, mask: number): QuantityKey {
  const largest = [0, 0, 0];
  for (const { slice, exact } of films) {
    const cells = slice.nu * slice.nv;
    for (let frame = 0; frame < frames; frame++)
      for (let component = 0; component < 3; component++) {
        const line = (frame * CHANNELS + component) * cells;
        for (let p = 0; p < cells; p++) {
          const size = Math.abs(exact[line + p]!);
          if (slice.hole[p] === 0 && slice.distance[p]! >= mask && size > largest[component]!)
            largest[component] = size;
        }
      }
  }
  return COMPONENTS[largest.indexOf(Math.max(...largest))]!;
}
