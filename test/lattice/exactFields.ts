import type { EdgeCurrents } from '../../src/gridding/edges.ts';
import { gaussLegendre } from '../../src/gridding/gaussLegendre.ts';
import { cross, dot, norm, scale, sub } from '../../src/scenario/curve.ts';
import type { Dipole, Filament, Medium, Vec3 } from '../../src/scenario/model.ts';
import type { Waveform } from '../../src/scenario/waveform.ts';
import type { Instants, SamplePoints } from '../../src/trace/trace.ts';

/** Adds the six components at a place and an instant to out. */
type Field = (place: Vec3, t: number, out: Float64Array) => void;

const add = (out: Float64Array, first: number, v: Vec3, factor: number) => {
  for (let a = 0; a < 3; a++) out[first + a]! += factor * v[a]!;
};

/**
 * Hertzian element of moment w·length·direction:
 * E = 1/(4πε) {[3n(n·d) − d](q/R³ + w/(vR²)) + [n(n·d) − d] w′/(v²R)},  H = (d×n)/(4π) [w/R² + w′/(vR)]
 */
export function dipoleField(dipole: Dipole, medium: Medium): Field {
  const d = scale(dipole.direction, dipole.length);
  const at = new Float64Array(3);
  return (place, t, out) => {
    const r = sub(place, dipole.at);
    const R = norm(r);
    const n = scale(r, 1 / R);
    dipole.waveform.at(t - R / medium.speed, 2, at);
    const [q, w, slope] = at as unknown as Vec3;
    const near = (q / R ** 3 + w / (medium.speed * R * R)) / (4 * Math.PI * medium.permittivity);
    const far = slope / (medium.speed ** 2 * R) / (4 * Math.PI * medium.permittivity);
    add(out, 0, n, dot(n, d) * (3 * near + far));
    add(out, 0, d, -near - far);
    add(out, 3, cross(d, n), (w / (R * R) + slope / (medium.speed * R)) / (4 * Math.PI));
  };
}

interface Term {
  readonly factor: number;
  readonly delay: number;
  readonly slowness: number;
  readonly waveform: Waveform;
}

/**
 * Straight filament with charges by continuity (Jefimenko's equations), Gauss–Legendre in s:
 * E = 1/(4πε) [∫(λ/R³ + λ̇/(vR²)) R ds − ∫ ŝ İ/(v²R) ds + Σ_ends (Q/R³ + Q̇/(vR²)) R],
 * H = 1/(4π) ∫ (I/R³ + İ/(vR²)) ŝ×R ds;  I = f w(t − delay − slowness s), λ = slowness·I, Q_start = −q, Q_end = +q.
 */
function straightField(
  from: Vec3,
  to: Vec3,
  terms: readonly Term[],
  medium: Medium,
  panels: number,
  rule: number,
): Field {
  const length = norm(sub(to, from));
  const direction = scale(sub(to, from), 1 / length);
  const { nodes, weights } = gaussLegendre(rule);
  const v = medium.speed;
  const gain = 1 / (4 * Math.PI * medium.permittivity);
  const at = new Float64Array(3);
  const along = (s: number): Vec3 => [
    from[0] + s * direction[0],
    from[1] + s * direction[1],
    from[2] + s * direction[2],
  ];
  return (place, t, out) => {
    for (let panel = 0; panel < panels; panel++)
      for (let m = 0; m < nodes.length; m++) {
        const s = (length * (panel + nodes[m]!)) / panels;
        const ds = (length * weights[m]!) / panels;
        const r = sub(place, along(s));
        const R = norm(r);
        const turn = cross(direction, r);
        for (const { factor, delay, slowness, waveform } of terms) {
          waveform.at(t - R / v - delay - slowness * s, 2, at);
          const flow = at[1]! / R ** 3 + at[2]! / (v * R * R);
          add(out, 0, r, gain * ds * factor * slowness * flow);
          add(out, 0, direction, (-gain * ds * factor * at[2]!) / (v * v * R));
          add(out, 3, turn, (ds * factor * flow) / (4 * Math.PI));
        }
      }
    for (const [s, sign] of [
      [0, -1],
      [length, 1],
    ] as const) {
      const r = sub(place, along(s));
      const R = norm(r);
      for (const { factor, delay, slowness, waveform } of terms) {
        waveform.at(t - R / v - delay - slowness * s, 2, at);
        add(out, 0, r, gain * sign * factor * (at[0]! / R ** 3 + at[1]! / (v * R * R)));
      }
    }
  };
}

/** A straight wire's field as designed. */
export function wireField(wire: Filament, medium: Medium): Field {
  const piece = wire.curve.pieces[0]!;
  if (piece.kind !== 'line' || wire.curve.pieces.length > 1)
    throw new Error('this reference knows straight wires only');
  const terms = wire.terms.map((term) => ({ ...term, waveform: wire.waveform }));
  return straightField(piece.from, piece.to, terms, medium, 4, 16);
}

/** Gridded currents as uniform filaments on their edges, with charges at the nodes; node (0, 0, 0) at the origin. */
export function griddedField(currents: EdgeCurrents, cellSize: Vec3, medium: Medium): Field {
  const edges = Array.from({ length: currents.count }, (_, e) => {
    const node = [0, 1, 2].map((a) => currents.node[3 * e + a]! * cellSize[a]!) as unknown as Vec3;
    const end = node.map((x, a) => x + (a === currents.axis[e] ? cellSize[a]! : 0)) as unknown as Vec3;
    const terms: Term[] = [];
    for (let p = currents.pairStart[e]!; p < currents.pairStart[e + 1]!; p++)
      terms.push({
        factor: currents.weight[p]!,
        delay: currents.delay[p]!,
        slowness: 0,
        waveform: currents.waveforms[currents.waveform[p]!]!,
      });
    return straightField(node, end, terms, medium, 1, 8);
  });
  return (place, t, out) => {
    for (const edge of edges) edge(place, t, out);
  };
}

/** A field at sample points and instants, in the layout of FieldHistory. */
export function historyOf(field: Field, points: SamplePoints, instants: Instants): Float64Array {
  const values = new Float64Array(points.count * 6 * instants.count);
  const out = new Float64Array(6);
  for (let site = 0; site < points.count * 6; site++) {
    const place = points.position.subarray(3 * site, 3 * site + 3) as unknown as Vec3;
    const times = site % 6 < 3 ? instants.E : instants.H;
    for (let n = 0; n < instants.count; n++) {
      out.fill(0);
      field(place, times[n]!, out);
      values[site * instants.count + n] = out[site % 6]!;
    }
  }
  return values;
}
