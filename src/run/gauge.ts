import { fieldOf } from '../retarded/field.ts';
import { prepareSources } from '../retarded/prepare.ts';
import { distanceToSources } from '../scenario/distance.ts';
import type { Medium, Source, Vec3 } from '../scenario/model.ts';

/** Weights of the fourth-order central difference at ±1 and ±2 steps. */
const STENCIL = [
  [1, 2 / 3],
  [-1, -2 / 3],
  [2, -1 / 12],
  [-2, 1 / 12],
] as const;

/** Instants within the window at which the gauge is tried. */
const INSTANTS = 6;

/**
 * The largest Lorenz-gauge residual |∇·A + εμ ∂φ/∂t| over some points and instants, relative to the largest of its terms
 * at that point: the potentials must satisfy it, whatever the sources, so it is a check of the integral by itself.
 * Differences of fourth order in steps of a hundredth of the shorter of distance and pulse leave some 1e-8 of their own.
 * @returns null where no potential reaches any of the points
 */
export function gaugeResidual(
  sources: readonly Source[],
  medium: Medium,
  points: readonly Vec3[],
  duration: number,
): number | null {
  const at = fieldOf(prepareSources(sources, medium, 'best'), { tolerance: 1e-11 });
  const pulse = Math.min(...sources.map(({ waveform }) => waveform.timeScale));
  let worst: number | null = null;
  for (const p of points.slice(0, 3)) {
    const step = 0.01 * Math.min(distanceToSources(sources, p), medium.speed * pulse);
    if (!(step > 0)) continue;
    let residual = 0;
    let largest = 0;
    for (let m = 1; m <= INSTANTS; m++) {
      const t = (duration * m) / (INSTANTS + 1);
      const terms = [0, 1, 2].map((a) =>
        difference(step, (offset) => {
          const q: [number, number, number] = [p[0], p[1], p[2]];
          q[a]! += offset;
          return at(q, t).A[a]!;
        }),
      );
      const dt = step / medium.speed;
      terms.push(difference(dt, (offset) => at(p, t + offset).phi) / medium.speed ** 2);
      residual = Math.max(residual, Math.abs(terms.reduce((sum, x) => sum + x, 0)));
      largest = Math.max(largest, ...terms.map(Math.abs));
    }
    if (largest > 0) worst = Math.max(worst ?? 0, residual / largest);
  }
  return worst;
}

function difference(step: number, f: (offset: number) => number): number {
  return STENCIL.reduce((sum, [m, weight]) => sum + weight * f(m * step), 0) / step;
}
