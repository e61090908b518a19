import { PARTS } from '../compare/budget.ts';
import { type DecibelScale, type KindScale, packed, type Scale, type SignedScale, type Theme } from '../draw/colour.ts';
import { contours } from '../draw/contour.ts';
import { type Plane, planeOfSamples, type Stroke } from '../draw/scene.ts';
import { PALETTE } from '../report/palette.ts';
import type { Scenario, Vec3 } from '../scenario/model.ts';
import type { Film, SliceFilm } from './film.ts';
import { layerOf, type Quantity, sampleQuantity } from './quantity.ts';

/** The three pictures of a film: grid, exact, difference. */
export type Side = 'grid' | 'exact' | 'difference';

/** Frames looked at to find a scale, as many as show the pulse wherever it is; and of each so many-th cell. */
const LOOKS = 16;
const SPARSE = 2;

/** Largest |value| of a quantity beyond the mask: what the colours span. */
export interface Limits {
  readonly field: number;
  readonly difference: number;
}

/** Two significant digits, upwards: the end of a scale that people can read. */
function rounded(value: number): number {
  if (!(value > 0)) return 1;
  const power = 10 ** (Math.floor(Math.log10(value)) - 1);
  return Math.ceil(value / power) * power;
}

/** Limits on the way to be found: so many of the frames have been looked at. */
interface Search {
  readonly key: string;
  /** film and quantity: while those stay, limits only grow */
  readonly of: readonly [Film, Quantity];
  done: number;
  field: number;
  difference: number;
}

/** How long a picture may spend on finding its scale, ms; the next ones go on with it. */
const SEARCH = 3;

function framesToLookAt({ frames, gridFrames }: Film): number[] {
  const step = Math.max(1, Math.floor(frames / LOOKS));
  const looks: number[] = [];
  for (let at = step >> 1; at < gridFrames; at += step) looks.push(at);
  return looks;
}

/**
 * Makes the planes that the panes draw: samples of a quantity at an instant, with their scale. Buffers are kept, so that
 * playing allocates nothing; what has not changed is not computed again.
 */
export class Pictures {
  private readonly buffers = new Map<string, { values: Float32Array; stamp: string; revision: number }>();
  /** whose samples the buffers hold */
  private film: Film | undefined;
  private limits: { readonly key: string; readonly value: Limits } | undefined;
  private search: Search | undefined;
  private scales: { readonly key: string; readonly value: Record<Side, Scale> } | undefined;

  /** The scales of the three pictures: one for grid and exact, one for their difference. */
  scalesOf(
    film: Film,
    mask: number,
    quantity: Quantity,
    frame: number,
    gain: number,
    difference: 'signed' | 'decibels',
  ): Record<Side, Scale> {
    const limits = this.limitsOf(film, mask, quantity, frame);
    const { label, unit } = quantity;
    const key = `${limits.field} ${limits.difference} ${gain} ${difference} ${label}`;
    if (this.scales?.key === key) return this.scales.value;
    const field: SignedScale = {
      kind: 'signed',
      limit: limits.field / gain,
      label: `${label}, ${unit}`,
      ...(label.startsWith('|') ? { sizes: true } : {}),
    };
    const signed: SignedScale = {
      kind: 'signed',
      limit: limits.difference / gain,
      label: `${label}, grid − exact, ${unit}`,
    };
    const decibels: DecibelScale = {
      kind: 'decibels',
      reference: limits.field,
      from: -80,
      to: 0,
      label: `|grid − exact| of ${label}, dB of ${Number(limits.field.toPrecision(2))} ${unit}`,
    };
    const value = { grid: field, exact: field, difference: difference === 'signed' ? signed : decibels };
    this.scales = { key, value };
    return value;
  }

  private limitsOf(film: Film, mask: number, quantity: Quantity, frame: number): Limits {
    const potential = quantity.kind === 'potential';
    const key = `${quantity.key} ${mask} ${film.gridFrames} ${film.exactKnown} ${potential ? `${frame} ${film.revision}` : ''} ${film.films.length} ${film.films[0]?.slice.layer}`;
    if (this.limits?.key === key) return this.limits.value;
    const looks = potential ? [frame] : framesToLookAt(film);
    if (this.search?.key !== key) {
      const before = this.search;
      const grows = before?.of[0] === film && before.of[1] === quantity && !potential;
      this.search = {
        key,
        of: [film, quantity],
        done: 0,
        field: grows ? before.field : 0,
        difference: grows ? before.difference : 0,
      };
    }
    const { search } = this;
    const until = performance.now() + SEARCH;
    while (search.done < looks.length) {
      for (const one of film.films) this.look(one, film, mask, quantity, looks[search.done]!, search);
      search.done++;
      if (performance.now() > until) break;
    }
    const { field, difference } = search;
    const value = { field: rounded(field), difference: rounded(difference > 0 ? difference : field / 10) };
    if (search.done === looks.length) this.limits = { key, value };
    return value;
  }

  /** Whether a scale is still being found, so that the next picture may have another. */
  get settling(): boolean {
    return this.search !== undefined && this.search.key !== this.limits?.key;
  }

  /** Widens the limits that are being found by what one slice shows at one instant. */
  private look(one: SliceFilm, film: Film, mask: number, quantity: Quantity, at: number, limits: Search): void {
    const { nu, nv } = layerOf(one, quantity);
    const { distance, nu: across } = one.slice;
    const potential = quantity.kind === 'potential';
    const [a, b] = ['grid', 'exact'].map((side) => this.buffer(`${side} looked at`, nu * nv).values);
    const exactToo = film.exactKnown || potential;
    if (!potential) sampleQuantity(one, 'grid', at, film.every, quantity, a!);
    if (exactToo) sampleQuantity(one, 'exact', at, film.every, quantity, b!);
    for (let j = 0; j < nv; j += SPARSE)
      for (let i = 0; i < nu; i += SPARSE) {
        if (distance[j * across + i]! < mask) continue;
        const n = j * nu + i;
        const value = Math.abs(potential ? b![n]! : a![n]!);
        // false for NaN
        if (value > limits.field) limits.field = value;
        if (!exactToo || potential) continue;
        const difference = Math.abs(a![n]! - b![n]!);
        if (difference > limits.difference) limits.difference = difference;
      }
  }

  /** The planes of one picture of the film. */
  planes(film: Film, scenario: Scenario, quantity: Quantity, frame: number, side: Side, scale: Scale): Plane[] {
    if (film !== this.film) {
      this.film = film;
      this.buffers.clear();
    }
    return film.films.map((one) => {
      const layer = layerOf(one, quantity);
      const { values, revision } = this.sampled(film, one, quantity, frame, side);
      return { ...planeAt(one, scenario, layer.offset, layer.nu, layer.nv, values, scale), revision };
    });
  }

  /** The samples of one picture on one slice, taken anew where something has changed. */
  private sampled(film: Film, one: SliceFilm, quantity: Quantity, frame: number, side: Side) {
    const { nu, nv } = layerOf(one, quantity);
    const buffer = this.buffer(`${side} ${one.slice.name}`, nu * nv);
    const stamp = `${quantity.key} ${frame} ${film.revision} ${one.potentials.has(frame)}`;
    if (buffer.stamp === stamp) return buffer;
    if (side === 'difference') {
      const grid = this.sampled(film, one, quantity, frame, 'grid').values;
      const exact = this.sampled(film, one, quantity, frame, 'exact').values;
      for (let j = 0, n = 0; j < nv; j++)
        for (let i = 0; i < nu; i++, n++)
          buffer.values[n] = one.known[j * one.slice.nu + i] === 2 ? grid[n]! - exact[n]! : Number.NaN;
    } else sampleQuantity(one, side, frame, film.every, quantity, buffer.values);
    buffer.stamp = stamp;
    buffer.revision++;
    return buffer;
  }

  private buffer(name: string, size: number) {
    const known = this.buffers.get(name);
    if (known?.values.length === size) return known;
    const fresh = { values: new Float32Array(size), stamp: '', revision: 0 };
    this.buffers.set(name, fresh);
    return fresh;
  }
}

/** The plane of samples on a slice, at their true places. */
function planeAt(
  { slice }: SliceFilm,
  { grid }: Scenario,
  offset: readonly [number, number, number],
  nu: number,
  nv: number,
  values: Float32Array,
  scale: Scale,
): Plane {
  const { axes, normal, layer, stride, name } = slice;
  const { box, cellSize } = grid;
  const first = [0, 1, 2].map(
    (a) => box.from[a]! + ((a === normal ? layer : 0) + offset[a]!) * cellSize[a]!,
  ) as unknown as Vec3;
  const step = (axis: number) => [0, 1, 2].map((a) => (a === axis ? stride * cellSize[a]! : 0)) as unknown as Vec3;
  return planeOfSamples(name, first, step(axes[0]), step(axes[1]), nu, nv, values, scale);
}

/** The scale of a trust map: point error relative to the tolerance, which lies in its middle. */
export function trustScale(tolerance: number, field: string): DecibelScale {
  const percent = Number((100 * tolerance).toPrecision(3));
  return {
    kind: 'decibels',
    reference: tolerance,
    from: -30,
    to: 30,
    label: `error of ${field}, dB of the tolerance (${percent} %)`,
  };
}

export function partScale(theme: Theme): KindScale {
  return {
    kind: 'kinds',
    kinds: PARTS.slice(0, 3).map((part) => ({ name: part, colour: packed(PALETTE[part][theme]) })),
    label: 'largest part',
  };
}

/** The planes of a trust map: the errors of E or H, or which part is the largest. */
export function trustPlanes(film: Film, scenario: Scenario, which: 'E' | 'H' | 'largest', scale: Scale): Plane[] {
  return film.films.flatMap((one) => {
    const values = one.trust?.[which];
    if (!values) return [];
    return [planeAt(one, scenario, [0, 0, 0], one.slice.nu, one.slice.nv, values, scale)];
  });
}

/** Outlines, on every slice, of the points that are nearer to a source than a distance (m). */
export function distanceOutlines(film: Film, scenario: Scenario, distance: number, colour: number): Stroke[] {
  const scale: SignedScale = { kind: 'signed', limit: 1, label: '' };
  return film.films.map((one) => {
    const offset: [number, number, number] = [0.5, 0.5, 0.5];
    offset[one.slice.normal] = 0;
    const plane = planeAt(one, scenario, offset, one.slice.nu, one.slice.nv, one.slice.distance, scale);
    return { points: contours(plane, [distance]), form: 'segments', colour, width: 1 };
  });
}
