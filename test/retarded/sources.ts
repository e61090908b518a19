import { mediumOf } from '../../src/scenario/constants.ts';
import { circle, polyline } from '../../src/scenario/curve.ts';
import type { Dipole, Filament, Medium, Vec3, WaveTerm } from '../../src/scenario/model.ts';
import type { Waveform } from '../../src/scenario/waveform.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';

/** Sources that the tests of this room share. */
export const vacuum = mediumOf(1, 1);

const SIGMA = 0.19e-9;

/** Smooth to rounding: it starts nine sigma early. */
export const smooth = makeWaveform({ type: 'gaussianDerivative', amplitude: 1, sigma: SIGMA, delay: 9 * SIGMA });
/** Leaves charge where it ends. */
export const unipolar = makeWaveform({ type: 'gaussian', amplitude: 1, sigma: SIGMA, delay: 9 * SIGMA });
/** Starts with a jump of 61 % of its peak. */
export const jumping = makeWaveform({ type: 'gaussian', amplitude: 1, sigma: SIGMA, delay: SIGMA });
/** Starts with a kink. */
export const kinked = makeWaveform({ type: 'doubleExponential', amplitude: 1, alpha: 1e9, beta: 1e10 });

export const wire = (points: readonly Vec3[], terms: readonly WaveTerm[], waveform: Waveform): Filament => ({
  type: 'wire',
  name: 'cable',
  curve: polyline(points),
  terms,
  waveform,
});

export const loop = (centre: Vec3, normal: Vec3, radius: number, waveform: Waveform): Filament => ({
  type: 'loop',
  name: 'ring',
  curve: circle(centre, normal, radius),
  terms: [{ factor: 1, delay: 0, slowness: 0 }],
  waveform,
});

export const dipole = (at: Vec3, direction: Vec3, length: number, waveform: Waveform): Dipole => ({
  type: 'dipole',
  name: 'probe',
  at,
  direction,
  length,
  waveform,
});

export const uniform: readonly WaveTerm[] = [{ factor: 1, delay: 0, slowness: 0 }];

/** One forward wave at `speed` times that of the medium. */
export const travelling = (speed: number, medium: Medium = vacuum): readonly WaveTerm[] => [
  { factor: 1, delay: 0, slowness: 1 / (speed * medium.speed) },
];

/** Two arms from the feed at `centre`, along ±direction: waves out, and back from the open ends. */
export function centreFed(
  centre: Vec3,
  direction: Vec3,
  arm: number,
  waveform: Waveform,
  medium: Medium = vacuum,
): Filament[] {
  return [1, -1].map((sign) => {
    const end: Vec3 = [0, 1, 2].map((a) => centre[a]! + sign * arm * direction[a]!) as unknown as Vec3;
    const { curve } = wire([centre, end], [], waveform);
    const slowness = 1 / medium.speed;
    return {
      ...wire([centre, end], [], waveform),
      terms: [
        { factor: sign, delay: 0, slowness },
        { factor: -sign, delay: 2 * curve.length * slowness, slowness: -slowness },
      ],
    };
  });
}

export const difference = (a: Vec3, b: Vec3): number =>
  Math.sqrt((a[0] - b[0]) ** 2 + (a[1] - b[1]) ** 2 + (a[2] - b[2]) ** 2);

export const size = (a: Vec3): number => difference(a, [0, 0, 0]);
