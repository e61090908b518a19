import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import { describe, expect, test } from 'vitest';
import type { EdgeCurrents, NodeCharges } from '../../src/gridding/edges.ts';
import { gaussLegendre } from '../../src/gridding/gaussLegendre.ts';
import { gridSources, type NodeGrid } from '../../src/gridding/gridding.ts';
import { type Curve, circle, polyline } from '../../src/scenario/curve.ts';
import {
  type Dipole,
  type Filament,
  GRIDDINGS,
  type Gridding,
  type Vec3,
  type WaveTerm,
} from '../../src/scenario/model.ts';
import { decaying, hat, standing } from '../../src/scenario/profiles.ts';
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

  const bent = polyline([...tilted, [0.05, 0.03, 0.02]]);
  const terms: [string, WaveTerm][] = [
    ['travelling', travelling[0]!],
    ['standing', { factor: 1.3, delay: 0, slowness: 0, profile: standing(bent.length, 31) }],
    [
      'decaying, backward',
      {
        factor: -0.8,
        delay: 0.1e-9 + (1.5 * bent.length) / SPEED,
        slowness: -1.5 / SPEED,
        profile: decaying(bent.length, 0.05, 'backward'),
      },
    ],
    ['hat', { factor: 1, delay: 0.1e-9, slowness: 0, profile: hat([0, 0.03, 0.07, bent.length], 1) }],
    ['half a hat', { factor: 1, delay: 0.1e-9, slowness: 0, profile: hat([0, 0.03, 0.07, bent.length], 3) }],
  ];
  test.each(terms)('node charges equal the trilinear deposit of the designed charge (≤ 1e-12 q): %s', (_, term) => {
    const curve = bent;
    const { charges } = gridSources([filament(curve, [term])], grid);
    const expected = new Map<string, number>();
    const t = 1.9e-9;
    const a = (s: number) => term.factor * (term.profile?.value(s) ?? 1);
    const da = (s: number) => term.factor * (term.profile?.slope(s) ?? 0);
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
    // λ = slowness·a w − a′ q by continuity; a fine composite rule in s, its own, independent of the cuts at grid planes.
    const point = new Float64Array(3);
    const { nodes, weights } = gaussLegendre(8);
    for (const piece of curve.pieces) {
      const breaks = (term.profile?.breaks ?? []).filter((s) => s > piece.s0 && s < piece.s0 + piece.length);
      const cuts = [piece.s0, piece.s0 + piece.length, ...breaks];
      for (const axis of [0, 1, 2] as const)
        for (let i = 0; i <= grid.cells[axis]; i++)
          cuts.push(...piece.crossings(axis, grid.origin[axis] + i * grid.cellSize[axis]));
      cuts.sort((a, b) => a - b);
      for (let c = 1; c < cuts.length; c++)
        nodes.forEach((x, m) => {
          const ds = cuts[c]! - cuts[c - 1]!;
          const s = cuts[c - 1]! + x * ds;
          piece.point(s, point);
          const u = t - term.delay - term.slowness * s;
          deposit(point, weights[m]! * ds * (term.slowness * a(s) * pulse.value(u) - da(s) * pulse.charge(u)));
        });
    }
    curve.pieces[0]!.point(0, point);
    deposit(point, -a(0) * pulse.charge(t - term.delay));
    curve.pieces[1]!.point(curve.length, point);
    deposit(point, a(curve.length) * pulse.charge(t - term.delay - term.slowness * curve.length));
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

describe('cruder griddings, as other solvers have them', () => {
  const h = 5e-3;
  const cubes = (cellSize: number, gridding: Gridding): NodeGrid => ({
    origin: [-0.1, -0.1, -0.1],
    cellSize: [cellSize, cellSize, cellSize],
    cells: [0.2 / cellSize, 0.2 / cellSize, 0.2 / cellSize],
    gridding,
  });
  const tilted: [Vec3, Vec3] = [
    [-0.0228, -0.0201, -0.0393],
    [0.0252, 0.0159, 0.0407],
  ];
  const step = (x: number) => (x > 0 ? 1 : 0);

  test('a staircase is a path of edges: the whole current on each, charge at its two ends alone', () => {
    const { edges, charges } = gridSources([filament(polyline(tilted), uniform)], cubes(h, 'staircase'));
    for (let e = 0; e < edges.count; e++) expect(Math.abs(at(edges, e, step, 1e-9))).toBe(1);
    // From the node nearest to the start to that nearest to the end: as many edges as nodes lie between, axis by axis.
    const nodes = tilted.map((p) => p.map((x) => Math.round((x + 0.1) / h)));
    expect(edges.count).toBe([0, 1, 2].reduce((sum, a) => sum + Math.abs(nodes[1]![a]! - nodes[0]![a]!), 0));
    const held = new Map<string, number>();
    for (let n = 0; n < charges.count; n++) {
      const q = at(charges, n, step, 1e-9);
      if (q !== 0) held.set(charges.node.subarray(3 * n, 3 * n + 3).join(), q);
    }
    expect(held).toEqual(
      new Map([
        [nodes[0]!.join(), -1],
        [nodes[1]!.join(), 1],
      ]),
    );
  });

  test.each([0, 0.0025])('a closed loop leaves no charge on a staircase, wherever it begins (centre at %d)', (x) => {
    for (const normal of [
      [0, 0, 1],
      [0.48, 0.36, 0.8],
    ] as Vec3[]) {
      const loop = { ...filament(circle([x, x, 0.003], normal, 0.03), uniform), type: 'loop' as const };
      const { edges, charges } = gridSources([loop], cubes(h, 'staircase'));
      expect(edges.count).toBeGreaterThan(20);
      for (let n = 0; n < charges.count; n++) expect(at(charges, n, step, 1e-9)).toBe(0);
    }
  });

  test('on a grid line all three are the same wire', () => {
    const wire = polyline([
      [0, 0, -0.03],
      [0, 0, 0.03],
    ]);
    const [trilinear, nearest, staircase] = GRIDDINGS.map(
      (gridding) => gridSources([filament(wire, uniform)], cubes(h, gridding)).edges,
    );
    for (const other of [nearest!, staircase!]) {
      expect([...other.node]).toEqual([...trilinear!.node]);
      expect([...other.axis]).toEqual([...trilinear!.axis]);
      other.weight.forEach((w, e) => {
        expect(Math.abs(w - trilinear!.weight[e]!)).toBeLessThan(1e-12);
      });
    }
  });

  test('a dipole goes on one edge for each of its components', () => {
    const dipole: Dipole = {
      type: 'dipole',
      name: 'd',
      at: [0.0013, -0.0007, 0.0021],
      direction: [0.6, 0, 0.8],
      length: 1e-3,
      waveform: pulse,
    };
    for (const gridding of ['nearest', 'staircase'] as const) {
      const { edges } = gridSources([dipole], cubes(h, gridding));
      expect(edges.count).toBe(2);
      const along = [...edges.axis].map((axis, e) => [axis, edges.weight[e]! * h]);
      expect(along).toEqual([
        [0, expect.closeTo(0.6e-3, 15)],
        [2, expect.closeTo(0.8e-3, 15)],
      ]);
    }
  });

  /** Coulomb's field of charges, up to 1/(4πε). */
  const coulomb = (charges: readonly (readonly [Vec3, number])[], p: Vec3) =>
    charges.reduce(
      (sum, [place, q]) => {
        const d = [p[0] - place[0], p[1] - place[1], p[2] - place[2]];
        const r = Math.sqrt(d[0]! ** 2 + d[1]! ** 2 + d[2]! ** 2);
        return sum.map((e, a) => e + (q * d[a]!) / r ** 3);
      },
      [0, 0, 0],
    );

  /** Error of the static field that a uniform current leaves, the worst of places `cells` from a wire's middle. */
  function staticError(gridding: Gridding, cellSize: number, distance: number, shift: Vec3): number {
    const ends = tilted.map((p) => p.map((x, a) => x + shift[a]!) as unknown as Vec3);
    const lattice = cubes(cellSize, gridding);
    const { charges } = gridSources([filament(polyline(ends), uniform)], lattice);
    const gridded = Array.from({ length: charges.count }, (_, n) => {
      const node = [0, 1, 2].map((a) => lattice.origin[a]! + charges.node[3 * n + a]! * cellSize);
      return [node as unknown as Vec3, at(charges, n, step, 1e-9)] as const;
    });
    const designed = [[ends[0]!, -1] as const, [ends[1]!, 1] as const];
    const middle = ends[0]!.map((x, a) => (x + ends[1]![a]!) / 2);
    // Across the wire, whose direction is (0.48, 0.36, 0.8).
    const across: Vec3[] = [
      [0.6, -0.8, 0],
      [-0.6, 0.8, 0],
      [0.64, 0.48, -0.6],
      [-0.64, -0.48, 0.6],
    ];
    return Math.max(
      ...across.map((v) => {
        const p = middle.map((x, a) => x + distance * v[a]!) as unknown as Vec3;
        const [a, b] = [coulomb(gridded, p), coulomb(designed, p)];
        return Math.sqrt(a.reduce((sum, e, i) => sum + (e - b[i]!) ** 2, 0) / b.reduce((sum, e) => sum + e * e, 0));
      }),
    );
  }

  test('static field at three cells: nearest edges are wrong by far more than a staircase or trilinear weights', () => {
    const error = (gridding: Gridding) => staticError(gridding, h, 3 * h, [0, 0, 0]);
    const [trilinear, nearest, staircase] = GRIDDINGS.map(error) as [number, number, number];
    console.log(
      `static error at 3 cells: trilinear ${(100 * trilinear).toFixed(2)} %, nearest ${(100 * nearest).toFixed(1)} %, staircase ${(100 * staircase).toFixed(2)} %`,
    );
    expect(trilinear).toBeLessThan(0.01);
    expect(nearest).toBeGreaterThan(0.1);
    expect(staircase).toBeLessThan(nearest);
  });

  test('far off, a staircase is of an order between a half and one and a half, trilinear of second', () => {
    // Where the wire lies in the cells decides a single error: the root mean square over places of it is refined.
    const random = xoroshiro128plus(7);
    const shifts = Array.from(
      { length: 200 },
      () => [0, 0, 0].map(() => h * (uniformFloat64(random) - 0.5)) as unknown as Vec3,
    );
    const rms = (gridding: Gridding, cellSize: number) =>
      Math.sqrt(shifts.reduce((sum, s) => sum + staticError(gridding, cellSize, 0.08, s) ** 2, 0) / shifts.length);
    const sizes = [5e-3, 2.5e-3, 1.25e-3];
    for (const [gridding, low, high] of [
      ['staircase', 0.5, 1.5],
      ['trilinear', 1.7, 2.3],
    ] as const) {
      const errors = sizes.map((size) => rms(gridding, size));
      const found = errors.slice(1).map((e, m) => Math.log2(errors[m]! / e));
      console.log(
        `${gridding}: ${errors.map((e) => `${(100 * e).toFixed(3)} %`).join(', ')}; orders ${found.map((p) => p.toFixed(2)).join(', ')}`,
      );
      for (const order of found) {
        expect(order).toBeGreaterThan(low);
        expect(order).toBeLessThan(high);
      }
    }
  });
});
