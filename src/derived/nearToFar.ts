import { cos, sin } from '../elementary/elementary.ts';
import { gaussLegendre } from '../retarded/quadrature.ts';
import type { Complex } from '../retarded/waveformSpectrum.ts';
import type { Medium, Vec3 } from '../scenario/model.ts';
import type { FieldHistory } from '../trace/trace.ts';

/**
 * The far field of what lies inside a closed surface, from the fields on it: currents J = n×H and M = −n×E on the surface
 * radiate outside what the sources inside do (equivalence principle; Balanis, Antenna Theory, 4th ed., §12.2, from memory),
 *   N = ∮ J e^(jk r̂·r′) dS,  L = ∮ M e^(jk r̂·r′) dS,
 *   rE e^(jkr) = −jk/(4π) [η (N − r̂(r̂·N)) + L×r̂],  e^(+jωt).
 * It sees sampled fields alone and so treats a grid's and the exact ones alike; what the exact ones give, against the far
 * field that is known, is the transform's own error.
 *
 * The surface is a box whose faces lie on planes of nodes of a Yee grid. There tangential E lives; tangential H lives half
 * a cell to either side, and the mean of the two is H on the plane to second order, at the very place of the E component
 * across it. Components are integrated where they live, and each line spectrum counts its own instants, so that nothing
 * else is interpolated.
 */
export interface BoxSurface {
  /** cells to read, 3 indices a point */
  readonly cells: Int32Array;
  readonly faces: readonly Face[];
}

/** One face of the box, its normal along ±`axis`. */
interface Face {
  readonly axis: number;
  readonly sign: 1 | -1;
  /** first of the `count` points on the plane, and of those one cell below it, both in the same order */
  readonly on: number;
  readonly below: number;
  readonly count: number;
  /** m², with b, c the axes after the normal: of E_b and H_c, which live at (b + ½, c), and of E_c and H_b at (b, c + ½) */
  readonly weights: readonly [Float64Array, Float64Array];
}

/**
 * The box `depth` cells inside the working box, and what is to be read on it: at most `stations` cells along each edge,
 * near the points of Gauss's rule, so that the number of samples is bounded whatever the grid.
 * @param boxCells cells of the working box; @param cellSize m
 * @throws RangeError where too little is left inside
 */
export function surfaceOf(
  boxCells: readonly [number, number, number],
  cellSize: Vec3,
  depth: number,
  stations: number,
): BoxSurface {
  if (boxCells.some((n) => n - 2 * depth < FEWEST))
    throw new RangeError(
      `the box is ${boxCells.join(' × ')} cells; a surface ${depth} cells inside of it needs ${2 * depth + FEWEST} each way.`,
    );
  const edges = boxCells.map((n, a) => edgeOf(depth, n - depth, cellSize[a]!, stations));
  const cells: number[] = [];
  const faces = [0, 1, 2].flatMap((axis) =>
    ([-1, 1] as const).map((sign): Face => {
      const [b, c] = [(axis + 1) % 3, (axis + 2) % 3] as const;
      const [along, across] = [edges[b]!, edges[c]!];
      const plane = sign < 0 ? depth : boxCells[axis]! - depth;
      const layer = (index: number) => {
        const first = cells.length / 3;
        for (const j of along.cells)
          for (const k of across.cells) {
            const cell = [0, 0, 0];
            [cell[axis], cell[b], cell[c]] = [index, j, k];
            cells.push(...cell);
          }
        return first;
      };
      return {
        axis,
        sign,
        on: layer(plane),
        below: layer(plane - 1),
        count: along.cells.length * across.cells.length,
        weights: [product(along.half, across.whole), product(along.whole, across.half)],
      };
    }),
  );
  return { cells: Int32Array.from(cells), faces };
}

/** Cells along an edge at least. */
const FEWEST = 4;

/** Cells read along an edge, and weights (m) of what lives at their lower nodes and in their middles. */
interface Edge {
  readonly cells: readonly number[];
  readonly whole: Float64Array;
  readonly half: Float64Array;
}

function edgeOf(from: number, to: number, size: number, stations: number): Edge {
  const { nodes } = gaussLegendre(Math.min(stations, to - from));
  const nearest = [...nodes].map((x) => from + Math.min(to - from - 1, Math.floor(((1 + x) / 2) * (to - from))));
  const cells = [...new Set(nearest)];
  const weights = (offset: number) =>
    leastWeights(cells.map((cell) => (2 * (cell + offset - from)) / (to - from) - 1)).map(
      (w) => (w * size * (to - from)) / 2,
    );
  return { cells, whole: weights(0), half: weights(0.5) };
}

const product = (a: Float64Array, b: Float64Array): Float64Array =>
  Float64Array.from({ length: a.length * b.length }, (_, m) => a[Math.floor(m / b.length)]! * b[m % b.length]!);

/** Weights may sum to so much more in size than in value: they stay near to positive, and noise is not amplified. */
const STABLE = 1.05;

/**
 * Weights of a rule on [−1, 1] at given places: of those exact for polynomials below a degree the ones with the least
 * square sum, the degree as high as they stay stable (M. W. Wilson, Math. Comp. 24, 1970, from memory).
 */
function leastWeights(places: readonly number[]): Float64Array {
  let best = Float64Array.from(places, () => 2 / places.length);
  for (let degree = 2; degree <= places.length; degree++) {
    const rows = legendreRows(places, degree);
    // V Vᵀ λ = moments, w = Vᵀ λ; the integral of P₀ is 2, of all others 0
    const gram = rows.map((p) => rows.map((q) => p.reduce((sum, v, i) => sum + v * q[i]!, 0)));
    const lambda = solve(gram, [2, ...new Array<number>(degree - 1).fill(0)]);
    const weights = Float64Array.from(places, (_, i) => rows.reduce((sum, row, l) => sum + lambda[l]! * row[i]!, 0));
    if (!(weights.reduce((sum, w) => sum + Math.abs(w), 0) <= 2 * STABLE)) break;
    best = weights;
  }
  return best;
}

/** P₀ … P_(degree−1) at places. */
function legendreRows(places: readonly number[], degree: number): number[][] {
  const rows = [places.map(() => 1), [...places]];
  for (let l = 1; rows.length < degree; l++)
    rows.push(places.map((x, i) => ((2 * l + 1) * x * rows[l]![i]! - l * rows[l - 1]![i]!) / (l + 1)));
  return rows.slice(0, degree);
}

/** Gauss's elimination of a positive matrix. */
function solve(matrix: number[][], right: number[]): number[] {
  const n = right.length;
  for (let p = 0; p < n; p++)
    for (let r = p + 1; r < n; r++) {
      const f = matrix[r]![p]! / matrix[p]![p]!;
      for (let c = p; c < n; c++) matrix[r]![c]! -= f * matrix[p]![c]!;
      right[r]! -= f * right[p]!;
    }
  for (let p = n - 1; p >= 0; p--) {
    for (let c = p + 1; c < n; c++) right[p]! -= matrix[p]![c]! * right[c]!;
    right[p]! /= matrix[p]![p]!;
  }
  return right;
}

/** What a surface says at one frequency. */
export interface SurfaceLine {
  /** rE e^(jkr) towards a direction, r from the origin, V/Hz */
  far(direction: Vec3): readonly [Complex, Complex, Complex];
  /** energy per hertz that flows out through the surface, 2 Re ∮ E×H*·n dS on positive frequencies alone, J/Hz */
  readonly outflow: number;
}

/**
 * Fields sampled on a surface, seen from far away at one frequency.
 * @param history at the surface's cells, from before anything is felt until all is over but for what stays for ever
 */
export function surfaceLine(
  surface: BoxSurface,
  history: FieldHistory,
  medium: Medium,
  frequency: number,
): SurfaceLine {
  const { position } = history.points;
  const line = lineOf(history, frequency);
  // Sheets of current: places, weight, J and M of the one axis each of them has.
  const sheets: Sheet[] = [];
  let outflow = 0;
  for (const { axis, sign, on, below, count, weights } of surface.faces) {
    const [b, c] = [(axis + 1) % 3, (axis + 2) % 3] as const;
    for (let m = 0; m < count; m++) {
      const mean = (component: number): Complex => {
        const [p, q] = [line(on + m, 3 + component), line(below + m, 3 + component)];
        return [(p[0] + q[0]) / 2, (p[1] + q[1]) / 2];
      };
      // n×H = s (H_b ĉ − H_c b̂), −n×E = s (E_c b̂ − E_b ĉ)
      for (const [lattice, electric, magnetic, turn] of [
        [0, b, c, -1],
        [1, c, b, 1],
      ] as const) {
        const weight = weights[lattice]![m]!;
        const E = line(on + m, electric);
        const H = mean(magnetic);
        const site = ((on + m) * 6 + electric) * 3;
        sheets.push({
          at: [position[site]!, position[site + 1]!, position[site + 2]!],
          electric,
          magnetic,
          J: [weight * sign * turn * H[0], weight * sign * turn * H[1]],
          M: [weight * sign * turn * E[0], weight * sign * turn * E[1]],
        });
        // n·(E×H*) = s (E_b H_c* − E_c H_b*)
        outflow -= 2 * weight * sign * turn * (E[0] * H[0] + E[1] * H[1]);
      }
    }
  }
  const k = (2 * Math.PI * frequency) / medium.speed;
  return { outflow, far: (direction) => farOf(sheets, k, medium.impedance, direction) };
}

/** One sample's currents: J along the axis of its E component, M along that of its H component. */
interface Sheet {
  readonly at: Vec3;
  readonly electric: number;
  readonly magnetic: number;
  readonly J: Complex;
  readonly M: Complex;
}

function farOf(sheets: readonly Sheet[], k: number, impedance: number, n: Vec3): readonly [Complex, Complex, Complex] {
  const N = new Float64Array(6);
  const L = new Float64Array(6);
  for (const { at, electric, magnetic, J, M } of sheets) {
    const phase = k * (at[0] * n[0] + at[1] * n[1] + at[2] * n[2]);
    const [re, im] = [cos(phase), sin(phase)];
    N[2 * electric]! += J[0] * re - J[1] * im;
    N[2 * electric + 1]! += J[0] * im + J[1] * re;
    L[2 * magnetic]! += M[0] * re - M[1] * im;
    L[2 * magnetic + 1]! += M[0] * im + M[1] * re;
  }
  const along = [0, 1].map((part) => n[0] * N[part]! + n[1] * N[2 + part]! + n[2] * N[4 + part]!);
  const component = (a: number): Complex => {
    const [b, c] = [(a + 1) % 3, (a + 2) % 3];
    const [re, im] = [0, 1].map(
      (part) =>
        impedance * (N[2 * a + part]! - n[a]! * along[part]!) + L[2 * b + part]! * n[c]! - L[2 * c + part]! * n[b]!,
    ) as [number, number];
    // times −jk/(4π)
    return [(k * im) / (4 * Math.PI), (-k * re) / (4 * Math.PI)];
  };
  return [component(0), component(1), component(2)];
}

/**
 * ∫ F e^(−jωt) dt of a site: Σ Δt F_n e^(−jωt_n), and the last sample for ever after, a geometric series: what charge
 * leaves behind neither ends nor rings. Spectrally accurate for fields sampled above twice their highest frequency.
 */
function lineOf({ instants, values }: FieldHistory, frequency: number): (point: number, component: number) => Complex {
  const omega = 2 * Math.PI * frequency;
  const { count } = instants;
  const step = (instants.E[count - 1]! - instants.E[0]!) / (count - 1);
  const turns = ([instants.E, instants.H] as const).map((list) => ({
    re: Float64Array.from(list, (t) => step * cos(omega * t)),
    im: Float64Array.from(list, (t) => -step * sin(omega * t)),
  }));
  // z/(1 − z), z = e^(−jωΔt), is −½ − j cot(ωΔt/2)/2
  const half = (omega * step) / 2;
  const [restRe, restIm] = [-0.5, -cos(half) / (2 * sin(half))];
  return (point, component) => {
    const { re, im } = turns[component < 3 ? 0 : 1]!;
    const start = (point * 6 + component) * count;
    let real = 0;
    let imaginary = 0;
    for (let n = 0; n < count; n++) {
      real += values[start + n]! * re[n]!;
      imaginary += values[start + n]! * im[n]!;
    }
    const last = values[start + count - 1]!;
    const [lastRe, lastIm] = [last * re[count - 1]!, last * im[count - 1]!];
    return [real + lastRe * restRe - lastIm * restIm, imaginary + lastRe * restIm + lastIm * restRe];
  };
}
