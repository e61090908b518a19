import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import { describe, expect, test } from 'vitest';
import { mediumOf } from '../../src/scenario/constants.ts';
import {
  type ArcPiece,
  type Curve,
  circle,
  cross,
  dot,
  type LinePiece,
  norm,
  polyline,
  scale,
  sub,
} from '../../src/scenario/curve.ts';
import { distanceToSources, firstArrival, lastArrival, sourceBounds } from '../../src/scenario/distance.ts';
import type { Source, Vec3, WaveTerm } from '../../src/scenario/model.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';

const generator = xoroshiro128plus(11);
/** Uniform in [−1, 1). */
const random = () => 2 * uniformFloat64(generator) - 1;
const randomPoint = (): Vec3 => [random(), random(), random()];
const randomUnit = (): Vec3 => {
  const v = randomPoint();
  return scale(v, 1 / norm(v));
};

const curves: [string, Curve][] = [
  ['a straight wire', polyline([randomPoint(), randomPoint()])],
  [
    'a wire along z',
    polyline([
      [0.1, 0.2, -0.5],
      [0.1, 0.2, 0.7],
    ]),
  ],
  ['a polyline', polyline(Array.from({ length: 7 }, randomPoint))],
  ['a circle', circle(randomPoint(), randomUnit(), 0.37)],
  ['a circle in the plane z = 0.2', circle([0, 0, 0.2], [0, 0, 1], 0.5)],
  ['a circle about −x', circle([0.3, 0, 0.2], [-1, 0, 0], 0.8)],
];

const at = (piece: LinePiece | ArcPiece, s: number): Vec3 => {
  const out = new Float64Array(3);
  piece.point(s, out);
  return [out[0]!, out[1]!, out[2]!];
};

const SAMPLES = 20_000;
function samples(curve: Curve): { s: number; p: Vec3 }[] {
  return curve.pieces.flatMap((piece) => {
    const count = Math.ceil((SAMPLES * piece.length) / curve.length);
    return Array.from({ length: count + 1 }, (_, n) => {
      const s = piece.s0 + (n / count) * piece.length;
      return { s, p: at(piece, s) };
    });
  });
}

describe.each(curves)('%s', (_, curve) => {
  const dense = samples(curve);
  const spacing = curve.length / SAMPLES;

  test('is parametrised by arc length, with its tangent', () => {
    let sum = 0;
    for (let n = 1; n < dense.length; n++) sum += norm(sub(dense[n]!.p, dense[n - 1]!.p));
    // Chords of a circle are short by a (2π/SAMPLES)²/24 part of it.
    expect(Math.abs(sum / curve.length - 1)).toBeLessThan(((2 * Math.PI) / SAMPLES) ** 2 / 24 + 1e-11);
    const tangent = new Float64Array(3);
    for (const piece of curve.pieces)
      for (const f of [0.1, 0.5, 0.8]) {
        const s = piece.s0 + f * piece.length;
        piece.tangent(s, tangent);
        const h = 1e-5 * piece.length;
        const slope = scale(sub(at(piece, s + h), at(piece, s - h)), 1 / (2 * h));
        // central difference: h²/6 of a unit circle's third derivative, and rounding ε/h
        for (let a = 0; a < 3; a++) expect(Math.abs(slope[a]! - tangent[a]!)).toBeLessThan(2e-9);
        expect(Math.abs(norm([tangent[0]!, tangent[1]!, tangent[2]!]) - 1)).toBeLessThan(4 * Number.EPSILON);
      }
  });

  test('crosses planes where sampling finds a change of sign', () => {
    for (const axis of [0, 1, 2] as const)
      for (let n = 0; n < 40; n++) {
        const value = random();
        const found = curve.pieces.flatMap((piece) => piece.crossings(axis, value));
        const expected: number[] = [];
        for (let k = 1; k < dense.length; k++)
          if ((dense[k - 1]!.p[axis] - value) * (dense[k]!.p[axis] - value) < 0) expected.push(dense[k]!.s);
        expect(found.length).toBe(expected.length);
        found.forEach((s, k) => {
          expect(Math.abs(s - expected[k]!)).toBeLessThanOrEqual(spacing * 1.01);
          const piece = curve.pieces.findLast((each) => each.s0 <= s)!;
          // Where it is found, the coordinate is the plane's, to rounding times the curve's slope there (at most 1).
          expect(Math.abs(at(piece, s)[axis] - value)).toBeLessThan(1e-14);
        });
      }
  });

  test('is as far from a point as its nearest sample', () => {
    for (let n = 0; n < 40; n++) {
      const p = scale(randomPoint(), 1.5);
      const sampled = dense.reduce((least, { p: q }) => Math.min(least, norm(sub(p, q))), Infinity);
      const distance = Math.min(...curve.pieces.map((piece) => piece.distance(p)));
      expect(distance).toBeLessThanOrEqual(sampled + 1e-15);
      expect(distance).toBeGreaterThan(sampled - spacing);
    }
  });

  test('lies in its bounds and touches them', () => {
    const { from, to } = sourceBounds({ type: 'wire', curve } as Source);
    for (const a of [0, 1, 2] as const) {
      const values = dense.map(({ p }) => p[a]);
      const [low, high] = [values.reduce((x, y) => Math.min(x, y)), values.reduce((x, y) => Math.max(x, y))];
      expect(low - from[a]).toBeGreaterThanOrEqual(-1e-15);
      expect(to[a] - high).toBeGreaterThanOrEqual(-1e-15);
      // a sample misses a smooth extreme by spacing²/(8 radius)
      expect(Math.max(low - from[a], to[a] - high)).toBeLessThan(spacing * spacing);
    }
  });

  test('first and last arrival bracket those of its samples', () => {
    const medium = mediumOf(2, 1);
    const waveform = makeWaveform({ type: 'gaussian', amplitude: 1, delay: 9e-9, sigma: 1e-9 });
    const terms: WaveTerm[] = [{ factor: 1, delay: 3e-9, slowness: 0 }];
    // Only open curves carry waves here: a loop's current is uniform.
    if (curve.pieces[0]!.kind === 'line')
      terms.push(
        { factor: 1, delay: 0, slowness: 1 / medium.speed },
        { factor: -1, delay: 2e-9 + curve.length / (0.4 * medium.speed), slowness: -1 / (0.4 * medium.speed) },
      );
    for (const subset of [terms, ...terms.map((term) => [term])]) {
      const source = { type: 'wire', name: 'w', curve, terms: subset, waveform } as const;
      for (let n = 0; n < 20; n++) {
        const p = scale(randomPoint(), 1.5);
        const arrivals = subset.flatMap(({ delay, slowness }) =>
          dense.map(({ s, p: q }) => delay + slowness * s + norm(sub(p, q)) / medium.speed),
        );
        const least = arrivals.reduce((x, y) => Math.min(x, y));
        const most = arrivals.reduce((x, y) => Math.max(x, y)) + waveform.lastActivity(0.01);
        const slack = (3 * spacing) / (0.4 * medium.speed);
        expect(firstArrival([source], medium, p)).toBeLessThanOrEqual(least * (1 + 1e-14));
        expect(firstArrival([source], medium, p)).toBeGreaterThan(least - slack);
        expect(lastArrival([source], medium, p, 0.01)).toBeGreaterThanOrEqual(most * (1 - 1e-14));
        expect(lastArrival([source], medium, p, 0.01)).toBeLessThan(most + slack);
      }
    }
  });
});

test('a loop is right-handed about its normal', () => {
  for (let n = 0; n < 20; n++) {
    const normal = randomUnit();
    const { u, v } = circle([0, 0, 0], normal, 1).pieces[0] as ArcPiece;
    const w = cross(u, v);
    for (let a = 0; a < 3; a++) expect(Math.abs(w[a]! - normal[a]!)).toBeLessThan(8 * Number.EPSILON);
    expect(Math.abs(dot(u, normal))).toBeLessThan(4 * Number.EPSILON);
  }
});

test('distance and arrivals take the nearest, the first and the last of several sources', () => {
  const waveform = makeWaveform({ type: 'gaussian', amplitude: 1, delay: 9e-9, sigma: 1e-9 });
  const dipole = (z: number): Source => ({
    type: 'dipole',
    name: `${z}`,
    at: [0, 0, z],
    direction: [0, 0, 1],
    length: 1e-3,
    waveform,
  });
  const medium = mediumOf(1, 1);
  const sources = [dipole(1), dipole(3), dipole(-2)];
  expect(distanceToSources(sources, [0, 0, 0])).toBe(1);
  expect(firstArrival(sources, medium, [0, 0, 0])).toBe(1 / medium.speed);
  expect(lastArrival(sources, medium, [0, 0, 0], 0.1)).toBe(waveform.lastActivity(0.1) + 3 / medium.speed);
  expect(distanceToSources([], [0, 0, 0])).toBe(Infinity);
});
