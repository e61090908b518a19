import { describe, expect, test } from 'vitest';
import { fieldAt } from '../../src/retarded/field.ts';
import { mediumOf } from '../../src/scenario/constants.ts';
import { circle, polyline } from '../../src/scenario/curve.ts';
import type { Filament, Profile, Source, Vec3 } from '../../src/scenario/model.ts';
import { decaying, standing } from '../../src/scenario/profiles.ts';
import type { WaveformSpec } from '../../src/scenario/waveform.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import oracle from '../oracle/retarded.json' with { type: 'json' };
import {
  centreFed,
  difference,
  dipole,
  jumping,
  loop,
  size,
  smooth,
  travelling,
  uniform,
  unipolar,
  vacuum,
  wire,
} from './sources.ts';

type Case = (typeof oracle.cases)[number];

const vec = (list: readonly number[], from = 0): Vec3 => [list[from]!, list[from + 1]!, list[from + 2]!];

function profileOf(entry: Case): { profile?: Profile } {
  const { profile, curve } = entry;
  if (!profile) return {};
  const { length } = polyline(curve.points!.map((p) => vec(p)));
  return {
    profile:
      profile.kind === 'standing'
        ? standing(length, profile.wavenumber!)
        : decaying(length, profile.decay!, profile.direction as 'forward' | 'backward'),
  };
}

function sourceOf(entry: Case): Filament {
  const { curve } = entry;
  return {
    type: 'wire',
    name: 'reference',
    curve:
      curve.kind === 'circle'
        ? circle(vec(curve.centre!), vec(curve.normal!), curve.radius!)
        : polyline(curve.points!.map((p) => vec(p))),
    terms: entry.terms.map(([factor, delay, slowness]) => ({
      factor: factor!,
      delay: delay!,
      slowness: slowness!,
      ...profileOf(entry),
    })),
    waveform: makeWaveform(entry.waveform as WaveformSpec),
  };
}

describe('fields against references of 40 digits (test/oracle/retarded.py)', () => {
  test.each(['best', 'quadrature'] as const)('%s: within its own error, and within 1e-10', (method) => {
    const worst = new Map<string, number>();
    for (const entry of oracle.cases) {
      const f = fieldAt([sourceOf(entry)], vacuum, vec(entry.point), entry.t, { method });
      const E = vec(entry.field);
      const B = vec(entry.field, 3);
      const A = vec(entry.field, 7);
      const phi = entry.field[6]!;
      const { speed } = vacuum;
      // The reference is rounded to double.
      const own = 2 * Number.EPSILON;
      const errors = [
        [difference(f.E, E), f.errorE, size(E)],
        [difference(f.B, B) * speed, f.errorH * vacuum.permeability * speed, Math.max(size(E), size(B) * speed)],
        [Math.abs(f.phi - phi), f.errorPhi, Math.max(Math.abs(phi), size(A) * speed)],
        [difference(f.A, A) * speed, f.errorA * speed, Math.max(Math.abs(phi), size(A) * speed)],
      ] as const;
      for (const [error, bound, scale] of errors) {
        expect(error, `${entry.name} at ${entry.point}`).toBeLessThanOrEqual(bound + own * scale);
        expect(error / scale, `${entry.name} at ${entry.point}`).toBeLessThan(1e-10);
        worst.set(entry.name, Math.max(worst.get(entry.name) ?? 0, error / scale));
      }
      expect(f.converged).toBe(true);
    }
    console.table(Object.fromEntries([...worst].map(([name, error]) => [name, { [method]: error.toExponential(1) }])));
  });

  test('the closed form asks for no quadrature of E and B', () => {
    // per wave term: two charges, and on each piece two ends or an end pair with four points of their gap
    for (const entry of oracle.cases.filter(({ name }) => name.startsWith('full-speed')))
      expect(
        fieldAt([sourceOf(entry)], vacuum, vec(entry.point), entry.t, { potentials: false }).evaluations,
      ).toBeLessThanOrEqual(2 * (2 + 6 * 2));
  });
});

describe('sources with known fields', () => {
  /**
   * Field of a circle of uniform current on its axis: R = √(a² + z²) for all of it, so
   * H = a²/2 (I/R³ + İ/(vR²)) along the axis and E = 0 there; A_φ drops out by symmetry.
   * (Static part: Jackson, Classical Electrodynamics, 3rd ed., §5.5, from memory; the rest by one retarded time.)
   */
  test('a loop on its axis', () => {
    const a = 0.03;
    for (const z of [0, 0.01, -0.05, 0.4])
      for (const t of [1.7e-9, 2e-9, 3e-9]) {
        const R = Math.sqrt(a * a + z * z);
        const tau = t - R / vacuum.speed;
        const H = ((a * a) / 2) * (smooth.value(tau) / R ** 3 + smooth.slope(tau) / (vacuum.speed * R * R));
        const f = fieldAt([loop([0.1, 0.2, 0.3], [0, 0, 1], a, smooth)], vacuum, [0.1, 0.2, 0.3 + z], t);
        expect(Math.abs(f.H[2] - H)).toBeLessThanOrEqual(f.errorH);
        expect(f.errorH).toBeLessThan(1e-9 * Math.abs(H) + 1e-14 / a);
        expect(size(f.E)).toBeLessThanOrEqual(f.errorE);
      }
  });

  /**
   * Hertzian dipole in spherical components, moment p(t) = l q (Balanis, Antenna Theory, 4th ed., §4.2, from memory, with
   * jω read as ∂/∂t): E_r = 2cos θ/(4πε)(p/r³ + ṗ/(vr²)), E_θ = sin θ/(4πε)(p/r³ + ṗ/(vr²) + p̈/(v²r)),
   * H_φ = sin θ/(4π)(ṗ/r² + p̈/(vr)).
   */
  test('a Hertzian dipole in a medium', () => {
    const medium = mediumOf(2.2, 1.5);
    const l = 2e-3;
    const at: Vec3 = [0.01, -0.02, 0.03];
    for (const [theta, phi, r] of [
      [0.3, 0.7, 0.02],
      [1.2, 2.5, 0.1],
      [2.8, -1, 3],
    ] as const) {
      const [st, ct, sp, cp] = [Math.sin(theta), Math.cos(theta), Math.sin(phi), Math.cos(phi)];
      const n: Vec3 = [st * cp, st * sp, ct];
      const toTheta: Vec3 = [ct * cp, ct * sp, -st];
      const toPhi: Vec3 = [-sp, cp, 0];
      const t = r / medium.speed + 1.6e-9;
      const point: Vec3 = [at[0] + r * n[0], at[1] + r * n[1], at[2] + r * n[2]];
      const tau = t - r / medium.speed;
      const [p, dp, ddp] = [l * unipolar.charge(tau), l * unipolar.value(tau), l * unipolar.slope(tau)];
      const v = medium.speed;
      const ke = 1 / (4 * Math.PI * medium.permittivity);
      const Er = 2 * ct * ke * (p / r ** 3 + dp / (v * r * r));
      const Et = st * ke * (p / r ** 3 + dp / (v * r * r) + ddp / (v * v * r));
      const Hp = (st / (4 * Math.PI)) * (dp / r ** 2 + ddp / (v * r));
      const f = fieldAt([dipole(at, [0, 0, 1], l, unipolar)], medium, point, t);
      const E = n.map((x, a) => Er * x + Et * toTheta[a]!) as unknown as Vec3;
      const H = toPhi.map((x) => Hp * x) as unknown as Vec3;
      // The test's own angles round too: as many roundings again as the estimate counts.
      expect(difference(f.E, E)).toBeLessThanOrEqual(2 * f.errorE);
      expect(difference(f.H, H)).toBeLessThanOrEqual(2 * f.errorH);
      expect(f.errorE).toBeLessThan(1e-12 * size(E));
    }
  });

  /** A pulse with net charge leaves Q at the far end and −Q at the near one: Coulomb's field, and no other. */
  test('Coulomb’s field stays after a pulse that leaves charge', () => {
    const from: Vec3 = [0, 0, 0];
    const to: Vec3 = [0.03, 0.01, 0.05];
    const Q = unipolar.finalCharge;
    const point: Vec3 = [0.05, -0.02, 0.04];
    const ke = 1 / (4 * Math.PI * vacuum.permittivity);
    const E = [0, 1, 2].map((a) => {
      const far = point[a]! - to[a]!;
      const near = point[a]! - from[a]!;
      return ke * Q * (far / difference(point, to) ** 3 - near / difference(point, from) ** 3);
    }) as unknown as Vec3;
    for (const terms of [travelling(1), travelling(0.6), uniform]) {
      // 4.5 ns: the Gaussian is 14 sigma past.
      const f = fieldAt([wire([from, to], terms, unipolar)], vacuum, point, 4.5e-9);
      expect(difference(f.E, E)).toBeLessThanOrEqual(f.errorE + 8 * Number.EPSILON * size(E));
      expect(f.errorE).toBeLessThan(1e-9 * size(E));
      expect(size(f.B) * vacuum.speed).toBeLessThan(1e-13 * size(E));
    }
  });

  /** E = −∇φ − ∂A/∂t and B = ∇×A are tested in test/verify; here the front of a jump alone, which differences see. */
  test('the front of a jump is part of E: −∂A/∂t of a uniform current that starts at once', () => {
    const source = [
      wire(
        [
          [0, 0, 0],
          [0, 0, 0.1],
        ],
        uniform,
        jumping,
      ),
    ];
    const point: Vec3 = [0.03, 0, 0.02];
    const t = 0.15e-9; // the front is at s where R = 45 mm
    const step = 1e-13;
    const potential = (dt: number) => fieldAt(source, vacuum, point, t + dt, { tolerance: 1e-14 }).A[2];
    // sixth-order difference
    const rate =
      (45 * (potential(step) - potential(-step)) -
        9 * (potential(2 * step) - potential(-2 * step)) +
        (potential(3 * step) - potential(-3 * step))) /
      (60 * step);
    // φ is that of the end charges alone, whose gradient is by the dipole-free closed form of a charge.
    const f = fieldAt(source, vacuum, point, t);
    const charges = [0, 0.1].map((z, m) => {
      const R = Math.sqrt(point[0] ** 2 + (point[2] - z) ** 2);
      const tau = t - R / vacuum.speed;
      const sign = m === 0 ? -1 : 1;
      const near = jumping.charge(tau) / R ** 3 + jumping.value(tau) / (vacuum.speed * R * R);
      return (sign * near * (point[2] - z)) / (4 * Math.PI * vacuum.permittivity);
    });
    expect(f.E[2]).toBeCloseTo(charges[0]! + charges[1]! - rate, 0);
    expect(Math.abs(f.E[2] / (charges[0]! + charges[1]! - rate) - 1)).toBeLessThan(1e-9);
  });
});

describe('what cancels', () => {
  test('charges at joints, at a feed and at open ends with a reflected wave are left out, not subtracted', () => {
    const points: Vec3[] = [
      [0, 0, 0],
      [0.01, 0, 0.02],
      [0.01, 0.03, 0.02],
    ];
    const one = fieldAt([wire(points, travelling(1), smooth)], vacuum, [0.05, 0.01, 0], 2e-9, { potentials: false });
    expect(one.evaluations).toBe(2 + 4); // two end charges, two ends of each piece
    const fed = fieldAt(centreFed([0, 0, 0], [0, 0, 1], 0.05, smooth), vacuum, [0.05, 0.01, 0], 2e-9, {
      potentials: false,
    });
    // four waves of two ends; at the feed the charges that flow out cancel between the arms, those that return do too
    expect(fed.evaluations).toBe(8);
  });

  test('a closed uniform loop has no charges; a closed polyline with a wave keeps them where it starts and ends', () => {
    const square: Vec3[] = [
      [0, 0, 0],
      [0.02, 0, 0],
      [0.02, 0.02, 0],
      [0, 0.02, 0],
      [0, 0, 0],
    ];
    const count = (source: Source) =>
      fieldAt([source], vacuum, [0.05, 0.01, 0.1], 2e-9, { potentials: false, method: 'best' }).evaluations;
    expect(count(wire(square, uniform, smooth)) % 15).toBe(0);
    expect(count(wire(square, travelling(1), smooth))).toBe(2 + 8);
  });
});

describe('refusals and limits', () => {
  test('a point on a source is refused, with source, segment and place', () => {
    const source = wire(
      [
        [0, 0, 0],
        [0, 0, 0.1],
        [0.1, 0, 0.1],
      ],
      uniform,
      smooth,
    );
    expect(() => fieldAt([source], vacuum, [0.025, 0, 0.1], 1e-9)).toThrow(/cable.*segment 2, s = 0.125/);
    expect(() => fieldAt([loop([0, 0, 0], [0, 0, 1], 0.5, smooth)], vacuum, [0, 0.5, 0], 1e-9)).toThrow(
      /ring.*segment 1/,
    );
    expect(() => fieldAt([dipole([1, 2, 3], [0, 0, 1], 1e-3, smooth)], vacuum, [1, 2, 3], 1e-9)).toThrow(/probe/);
    expect(() => fieldAt(centreFed([0, 0, 0], [0, 0, 1], 0.05, smooth), vacuum, [0, 0, 0.02], 1e-9)).toThrow(
      /s = 0.02/,
    );
  });

  test('an exhausted budget is told, with the place, and its error is still a bound', () => {
    const source = wire(
      [
        [0, 0, 0],
        [0, 0, 0.1],
      ],
      uniform,
      // Its front starts as a broken power of time, which takes many parts.
      makeWaveform({ type: 'heidler', terms: [{ amplitude: 1, tau1: 0.2e-9, tau2: 2e-9, n: 1.8 }] }),
    );
    const exact = fieldAt([source], vacuum, [0.02, 0.05, 0.13], 0.5e-9, { tolerance: 1e-14 });
    const f = fieldAt([source], vacuum, [0.02, 0.05, 0.13], 0.5e-9, { tolerance: 1e-14, maxEvaluations: 1 });
    expect(exact.converged).toBe(true);
    expect(exact.evaluations).toBeGreaterThan(f.evaluations);
    expect(f.converged).toBe(false);
    expect(f.worst).toMatch(/cable.*segment 1, s from/);
    expect(difference(f.E, exact.E)).toBeLessThanOrEqual(f.errorE);
    expect(f.errorE).toBeGreaterThan(exact.errorE);
  });

  test('nothing is felt before it arrives', () => {
    const f = fieldAt(
      [
        wire(
          [
            [0, 0, 0],
            [0, 0, 0.1],
          ],
          travelling(0.5),
          smooth,
        ),
      ],
      vacuum,
      [3, 0, 0],
      9.9e-9,
    );
    expect([...f.E, ...f.H, f.phi, ...f.A].every((x) => x === 0)).toBe(true);
  });
});
