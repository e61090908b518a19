import type { FacetMap, Rectangle, Vec3 } from './projection.ts';

/** An image with a depth for each pixel; the nearest so far (−1 near … 1 far), Infinity where nothing was drawn. */
export class Surface {
  /** packed colours, row by row from the top */
  readonly pixels: Uint32Array;
  /** the same memory as bytes R, G, B, A, for an `ImageData` or a file */
  readonly bytes: Uint8ClampedArray<ArrayBuffer>;
  readonly depth: Float32Array;

  /** @param width, height pixels */
  constructor(
    readonly width: number,
    readonly height: number,
  ) {
    const memory = new ArrayBuffer(width * height * 4);
    this.pixels = new Uint32Array(memory);
    this.bytes = new Uint8ClampedArray(memory);
    this.depth = new Float32Array(width * height);
  }

  clear(colour: number): void {
    this.pixels.fill(colour);
    this.depth.fill(Number.POSITIVE_INFINITY);
  }

  /** Fills a rectangle with one colour; leaves the depth alone. */
  fill(rectangle: Rectangle, colour: number): void {
    const { left, right, top, bottom } = this.clip(rectangle);
    for (let y = top; y < bottom; y++) this.pixels.fill(colour, y * this.width + left, y * this.width + right);
  }

  /** The whole pixels of a rectangle that lie in the image: left ≤ x < right, top ≤ y < bottom. */
  clip({ x, y, width, height }: Rectangle): Clip {
    return {
      left: Math.max(0, Math.round(x)),
      top: Math.max(0, Math.round(y)),
      right: Math.min(this.width, Math.round(x + width)),
      bottom: Math.min(this.height, Math.round(y + height)),
    };
  }
}

/** Whole pixels: left ≤ x < right, top ≤ y < bottom. */
export interface Clip {
  readonly left: number;
  readonly right: number;
  readonly top: number;
  readonly bottom: number;
}

/** Colours of a facet, nu along its first edge and nv along its second, first edge fastest; 0 is transparent. */
export interface Texture {
  readonly nu: number;
  readonly nv: number;
  readonly colours: Uint32Array;
}

/** f − g, both linear functions of the pixel. */
function difference(f: Vec3, g: Vec3): Vec3 {
  return [f[0] - g[0], f[1] - g[1], f[2] - g[2]];
}

/**
 * Draws a facet: each pixel inside `clip` whose centre sees it takes the colour of the sample there, unless something
 * nearer was drawn. Exact for both cameras: a/w, b/w, 1/w and z are stepped along the scan line and divided at each pixel.
 */
export function fillFacet(surface: Surface, clip: Clip, map: FacetMap, { nu, nv, colours }: Texture): void {
  const { pixels, depth, width } = surface;
  const { a, b, inverseW, z } = map;
  const inside: readonly Vec3[] = [
    inverseW,
    a,
    difference(inverseW, a),
    b,
    difference(inverseW, b),
    [z[0], z[1], z[2] + 1],
    [-z[0], -z[1], 1 - z[2]],
  ];
  const stepA = a[0] * nu;
  const stepB = b[0] * nv;
  const stepW = inverseW[0];
  const stepZ = z[0];
  for (let y = clip.top; y < clip.bottom; y++) {
    const yc = y + 0.5;
    let from = clip.left + 0.5;
    let to = clip.right - 0.5;
    for (const f of inside) {
      const rest = f[1] * yc + f[2];
      const slope = f[0];
      if (slope > 0) from = Math.max(from, -rest / slope);
      else if (slope < 0) to = Math.min(to, -rest / slope);
      else if (rest < 0) to = Number.NEGATIVE_INFINITY;
    }
    if (!(from <= to)) continue;
    const first = Math.ceil(from - 0.5);
    const last = Math.floor(to - 0.5);
    const xc = first + 0.5;
    let sa = nu * (a[0] * xc + a[1] * yc + a[2]);
    let sb = nv * (b[0] * xc + b[1] * yc + b[2]);
    let sw = inverseW[0] * xc + inverseW[1] * yc + inverseW[2];
    let sz = z[0] * xc + z[1] * yc + z[2];
    const end = y * width + last;
    for (let k = y * width + first; k <= end; k++) {
      if (sz < depth[k]!) {
        const w = 1 / sw;
        // rounding at the rim of a grazing facet may step outside by a hair
        const i = Math.min(nu - 1, Math.max(0, (sa * w) | 0));
        const j = Math.min(nv - 1, Math.max(0, (sb * w) | 0));
        const colour = colours[j * nu + i]!;
        if (colour !== 0) {
          pixels[k] = colour;
          depth[k] = sz;
        }
      }
      sa += stepA;
      sb += stepB;
      sw += stepW;
      sz += stepZ;
    }
  }
}
