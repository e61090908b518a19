import { describe, expect, test } from 'vitest';
import { largestPartAt, regionsAlong } from '../../src/derived/regions.ts';
import { farField } from '../../src/retarded/farField.ts';
import { fieldAt } from '../../src/retarded/field.ts';
import { partPeaksOf, partsOf } from '../../src/retarded/parts.ts';
import { polyline } from '../../src/scenario/curve.ts';
import type { Source, Vec3 } from '../../src/scenario/model.ts';
import { standing } from '../../src/scenario/profiles.ts';
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

const BENT: readonly Vec3[] = [
  [0, 0, -0.03],
  [0.02, 0, 0],
  [0, 0.03, 0.03],
];

const kinds: readonly (readonly [string, Source[]])[] = [
  ['dipole', [dipole([0, 0, 0], [0, 0.6, 0.8], 1e-2, smooth)]],
  ['centre-fed wire', centreFed([0, 0, 0], [0.48, 0.36, 0.8], 0.05, smooth)],
  ['slow wave that leaves charge', [wire(BENT, travelling(0.6), unipolar)]],
  ['uniform wire, kinked', [wire(BENT, uniform, kinked)]],
  ['wave with a jump', [wire(BENT, travelling(1), jumping)]],
  ['loop with a jump', [loop([0.01, 0, 0], [0.6, 0, 0.8], 0.03, jumping)]],
  [
    'profile',
    [wire(BENT, [{ factor: 1, delay: 0, slowness: 0, profile: standing(polyline(BENT).length, 40) }], smooth)],
  ],
];

const sum = (...vectors: readonly Vec3[]): Vec3 =>
  vectors.reduce((a, b) => [a[0] + b[0], a[1] + b[1], a[2] + b[2]], [0, 0, 0]);

describe('near, induction and radiation parts', () => {
  test('add up to the field', () => {
    const rows = kinds.map(([kind, sources]) => {
      const parts = partsOf(sources, vacuum);
      let electric = 0;
      let magnetic = 0;
      let told = 0;
      for (const at of [
        [0.06, -0.03, 0.02],
        [0.015, 0.012, 0.03],
        [-0.4, 0.3, 0.5],
      ] as const) {
        const here = [0.9e-9, 1.7e-9, 2.6e-9, 3.4e-9, 4.1e-9].map((t) => ({
          ...parts(at, t),
          exact: fieldAt(sources, vacuum, at, t, { potentials: false }),
        }));
        // Waveforms are right relative to their peaks, so that fields are relative to theirs.
        const scale = Math.max(...here.flatMap(({ E }) => [E.near, E.induction, E.radiation].map(size)));
        for (const { E, H, errorE, errorH, exact } of here) {
          electric = Math.max(electric, difference(sum(E.near, E.induction, E.radiation), exact.E) / scale);
          magnetic = Math.max(
            magnetic,
            (vacuum.impedance * difference(sum(H.induction, H.radiation), exact.H)) / scale,
          );
          told = Math.max(told, errorE / scale, (vacuum.impedance * errorH) / scale);
        }
      }
      return { kind, E: electric, H: magnetic, 'error told': told };
    });
    console.table(rows);
    for (const row of rows) {
      // The exact field is asked for 1e-10 of itself.
      expect(row.E, row.kind).toBeLessThan(1e-10 + row['error told']);
      expect(row.H, row.kind).toBeLessThan(1e-10 + row['error told']);
      expect(row['error told'], row.kind).toBeLessThan(1e-7);
    }
  });

  test('fall as 1/r³, 1/r² and 1/r, and the last is the far field', () => {
    const direction: Vec3 = [0.36, -0.48, 0.8];
    for (const [kind, sources] of kinds.slice(0, 3)) {
      const parts = partsOf(sources, vacuum);
      const tau = 1.8e-9;
      const rows = [50, 100, 200].map((r) => {
        const { E } = parts(direction.map((x) => r * x) as unknown as Vec3, tau + r / vacuum.speed);
        return { near: size(E.near) * r ** 3, induction: size(E.induction) * r * r, radiation: size(E.radiation) * r };
      });
      const far = farField(sources, vacuum, direction, Float64Array.of(tau, tau + 1e-10));
      const radiated = size([far.values[0]!, far.values[2]!, far.values[4]!]);
      for (const key of ['near', 'induction', 'radiation'] as const) {
        const drifts = [1, 2].map((m) => Math.abs(rows[m]![key] / rows[m - 1]![key] - 1));
        expect(drifts[0]!, `${kind} ${key}`).toBeLessThan(2e-3);
        // What remains is of first order in size over distance.
        expect(drifts[1]!, `${kind} ${key}`).toBeLessThan(0.6 * drifts[0]! + 1e-9);
      }
      expect(rows[2]!.radiation / radiated, kind).toBeCloseTo(1, 3);
    }
  });

  test('peaks over instants are those of the parts themselves', () => {
    const [, sources] = kinds[1]!;
    const at: Vec3 = [0.06, -0.03, 0.02];
    const instants = Array.from({ length: 30 }, (_, n) => 1e-9 + n * 0.1e-9);
    const peaks = partPeaksOf(sources, vacuum)(at, instants);
    const parts = instants.map((t) => partsOf(sources, vacuum)(at, t).E);
    for (const key of ['near', 'induction', 'radiation'] as const)
      expect(peaks[key] / Math.max(...parts.map((E) => size(E[key])))).toBeCloseTo(1, 9);
  });
});

describe('where the parts take over', () => {
  test('broadside of a dipole: where the peaks of q/r³, I/(vr²) and I′/(v²r) are equal', () => {
    // q of a Gaussian's derivative has the peak √e σ A, I has A, I′ has √e A/σ (a Gaussian's own: √(2π) σ, 1, 1/(σ√e)).
    const e = Math.sqrt(Math.E);
    const reach = vacuum.speed * 0.19e-9;
    for (const [waveform, q, slope] of [
      [smooth, e, e],
      [unipolar, Math.sqrt(2 * Math.PI), 1 / e],
    ] as const) {
      const regions = regionsAlong([dipole([0.01, 0, 0], [0, 0, 1], 1e-3, waveform)], vacuum)([1, 0, 0]);
      const near = Math.min(q, Math.sqrt(q / slope)) * reach;
      const radiation = Math.max(1 / slope, Math.sqrt(q / slope)) * reach;
      console.table({
        found: { ...regions, centre: '', direction: '' },
        closed: { nearTo: near, radiationFrom: radiation },
      });
      // Peaks are read from 60 instants over about 15 σ: each may be missed by (0.12 σ)²/2.
      expect(regions.nearTo! / near).toBeCloseTo(1, 2);
      expect(regions.radiationFrom! / radiation).toBeCloseTo(1, 2);
      expect(regions.centre).toEqual([0.01, 0, 0]);
    }
  });

  test('the largest part at a place agrees with the regions along its line', () => {
    const sources = centreFed([0, 0, 0], [0, 0, 1], 0.02, smooth);
    const direction: Vec3 = [0.8, 0.36, 0.48];
    const { nearTo, radiationFrom } = regionsAlong(sources, vacuum)(direction);
    const at = largestPartAt(sources, vacuum);
    const place = (r: number): Vec3 => direction.map((d) => r * d) as unknown as Vec3;
    expect(at(place(0.97 * nearTo!)).largest).toBe('near');
    expect(at(place(1.03 * nearTo!)).largest).not.toBe('near');
    expect(at(place(1.03 * radiationFrom!)).largest).toBe('radiation');
    expect(at(place(0.97 * radiationFrom!)).largest).not.toBe('radiation');
  });
});
