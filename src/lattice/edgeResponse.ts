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
 * Near the edge the lattice's static field is known to all orders, D_a D_e g_static or D_c g_static from the tabulated
 * static Green's function, and replaces the expansion in the lowest coefficient. It fixes the next one as well: g as a
 * power series in D has no linear term that differences do not remove, so before the delay is taken out the next
 * coefficient vanishes, and after it equals r/v times the lowest.
 *
 * The edge as a uniform filament with charges at its nodes, which is what the retarded integral takes it for, is
 *   E_a = (d_e/ε) M_e (∂_a ∂_e D⁻¹ − δ_ae D/v²) G,   H_a = d_e ε_ace M_e ∂_c G,   M_e = D_e/∂_e = 1 + (d_e²/24) ∂_e²,
 * its static field in closed form.
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
  readonly #static: StaticGreen;
  readonly #position = new Position();
  /** by edge axis, then by site */
  readonly #operators: readonly Operators[];

  constructor(lattice: Lattice) {
    this.#lattice = lattice;
    this.#static = staticGreen(lattice.cellSize);
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
    this.#exactStatics(edge, site, x, y, z);
    this.#timeStep((timeStep * timeStep) / 24, r / medium.speed);
    return true;
  }

  /** (Δt²/24) Σ_k p_k [k D^{k+2} − (r/v) D^{k+3}] */
  #timeStep(factor: number, delay: number): void {
    for (let k = -1; k <= 1; k++) {
      const p = factor * this.element[k + 1]!;
      this.lattice[k + 3]! += k * p;
      this.lattice[k + 4]! -= delay * p;
    }
  }

  /** The lowest coefficient to all orders in the cell size, and the next, which is r/v times it. */
  #exactStatics(edge: Axis, site: Site, x: number, y: number, z: number): void {
    const electric = site < 3;
    const lowest = electric ? 0 : 1;
    const point = this.element[lowest]!;
    const delay = this.distance / this.#lattice.medium.speed;
    const replace = (part: 'lattice' | 'filament', field: number) => {
      const change = field - point - this[part][lowest]!;
      this[part][lowest] = field - point;
      this[part][lowest + 1]! += delay * change;
    };
    replace('filament', electric ? this.#filamentE(edge, site as Axis) : this.#filamentH(edge, (site - 3) as Axis));
    const { reach } = this.#static;
    if (Math.abs(x) + 0.5 > reach[0] || Math.abs(y) + 0.5 > reach[1] || Math.abs(z) + 0.5 > reach[2]) return;
    replace(
      'lattice',
      electric ? this.#latticeE(edge, site as Axis, x, y, z) : this.#latticeH(edge, (site - 3) as Axis, x, y, z),
    );
  }

  /** (d_e/ε) D_a D_e g, V/m for 1 A·s */
  #latticeE(edge: Axis, a: Axis, x: number, y: number, z: number): number {
    const { cellSize, medium } = this.#lattice;
    let sum = 0;
    for (const p of HALVES)
      for (const q of HALVES) {
        const shift = (axis: Axis) => (axis === a ? p : 0) + (axis === edge ? q : 0);
        sum += 4 * p * q * this.#static.at(x + shift(0), y + shift(1), z + shift(2));
      }
    return sum / (cellSize[a] * medium.permittivity);
  }

  /** d_e ε_ace D_c g, A/m for 1 A */
  #latticeH(edge: Axis, a: Axis, x: number, y: number, z: number): number {
    const { cellSize } = this.#lattice;
    const c = (3 - edge - a) as Axis;
    let sum = 0;
    for (const p of HALVES)
      sum += 2 * p * this.#static.at(x + (c === 0 ? p : 0), y + (c === 1 ? p : 0), z + (c === 2 ? p : 0));
    return (cyclicSign(a, c) * cellSize[edge] * sum) / cellSize[c]!;
  }

  /** Two point charges at the edge's nodes: −x_a/(4πε r³) at the upper node minus the same at the lower, V/m for 1 A·s. */
  #filamentE(edge: Axis, a: Axis): number {
    const { cellSize, medium } = this.#lattice;
    let sum = 0;
    for (const p of HALVES) {
      const end = (axis: Axis) => this.direction[axis] * this.distance + (axis === edge ? p * cellSize[edge] : 0);
      const [x, y, z] = [end(0), end(1), end(2)];
      const r = Math.sqrt(x * x + y * y + z * z);
      sum -= (2 * p * end(a)) / (r * r * r);
    }
    return sum / (4 * Math.PI * medium.permittivity);
  }

  /** Biot–Savart of a straight piece: −ε_ace x_c/(4πρ²) [(z + d/2)/r₊ − (z − d/2)/r₋], z along the edge; A/m for 1 A. */
  #filamentH(edge: Axis, a: Axis): number {
    const { cellSize } = this.#lattice;
    const c = (3 - edge - a) as Axis;
    const across = this.direction[c] * this.distance;
    const other = this.direction[a] * this.distance;
    const along = this.direction[edge] * this.distance;
    const square = across * across + other * other;
    let sum = 0;
    for (const p of HALVES) {
      const end = along + p * cellSize[edge];
      sum += (2 * p * end) / Math.sqrt(square + end * end);
    }
    return (-cyclicSign(a, c) * across * sum) / (4 * Math.PI * square);
  }
}

/** Ex, Ey, Ez, Hx, Hy, Hz */
export type Site = 0 | 1 | 2 | 3 | 4 | 5;

const AXES = [0, 1, 2] as const;
const SITES = [0, 1, 2, 3, 4, 5] as const;
const HALVES = [-0.5, 0.5] as const;

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
