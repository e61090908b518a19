/**
 * Reflection of plane waves by a wall at one exact angle: in a guide with conducting side walls, E along z and uniform in
 * z, a current sheet excites a single mode, which is a pair of plane waves that meet the end wall at ±θ. On the lattice the
 * mode is a sine exactly, and between sheet and wall, at every frequency,
 *   E(x) = A e^(−jkx) + B e^(jkx),   R = (B/A) e^(…) from two cross-sections,
 * whatever the other end of the guide does, once everything has died away.
 */
import type { LinearWall, Stretch } from '../../src/fdtd/boundaries/boundary.ts';
import { stretchAt, wallOf } from '../../src/fdtd/layout.ts';
import type { GridProblem } from '../../src/fdtd/problem.ts';
import { marchAlone } from '../../src/fdtd/run.ts';
import { mediumOf } from '../../src/scenario/constants.ts';
import type { Boundary } from '../../src/scenario/model.ts';
import { cellsBehind } from '../../src/scenario/walls.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import { courantStep, cpml, edgesOf, everyFace, PEC, plainProblem, type Triple } from './problems.ts';

const vacuum = mediumOf(1, 1);

export interface Guide {
  /** angle of incidence, rad, at the frequency that is looked at */
  readonly angle: number;
  /** ω/2π, Hz */
  readonly frequency: number;
  /** k along x, 1/m */
  readonly normal: number;
  readonly problem: GridProblem;
  /** cells from the two cross-sections to the wall */
  readonly distances: readonly [number, number];
}

/** Cells between the left end and the sheet, the sheet and the first cross-section, the last one and the wall. */
const GAP = 6;

/**
 * @param angle of incidence, rad
 * @param cellsPerWavelength at the frequency that is looked at, nearly
 */
export function guideAt(
  wall: Boundary,
  angle: number,
  cellsPerWavelength: number,
  cellSize: Triple,
  courant = 0.99,
): Guide {
  const [dx, dy] = cellSize;
  const timeStep = courantStep(courant, cellSize, vacuum.speed);
  const wavelength = cellsPerWavelength * dx;
  const across = Math.max(4, Math.round(wavelength / (2 * Math.sin(angle)) / dy));
  const ky = Math.PI / (across * dy);
  const kx = ky / Math.tan(angle);
  // [sin(ωΔt/2)/(vΔt)]² = [sin(kx dx/2)/dx]² + [sin(ky dy/2)/dy]² (Taflove & Hagness)
  const root = Math.hypot(Math.sin((kx * dx) / 2) / dx, Math.sin((ky * dy) / 2) / dy);
  const frequency = Math.asin(vacuum.speed * timeStep * root) / (Math.PI * timeStep);
  const apart = Math.max(1, Math.round(Math.PI / 2 / kx / dx));
  // Narrow enough for the cut-off to lie at −80 dB of the spectrum: it would ring for ever.
  const cutOff = Math.asin(vacuum.speed * timeStep * (Math.sin((ky * dy) / 2) / dy)) / (Math.PI * timeStep);
  const sigma = 4.3 / (2 * Math.PI * (frequency - cutOff));
  const length = GAP + GAP + apart + GAP;
  const reach = (length * dx) / (vacuum.speed * Math.cos(angle));
  const waveform = makeWaveform({ type: 'modulatedGaussian', amplitude: 1, delay: 6 * sigma, sigma, frequency });
  const sheet = Array.from({ length: across - 1 }, (_, n) => n + 1).flatMap((j) =>
    [0, 1].map((k) => ({ axis: 2, node: [GAP, j, k], weight: Math.sin((j * Math.PI) / across) })),
  );
  const middle = Math.floor(across / 2);
  const ends = cpml(12, { alphaFrequency: 0 });
  const problem = plainProblem([length, across, 2], {
    cellSize,
    timeStep,
    steps: Math.ceil((12 * sigma + 12 * reach) / timeStep),
    boundary: { ...everyFace(PEC), 'x-': ends, 'x+': wall },
    pad: { ...everyFace(0), 'x-': 12, 'x+': cellsBehind(wall) },
    currents: edgesOf(sheet, waveform),
    scale: vacuum.impedance,
    samples: [{ cell: Int32Array.from([2 * GAP, middle, 0, 2 * GAP + apart, middle, 0]), every: 1 }],
  });
  return { angle, frequency, normal: kx, problem, distances: [GAP + apart, GAP] };
}

/** |R| at the box's face, and how much of the peak is left at the end of the run. */
export function measuredReflection({ problem, frequency, normal, distances }: Guide): {
  reflected: number;
  left: number;
} {
  const { steps, timeStep, cellSize } = problem;
  const values = marchAlone(problem).samples[0]!;
  const turn = 2 * Math.PI * frequency * timeStep;
  const [near, far] = [0, 1].map((p) => {
    const line = values.subarray((p * 6 + 2) * steps, (p * 6 + 3) * steps);
    let [re, im] = [0, 0];
    line.forEach((v, n) => {
      re += v * Math.cos(turn * n);
      im -= v * Math.sin(turn * n);
    });
    return { re, im, peak: Math.max(...line.map(Math.abs)), left: Math.max(...line.slice(-20).map(Math.abs)) };
  }) as [Phasor, Phasor];
  // e^{∓jkd} at the distances d to the wall: E_p = A e^{jkd_p} + B e^{−jkd_p}.
  const phase = (p: 0 | 1) => normal * distances[p] * cellSize[0];
  const part = (sign: 1 | -1) => {
    // A ∝ E_0 e^{−jkd_1} − E_1 e^{−jkd_0}, B ∝ E_1 e^{jkd_0} − E_0 e^{jkd_1}
    const [a, b] = [-sign * phase(1), -sign * phase(0)];
    const re = near.re * Math.cos(a) - near.im * Math.sin(a) - far.re * Math.cos(b) + far.im * Math.sin(b);
    const im = near.re * Math.sin(a) + near.im * Math.cos(a) - far.re * Math.sin(b) - far.im * Math.cos(b);
    return Math.hypot(re, im);
  };
  return { reflected: part(-1) / part(1), left: Math.max(near.left / near.peak, far.left / far.peak) };
}

interface Phasor {
  readonly re: number;
  readonly im: number;
  readonly peak: number;
  readonly left: number;
}

// ------------------------------------------------------------------------------------------ what a scheme must return

class Complex {
  readonly re: number;
  readonly im: number;
  constructor(re: number, im = 0) {
    this.re = re;
    this.im = im;
  }
  static turn(phase: number): Complex {
    return new Complex(Math.cos(phase), Math.sin(phase));
  }
  plus(o: Complex): Complex {
    return new Complex(this.re + o.re, this.im + o.im);
  }
  minus(o: Complex): Complex {
    return new Complex(this.re - o.re, this.im - o.im);
  }
  times(o: Complex): Complex {
    return new Complex(this.re * o.re - this.im * o.im, this.re * o.im + this.im * o.re);
  }
  over(o: Complex): Complex {
    const square = o.re * o.re + o.im * o.im;
    return this.times(new Complex(o.re / square, -o.im / square));
  }
  get size(): number {
    return Math.hypot(this.re, this.im);
  }
}

/**
 * |R| of a linear wall's own difference scheme for E = Z^n (q^l + R q^{−l}), q = e^{jk dx}, l cells inward:
 *   R = −P(q)/P(1/q),  P(q) = 1 − Σ_l now_l q^l − Z^{−1} Σ_l old_l q^l − Z^{−2} Σ_l older_l q^l − Z^{−1} (1 + q) Σ_a 2 across_a cos(k_a d_a).
 */
export function schemeReflection({ problem, frequency, normal, angle }: Guide, wall: LinearWall): number {
  const [dx, dy] = problem.cellSize;
  const back = Complex.turn(-2 * Math.PI * frequency * problem.timeStep);
  const ky = normal * Math.tan(angle);
  const value = (sign: 1 | -1) => {
    const power = (l: number) => Complex.turn(sign * normal * dx * l);
    let sum = new Complex(1);
    const take = (terms: readonly number[], from: number, delay: Complex) =>
      terms.forEach((c, l) => {
        sum = sum.minus(
          power(l + from)
            .times(delay)
            .times(new Complex(c)),
        );
      });
    take(wall.now, 1, new Complex(1));
    take(wall.old, 0, back);
    take(wall.older, 0, back.times(back));
    if (wall.sideways) {
      // The axes after x are y, along which the mode varies, and z, along which it does not.
      const [y, z] = wall.sideways.across;
      const sides = 2 * y * Math.cos(ky * dy) + 2 * z;
      take([sides, sides], 0, back);
    }
    return sum;
  };
  return value(1).size / value(-1).size;
}

/**
 * |R| at the face of stretched layers, from their own recursion: E_i at the nodes from the conductor inward,
 *   −4 sin²(ωΔt/2) E_i = (vΔt/dx)² S_i [S_{i+½}(E_{i+1} − E_i) − S_{i−½}(E_i − E_{i−1})] − (vΔt/dy)² 4 sin²(k_y dy/2) E_i,
 *   S = 1/κ + a/(1 − bZ^{−1}) for ψ ← bψ + aΔ, Δ ← Δ/κ + ψ.
 */
export function layersReflection({ problem, frequency, normal, angle }: Guide, layers: number): number {
  const [dx, dy] = problem.cellSize;
  const { timeStep, medium, boxCells } = problem;
  const omega = 2 * Math.PI * frequency;
  const back = Complex.turn(-omega * timeStep);
  const stretch = ({ b, a, inverseKappa }: Stretch) =>
    new Complex(inverseKappa).plus(new Complex(a).over(new Complex(1).minus(back.times(new Complex(b)))));
  const ky = normal * Math.tan(angle);
  const cx = (medium.speed * timeStep) / dx;
  const cy = (medium.speed * timeStep) / dy;
  const rest = -4 * Math.sin((omega * timeStep) / 2) ** 2 + cy * cy * 4 * Math.sin((ky * dy) / 2) ** 2;
  const last = problem.pad['x-'] + boxCells[0] + layers;
  let outer = new Complex(0);
  let here = new Complex(1);
  const inward: Complex[] = [outer, here];
  for (let i = last - 1; i > last - layers - 2; i--) {
    const onNode = stretch(stretchAt(problem, 0, 'E', i));
    const outside = stretch(stretchAt(problem, 0, 'H', i));
    const inside = stretch(stretchAt(problem, 0, 'H', i - 1));
    // S_{i−½}(E_{i−1} − E_i) = rest E_i/(c² S_i) − S_{i+½}(E_{i+1} − E_i)
    const flow = here
      .times(new Complex(rest / (cx * cx)))
      .over(onNode)
      .minus(outside.times(outer.minus(here)));
    const next = here.plus(flow.over(inside));
    outer = here;
    here = next;
    inward.push(here);
  }
  // E at the face and one cell before it: A + B and A q + B/q.
  const [face, before] = [inward[layers]!, inward[layers + 1]!];
  const q = Complex.turn(normal * dx);
  const r = Complex.turn(-normal * dx);
  return before.minus(face.times(q)).size / before.minus(face.times(r)).size;
}

/** The wall of the guide's end. */
export const endWall = (guide: Guide) => wallOf(guide.problem, 'x+');
