import { expect, test } from 'vitest';
import { exp } from '../../src/elementary/elementary.ts';
import { fieldOf } from '../../src/retarded/field.ts';
import { prepareSources } from '../../src/retarded/prepare.ts';
import { fieldBySpectrum } from '../../src/retarded/spectral.ts';
import { mediumOf } from '../../src/scenario/constants.ts';
import type { Vec3 } from '../../src/scenario/model.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import { difference, size, travelling, wire } from '../retarded/sources.ts';

/**
 * A short packet of charge runs along a straight wire at βv: a charge in uniform motion, once what its start has radiated
 * has passed and before its end is felt. Its field is that of Liénard and Wiechert for constant velocity,
 *   E = q γ R / (4πε (γ²R∥² + R⊥²)^(3/2)),  B = β × E / v,
 * R from where the charge is now (Jackson, Classical Electrodynamics, 3rd ed., eqs. 11.152 and 14.14, from memory), and
 * Coulomb's of the charge −q that is left at the wire's first point.
 */

/** Widths σβv of the packets, and how far beside the wire they are seen, m. */
const WIDTHS = [0.04, 0.02, 0.0025];
const BESIDE = 0.05;

/** Where the packet is when it is looked at, before and behind the place, m. */
const AHEAD = [-0.1, -0.03, 0, 0.05];

/** Of a charge q at z = 0 in motion along z: E and H at (x, y, z). */
function lienardWiechert(medium: ReturnType<typeof mediumOf>, beta: number, q: number, [x, y, z]: Vec3) {
  const gamma = 1 / Math.sqrt(1 - beta * beta);
  const square = gamma * gamma * z * z + x * x + y * y;
  const gain = (q * gamma) / (4 * Math.PI * medium.permittivity * square * Math.sqrt(square));
  const E: Vec3 = [gain * x, gain * y, gain * z];
  // ẑ × E = (−E_y, E_x, 0); H = β v ε ẑ × E
  const h = beta * medium.speed * medium.permittivity;
  return { E, H: [-h * E[1], h * E[0], 0] as Vec3 };
}

test.each([
  ['vacuum', 0.3, mediumOf(1, 1)],
  ['vacuum', 0.8, mediumOf(1, 1)],
  ['vacuum', 0.95, mediumOf(1, 1)],
  ['εr 2.25, μr 1.4', 0.8, mediumOf(2.25, 1.4)],
] as const)('a charge in uniform motion, in %s at β = %d (Liénard–Wiechert)', (_, beta, medium) => {
  const v = beta * medium.speed;
  // What the start radiates runs ahead by 1 − β of the way: more than nine sigma of the widest packet.
  const middle = (9 * WIDTHS[0]! + 0.15) / (1 - beta);
  const packets = WIDTHS.map((width) => {
    const sigma = width / v;
    const delay = 9 * sigma;
    const waveform = makeWaveform({ type: 'gaussian', amplitude: 1, sigma, delay });
    const sources = [
      wire(
        [
          [0, 0, 0],
          [0, 0, 2 * middle],
        ],
        travelling(beta, medium),
        waveform,
      ),
    ];
    const exact = fieldOf(prepareSources(sources, medium, 'best'), { tolerance: 1e-13 });
    const charge = waveform.finalCharge;
    let [worst, apart, bySpectrum] = [0, 0, 0];
    for (const [x, y] of [
      [BESIDE, 0],
      [-0.03, 0.04],
    ] as const)
      for (const ahead of AHEAD) {
        const place: Vec3 = [x, y, middle];
        // when the packet's middle is `ahead` of the place
        const t = delay + (middle + ahead) / v;
        const found = exact(place, t);
        // The packet as point charges w(u) du that left at u: trapezoidal rule, exact to rounding for what is so smooth.
        const E = [0, 0, 0];
        const H = [0, 0, 0];
        const step = sigma / 16;
        for (let n = -144; n <= 144; n++) {
          const u = n / 16;
          const one = lienardWiechert(medium, beta, step * exp(-0.5 * u * u), [
            x,
            y,
            middle - v * (t - delay - u * sigma),
          ]);
          for (let a = 0; a < 3; a++) {
            E[a]! += one.E[a]!;
            H[a]! += one.H[a]!;
          }
        }
        // What is left at the first point is at rest: β = 0.
        const rest = lienardWiechert(medium, 0, -charge, place).E;
        const moving = E.map((e, a) => e + rest[a]!) as unknown as Vec3;
        const point = lienardWiechert(medium, beta, charge, [x, y, -ahead]);
        worst = Math.max(
          worst,
          difference(found.E, moving) / size(moving),
          difference(found.H, H as unknown as Vec3) / size(H as unknown as Vec3),
        );
        if (ahead === 0) apart = Math.max(apart, difference(point.H, found.H) / size(point.H));
        if (width === WIDTHS[0] && beta < 0.9 && x > 0 && ahead === -0.03) {
          const { values } = fieldBySpectrum(sources, medium, t)(place, [t]);
          bySpectrum = difference(values[0]!.E, moving) / size(moving);
        }
      }
    const x = (width * width) / ((1 - beta * beta) * BESIDE * BESIDE);
    return {
      'σ v, m': width,
      'off its charges': worst,
      'by spectrum': bySpectrum,
      'off a point': apart,
      '3/2 x²': 1.5 * x,
    };
  });
  console.table(packets);
  for (const packet of packets) {
    // A rounding of the instant moves the packet by ε of its way, a part of its width that is γ² times as large as seen.
    const way = (2 * middle) / packet['σ v, m'] / (1 - beta * beta);
    expect(packet['off its charges']).toBeLessThan(16 * Number.EPSILON * way);
    expect(packet['by spectrum']).toBeLessThan(1e-8);
  }
  // Across, the mean of (1 + γ²z²/R⊥²)^(−3/2) over the packet: 1 − (3/2) x² + (45/8) x⁴ …, x = γσv/R⊥.
  const narrow = packets.at(-1)!;
  const square = narrow['3/2 x²'] / 1.5;
  expect(Math.abs(narrow['off a point'] / narrow['3/2 x²'] - 1)).toBeLessThan(4 * square);
});
