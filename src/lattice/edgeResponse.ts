import { log1p } from '../elementary/elementary.ts';
import type { Axis, Vec3 } from '../scenario/model.ts';
import type { Lattice } from './lattice.ts';
import { type Orders, Position, RadialOperator, SIX } from './radialOperator.ts';
import { type StaticGreen, staticGreen } from './static.ts';

/**
 * The field that an unbounded Yee lattice shows of one edge with current I(t), as six delayed time derivatives.
 *
 * With D_a u = [u(x + d_a/2) − u(x − d_a/2)]/d_a and D_t likewise, Yee's scheme driven by J = ê_e I/(area of the edge's
 * dual face) gives, without approximation, for the component a of an edge along e of length d_e,
 *   E_a = (d_e/ε) (D_a D_e D_t⁻¹ − δ_ae D_t/v²) g ∗ I,      H_a = d_e ε_ace D_c g ∗ I  (c the third axis),
 * g the lattice's scalar Green's function, (Σ_b D_b² − D_t²/v²) g = −δ. Here x runs from the edge's midpoint to the
 * component's own site, so that every difference is centred. To second order in cell sizes and time step,
 *   D_a = ∂_a + (d_a²/24) ∂_a³,   D_t^k = D^k + (kΔt²/24) D^{k+2},   g = G + Σ_b (d_b²/12) ∂_b⁴ F − (Δt²/24)(r/v) D³ G,
 * where G is the free Green's function and F its response to itself (see radialOperator.ts). Nothing ties the three
 * cell sizes to each other; the medium enters by ε and v alone. With p_k the coefficients of the point element (G alone),
 * every time-step term together is
 *   (Δt²/24) Σ_k p_k [k D^{k+2} − (r/v) D^{k+3}],
 * because the spatially continuous field depends on time through D_t only, the delay e^(−D_t r/v) included.
 *
 * The edge as a uniform filament with charges at its nodes, which is what the retarded integral takes it for, is
 *   E_a = (d_e/ε) M_e (∂_a ∂_e D⁻¹ − δ_ae D/v²) G,   H_a = d_e ε_ace M_e ∂_c G,   M_e = D_e/∂_e = 1 + (d_e²/24) ∂_e².
 *
 * Near the edge both are known to all orders of the cell size in their first four powers of D: the second and fourth are
 * those of the point element, the first and third come from the tables of static.ts or, for the filament, in
 * closed form. The coefficients here belong to the delayed waveform, that is, to the series times e^(Dr/v).
 */
export class EdgeResponse {
  /** r, m */
  distance = 0;
  /** [k + 1] multiplies D^k of the edge's delayed current, k = −1 … 4; V/m or A/m for 1 A */
  readonly element = new Float64Array(SIX);
  /** the lattice's field minus the point element's */
  readonly lattice = new Float64Array(SIX);
  /** the filament's field minus the point element's */
  readonly filament = new Float64Array(SIX);
  /** unit vector from the edge's midpoint to the site */
  readonly direction: [number, number, number] = [0, 0, 0];

  readonly #lattice: Lattice;
  readonly #green: StaticGreen;
  readonly #position = new Position();
  /** by edge axis, then by site */
  readonly #operators: readonly Operators[];

  constructor(lattice: Lattice) {
    this.#lattice = lattice;
    this.#green = staticGreen(lattice.cellSize);
    this.#operators = AXES.flatMap((edge) => SITES.map((site) => operatorsFor(site, edge, lattice)));
  }

  /**
   * The response at a component's site: fills `element`, `lattice`, `filament`, `direction` and `distance`.
   * @param edge axis of the edge
   * @param site 0, 1, 2 for Ex, Ey, Ez, 3, 4, 5 for Hx, Hy, Hz
   * @param x, y, z offset of the site from the edge's midpoint, in cells (multiples of ½ by the staggering)
   * @returns false where the component vanishes identically: H along the edge
   */
  at(edge: Axis, site: Site, x: number, y: number, z: number): boolean {
    if (site === edge + 3) return false;
    const { cellSize, timeStep, medium } = this.#lattice;
    const position = this.#position;
    position.set(x * cellSize[0], y * cellSize[1], z * cellSize[2]);
    const r = position.distance;
    this.distance = r;
    this.direction[0] = (x * cellSize[0]) / r;
    this.direction[1] = (y * cellSize[1]) / r;
    this.direction[2] = (z * cellSize[2]) / r;
    const operators = this.#operators[edge * 6 + site]!;
    operators.element.coefficients(position, medium.speed, this.element);
    operators.lattice.coefficients(position, medium.speed, this.lattice);
    operators.filament.coefficients(position, medium.speed, this.filament);
    const delay = r / medium.speed;
    if (site < 3) this.#slowE(edge, site as Axis, x, y, z, delay);
    else this.#slowH(edge, (site - 3) as Axis, x, y, z, delay);
    this.#timeStep((timeStep * timeStep) / 24, delay);
    return true;
  }

  /** (Δt²/24) Σ_k p_k [k D^{k+2} − (r/v) D^{k+3}], p the lattice's coefficients so far; downwards, so as not to see itself. */
  #timeStep(factor: number, delay: number): void {
    for (let k = 1; k >= -1; k--) {
      const p = factor * (this.element[k + 1]! + this.lattice[k + 1]!);
      this.lattice[k + 3]! += k * p;
      this.lattice[k + 4]! -= delay * p;
    }
  }

  /**
   * Puts exact slow fields into a part: its first four coefficients from `first` on, given the first and third of the
   * whole field before the delay. With A and B what they exceed the point element's by, the series (A + B D²) e^(Dr/v).
   */
  #replace(part: Float64Array, first: 0 | 1, whole0: number, whole2: number, delay: number): void {
    const { element } = this;
    const e0 = element[first]!;
    const e2 = element[first + 2]! - delay * (element[first + 1]! - (delay / 2) * e0);
    const a = whole0 - e0;
    const b = whole2 - e2;
    part[first] = a;
    part[first + 1] = delay * a;
    part[first + 2] = (delay * delay * a) / 2 + b;
    part[first + 3] = delay * ((delay * delay * a) / 6 + b);
  }

  #tabulated(x: number, y: number, z: number): boolean {
    const { reach } = this.#green;
    return Math.abs(x) + 0.5 <= reach[0] && Math.abs(y) + 0.5 <= reach[1] && Math.abs(z) + 0.5 <= reach[2];
  }

  /** E, V/m for 1 A·s and for 1 A/s: d_e/ε times D_a D_e g0 and (D_a D_e g2 − δ_ae g0)/v². */
  #slowE(edge: Axis, a: Axis, x: number, y: number, z: number, delay: number): void {
    const { cellSize, medium } = this.#lattice;
    const square = medium.speed * medium.speed;
    const ends = this.#ends(edge);
    // Charges ±1 at the edge's nodes, their potential's second-order part r/(8π), and the current between them.
    const here = this.direction[a] * this.distance;
    const upper = a === edge ? ends.upper : here;
    const lower = a === edge ? ends.lower : here;
    const cube = (r: number) => r * r * r;
    const charges = upper / cube(ends.rUpper) - lower / cube(ends.rLower);
    const bent = (lower / ends.rLower - upper / ends.rUpper) / 2 - (a === edge ? ends.inverse : 0);
    const gain = 1 / (4 * Math.PI * medium.permittivity);
    this.#replace(this.filament, 0, gain * charges, (gain * bent) / square, delay);
    if (!this.#tabulated(x, y, z)) return;
    const green = this.#green;
    let first = 0;
    let third = a === edge ? -cellSize[a] * cellSize[edge] * green.at(x, y, z) : 0;
    for (const p of HALVES)
      for (const q of HALVES) {
        const i = x + shift(0, a, p) + shift(0, edge, q);
        const j = y + shift(1, a, p) + shift(1, edge, q);
        const k = z + shift(2, a, p) + shift(2, edge, q);
        first += 4 * p * q * green.at(i, j, k);
        third += 4 * p * q * green.second(i, j, k);
      }
    const scale = 1 / (cellSize[a] * medium.permittivity);
    this.#replace(this.lattice, 0, scale * first, (scale * third) / square, delay);
  }

  /** H, A/m for 1 A and for 1 A/s²: d_e ε_ace times D_c g0 and D_c g2/v². */
  #slowH(edge: Axis, a: Axis, x: number, y: number, z: number, delay: number): void {
    const { cellSize, medium } = this.#lattice;
    const square = medium.speed * medium.speed;
    const c = (3 - edge - a) as Axis;
    const sign = cyclicSign(a, c);
    const ends = this.#ends(edge);
    // Biot–Savart of a straight piece; ∂_c r/(8π) integrated along it.
    const across = this.direction[c] * this.distance;
    const other = this.direction[a] * this.distance;
    const biot = (ends.upper / ends.rUpper - ends.lower / ends.rLower) / (across * across + other * other);
    const gain = (sign * across) / (4 * Math.PI);
    this.#replace(this.filament, 1, gain * biot, (gain * ends.inverse) / (2 * square), delay);
    if (!this.#tabulated(x, y, z)) return;
    const green = this.#green;
    let first = 0;
    let third = 0;
    for (const p of HALVES) {
      const i = x + shift(0, c, p);
      const j = y + shift(1, c, p);
      const k = z + shift(2, c, p);
      first += 2 * p * green.at(i, j, k);
      third += 2 * p * green.second(i, j, k);
    }
    const scale = (sign * cellSize[edge]) / cellSize[c];
    this.#replace(this.lattice, 1, scale * first, (scale * third) / square, delay);
  }

  /**
   * The site seen from the edge's lower and upper node: coordinates along the edge, distances, and over the edge
   * ∫ ds/R = log((z + d/2 + r₊)/(z − d/2 + r₋)), z ≥ 0 (else of the mirror image), r± from z ± d/2.
   */
  #ends(edge: Axis) {
    const half = this.#lattice.cellSize[edge] / 2;
    const z = this.direction[edge] * this.distance;
    const b = this.direction[(edge + 1) % 3]! * this.distance;
    const c = this.direction[(edge + 2) % 3]! * this.distance;
    const from = (along: number) => Math.sqrt(along * along + b * b + c * c);
    const upper = z - half;
    const lower = z + half;
    const rUpper = from(upper);
    const rLower = from(lower);
    // r₊ − r₋ without cancellation.
    const gap = (4 * half * Math.abs(z)) / (rUpper + rLower);
    const near = Math.abs(z) - half + Math.min(rUpper, rLower);
    return { upper, lower, rUpper, rLower, inverse: log1p((2 * half + gap) / near) };
  }
}

/** Ex, Ey, Ez, Hx, Hy, Hz */
export type Site = 0 | 1 | 2 | 3 | 4 | 5;

const AXES = [0, 1, 2] as const;
const SITES = [0, 1, 2, 3, 4, 5] as const;
const HALVES = [-0.5, 0.5] as const;

/** How far a half step p along one axis moves along another. */
const shift = (axis: Axis, along: Axis, p: number) => (axis === along ? p : 0);

/** The point element, and what the lattice and the filament add to it, to second order. */
interface Operators {
  readonly element: RadialOperator;
  readonly lattice: RadialOperator;
  readonly filament: RadialOperator;
}

function operatorsFor(site: Site, edge: Axis, lattice: Lattice): Operators {
  return site < 3
    ? operatorsForE(site as Axis, edge, lattice)
    : operatorsForH((site - 3) as Axis, edge, lattice.cellSize);
}

function operatorsForE(a: Axis, e: Axis, { cellSize, medium }: Lattice): Operators {
  const gain = cellSize[e] / medium.permittivity;
  const element = new RadialOperator().ofG(gain, -1, along(a, e));
  const filament = new RadialOperator().ofG(gain * second(cellSize[e]), -1, along(a, e, e, e));
  const lattice = new RadialOperator()
    .ofG(gain * second(cellSize[a]), -1, along(a, a, a, e))
    .ofG(gain * second(cellSize[e]), -1, along(a, e, e, e));
  for (const b of AXES) lattice.ofF(2 * gain * second(cellSize[b]), -1, along(a, e, b, b, b, b));
  if (a === e) {
    const wave = -gain / (medium.speed * medium.speed);
    element.ofG(wave, 1, along());
    filament.ofG(wave * second(cellSize[e]), 1, along(e, e));
    for (const b of AXES) lattice.ofF(2 * wave * second(cellSize[b]), 1, along(b, b, b, b));
  }
  return { element, lattice, filament };
}

function operatorsForH(a: Axis, e: Axis, cellSize: Vec3): Operators {
  const element = new RadialOperator();
  const lattice = new RadialOperator();
  const filament = new RadialOperator();
  if (a !== e) {
    const c = (3 - e - a) as Axis;
    const gain = cyclicSign(a, c) * cellSize[e];
    element.ofG(gain, 0, along(c));
    filament.ofG(gain * second(cellSize[e]), 0, along(c, e, e));
    lattice.ofG(gain * second(cellSize[c]), 0, along(c, c, c));
    for (const b of AXES) lattice.ofF(2 * gain * second(cellSize[b]), 0, along(c, b, b, b, b));
  }
  return { element, lattice, filament };
}

/** d²/24, the second-order term of a centred difference over d. */
const second = (d: number) => (d * d) / 24;

/** One derivative along each of the axes listed. */
function along(...axes: Axis[]): Orders {
  const count = (axis: Axis) => axes.filter((other) => other === axis).length;
  return [count(0), count(1), count(2)];
}

/** ε_ace for distinct axes: +1 where c follows a. */
const cyclicSign = (a: Axis, c: Axis) => ((c - a + 3) % 3 === 1 ? 1 : -1);
