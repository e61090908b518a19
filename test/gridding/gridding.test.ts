import { describe, expect, test } from 'vitest';
import type { EdgeCurrents, NodeCharges } from '../../src/gridding/edges.ts';
import { gaussLegendre } from '../../src/gridding/gaussLegendre.ts';
import { gridSources, type NodeGrid } from '../../src/gridding/gridding.ts';
import { type Curve, circle, polyline } from '../../src/scenario/curve.ts';
import type { Dipole, Filament, Vec3, WaveTerm } from '../../src/scenario/model.ts';
import type { Waveform } from '../../src/scenario/waveform.ts';

/** A polynomial pulse: its charge and derivatives are known exactly, which is all that gridding needs of a waveform. */
const SPAN = 4e-9;
const pulse = {
  timeScale: 1e-9,
  value: (t: number) => (t > 0 && t < SPAN ? (t * (SPAN - t)) ** 4 / (SPAN / 2) ** 8 : 0),
  charge: (t: number) => {
    if (t <= 0) return 0;
    const x = Math.min(t, SPAN) / SPAN;
    const antiderivative = x ** 5 / 5 - (4 * x ** 6) / 6 + (6 * x ** 7) / 7 - (4 * x ** 8) / 8 + x ** 9 / 9;
    return antiderivative * SPAN * 256;
  },
} as unknown as Waveform;

const grid: NodeGrid = { origin: [-0.1, -0.08, -0.12], cellSize: [5e-3, 4e-3, 6e-3], cells: [40, 40, 40] };
const SPEED = 299792458;

const filament = (curve: Curve, terms: WaveTerm[]): Filament => ({
  type: 'wire',
  name: 'w',
  curve,
  terms,
  waveform: pulse,
});
const travelling: WaveTerm[] = [{ factor: 1, delay: 0.1e-9, slowness: 1 / SPEED }];
const uniform: WaveTerm[] = [{ factor: 1, delay: 0, slowness: 0 }];

const at = (list: EdgeCurrents | NodeCharges, entry: number, w: (t: number) => number, t: number) => {
  let sum = 0;
  for (let p = list.pairStart[entry]!; p < list.pairStart[entry + 1]!; p++)
    sum += list.weight[p]! * w(t - list.delay[p]!);
  return sum;
};

/** Σ I_e h_e over edges: the current moment the grid carries, A·m. */
function moment(edges: EdgeCurrents, t: number): Vec3 {
  const sum: [number, number, number] = [0, 0, 0];
  for (let e = 0; e < edges.count; e++)
    sum[edges.axis[e]!]! += at(edges, e, pulse.value, t) * grid.cellSize[edges.axis[e]!]!;
  return sum;
}

describe('Gauss–Legendre rule', () => {
  test('integrates x^(2n−1) exactly on [0, 1]', () => {
    for (const n of [1, 2, 3, 5, 8, 16]) {
      const { nodes, weights } = gaussLegendre(n);
      for (let power = 0; power < 2 * n; power++) {
        const sum = nodes.reduce((total, x, m) => total + weights[m]! * x ** power, 0);
        expect(Math.abs(sum * (power + 1) - 1)).toBeLessThan(1e-13);
      }
    }
  });
});

describe('charge-conserving gridding', () => {
  const tilted: [Vec3, Vec3] = [
    [-0.023, -0.021, -0.04],
    [0.0262, 0.0153, 0.0413],
  ];

  test('the moment of a uniform current is the wire’s, along every axis', () => {
    const { edges } = gridSources([filament(polyline(tilted), uniform)], grid);
    const t = 1.7e-9;
    moment(edges, t).forEach((m, a) => {
      expect(Math.abs(m / (pulse.value(t) * (tilted[1][a]! - tilted[0][a]!)) - 1)).toBeLessThan(1e-13);
    });
  });

  test('node charges equal the trilinear deposit of the designed charge (≤ 1e-12 q)', () => {
    const curve = polyline([...tilted, [0.05, 0.03, 0.02]]);
    const { charges } = gridSources([filament(curve, travelling)], grid);
    const expected = new Map<string, number>();
    const t = 1.9e-9;
    const term = travelling[0]!;
    const deposit = (p: ArrayLike<number>, q: number) => {
      const u = [0, 1, 2].map((a) => (p[a]! - grid.origin[a]!) / grid.cellSize[a]!);
      const cell = u.map(Math.floor);
      for (let corner = 0; corner < 8; corner++) {
        const step = [corner & 1, (corner >> 1) & 1, corner >> 2];
        const weight = step.reduce((w, up, a) => w * (up ? u[a]! - cell[a]! : 1 - u[a]! + cell[a]!), 1);
        const key = step.map((up, a) => cell[a]! + up).join();
        expected.set(key, (expected.get(key) ?? 0) + weight * q);
      }
    };
    // λ = slowness·w by continuity; a fine composite rule in s, its own, independent of the cuts at grid planes.
    const point = new Float64Array(3);
    const { nodes, weights } = gaussLegendre(8);
    for (const piece of curve.pieces) {
      const cuts = [piece.s0, piece.s0 + piece.length];
      for (const axis of [0, 1, 2] as const)
        for (let i = 0; i <= grid.cells[axis]; i++)
          cuts.push(...piece.crossings(axis, grid.origin[axis] + i * grid.cellSize[axis]));
      cuts.sort((a, b) => a - b);
      for (let c = 1; c < cuts.length; c++)
        nodes.forEach((x, m) => {
          const ds = cuts[c]! - cuts[c - 1]!;
          const s = cuts[c - 1]! + x * ds;
          piece.point(s, point);
          deposit(point, weights[m]! * ds * term.slowness * pulse.value(t - term.delay - term.slowness * s));
        });
    }
    curve.pieces[0]!.point(0, point);
    deposit(point, -pulse.charge(t - term.delay));
    curve.pieces[1]!.point(curve.length, point);
    deposit(point, pulse.charge(t - term.delay - term.slowness * curve.length));
    const q = pulse.charge(SPAN);
    let worst = 0;
    for (let n = 0; n < charges.count; n++) {
      const key = charges.node.subarray(3 * n, 3 * n + 3).join();
      worst = Math.max(worst, Math.abs(at(charges, n, pulse.charge, t) - (expected.get(key) ?? 0)));
      expected.delete(key);
    }
    for (const left of expected.values()) worst = Math.max(worst, Math.abs(left));
    expect(worst / q).toBeLessThan(1e-12);
  });

  test('a uniform closed loop leaves no charge at any node, whatever its tilt', () => {
    const normal: Vec3 = [0.48, 0.36, 0.8];
    const { edges, charges } = gridSources(
      [{ ...filament(circle([0.011, -0.002, 0.003], normal, 0.031), uniform), type: 'loop' }],
      grid,
    );
    expect(edges.count).toBeGreaterThan(50);
    // The arc's own Gauss rule integrates trigonometric weights: 1e-10 of the current is its residue, not the scheme's.
    for (let n = 0; n < charges.count; n++)
      expect(Math.abs(at(charges, n, (x) => (x > 0 ? 1 : 0), 1e-9))).toBeLessThan(1e-10);
  });

  test('the magnetic moment of a gridded loop is I π r² n', () => {
    const normal: Vec3 = [0.48, 0.36, 0.8];
    const { edges } = gridSources([filament(circle([0.011, -0.002, 0.003], normal, 0.031), uniform)], grid);
    const magnetic: [number, number, number] = [0, 0, 0];
    for (let e = 0; e < edges.count; e++) {
      const a = edges.axis[e]!;
      const current = at(edges, e, () => 1, 0) * grid.cellSize[a]!;
      const r = [0, 1, 2].map(
        (b) => grid.origin[b]! + (edges.node[3 * e + b]! + (a === b ? 0.5 : 0)) * grid.cellSize[b]!,
      );
      // ½ r × I dl
      magnetic[(a + 1) % 3]! += 0.5 * current * r[(a + 2) % 3]!;
      magnetic[(a + 2) % 3]! -= 0.5 * current * r[(a + 1) % 3]!;
    }
    const area = Math.PI * 0.031 ** 2;
    magnetic.forEach((m, a) => {
      expect(Math.abs(m / (area * normal[a]!) - 1)).toBeLessThan(1e-9);
    });
  });

  test('a wire on a grid line drives that line alone, by whole edges', () => {
    const wire = polyline([
      [0, 0, -0.03],
      [0, 0, 0.03],
    ]);
    const { edges, charges } = gridSources([filament(wire, uniform)], { ...grid, origin: [-0.1, -0.08, -0.12] });
    expect(edges.count).toBe(10);
    for (let e = 0; e < edges.count; e++) {
      expect(edges.axis[e]).toBe(2);
      expect(edges.node[3 * e]).toBe(20);
      expect(edges.node[3 * e + 1]).toBe(20);
      expect(at(edges, e, () => 1, 0)).toBeCloseTo(1, 14);
    }
    expect(charges.count).toBe(2);
  });

  test('a dipole keeps its moment and its centroid, wherever it lies in a cell, next to a wall too', () => {
    for (const at0 of [
      [0.0013, -0.0007, 0.0021],
      [0, 0, 0],
      [-0.0991, 0.0787, 0.119],
    ] as Vec3[]) {
      const dipole: Dipole = {
        type: 'dipole',
        name: 'd',
        at: at0,
        direction: [0.6, 0, 0.8],
        length: 1e-3,
        waveform: pulse,
      };
      const { edges } = gridSources([dipole], grid);
      const total = [0, 0, 0];
      const centroid = [0, 1, 2].map(() => [0, 0, 0]);
      for (let e = 0; e < edges.count; e++) {
        const a = edges.axis[e]!;
        const m = at(edges, e, () => 1, 0) * grid.cellSize[a]!;
        total[a]! += m;
        for (let b = 0; b < 3; b++)
          centroid[a]![b]! +=
            m * (grid.origin[b]! + (edges.node[3 * e + b]! + (a === b ? 0.5 : 0)) * grid.cellSize[b]!);
      }
      for (const a of [0, 2]) {
        expect(Math.abs(total[a]! / (1e-3 * dipole.direction[a]!) - 1)).toBeLessThan(1e-12);
        for (let b = 0; b < 3; b++) expect(Math.abs(centroid[a]![b]! / total[a]! - at0[b]!)).toBeLessThan(1e-13);
      }
      expect(total[1]).toBe(0);
    }
  });
});
