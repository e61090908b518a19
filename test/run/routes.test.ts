import { expect, test } from 'vitest';
import { compareRoutes, disagreement } from '../../src/run/routes.ts';
import type { Vec3 } from '../../src/scenario/model.ts';
import type { Waveform } from '../../src/scenario/waveform.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import { dipole, kinked, loop, smooth, travelling, vacuum, wire } from '../retarded/sources.ts';

const BENT: readonly Vec3[] = [
  [0, 0, -0.05],
  [0.02, 0, 0],
  [0, 0.03, 0.05],
];
const PLACES = [
  { observer: 'A', at: [0.06, -0.07, 0.05] as Vec3 },
  { observer: 'B', at: [-0.1, 0.04, 0.01] as Vec3 },
  { observer: null, at: [0.02, 0.09, -0.08] as Vec3 },
  { observer: 'far', at: [40, 0, 0] as Vec3 },
];
const DURATION = 4e-9;
const routes = (waveform: Waveform, seed = 1) =>
  compareRoutes([wire(BENT, travelling(0.7), waveform)], vacuum, PLACES, DURATION, seed);

test('smooth pulses: both routes within 1e-8, the same for the same seed, no place before its first arrival', () => {
  const found = [1, 2, 3].map((seed) => routes(smooth, seed));
  console.table(found);
  for (const { status, places, largest, limit, observer } of found) {
    expect(status).toBe('agree');
    expect(places).toBe(3);
    expect(largest).toBeLessThan(1e-8);
    expect(limit).toBeLessThan(1.1e-8);
    expect(observer).not.toBe('far');
  }
  expect(routes(smooth, 2)).toEqual(found[1]);
  expect(found[0]!.largest).not.toBe(found[1]!.largest);
});

test('a vanishing E, on the axis of a loop, has no difference of its own', () => {
  const ring = loop([0, 0, 0], [0, 0, 1], 0.03, smooth);
  const found = compareRoutes([ring], vacuum, [{ observer: 'axis', at: [0, 0, 0.05] }], DURATION, 1);
  console.log(`on the axis: ${found.largest} in ${found.quantity}`);
  expect(found.status).toBe('agree');
});

test('a route that is wrong by 1e-6 is found out', () => {
  const wrong = 1 + 1e-6;
  // Integrals read all orders, spectra the value alone.
  const at: Waveform['at'] = (t, orders, out) => {
    smooth.at(t, orders, out);
    for (let n = 0; n <= orders; n++) out[n]! *= wrong;
  };
  const off = {
    ...smooth,
    at,
    slope: (t: number) => wrong * smooth.slope(t),
    charge: (t: number) => wrong * smooth.charge(t),
  };
  const { status, largest } = routes(off);
  expect(status).toBe('differ');
  expect(largest! / 1e-6).toBeGreaterThan(0.1);
  expect(largest! / 1e-6).toBeLessThan(1.1);
});

test('what is not compared says why', () => {
  expect(routes(kinked)).toMatchObject({ status: 'not compared', reason: expect.stringContaining('kink or a jump') });
  const early = makeWaveform({ type: 'gaussian', amplitude: 1, sigma: 1e-10, delay: 4e-10 });
  expect(routes(early)).toMatchObject({ status: 'not compared', reason: expect.stringContaining('kink or a jump') });
  const fast = makeWaveform({ type: 'gaussian', amplitude: 1, sigma: 1e-13, delay: 9e-13 });
  expect(routes(fast)).toMatchObject({ status: 'not compared', reason: expect.stringContaining('wavelengths') });
  const far = compareRoutes([dipole([0, 0, 0], [0, 0, 1], 1e-3, smooth)], vacuum, PLACES.slice(3), DURATION, 1);
  expect(far).toMatchObject({ status: 'not compared', reason: expect.stringContaining('no field reaches') });
});

test('each quantity is measured against its own peak, or against its partner’s where that is larger', () => {
  const peaks = { E: 100, H: 0.1, phi: 3, A: 2e-8, distance: 0.01 };
  const zero = { E: [0, 0, 0] as Vec3, H: [0, 0, 0] as Vec3, phi: 0, A: [0, 0, 0] as Vec3 };
  const off = { E: [1, 0, 0] as Vec3, H: [0, 0.1, 0] as Vec3, phi: 0.6, A: [0, 0, 1e-9] as Vec3 };
  const list = disagreement([zero, off], [zero, zero], [peaks, peaks], { speed: 3e8, impedance: 377 });
  const found = Object.fromEntries(list.map(({ quantity, largest }) => [quantity, largest]));
  // E/η is 0.265, vA 6
  expect(found.E).toBeCloseTo(0.01, 12);
  expect(found.H).toBeCloseTo(0.1 / (100 / 377), 12);
  expect(found.phi).toBeCloseTo(0.1, 12);
  expect(found.A).toBeCloseTo(0.05, 12);
  expect(list.every(({ row }) => row === 1)).toBe(true);
});
