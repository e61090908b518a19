import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';

/** A scenario file that plans and predictions are tried on; its grid is a placeholder for the plan to replace. */
export interface PlanCase {
  readonly label: string;
  readonly tolerance: number;
  readonly json: {
    readonly sources: readonly object[];
    readonly grid: { readonly cellSize: number; readonly box: { readonly from: number[]; readonly to: number[] } };
    readonly observers: readonly { readonly name: string; readonly at: number[] }[];
    readonly [key: string]: unknown;
  };
}

const SPEED = 299_792_458;

/**
 * Seeded scenarios: dipoles, wires on and off the grid lines, bent wires and loops in three media; Gaussian pulses, their
 * derivatives and bursts whose shortest significant wavelength is 60 to 150 mm; one or two observers 0.3 to 1.3 of it off
 * the source, 30° or more off its axis; tolerances from 1 to 8 %, log-uniform.
 */
export function planCases(seed: number, count: number): PlanCase[] {
  const generator = xoroshiro128plus(seed);
  const uniform = (low: number, high: number) => low + (high - low) * uniformFloat64(generator);
  const logarithmic = (low: number, high: number) => low * (high / low) ** uniform(0, 1);
  const pick = <T>(list: readonly T[]): T => list[Math.floor(uniform(0, list.length))]!;
  const unit = (): number[] => {
    const z = uniform(-1, 1);
    const turn = uniform(0, 2 * Math.PI);
    const across = Math.sqrt(1 - z * z);
    return [across * Math.cos(turn), across * Math.sin(turn), z];
  };
  const kinds = ['dipole', 'axis wire', 'tilted wire', 'bent wire', 'loop'] as const;
  return Array.from({ length: count }, (_, n) => {
    const kind = kinds[n % kinds.length]!;
    const permittivity = pick([1, 1, 2.25, 4]);
    const speed = SPEED / Math.sqrt(permittivity);
    const wavelength = uniform(0.06, 0.15);
    const pulse = pick(['gaussian', 'gaussianDerivative', 'modulatedGaussian'] as const);
    // ωσ where |ωW| is −40 dB of its peak: 3.6 for the Gaussian, 3.9 for its derivative; a burst of ωσ = 6 ends at 9.
    const turns = { gaussian: 3.6, gaussianDerivative: 3.9, modulatedGaussian: 9 }[pulse];
    const sigma = (turns * wavelength) / (2 * Math.PI * speed);
    const delay = 9 * sigma;
    const waveform = {
      type: pulse,
      amplitude: 1,
      delay,
      sigma,
      ...(pulse === 'modulatedGaussian' ? { frequency: 6 / (2 * Math.PI * sigma) } : {}),
    };
    const centre = [uniform(-0.01, 0.01), uniform(-0.01, 0.01), uniform(-0.01, 0.01)];
    const axis = kind === 'axis wire' ? [0, 0, 1] : unit();
    const size = wavelength * uniform(0.2, 0.8);
    const slow = pick([1, 0.5]);
    const along = (s: number, d = axis) => centre.map((x, a) => x + s * d[a]!);
    const current = pick([
      { profile: 'uniform', waveform },
      { profile: 'travelling', speed: slow, waveform },
    ]);
    const source =
      kind === 'dipole'
        ? { type: 'dipole', at: centre, direction: axis, length: 0.001, current: { waveform } }
        : kind === 'loop'
          ? { type: 'loop', centre, normal: axis, radius: size / 4, current: { waveform } }
          : {
              type: 'wire',
              points: [
                along(-size / 2),
                ...(kind === 'bent wire' ? [centre] : []),
                along(size / 2, kind === 'bent wire' ? unit() : axis),
              ],
              current,
            };
    const extent = kind === 'dipole' ? 0 : size / 2;
    const observers = Array.from({ length: pick([1, 2]) }, (_, m) => {
      let direction = unit();
      const cosine = () => Math.abs(direction.reduce((sum, x, a) => sum + x * axis[a]!, 0));
      while (cosine() > 0.86) direction = unit();
      return { name: `O${m + 1}`, at: along(extent + wavelength * uniform(0.3, 1.3), direction) };
    });
    const reach = extent + 1.3 * wavelength;
    const duration = delay + 6 * sigma + (kind === 'dipole' ? 0 : size / (0.5 * speed)) + (reach + extent) / speed;
    const tolerance = logarithmic(0.01, 0.08);
    const half = reach + 0.03;
    return {
      label: `${n} ${kind}, εr ${permittivity}, ${pulse}, λ ${(wavelength * 1e3).toFixed(0)} mm`,
      tolerance,
      json: {
        medium: { relativePermittivity: permittivity },
        sources: [source],
        grid: {
          cellSize: wavelength / 10,
          box: { from: centre.map((x) => x - half), to: centre.map((x) => x + half) },
        },
        duration,
        observers,
      },
    };
  });
}
