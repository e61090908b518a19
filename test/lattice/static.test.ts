import { describe, expect, test } from 'vitest';
import { scaledBessel, staticGreen } from '../../src/lattice/static.ts';
import type { Vec3 } from '../../src/scenario/model.ts';

describe('scaled modified Bessel functions', () => {
  test('e^(−x) I_l(x) on both sides of the change of method', () => {
    // mpmath at 40 digits, rounded to double: besseli(l, x) * exp(-x)
    const reference: [number, number, number][] = [
      [0, 1, 0.46575960759364043],
      [1, 1, 0.20791041534970844],
      [18, 1, 2.220941395109548e-22],
      [18, 30, 0.0003535230062442723],
      [5, 1900, 0.009092930960722927],
      [0, 2500, 0.007979244640108492],
      [18, 2500, 0.007478491234339792],
    ];
    const out = new Float64Array(19);
    for (const [l, x, value] of reference) {
      scaledBessel(x, out);
      // The recurrence adds up to 9√x positive terms, the series a dozen: both far below this.
      expect(Math.abs(out[l]! / value - 1)).toBeLessThan(32 * Number.EPSILON);
    }
  });
});

describe("the lattice's static Green's function", () => {
  test("Watson's integral and its neighbours", () => {
    const { at } = staticGreen([1, 1, 1]);
    // Watson 1939: 0.505462019717326006… for half the symbol used here; Joyce, J. Phys. A 6, 1973 (from memory).
    const watson = 0.505462019717326 / 2;
    // Glasser & Boersma, J. Phys. A 33, 2000: u(1,1,0) = (5/12) u0 − 1/(2π² u0), u0 = 2g(0,0,0) (from memory).
    const diagonal = ((5 / 12) * 2 * watson - 1 / (4 * Math.PI ** 2 * watson)) / 2;
    // 192 nodes of the rule, all terms positive: rounding grows as √192 at most.
    expect(Math.abs(at(0, 0, 0) - watson)).toBeLessThan(4 * Number.EPSILON);
    expect(Math.abs(at(1, 0, 0) - (watson - 1 / 6))).toBeLessThan(4 * Number.EPSILON);
    expect(Math.abs(at(1, 1, 0) - diagonal)).toBeLessThan(4 * Number.EPSILON);
  });

  test.each([[[1e-3, 1e-3, 1e-3]], [[1e-3, 2e-3, 0.7e-3]], [[3e-3, 1e-3, 1e-3]]] as [Vec3][])(
    'satisfies Σ D_a² g0 = −δ/(dx dy dz), Σ D_a² g2 = g0 with cells %j',
    (d) => {
      const { at, second, reach } = staticGreen(d);
      let worst = 0;
      let worst2 = 0;
      for (let l = 0; l < reach[0]; l++)
        for (let m = 0; m < reach[1]; m++)
          for (let n = 0; n < reach[2]; n++) {
            const laplacian = (g: typeof at) =>
              (g(l + 1, m, n) + g(l - 1, m, n) - 2 * g(l, m, n)) / d[0] ** 2 +
              (g(l, m + 1, n) + g(l, m - 1, n) - 2 * g(l, m, n)) / d[1] ** 2 +
              (g(l, m, n + 1) + g(l, m, n - 1) - 2 * g(l, m, n)) / d[2] ** 2;
            worst2 = Math.max(worst2, Math.abs(laplacian(second) / at(l, m, n) - 1));
            const sum = laplacian(at);
            worst = Math.max(worst, Math.abs(sum * d[0] * d[1] * d[2] + (l + m + n === 0 ? 1 : 0)));
          }
      console.log(
        `cells ${d.join('×')} m, reach ${reach.join('×')}: ${worst.toExponential(1)}, ${worst2.toExponential(1)}`,
      );
      // Rounding of the largest values, times the three weights.
      const scale = at(0, 0, 0) * d[0] * d[1] * d[2] * 2 * d.reduce((s, x) => s + 1 / (x * x), 0);
      expect(worst).toBeLessThan(4 * Number.EPSILON * scale);
      // g2's integrand cancels to t^(1/2) roundings, t up to 2·10⁷: 10⁻¹², and second differences are (h/r)² of it, down to
      // 3·10⁻⁴ in the corners.
      expect(worst2).toBeLessThan(4e-9);
    },
  );

  test('is symmetric, and permutes with the cells', () => {
    const a = staticGreen([1e-3, 2e-3, 0.7e-3]);
    const b = staticGreen([0.7e-3, 1e-3, 2e-3]);
    for (const [l, m, n] of [
      [1, 2, 3],
      [17, 4, 9],
      [0, 0, 12],
    ] as Vec3[]) {
      expect(a.at(-l, m, -n)).toBe(a.at(l, m, n));
      expect(Math.abs(b.at(n, l, m) / a.at(l, m, n) - 1)).toBeLessThan(64 * Number.EPSILON);
    }
  });

  test('approaches 1/(4πr), and its companion r/(8π) but for a constant, with order 2', () => {
    const { at, second } = staticGreen([1, 1, 1]);
    const direction = [2, 1, 0];
    const rows: { r: number; error: number; order: number; 'slope of g2': number }[] = [];
    for (const n of [1, 2, 4, 8]) {
      const r = n * Math.sqrt(5);
      const [x, y, z] = direction.map((c) => n * c) as unknown as Vec3;
      const error = Math.abs(at(x, y, z) * 4 * Math.PI * r - 1);
      const before = rows.at(-1);
      // D_x r/(8π) = x/(8πr) + O(h²/r²)
      const slope = (((second(x + 1, y, z) - second(x - 1, y, z)) / 2) * 8 * Math.PI * r) / x;
      rows.push({ r, error, order: before ? Math.log2(before.error / error) : Number.NaN, 'slope of g2': slope });
    }
    console.table(rows);
    expect(Math.abs(rows[3]!['slope of g2'] - 1)).toBeLessThan(1 / 320);
    expect(rows[3]!.order).toBeGreaterThan(1.9);
    expect(rows[3]!.order).toBeLessThan(2.1);
  });
});
