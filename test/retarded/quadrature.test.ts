import { describe, expect, test } from 'vitest';
import { gaussLegendre, KRONROD_POINTS, kronrod, kronrodError } from '../../src/retarded/quadrature.ts';

/** ∫₋₁¹ x^power dx */
const moment = (power: number) => (power % 2 === 1 ? 0 : 2 / (power + 1));

const sum = (nodes: Float64Array, weights: Float64Array, f: (x: number) => number) =>
  nodes.reduce((total, x, m) => total + weights[m]! * f(x), 0);

// Sums of n terms of size ≤ 1: n roundings.
describe('quadrature rules', () => {
  test('Kronrod’s 15 points are exact to degree 22, its 7-point Gauss rule to degree 13, and no further', () => {
    const gauss = kronrod.weights.map((w, m) => w - kronrod.differences[m]!);
    const error = (weights: Float64Array, power: number) =>
      Math.abs(sum(kronrod.nodes, weights, (x) => x ** power) - moment(power));
    for (let power = 0; power <= 23; power++) {
      expect(error(kronrod.weights, power)).toBeLessThan(KRONROD_POINTS * Number.EPSILON);
      if (power <= 13) expect(error(gauss, power)).toBeLessThan(KRONROD_POINTS * Number.EPSILON);
    }
    expect(error(kronrod.weights, 24)).toBeGreaterThan(1e-9);
    expect(error(gauss, 14)).toBeGreaterThan(1e-6);
  });

  test('Gauss’s n points are exact to degree 2n − 1 and not to 2n', () => {
    for (const n of [1, 2, 4, 6, 12, 24]) {
      const { nodes, weights } = gaussLegendre(n);
      const error = (power: number) => Math.abs(sum(nodes, weights, (x) => x ** power) - moment(power));
      for (let power = 0; power < 2 * n; power++) expect(error(power)).toBeLessThan(4 * n * Number.EPSILON);
      if (n < 12) expect(error(2 * n)).toBeGreaterThan(1e-7);
    }
  });

  test('128 points integrate 1/(x² + 0.01²), whose poles are near the interval', () => {
    const { nodes, weights } = gaussLegendre(128);
    // ρ^(−2n), ρ = 0.01 + √1.0001, is 0.077 of the largest value: the rule converges as its ellipse says.
    const exact = (2 * Math.atan(100)) / 0.01;
    const relative = Math.abs(sum(nodes, weights, (x) => 1 / (x * x + 1e-4)) / exact - 1);
    expect(relative).toBeLessThan(2 * (0.01 + Math.sqrt(1.0001)) ** -256);
    expect(relative).toBeGreaterThan(0.1 * (0.01 + Math.sqrt(1.0001)) ** -256);
  });

  test('the error estimate is never below the error for smooth, peaked and kinked integrands', () => {
    const cases: [(x: number) => number, number][] = [
      [(x) => Math.exp(x), Math.E - 1 / Math.E],
      [(x) => 1 / (1 + 25 * x * x), (2 * Math.atan(5)) / 5],
      [(x) => Math.abs(x - 0.1), (0.9 * 0.9 + 1.1 * 1.1) / 2],
      [(x) => Math.cos(20 * x), Math.sin(20) / 10],
    ];
    for (const [f, exact] of cases) {
      const value = sum(kronrod.nodes, kronrod.weights, f);
      const spread = sum(kronrod.nodes, kronrod.weights, (x) => Math.abs(f(x) - value / 2));
      const estimate = kronrodError(Math.abs(sum(kronrod.nodes, kronrod.differences, f)), spread);
      expect(Math.abs(value - exact)).toBeLessThanOrEqual(estimate + 8 * Number.EPSILON * Math.abs(exact));
    }
  });
});
