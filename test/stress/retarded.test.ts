import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import { describe, expect, test } from 'vitest';
import { gridSources } from '../../src/gridding/gridding.ts';
import { fieldOf } from '../../src/retarded/field.ts';
import { griddedHistory } from '../../src/retarded/gridded.ts';
import { exactHistory } from '../../src/retarded/history.ts';
import { prepareGridded, prepareSources } from '../../src/retarded/prepare.ts';
import { mediumOf } from '../../src/scenario/constants.ts';
import type { Medium, Source, Vec3, WaveTerm } from '../../src/scenario/model.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import { instantsOf, samplePoints } from '../../src/trace/trace.ts';
import { dipole, loop, wire } from '../retarded/sources.ts';

/** Random questions: any source, waveform, medium, cell shape; all in units of a pulse of about 0.2 ns. */
function questions(seed: number) {
  const rng = xoroshiro128plus(seed);
  const real = (from: number, to: number) => from + (to - from) * uniformFloat64(rng);
  const choose = <T>(list: readonly T[]): T => list[Math.floor(real(0, list.length))]!;
  const place = (reach: number): Vec3 => [real(-reach, reach), real(-reach, reach), real(-reach, reach)];
  const unit = (): Vec3 => {
    const v = place(1);
    const length = Math.sqrt(v[0] ** 2 + v[1] ** 2 + v[2] ** 2);
    return [v[0] / length, v[1] / length, v[2] / length];
  };
  const pulse = (sigma: number) =>
    makeWaveform(
      choose([
        { type: 'gaussian', amplitude: 1, sigma, delay: sigma * real(0, 10) },
        { type: 'gaussianDerivative', amplitude: -2, sigma, delay: sigma * real(-0.5, 10) },
        {
          type: 'modulatedGaussian',
          amplitude: 1,
          sigma,
          delay: sigma * real(1, 10),
          frequency: real(0.15, 0.7) / sigma,
        },
        { type: 'doubleExponential', amplitude: 1, alpha: 0.1 / sigma, beta: real(1, 6) / sigma },
      ] as const),
    );
  const source = (medium: Medium, sigma: number, reach: number): Source => {
    const slowness = choose([0, 1, -1, real(1, 3), -real(1, 3)]) / medium.speed;
    const terms = (length: number): WaveTerm[] => [
      { factor: real(-1, 1), delay: real(0, 0.5e-9) - Math.min(0, slowness) * length, slowness },
    ];
    const kind = real(0, 1);
    const waveform = pulse(sigma);
    if (kind < 0.2) return dipole(place(reach), unit(), 3e-3, waveform);
    const built =
      kind < 0.7
        ? wire([place(reach), place(reach), place(reach)], [], waveform)
        : loop(place(reach / 3), unit(), real(0.2, 0.6) * reach, waveform);
    return { ...built, terms: terms(built.curve.length) };
  };
  return { real, choose, place, source };
}

const sites = (position: Float64Array, m: number): Vec3 => [
  position[3 * m]!,
  position[3 * m + 1]!,
  position[3 * m + 2]!,
];

describe('random questions to the exact side', () => {
  test.each([1, 2, 3, 4])('histories are within their bound of the field at each instant, seed %i', (seed) => {
    const { real, choose, place, source } = questions(seed);
    let compared = 0;
    for (let n = 0; n < 150; n++) {
      const medium = mediumOf(real(1, 4), real(1, 2));
      const sources = Array.from({ length: choose([1, 2]) }, () => source(medium, real(0.1e-9, 0.4e-9), 0.06));
      const h = real(2e-3, 8e-3);
      const timeStep = ((0.99 * h) / (medium.speed * Math.sqrt(3))) * choose([1, 1, 5]);
      const instants = instantsOf(Math.ceil(6e-9 / timeStep), timeStep);
      const cells = Int32Array.from({ length: 6 }, () => Math.round(real(-25, 25)));
      const points = samplePoints(cells, place(2e-3), [h, 0.8 * h, 0.9 * h]);
      const method = choose(['best', 'quadrature'] as const);
      const history = exactHistory(sources, medium, points, instants, { method });
      const field = fieldOf(prepareSources(sources, medium, 'best'), { potentials: false, tolerance: 1e-12 });
      for (let m = 0; m < 12; m++)
        for (let round = 0; round < 6; round++) {
          const i = Math.floor(real(0, instants.count));
          const component = m % 6;
          const f = field(sites(points.position, m), component < 3 ? instants.E[i]! : instants.H[i]!);
          const exact = component < 3 ? f.E[component]! : f.H[component - 3]!;
          const own = component < 3 ? f.errorE : f.errorH;
          const error = Math.abs(history.values[m * instants.count + i]! - exact);
          expect(error, `case ${n}, site ${m}, instant ${i}`).toBeLessThanOrEqual(history.errorBound[m]! + own);
          compared++;
        }
    }
    expect(compared).toBe(150 * 72);
  });

  test.each([1, 2])('gridded histories are right to ten times the accuracy asked for, seed %i', (seed) => {
    const { real, source } = questions(100 + seed);
    let compared = 0;
    for (let n = 0; n < 30; n++) {
      const medium = mediumOf(real(1, 4), 1);
      const h: Vec3 = [real(3e-3, 8e-3), real(3e-3, 8e-3), real(3e-3, 8e-3)];
      const sigma = (real(10, 20) * h[0]) / medium.speed;
      const sources = [source(medium, sigma, 0.03)];
      const origin: Vec3 = [-0.1, -0.1, -0.1];
      const cells = h.map((d) => Math.ceil(0.2 / d)) as unknown as Vec3;
      const gridded = gridSources(sources, { origin, cellSize: h, cells: [cells[0], cells[1], cells[2]] });
      const timeStep = 0.99 / (medium.speed * Math.sqrt(h.reduce((sum, d) => sum + 1 / (d * d), 0)));
      const instants = instantsOf(Math.ceil((12 * sigma + 0.5e-9) / timeStep), timeStep);
      // Outside the source, two cells and more from it.
      const cell = Int32Array.from({ length: 3 }, (_, a) =>
        Math.floor(cells[a]! * (a === n % 3 ? 0.72 : real(0.3, 0.7))),
      );
      const points = samplePoints(cell, origin, h);
      const { values } = griddedHistory(gridded, origin, h, medium, points, instants);
      const field = fieldOf(prepareGridded(gridded, origin, h, medium), { potentials: false, tolerance: 1e-11 });
      for (const first of [0, 3]) {
        const own = values.subarray(first * instants.count, (first + 3) * instants.count);
        const peak = own.reduce((most, v) => Math.max(most, Math.abs(v)), 0);
        for (let m = first; m < first + 3; m++)
          for (let round = 0; round < 3; round++) {
            const i = Math.floor(real(0, instants.count));
            const f = field(sites(points.position, m), m < 3 ? instants.E[i]! : instants.H[i]!);
            const error = Math.abs(values[m * instants.count + i]! - (m < 3 ? f.E[m]! : f.H[m - 3]!));
            expect(error, `case ${n}, site ${m}, instant ${i}`).toBeLessThanOrEqual(1e-7 * peak);
            compared++;
          }
      }
    }
    expect(compared).toBe(30 * 18);
  });
});
