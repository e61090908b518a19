import { readFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { faradayResidual, fluxThrough, inducedVoltage, voltageAlong } from '../../src/derived/paths.ts';
import { cos, sin } from '../../src/elementary/elementary.ts';
import { fieldOf } from '../../src/retarded/field.ts';
import { prepareSources } from '../../src/retarded/prepare.ts';
import { gaussLegendre } from '../../src/retarded/quadrature.ts';
import { cross, dot, sub } from '../../src/scenario/curve.ts';
import type { Source, Vec3 } from '../../src/scenario/model.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import {
  centreFed,
  dipole,
  kinked,
  loop,
  smooth,
  travelling,
  uniform,
  unipolar,
  vacuum,
  wire,
} from '../retarded/sources.ts';

const oracle = JSON.parse(readFileSync(new URL('../oracle/special.json', import.meta.url), 'utf8'));

const CORNERS: readonly Vec3[] = [
  [0.03, 0.01, -0.02],
  [0.08, -0.02, 0.01],
  [0.07, 0.06, 0.05],
];

const kinds: readonly (readonly [string, Source[]])[] = [
  ['dipole', [dipole([0, 0, 0], [0, 0.6, 0.8], 1e-2, smooth)]],
  ['centre-fed wire', centreFed([0, 0, 0], [0.48, 0.36, 0.8], 0.02, smooth)],
  [
    'wire that leaves charge',
    [
      wire(
        [
          [0, 0, -0.02],
          [0.01, 0, 0.02],
        ],
        travelling(0.6),
        unipolar,
      ),
    ],
  ],
  ['loop', [loop([-0.02, 0, 0], [0.6, 0, 0.8], 0.03, smooth)]],
];

/** ∫ B·n dS over a triangle by Gauss's product rule in collapsed coordinates. */
function fluxOverTriangle(sources: readonly Source[], [a, b, c]: readonly Vec3[], t: number): number {
  const field = fieldOf(prepareSources(sources, vacuum, 'best'), { tolerance: 1e-12, potentials: false });
  const { nodes, weights } = gaussLegendre(20);
  const [u, v] = [sub(b!, a!), sub(c!, a!)];
  const normal = cross(u, v);
  let sum = 0;
  for (const [i, x] of nodes.entries())
    for (const [j, y] of nodes.entries()) {
      const p = (1 + x) / 2;
      const q = ((1 + y) / 2) * p;
      const at = a!.map((s, k) => s + (p - q) * u[k]! + q * v[k]!) as unknown as Vec3;
      sum += (weights[i]! / 2) * (weights[j]! / 2) * p * dot(field(at, t).B, normal);
    }
  return sum;
}

describe('voltage and flux', () => {
  test('the flux round a loop is that of B through its surface, and Faraday’s law holds', () => {
    const rows = kinds.map(([kind, sources]) => {
      const flux = fluxThrough(sources, vacuum, CORNERS);
      const residual = faradayResidual(sources, vacuum, CORNERS);
      const instants = [1.75e-9, 1.9e-9, 2.2e-9];
      const biggest = Math.max(...instants.map((t) => Math.abs(flux(t).value)));
      const law = instants.map((t) => residual(t));
      const emf = Math.max(...law.map(({ scale }) => scale));
      return {
        kind,
        'flux, Wb': biggest,
        'surface − line': Math.max(
          ...instants.map((t) => Math.abs(fluxOverTriangle(sources, CORNERS, t) - flux(t).value) / biggest),
        ),
        'error told': Math.max(...instants.map((t) => flux(t).error / biggest)),
        'EMF, V': emf,
        Faraday: Math.max(...law.map((l) => l.residual / emf)),
      };
    });
    console.table(rows);
    for (const row of rows) {
      expect(row['surface − line'], row.kind).toBeLessThan(1e-8);
      // h⁴/30 of the fifth derivative of the flux, h = 1/50 of the time scale: 1.6e-7/30 · 15, and twice that for w′.
      expect(row.Faraday, row.kind).toBeLessThan(3e-7);
    }
  });

  test('where nothing moves any more a voltage is a difference of potential, along any path', () => {
    const sources = [
      wire(
        [
          [0, 0, -0.02],
          [0.01, 0, 0.02],
        ],
        uniform,
        unipolar,
      ),
    ];
    const late = 6e-9;
    const at = fieldOf(prepareSources(sources, vacuum, 'best'));
    const first = CORNERS[0]!;
    const last = CORNERS[2]!;
    const expected = at(first, late).phi - at(last, late).phi;
    for (const path of [CORNERS, [first, last], [first, [0.1, 0.1, -0.1] as Vec3, last]]) {
      const { value, error } = voltageAlong(sources, vacuum, path)(late);
      expect(Math.abs(value - expected)).toBeLessThanOrEqual(error + 1e-9 * Math.abs(expected));
      expect(error).toBeLessThan(2e-9 * Math.abs(expected) * 10);
    }
    const round = inducedVoltage(sources, vacuum, CORNERS)(late);
    expect(Math.abs(round.value)).toBeLessThan(1e-8 * Math.abs(expected));
  });

  test('mutual inductance of two coaxial circles, by Maxwell’s elliptic integrals', () => {
    // So slow a pulse that the flux is that of a steady current: (d/cσ)² is 1e-11.
    const slow = makeWaveform({ type: 'gaussian', amplitude: 1, sigma: 1e-4, delay: 9e-4 });
    const rows = (oracle.mutual as [number, number, number, number][]).map(([a, b, d, mutual]) => {
      const fluxes = [48, 96].map((corners) => {
        const round = Array.from({ length: corners }, (_, n): Vec3 => {
          const angle = (2 * Math.PI * n) / corners;
          return [b * cos(angle), b * sin(angle), d];
        });
        return fluxThrough([loop([0, 0, 0], [0, 0, 1], a, slow)], vacuum, round, { tolerance: 1e-9 })(9e-4).value;
      });
      // A polygon misses what falls with the square of its corners.
      const [coarse, fine] = fluxes as [number, number];
      return {
        a,
        b,
        d,
        coarse: coarse / mutual - 1,
        fine: fine / mutual - 1,
        both: (4 * fine - coarse) / 3 / mutual - 1,
      };
    });
    console.table(rows);
    for (const { coarse, fine, both } of rows) {
      expect(coarse / fine).toBeGreaterThan(3.9);
      expect(coarse / fine).toBeLessThan(4.1);
      // Of the fourth order is left (2π/48)⁴/120 and its like.
      expect(Math.abs(both)).toBeLessThan(1e-5);
    }
  });

  test('a path across a source is refused, and says which and where', () => {
    const sources = [
      wire(
        [
          [0, 0, -0.02],
          [0, 0, 0.02],
        ],
        uniform,
        smooth,
      ),
      loop([0.5, 0, 0], [0, 0, 1], 0.1, smooth),
    ];
    const across = [
      [-0.01, 0, 0.005],
      [0.01, 0, 0.005],
    ] as const;
    expect(() => voltageAlong(sources, vacuum, across)).toThrow(/crosses source “cable” at \(.*0\.005\) m/);
    expect(() =>
      voltageAlong(sources, vacuum, [
        [0.5, 0, 0],
        [0.7, 0, 0],
      ]),
    ).toThrow('crosses source “ring”');
    // Near misses are not crossings.
    expect(() =>
      voltageAlong(sources, vacuum, [
        [-0.01, 1e-6, 0.005],
        [0.01, 1e-6, 0.005],
      ]),
    ).not.toThrow();
    expect(() =>
      voltageAlong(sources, vacuum, [
        [0, 0, 0.0201],
        [0.1, 0, 0.0201],
      ]),
    ).not.toThrow();
    expect(() =>
      voltageAlong(sources, vacuum, [
        [0.1, 0, 0],
        [0.1, 0, 0],
      ]),
    ).toThrow('no length');
  });

  test('close past a wire the error told is not below the true one', () => {
    const sources = centreFed([0, 0, 0], [0, 0, 1], 0.02, kinked);
    const path = [
      [-0.01, 1e-5, 0.005],
      [0.01, 1e-5, 0.005],
    ] as const;
    const t = 1.2e-9;
    const best = voltageAlong(sources, vacuum, path, { tolerance: 1e-12 })(t);
    for (const tolerance of [1e-3, 1e-5, 1e-7]) {
      const { value, error } = voltageAlong(sources, vacuum, path, { tolerance })(t);
      expect(Math.abs(value - best.value)).toBeLessThanOrEqual(error);
    }
  });
});
