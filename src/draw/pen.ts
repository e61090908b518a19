import { blend } from './colour.ts';
import type { Clip, Surface } from './surface.ts';

/**
 * A stroke in the image: segments x0, y0, z0, x1, y1, z1 (pixels and depth, six numbers each) with a colour at each end.
 * Segments that follow one another share their dashes.
 */
export interface ImageStroke {
  readonly segments: Float64Array;
  /** packed, two a segment */
  readonly colours: Uint32Array;
  /** pixels */
  readonly width: number;
  /** pixels drawn and pixels left out in turn; solid without */
  readonly dash?: readonly [number, number] | undefined;
  /** weight of the parts behind a facet, 0…1: 0 omits them, 1 draws through */
  readonly ghost: number;
}

/** Hidden parts of a stroke, where nothing else is asked for. */
export const GHOST = 0.22;

/**
 * Whether a point of this depth at this place is seen. A stroke that lies in a facet is neither before nor behind it: the
 * depth is known at the middles of pixels, and up to half a pixel aside a facet's depth differs by half its slope, however
 * steep it is seen. So a point counts as seen down to a pixel's slope behind, and no offset has to be tuned.
 */
export function isSeen(surface: Surface, clip: Clip, x: number, y: number, z: number): boolean {
  const column = Math.min(clip.right - 1, Math.max(clip.left, Math.floor(x)));
  const row = Math.min(clip.bottom - 1, Math.max(clip.top, Math.floor(y)));
  const at = row * surface.width + column;
  // a facet seen square on has no slope, but the rounding of its single-precision store
  const behind = z - surface.depth[at]! - 1e-6;
  if (behind <= 0) return true;
  const left = column - 2 < clip.left ? 0 : slope(surface, at, -1);
  const right = column + 2 >= clip.right ? 0 : slope(surface, at, 1);
  const above = row - 2 < clip.top ? 0 : slope(surface, at, -surface.width);
  const below = row + 2 >= clip.bottom ? 0 : slope(surface, at, surface.width);
  return behind <= Math.max(left, right) + Math.max(above, below);
}

/**
 * Depth gained over one pixel beside another, the smaller of two in a row: one of them may be a step to another facet, or
 * cross the line where two facets meet. At the rim of all that was drawn it is unlimited, so that rims are seen whole.
 */
function slope({ depth }: Surface, at: number, step: number): number {
  const next = depth[at + step]!;
  if (next === Number.POSITIVE_INFINITY) return next;
  return Math.min(Math.abs(next - depth[at]!), Math.abs(depth[at + 2 * step]! - next));
}

/**
 * Draws smooth strokes and discs. A stroke first leaves its largest coverage at each pixel, then is blended once, so that
 * joints and crossings of a faint stroke are no darker than its straights.
 */
export class Pen {
  private readonly weight: Float32Array;
  private readonly ink: Uint32Array;
  private readonly touched: Int32Array;
  private count = 0;

  constructor(private readonly surface: Surface) {
    const size = surface.pixels.length;
    this.weight = new Float32Array(size);
    this.ink = new Uint32Array(size);
    this.touched = new Int32Array(size);
  }

  /** Draws a stroke inside `clip`, its hidden parts faintly. */
  stroke(stroke: ImageStroke, clip: Clip): void {
    const { segments } = stroke;
    let travelled = 0;
    for (let s = 0; s < segments.length; s += 6) {
      const follows = s > 0 && segments[s] === segments[s - 3] && segments[s + 1] === segments[s - 2];
      if (!follows) travelled = 0;
      travelled += this.segment(stroke, s, travelled, clip);
    }
    this.settle();
  }

  /**
   * Leaves the coverage of the segment at `s`, with round ends: 1 within half the width of its axis, falling to 0 over one
   * pixel. Row by row, only where the axis passes within reach.
   * @param travelled length of the stroke before this segment, pixels
   * @returns its own length, pixels
   */
  private segment(stroke: ImageStroke, s: number, travelled: number, clip: Clip): number {
    const { segments, colours, width, dash, ghost } = stroke;
    const x0 = segments[s]!;
    const y0 = segments[s + 1]!;
    const z0 = segments[s + 2]!;
    const x1 = segments[s + 3]!;
    const y1 = segments[s + 4]!;
    const dx = x1 - x0;
    const dy = y1 - y0;
    const dz = segments[s + 5]! - z0;
    const colour0 = colours[s / 3]!;
    const colour1 = colours[s / 3 + 1]!;
    const squared = dx * dx + dy * dy;
    const length = Math.sqrt(squared);
    const reach = width / 2 + 0.5;
    const top = Math.max(clip.top, Math.floor(Math.min(y0, y1) - reach));
    const bottom = Math.min(clip.bottom - 1, Math.floor(Math.max(y0, y1) + reach));
    const halfRow = dy === 0 ? Number.POSITIVE_INFINITY : (reach * length) / Math.abs(dy);
    for (let y = top; y <= bottom; y++) {
      const py = y + 0.5 - y0;
      const middle = dy === 0 ? x0 : x0 + (py * dx) / dy;
      const left = Math.max(clip.left, Math.floor(Math.max(Math.min(x0, x1) - reach, middle - halfRow)));
      const right = Math.min(clip.right - 1, Math.floor(Math.min(Math.max(x0, x1) + reach, middle + halfRow)));
      for (let x = left; x <= right; x++) {
        const px = x + 0.5 - x0;
        const t = squared === 0 ? 0 : Math.min(1, Math.max(0, (px * dx + py * dy) / squared));
        const ex = px - t * dx;
        const ey = py - t * dy;
        const apart = ex * ex + ey * ey;
        if (apart >= reach * reach) continue;
        const coverage = Math.min(1, reach - Math.sqrt(apart));
        if (dash && (travelled + t * length) % (dash[0] + dash[1]) > dash[0]) continue;
        const seen = isSeen(this.surface, clip, x0 + t * dx, y0 + t * dy, z0 + t * dz);
        const colour = colour0 === colour1 ? colour0 : blend(colour0, colour1, t);
        this.leave(y * this.surface.width + x, seen ? coverage : coverage * ghost, colour);
      }
    }
    return length;
  }

  /** Draws a disc (`inner` 0) or a ring between two radii, pixels, with the given weight. */
  ring(x: number, y: number, inner: number, outer: number, colour: number, weight: number, clip: Clip): void {
    const top = Math.max(clip.top, Math.floor(y - outer - 1));
    const bottom = Math.min(clip.bottom - 1, Math.floor(y + outer + 1));
    const left = Math.max(clip.left, Math.floor(x - outer - 1));
    const right = Math.min(clip.right - 1, Math.floor(x + outer + 1));
    for (let row = top; row <= bottom; row++)
      for (let column = left; column <= right; column++) {
        const r = Math.hypot(column + 0.5 - x, row + 0.5 - y);
        const coverage = Math.min(1, outer + 0.5 - r, inner > 0 ? r - inner + 0.5 : 1);
        if (coverage > 0) this.leave(row * this.surface.width + column, coverage * weight, colour);
      }
    this.settle();
  }

  /** The largest weight at a pixel wins. */
  private leave(pixel: number, weight: number, colour: number): void {
    const before = this.weight[pixel]!;
    if (weight <= before) return;
    if (before === 0) this.touched[this.count++] = pixel;
    this.weight[pixel] = weight;
    this.ink[pixel] = colour;
  }

  /** Blends what was left, and forgets it. */
  private settle(): void {
    const { pixels } = this.surface;
    for (let n = 0; n < this.count; n++) {
      const pixel = this.touched[n]!;
      pixels[pixel] = blend(pixels[pixel]!, this.ink[pixel]!, this.weight[pixel]!);
      this.weight[pixel] = 0;
    }
    this.count = 0;
  }
}
