import { describe, expect, test } from 'vitest';
import { CHANNELS, staggeredAlong } from '../../src/run/planes.ts';
import type { Axis } from '../../src/scenario/model.ts';
import type { SliceFilm } from '../../src/scene/film.ts';
import { layerOf, quantityOf, sampleQuantity } from '../../src/scene/quantity.ts';
import { STAGGER } from '../../src/trace/trace.ts';

const [NU, NV, FRAMES, EVERY] = [6, 5, 4, 3];

/** A linear function of place (cells) and time (steps) for each component. */
const linear = (component: number, x: readonly number[], t: number): number =>
  [1, -2, 0.5][component % 3]! * (x[0]! + 3 * x[1]! - 2 * x[2]!) + (component < 3 ? 0.25 : -0.75) * t + component;

/** A film of these functions on a slice, each component at its own place and instant. */
function filmOf(normal: Axis, stride: number): SliceFilm {
  const axes = ([0, 1, 2] as Axis[]).filter((a) => a !== normal) as [Axis, Axis];
  const cells = NU * NV;
  const grid = new Float32Array(FRAMES * CHANNELS * cells);
  const lower = staggeredAlong(normal);
  const layer = 4;
  for (let frame = 0; frame < FRAMES; frame++)
    for (let channel = 0; channel < CHANNELS; channel++)
      for (let j = 0; j < NV; j++)
        for (let i = 0; i < NU; i++) {
          const component = channel < 6 ? channel : lower[channel - 6]!;
          const x = [...STAGGER[component]!];
          x[axes[0]]! += i * stride;
          x[axes[1]]! += j * stride;
          x[normal]! += channel < 6 ? layer : layer - 1;
          // E at (n+1)Δt, H half a step later
          const t = frame * EVERY + (component < 3 ? 0 : 0.5);
          grid[(frame * CHANNELS + channel) * cells + j * NU + i] = linear(component, x, t);
        }
  const slice = {
    name: 'p',
    normal,
    axes,
    layer,
    stride,
    nu: NU,
    nv: NV,
    cells: new Int32Array(3 * cells),
    hole: new Uint8Array(cells),
    distance: new Float32Array(cells),
  };
  return {
    slice,
    grid,
    exact: grid.slice(),
    known: new Uint8Array(cells).fill(2),
    trust: undefined,
    potentials: new Map(),
  };
}

describe('quantities', () => {
  test('averages bring all components to one point and instant: linear fields come out exactly', () => {
    for (const normal of [0, 1, 2] as Axis[])
      for (const stride of [1, 3]) {
        const film = filmOf(normal, stride);
        const { axes, layer } = film.slice;
        for (const key of ['E', 'H', 'Sx', 'Sy', 'Sz', 'S'] as const) {
          const quantity = quantityOf(key);
          const { nu, nv, offset } = layerOf(film, quantity);
          const out = new Float32Array(nu * nv);
          const frame = 2;
          sampleQuantity(film, 'grid', frame, EVERY, quantity, out);
          for (let j = 0; j < nv; j++)
            for (let i = 0; i < nu; i++) {
              const x = [...offset];
              x[axes[0]]! += i * stride;
              x[axes[1]]! += j * stride;
              x[normal]! += layer;
              const [E, H] = [0, 3].map((first) => [0, 1, 2].map((c) => linear(first + c, x, frame * EVERY)));
              const S = [0, 1, 2].map((a) => E![(a + 1) % 3]! * H![(a + 2) % 3]! - E![(a + 2) % 3]! * H![(a + 1) % 3]!);
              const size = (v: readonly number[]) => Math.hypot(...v);
              const expected = { E: size(E!), H: size(H!), Sx: S[0]!, Sy: S[1]!, Sz: S[2]!, S: size(S) }[key];
              // single precision through sums of some ten terms of the fields' size, squared for S
              const scale = key.startsWith('S') ? size(E!) * size(H!) : expected + 100;
              expect(Math.abs(out[j * nu + i]! - expected)).toBeLessThan(2e-6 * scale);
            }
        }
      }
  });

  test('a component is shown as it is', () => {
    const film = filmOf(1, 1);
    const out = new Float32Array(NU * NV);
    sampleQuantity(film, 'exact', 3, EVERY, quantityOf('Hy'), out);
    expect([...out]).toEqual([...film.exact.subarray((3 * CHANNELS + 4) * NU * NV, (3 * CHANNELS + 5) * NU * NV)]);
  });

  test('what is not known, or lies on a source, is NaN; on the grid’s side potentials always are', () => {
    const film = filmOf(2, 1);
    film.known[8] = 0;
    film.slice.hole[14] = 1;
    const out = new Float32Array(NU * NV);
    sampleQuantity(film, 'exact', 1, EVERY, quantityOf('Ex'), out);
    expect([...out.keys()].filter((n) => Number.isNaN(out[n]!))).toEqual([8, 14]);
    sampleQuantity(film, 'grid', 1, EVERY, quantityOf('Ex'), out);
    expect([...out.keys()].filter((n) => Number.isNaN(out[n]!))).toEqual([14]);
    const average = new Float32Array((NU - 1) * (NV - 1));
    sampleQuantity(film, 'grid', 1, EVERY, quantityOf('E'), average);
    // the four points around cell 14, (2, 2)
    expect([...average.keys()].filter((n) => Number.isNaN(average[n]!))).toEqual([6, 7, 11, 12]);
    sampleQuantity(film, 'grid', 1, EVERY, quantityOf('phi'), out);
    expect(out.every(Number.isNaN)).toBe(true);
  });
});
