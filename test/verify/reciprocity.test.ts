import { describe, expect, test } from 'vitest';
import { cos, sin } from '../../src/elementary/elementary.ts';
import { gaussLegendre } from '../../src/retarded/quadrature.ts';
import { steadyField } from '../../src/retarded/spectral.ts';
import { type Complex, linesOf } from '../../src/retarded/waveformSpectrum.ts';
import { mediumOf } from '../../src/scenario/constants.ts';
import type { Medium, Source, Vec3 } from '../../src/scenario/model.ts';
import { standing } from '../../src/scenario/profiles.ts';
import { centreFed, dipole, loop, smooth, travelling, vacuum, wire } from '../retarded/sources.ts';

/**
 * Reciprocity: ∫ E₁·J₂ = ∫ E₂·J₁ for any two currents of one frequency in one medium (Lorentz; Balanis, Antenna Theory,
 * 4th ed., §3.8, from memory). Nothing in the integrals knows of it.
 */

/** ∫ E·J over a source, W (no conjugate): E by one source's field, J along the other. */
function reaction(by: readonly Source[], on: Source, medium: Medium, frequency: number): Complex {
  const at = steadyField(by, medium);
  const omega = 2 * Math.PI * frequency;
  const amplitude = linesOf([on.waveform], 'steady')(frequency)[0]!.value[0];
  const sum: [number, number] = [0, 0];
  const add = (place: Vec3, along: ArrayLike<number>, re: number, im: number) => {
    at(place, frequency).E.forEach(([a, b], c) => {
      sum[0] += along[c]! * (a * re - b * im);
      sum[1] += along[c]! * (a * im + b * re);
    });
  };
  if (on.type === 'dipole') add(on.at, on.direction, amplitude * on.length, 0);
  else
    for (const piece of on.curve.pieces)
      for (const { factor, delay, slowness, profile } of on.terms) {
        const end = piece.s0 + piece.length;
        const bounds = [piece.s0, ...(profile?.breaks ?? []).filter((s) => s > piece.s0 && s < end), end];
        const { nodes, weights } = gaussLegendre(32);
        const [place, tangent] = [new Float64Array(3), new Float64Array(3)];
        for (let m = 1; m < bounds.length; m++)
          for (const [n, x] of nodes.entries()) {
            const half = (bounds[m]! - bounds[m - 1]!) / 2;
            const s = bounds[m - 1]! + half * (1 + x);
            piece.point(s, place);
            piece.tangent(s, tangent);
            const size = amplitude * factor * (profile ? profile.value(s) : 1) * weights[n]! * half;
            const phase = omega * (delay + slowness * s);
            add([place[0]!, place[1]!, place[2]!], tangent, size * cos(phase), -size * sin(phase));
          }
      }
  return sum;
}

describe('reciprocity', () => {
  test('what one source does to another is what that one does to it', () => {
    const bent: readonly Vec3[] = [
      [0.1, 0, -0.03],
      [0.12, 0, 0],
      [0.1, 0.03, 0.03],
    ];
    const bentLength = wire(bent, [], smooth).curve.length;
    const rows = [vacuum, mediumOf(2.25, 1.4)].flatMap((medium) => {
      const sources: readonly (readonly [string, Source])[] = [
        ['dipole', dipole([0, 0.01, 0], [0, 0.6, 0.8], 1e-2, smooth)],
        ['second dipole', dipole([0.04, -0.06, 0.03], [0.48, 0.36, 0.8], 5e-3, smooth)],
        ['loop', loop([-0.1, 0, 0], [0.6, 0, 0.8], 0.03, smooth)],
        ['wave', wire(bent, travelling(0.7, medium), smooth)],
        [
          'standing',
          wire(
            bent.map((p) => [p[0], p[1] + 0.1, p[2]] as Vec3),
            [{ factor: 1, delay: 0, slowness: 0, profile: standing(bentLength, 40) }],
            smooth,
          ),
        ],
        ['arm', centreFed([0, 0.15, 0.1], [1, 0, 0], 0.05, smooth, medium)[0]!],
      ];
      return sources.flatMap(([first, a], n) =>
        sources.slice(n + 1).map(([second, b]) => {
          const there = reaction([a], b, medium, 1.3e9);
          const back = reaction([b], a, medium, 1.3e9);
          const size = Math.sqrt(there[0] ** 2 + there[1] ** 2);
          return { first, second, size, off: Math.sqrt((there[0] - back[0]) ** 2 + (there[1] - back[1]) ** 2) / size };
        }),
      );
    });
    console.table(rows);
    // 32 points on pieces of 0.1 m and less, of fields of sources at least 0.05 m away: right to rounding of 1e3 terms.
    for (const { first, second, off } of rows) expect(off, `${first}, ${second}`).toBeLessThan(1e-11);
  });
});
