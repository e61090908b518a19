import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import { describe, expect, test } from 'vitest';
import { log } from '../../src/elementary/elementary.ts';
import { gridSources } from '../../src/gridding/gridding.ts';
import { centredRule, DelayGrid, ElementList, measureRule } from '../../src/retarded/delayGrid.ts';
import { farField } from '../../src/retarded/farField.ts';
import { type FieldValue, fieldAt, fieldOf } from '../../src/retarded/field.ts';
import { griddedHistory } from '../../src/retarded/gridded.ts';
import { historyOf } from '../../src/retarded/history.ts';
import { prepareGridded, prepareSources } from '../../src/retarded/prepare.ts';
import { gaussLegendre } from '../../src/retarded/quadrature.ts';
import type { Source, Vec3 } from '../../src/scenario/model.ts';
import { instantsOf, samplePoints } from '../../src/trace/trace.ts';
import {
  centreFed,
  difference,
  dipole,
  jumping,
  kinked,
  loop,
  size,
  smooth,
  travelling,
  uniform,
  unipolar,
  vacuum,
  wire,
} from '../retarded/sources.ts';

const { speed } = vacuum;

function random(seed: number) {
  const rng = xoroshiro128plus(seed);
  const real = (from: number, to: number) => from + (to - from) * uniformFloat64(rng);
  const place = (reach: number): Vec3 => [real(-reach, reach), real(-reach, reach), real(-reach, reach)];
  return { real, place };
}

const median = (list: number[]) => list.toSorted((a, b) => a - b)[Math.floor(list.length / 2)]!;

describe('adaptive quadrature against the closed form of full-speed waves', () => {
  test.each([
    ['smooth', smooth],
    ['jumping', jumping],
    ['kinked', kinked],
  ] as const)('the true error is below its estimate at 1000 seeded places and instants, %s pulse', (name, waveform) => {
    const { real, place } = random(20_261);
    const rows: Record<string, unknown> = {};
    for (const tolerance of [1e-4, 1e-10]) {
      const ratios: number[] = [];
      let felt = 0;
      let worst = 0;
      for (let n = 0; n < 500; n++) {
        const sources = [
          wire([place(0.05), place(0.05), place(0.05)], travelling(1), waveform),
          ...centreFed(place(0.02), [0.48, 0.36, 0.8], 0.04, waveform),
        ];
        // Half of the places are close to the first wire, down to a micrometre.
        const near = new Float64Array(3);
        const first = sources[0]!.curve;
        first.pieces[0]!.point(real(0, 0.9) * first.pieces[0]!.length, near);
        const gap = 10 ** real(-6, -2);
        const at: Vec3 = n % 2 ? place(0.2) : [near[0]! + gap * 0.6, near[1]! + gap * 0.48, near[2]! - gap * 0.64];
        const t = real(0, 2.5e-9);
        const exact = fieldAt(sources, vacuum, at, t, { potentials: false });
        const computed = fieldAt(sources, vacuum, at, t, { method: 'quadrature', potentials: false, tolerance });
        const errors = [
          [difference(computed.E, exact.E), computed.errorE, exact.errorE, size(exact.E)],
          [difference(computed.H, exact.H), computed.errorH, exact.errorH, size(exact.E) / vacuum.impedance],
        ] as const;
        for (const [error, estimate, own, scale] of errors) {
          if (scale === 0) continue;
          felt++;
          expect(error, `${name}, ${n}: ${at} at ${t}`).toBeLessThanOrEqual(estimate + own);
          // In a pulse’s far tail nothing but rounding is left of either.
          if (own < 1e-9 * scale) worst = Math.max(worst, error / scale);
          if (error > 0) ratios.push(estimate / error);
        }
        expect(computed.converged).toBe(true);
      }
      rows[tolerance] = { felt, 'estimate / error, median': Math.round(median(ratios)), 'worst error': worst };
      expect(felt).toBeGreaterThan(500);
      // At 1e-10 what is left of the error is rounding, which the estimate counts term by term as if all added up.
      expect(median(ratios)).toBeLessThan(1e5);
    }
    console.table(rows);
  });
});

/** Weights of the eighth-order central difference at 1 … 4 steps (Fornberg 1988, from memory). */
const EIGHTH = [4 / 5, -1 / 5, 4 / 105, -1 / 280];

function rate<T>(f: (offset: number) => T, read: (value: T) => number, step: number): number {
  return EIGHTH.reduce((sum, w, m) => sum + (w * (read(f((m + 1) * step)) - read(f(-(m + 1) * step)))) / step, 0);
}

describe('potentials', () => {
  test('E = −∇φ − ∂A/∂t, B = ∇×A and ∇·A + φ̇/v² = 0, by differences of eighth order', () => {
    const { real, place } = random(4_711);
    const kinds: Record<string, (w: typeof smooth) => Source[]> = {
      'centre-fed': (w) => centreFed([0, 0, 0], [0.48, 0.36, 0.8], 0.05, w),
      'slow wave': (w) => [
        wire(
          [
            [0, 0, -0.05],
            [0.02, 0, 0],
            [0, 0.03, 0.05],
          ],
          travelling(0.55),
          w,
        ),
      ],
      uniform: (w) => [
        wire(
          [
            [0, 0, -0.05],
            [0.02, 0, 0.05],
          ],
          uniform,
          w,
        ),
      ],
      loop: (w) => [loop([0, 0, 0], [0, 0.6, 0.8], 0.04, w)],
      dipole: (w) => [dipole([0, 0, 0], [0, 0.6, 0.8], 1e-3, w)],
    };
    const rows: Record<string, Record<string, string>> = {};
    for (const [kind, build] of Object.entries(kinds))
      for (const waveform of [smooth, unipolar, kinked]) {
        const sources = build(waveform);
        const field = fieldOf(prepareSources(sources, vacuum, 'best'), { tolerance: 1e-14 });
        const worst = { E: 0, B: 0, gauge: 0 };
        for (let n = 0; n < 6; n++) {
          const direction = place(1);
          const distance = real(0.08, 0.25) / size(direction);
          const p = direction.map((x) => x * distance) as unknown as Vec3;
          // Well after the first arrival, so that no step crosses a kink's front.
          const t = 0.9e-9 + (waveform === kinked ? 0.5e-9 : 0.8e-9) + real(0, 0.4e-9);
          const step = 1e-3;
          const along = (a: number) => (offset: number) =>
            field(p.map((x, b) => (a === b ? x + offset : x)) as unknown as Vec3, t);
          const inTime = (offset: number) => field(p, t + offset / speed);
          const f = field(p, t);
          const gradient = [0, 1, 2].map((a) => rate(along(a), (v) => v.phi, step));
          const growth = [0, 1, 2].map((a) => speed * rate(inTime, (v) => v.A[a]!, step));
          const slope = (a: number, b: number) => rate(along(a), (v: FieldValue) => v.A[b]!, step);
          const E = [0, 1, 2].map((a) => -gradient[a]! - growth[a]!) as unknown as Vec3;
          const B = [0, 1, 2].map((a) => {
            const [b, c] = [(a + 1) % 3, (a + 2) % 3];
            return slope(b, c) - slope(c, b);
          }) as unknown as Vec3;
          const divergence = [0, 1, 2].map((a) => slope(a, a));
          const decay = rate(inTime, (v) => v.phi, step) / speed;
          const parts = Math.max(size(gradient as unknown as Vec3), size(growth as unknown as Vec3));
          worst.E = Math.max(worst.E, difference(E, f.E) / parts);
          worst.B = Math.max(worst.B, (difference(B, f.B) * speed) / Math.max(parts, size(f.B) * speed));
          const gauge = Math.abs(divergence.reduce((sum, x) => sum + x, decay));
          worst.gauge = Math.max(worst.gauge, (gauge * speed) / parts);
        }
        const name = waveform === smooth ? 'smooth' : waveform === unipolar ? 'unipolar' : 'kinked';
        rows[`${kind}, ${name}`] = Object.fromEntries(
          Object.entries(worst).map(([key, value]) => [key, value.toExponential(1)]),
        );
        // Step over the nearest scale, 1 mm over 40 mm (distance less the source) or 30 mm (v/β): of eighth order,
        // 576 (1/30)⁸ = 1e-9 for a 1/r potential; rounding of potentials, 1e-14 · 40, is below.
        for (const value of Object.values(worst)) expect(value, `${kind}, ${name}`).toBeLessThan(1e-8);
      }
    console.table(rows);
  });
});

describe('one current told in two ways', () => {
  test('a filament and the dipoles it is made of have the same field', () => {
    // Dipoles of moment I ds with their own charges: interior charges cancel in the sum, the ends' stay.
    const from: Vec3 = [0, 0, 0];
    const to: Vec3 = [0.03, 0.01, 0.05];
    const length = difference(from, to);
    const direction = to.map((x) => x / length) as unknown as Vec3;
    const { nodes, weights } = gaussLegendre(48);
    const at: Vec3 = [0.05, -0.02, 0.04];
    for (const [name, slowness] of [
      ['uniform', 0],
      ['slow', 1.7 / speed],
      ['full speed', 1 / speed],
    ] as const)
      for (const t of [1.6e-9, 2e-9, 2.4e-9]) {
        const filament = fieldAt([wire([from, to], [{ factor: 1, delay: 0, slowness }], unipolar)], vacuum, at, t);
        const sum = [0, 0, 0, 0, 0, 0];
        nodes.forEach((x, m) => {
          const s = (length * (1 + x)) / 2;
          const place = direction.map((d) => s * d) as unknown as Vec3;
          const one = fieldAt(
            [dipole(place, direction, (length * weights[m]!) / 2, unipolar)],
            vacuum,
            at,
            t - slowness * s,
          );
          [...one.E, ...one.H].forEach((value, c) => {
            sum[c]! += value;
          });
        });
        const E = sum.slice(0, 3) as unknown as Vec3;
        const H = sum.slice(3) as unknown as Vec3;
        expect(difference(E, filament.E) / size(E), name).toBeLessThan(1e-12);
        expect(difference(H, filament.H) / size(H), name).toBeLessThan(1e-12);
      }
  });

  test('a short uniform wire tends to a dipole with the square of its length', () => {
    const at: Vec3 = [0.06, 0.02, 0.05];
    const errors = [8e-3, 4e-3, 2e-3, 1e-3].map((l) => {
      const short = fieldAt(
        [
          wire(
            [
              [0, 0, -l / 2],
              [0, 0, l / 2],
            ],
            uniform,
            smooth,
          ),
        ],
        vacuum,
        at,
        1.9e-9,
      );
      const point = fieldAt([dipole([0, 0, 0], [0, 0, 1], l, smooth)], vacuum, at, 1.9e-9);
      return difference(short.E, point.E) / size(point.E);
    });
    const orders = errors.slice(1).map((e, m) => log(errors[m]! / e) / Math.LN2);
    console.table(errors.map((error, m) => ({ length: 8e-3 / 2 ** m, error, order: m === 0 ? '' : orders[m - 1]! })));
    for (const order of orders) {
      expect(order).toBeGreaterThan(1.97);
      expect(order).toBeLessThan(2.03);
    }
  });

  test('the near field of a long wire is that of its potentials far out: r E tends to the far field as 1/r', () => {
    const sources: Source[] = [
      ...centreFed([0.01, 0.02, -0.01], [0.48, 0.36, 0.8], 0.05, smooth),
      wire(
        [
          [0, 0, 0],
          [0.03, 0, 0.01],
          [0.03, 0.02, 0],
        ],
        travelling(0.7),
        kinked,
      ),
      loop([0, 0.02, 0], [0.6, 0, 0.8], 0.03, smooth),
      loop([0, 0.02, 0], [0.6, 0, 0.8], 0.03, kinked),
      dipole([0, 0, 0.02], [1, 0, 0], 0.01, smooth),
    ];
    const n: Vec3 = [0.36, -0.48, 0.8];
    const times = Float64Array.from({ length: 40 }, (_, m) => 1e-9 + m * 0.04e-9);
    const far = farField(sources, vacuum, n, times);
    const peak = far.values.reduce((most, v) => Math.max(most, Math.abs(v)), 0);
    expect(far.error).toBeLessThan(1e-6 * peak);
    const errors = [100, 200, 400].map((r) => {
      let worst = 0;
      times.forEach((t, m) => {
        const f = fieldAt(sources, vacuum, n.map((x) => r * x) as unknown as Vec3, t + r / speed, {
          potentials: false,
        });
        const along = f.E[0] * n[0] + f.E[1] * n[1] + f.E[2] * n[2];
        for (let a = 0; a < 3; a++)
          worst = Math.max(worst, Math.abs(r * (f.E[a]! - along * n[a]!) - far.values[a * times.length + m]!) / peak);
      });
      return worst;
    });
    const orders = errors.slice(1).map((e, m) => log(errors[m]! / e) / Math.LN2);
    console.table(errors.map((error, m) => ({ distance: 100 * 2 ** m, error, order: m === 0 ? '' : orders[m - 1]! })));
    for (const order of orders) {
      expect(order).toBeGreaterThan(0.95);
      expect(order).toBeLessThan(1.05);
    }
  });
});

describe('delay spreading', () => {
  test('levels of the rule, error of w over its peak: they fall with the p-th power of the step', () => {
    const gaussian = unipolar;
    const levels: Record<number, Record<number, number>> = {};
    for (const points of [4, 8, 12]) {
      levels[points] = {};
      for (const samples of [10, 20, 40]) {
        const { error, peak } = measureRule(centredRule(points, 1), gaussian, gaussian.timeScale / samples);
        levels[points][samples] = error[1] / peak[1];
      }
    }
    console.table(levels);
    // Largest of Π(x − x_j)/p! over the middle interval, at its middle, times the largest p-th derivative of e^(−u²/2),
    // (p − 1)!! at the peak: p = 4: 9/16/24·3; p = 8: 43.07/40320·105; p = 12: 26398/479001600·10395 (in steps of sigma).
    for (const [points, gain] of [
      [4, (9 / 16 / 24) * 3],
      [8, (43.066 / 40320) * 105],
      [12, (26_377 / 479_001_600) * 10_395],
    ] as const)
      for (const samples of [10, 20, 40]) {
        const predicted = gain * samples ** -points;
        const measured = levels[points]![samples]!;
        // What is measured counts twice, for places between those tried.
        expect(measured).toBeLessThan(2.1 * predicted + 32 * Number.EPSILON);
        if (predicted > 1e-13) expect(measured).toBeGreaterThan(predicted);
      }
  });

  test('the kernel gives the rule’s values: elements against the direct sum, smooth and kinked', () => {
    const { real } = random(99);
    const step = 0.01e-9;
    for (const waveform of [smooth, kinked, jumping])
      for (const accuracy of [1e-4, 1e-8, 1e-11]) {
        const grid = new DelayGrid([waveform], step, 300, 300 * step, accuracy);
        const list = new ElementList();
        const elements = Array.from({ length: 200 }, () => ({
          delay: real(0, 1.2e-9),
          q: real(-1, 1) * 1e10,
          w: real(-1, 1),
          slope: real(-1, 1) * 1e-10,
        }));
        for (const { delay, q, w, slope } of elements) list.add((step - delay) / step, q, w, slope);
        const values = new Float64Array(300);
        grid.addHistory(values, 0, list);
        let worst = 0;
        let scale = 0;
        for (let n = 0; n < 300; n++) {
          let sum = 0;
          let bound = 0;
          for (const { delay, q, w, slope } of elements) {
            const u = (n + 1) * step - delay;
            sum += q * waveform.charge(u) + w * waveform.value(u) + slope * waveform.slope(u);
            const { error } = grid.errors[0]!;
            bound += Math.abs(q) * error[0] + Math.abs(w) * error[1] + Math.abs(slope) * error[2];
          }
          scale = Math.max(scale, Math.abs(sum));
          worst = Math.max(worst, Math.abs(values[n]! - sum) / bound);
        }
        // The bound adds up 200 errors of one sign; it may not be exceeded, and at random signs it is far from met.
        expect(worst, `${waveform.spec.type} ${accuracy}`).toBeLessThan(1);
        expect(scale).toBeGreaterThan(1);
      }
  });

  test('a gridded wire: what the accuracy asked for gives', () => {
    const h = 5e-3;
    const origin: Vec3 = [-0.1, -0.1, -0.1];
    const sources = centreFed([1.2e-3, -2.1e-3, 0.7e-3], [0.48, 0.36, 0.8], 0.03, smooth);
    const gridded = gridSources(sources, { origin, cellSize: [h, h, h], cells: [40, 40, 40] });
    const instants = instantsOf(300, (0.99 * h) / (speed * Math.sqrt(3)));
    const points = samplePoints(Int32Array.of(31, 24, 27), origin, [h, h, h]);
    const exact = historyOf(prepareGridded(gridded, origin, [h, h, h], vacuum), points, instants, { tolerance: 1e-11 });
    const rows: Record<string, unknown> = {};
    for (const accuracy of [1e-3, 1e-5, 1e-7, 1e-9, 1e-11]) {
      const found = griddedHistory(gridded, origin, [h, h, h], vacuum, points, instants, { accuracy });
      let error = 0;
      let peak = 0;
      found.values.forEach((v, m) => {
        const unit = Math.floor(m / instants.count) < 3 ? 1 : vacuum.impedance;
        error = Math.max(error, unit * Math.abs(v - exact.values[m]!));
        peak = Math.max(peak, unit * Math.abs(exact.values[m]!));
      });
      rows[accuracy] = { error: error / peak, 'found by 8 checks': found.difference };
      expect(error / peak).toBeLessThan(accuracy);
    }
    console.table(rows);
  });
});
