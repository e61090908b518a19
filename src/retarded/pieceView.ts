import { atan2, cos, sin } from '../elementary/elementary.ts';
import type { ArcPiece, LinePiece } from '../scenario/curve.ts';
import type { Vec3 } from '../scenario/model.ts';

/**
 * A piece of filament as one observer sees it. `look(s)` sets R = observer − source in (x, y, z), its length in r and
 * the tangent in (sx, sy, sz); s is the arc length along the whole curve. Lines keep the observer's distance from their
 * axis, so that R is right to rounding however near the observer is.
 */
export interface PieceView {
  readonly start: number;
  readonly end: number;
  x: number;
  y: number;
  z: number;
  r: number;
  sx: number;
  sy: number;
  sz: number;
  look(s: number): void;
  /** the least R on [from, to] */
  distance(from: number, to: number): number;
  /** the arc length nearest to the observer on the whole piece */
  readonly nearest: number;
  /** arc lengths strictly inside the piece where s·bend + R turns from falling to rising or back, ascending; |bend| ≤ 1 */
  turns(bend: number): number[];
}

/** A view from a place in space, not from infinity. */
export interface PlaceView extends PieceView {
  /** the largest coordinate of observer and piece: what their difference is rounded to, m */
  readonly reach: number;
  /** of a straight piece: all R are P + (foot − s) ŝ */
  readonly line?: Perpendicular;
}

/** From a straight line to an observer. */
export interface Perpendicular {
  /** arc length where it stands */
  readonly foot: number;
  /** P, m, and its square */
  readonly px: number;
  readonly py: number;
  readonly pz: number;
  readonly rho2: number;
}

export function viewOf(piece: LinePiece | ArcPiece, point: Vec3): PlaceView {
  return piece.kind === 'line' ? new LineView(piece, point) : new ArcView(piece, point);
}

class LineView implements PlaceView {
  readonly start: number;
  readonly end: number;
  readonly nearest: number;
  readonly reach: number;
  readonly sx: number;
  readonly sy: number;
  readonly sz: number;
  x = 0;
  y = 0;
  z = 0;
  r = 0;
  readonly line: Perpendicular;

  constructor(piece: LinePiece, point: Vec3) {
    this.start = piece.s0;
    this.end = piece.s0 + piece.length;
    [this.sx, this.sy, this.sz] = piece.direction;
    // Measured from the nearer end: near that end the small differences are then exact.
    const d = piece.direction;
    const fromStart = footBeyond(point, piece.from, d);
    const near = fromStart < piece.length / 2 ? piece.from : piece.to;
    const beyond = near === piece.from ? fromStart : footBeyond(point, piece.to, d);
    const foot = (near === piece.from ? this.start : this.end) + beyond;
    const px = point[0] - near[0] - beyond * d[0];
    const py = point[1] - near[1] - beyond * d[1];
    const pz = point[2] - near[2] - beyond * d[2];
    this.line = { foot, px, py, pz, rho2: px * px + py * py + pz * pz };
    this.nearest = Math.min(Math.max(foot, this.start), this.end);
    this.reach = Math.max(...point.map(Math.abs), ...near.map(Math.abs));
  }

  look(s: number): void {
    const { foot, px, py, pz, rho2 } = this.line;
    const along = foot - s;
    this.x = px + along * this.sx;
    this.y = py + along * this.sy;
    this.z = pz + along * this.sz;
    this.r = Math.sqrt(rho2 + along * along);
  }

  distance(from: number, to: number): number {
    const { foot, rho2 } = this.line;
    const along = foot < from ? from - foot : foot > to ? foot - to : 0;
    return Math.sqrt(rho2 + along * along);
  }

  /** bend + (s − foot)/R = 0 */
  turns(bend: number): number[] {
    const { foot, rho2 } = this.line;
    const sine = 1 - bend * bend;
    if (!(sine > 0)) return rho2 === 0 && foot > this.start && foot < this.end ? [foot] : [];
    const s = foot - bend * Math.sqrt(rho2 / sine);
    return s > this.start && s < this.end ? [s] : [];
  }
}

const footBeyond = (p: Vec3, a: Vec3, d: Vec3): number =>
  (p[0] - a[0]) * d[0] + (p[1] - a[1]) * d[1] + (p[2] - a[2]) * d[2];

const TURN = 2 * Math.PI;

class ArcView implements PlaceView {
  readonly start: number;
  readonly end: number;
  readonly nearest: number;
  readonly reach: number;
  x = 0;
  y = 0;
  z = 0;
  r = 0;
  sx = 0;
  sy = 0;
  sz = 0;
  readonly #piece: ArcPiece;
  /** the observer in the circle's frame: in-plane coordinates and height */
  readonly #a: number;
  readonly #b: number;
  readonly #height: number;
  /** the angle nearest to the observer, in [0, 2π) */
  readonly #facing: number;

  constructor(piece: ArcPiece, point: Vec3) {
    this.#piece = piece;
    this.reach = Math.max(...point.map(Math.abs), ...piece.centre.map(Math.abs));
    this.start = piece.s0;
    this.end = piece.s0 + piece.length;
    this.#a = footBeyond(point, piece.centre, piece.u);
    this.#b = footBeyond(point, piece.centre, piece.v);
    this.#height = footBeyond(point, piece.centre, piece.normal);
    const angle = atan2(this.#b, this.#a);
    this.#facing = angle < 0 ? angle + TURN : angle;
    const s = this.start + this.#facing * piece.radius;
    this.look(this.start);
    const atStart = this.r;
    this.look(this.end);
    this.nearest = s <= this.end ? s : this.r < atStart ? this.end : this.start;
  }

  look(s: number): void {
    const { radius, u, v, normal, s0 } = this.#piece;
    const c = cos((s - s0) / radius);
    const d = sin((s - s0) / radius);
    const a = this.#a - radius * c;
    const b = this.#b - radius * d;
    const h = this.#height;
    this.x = a * u[0] + b * v[0] + h * normal[0];
    this.y = a * u[1] + b * v[1] + h * normal[1];
    this.z = a * u[2] + b * v[2] + h * normal[2];
    this.r = Math.sqrt(a * a + b * b + h * h);
    this.sx = c * v[0] - d * u[0];
    this.sy = c * v[1] - d * u[1];
    this.sz = c * v[2] - d * u[2];
  }

  distance(from: number, to: number): number {
    const s = this.start + this.#facing * this.#piece.radius;
    if (s >= from && s <= to) {
      const beyond = Math.sqrt(this.#a * this.#a + this.#b * this.#b) - this.#piece.radius;
      return Math.sqrt(beyond * beyond + this.#height * this.#height);
    }
    this.look(from);
    const first = this.r;
    this.look(to);
    return Math.min(first, this.r);
  }

  /**
   * With x the angle from the nearest point, R² = A − B cos x and dR/ds = B sin x / (2 R radius), which rises from
   * −peak to peak between ∓x_m, cos x_m = (A − √(A² − B²))/B, and falls elsewhere: at most two turns.
   */
  turns(bend: number): number[] {
    const { radius } = this.#piece;
    const inPlane = Math.sqrt(this.#a * this.#a + this.#b * this.#b);
    const B = 2 * radius * inPlane;
    if (B === 0) return [];
    const A = radius * radius + inPlane * inPlane + this.#height * this.#height;
    const rate = (x: number) => {
      const half = sin(x / 2);
      return (B * sin(x)) / (2 * radius * Math.sqrt(Math.max(A - B + 2 * B * half * half, Number.MIN_VALUE)));
    };
    const cosine = B / (A + Math.sqrt(Math.max(0, (A - B) * (A + B))));
    const steepest = atan2(Math.sqrt(Math.max(0, (1 - cosine) * (1 + cosine))), cosine);
    if (Math.abs(bend) >= rate(steepest)) return [];
    // For bend ≥ 0 the zeros of bend + rate lie in x ≤ 0; the other sign is the mirror image.
    const size = Math.abs(bend);
    const found = [bisect((x) => rate(x) - size, 0, steepest), bisect((x) => rate(x) - size, Math.PI, steepest)];
    return found
      .map((x) => this.#facing + (bend > 0 ? -x : x))
      .map((angle) => this.start + (angle - TURN * Math.floor(angle / TURN)) * radius)
      .filter((s) => s > this.start && s < this.end)
      .sort((p, q) => p - q);
  }
}

/** The zero of f between `low`, where it is ≤ 0, and `high`, where it is > 0, to the last bit. */
function bisect(f: (x: number) => number, low: number, high: number): number {
  for (;;) {
    const middle = (low + high) / 2;
    if (middle === low || middle === high) return low;
    if (f(middle) > 0) high = middle;
    else low = middle;
  }
}

/**
 * The arc length on [from, to], where s·bend + R is monotone, at which it equals `target`; undefined where it does not.
 * Secant steps kept inside a bracket that is halved when they stall.
 */
export function crossing(view: PieceView, bend: number, target: number, from: number, to: number): number | undefined {
  const excess = (s: number) => {
    view.look(s);
    return s * bend + view.r - target;
  };
  let a = from;
  let b = to;
  let fa = excess(a);
  let fb = excess(b);
  if (fa === 0) return a;
  if (fb === 0) return b;
  if (fa > 0 === fb > 0) return undefined;
  for (let round = 0; round < 200; round++) {
    const secant = b - (fb * (b - a)) / (fb - fa);
    const s = round % 3 === 2 || !(secant > Math.min(a, b) && secant < Math.max(a, b)) ? (a + b) / 2 : secant;
    if (s === a || s === b) return s;
    const fs = excess(s);
    if (fs === 0 || Math.abs(b - a) <= Number.EPSILON * Math.abs(s)) return s;
    if (fs > 0 === fb > 0) {
      b = s;
      fb = fs;
      fa *= 0.5;
    } else {
      a = b;
      fa = fb;
      b = s;
      fb = fs;
    }
  }
  return b;
}
