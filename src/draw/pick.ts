import { dividerOf, viewOf } from './display.ts';
import { contains, facetMap, linear, pixelOf, projectionOf, type Rectangle, type Vec3 } from './projection.ts';
import type { Marker, Pane, Plane, Scene } from './scene.ts';

/** What lies under a pixel. */
export interface Hit {
  readonly pane: number;
  readonly plane: Plane;
  /** m */
  readonly point: Vec3;
  /** the sample there, and its value in the plane's unit */
  readonly i: number;
  readonly j: number;
  readonly value: number;
}

/** The pane whose view holds a place in the image. */
export function paneAt({ panes, pixelRatio }: Scene, x: number, y: number): number | undefined {
  const n = panes.findIndex((pane) => contains(viewOf(pane, pixelRatio), x, y));
  return n < 0 ? undefined : n;
}

/** The planes a place in a pane shows: those on its side of the divider. */
function planesAt(pane: Pane, view: Rectangle, x: number): readonly Plane[] {
  return pane.overlay && x >= dividerOf(pane, view) ? pane.overlay.planes : pane.planes;
}

/**
 * The nearest plane under a place in the image (pixels; the middle of pixel n is n + ½), by the inverse of the very
 * projection that drew it. Transparent samples are looked through.
 */
export function pick(scene: Scene, x: number, y: number): Hit | undefined {
  const n = paneAt(scene, x, y);
  if (n === undefined) return undefined;
  const pane = scene.panes[n]!;
  const view = viewOf(pane, scene.pixelRatio);
  const projection = projectionOf(pane.camera, view);
  let nearest = Number.POSITIVE_INFINITY;
  let hit: Hit | undefined;
  for (const plane of planesAt(pane, view, x)) {
    const map = facetMap(projection, plane);
    if (!map) continue;
    const inverseW = linear(map.inverseW, x, y);
    const a = linear(map.a, x, y) / inverseW;
    const b = linear(map.b, x, y) / inverseW;
    const z = linear(map.z, x, y);
    if (!(inverseW > 0 && a >= 0 && a <= 1 && b >= 0 && b <= 1 && z >= -1 && z <= 1 && z < nearest)) continue;
    const i = Math.min(plane.nu - 1, Math.floor(a * plane.nu));
    const j = Math.min(plane.nv - 1, Math.floor(b * plane.nv));
    const value = plane.values[j * plane.nu + i]!;
    if (Number.isNaN(value)) continue;
    nearest = z;
    const at = (k: 0 | 1 | 2) => plane.origin[k] + a * plane.u[k] + b * plane.v[k];
    hit = { pane: n, plane, point: [at(0), at(1), at(2)], i, j, value };
  }
  return hit;
}

/** The marker nearest to a place in the image, within `reach` image pixels. */
export function pickMarker(scene: Scene, x: number, y: number, reach: number): Marker | undefined {
  const n = paneAt(scene, x, y);
  if (n === undefined) return undefined;
  const pane = scene.panes[n]!;
  const projection = projectionOf(pane.camera, viewOf(pane, scene.pixelRatio));
  let least = reach;
  let found: Marker | undefined;
  for (const marker of pane.markers) {
    const at = pixelOf(projection, marker.at);
    if (!at) continue;
    const distance = Math.hypot(at.x - x, at.y - y);
    if (distance <= least) {
      least = distance;
      found = marker;
    }
  }
  return found;
}

/**
 * How far along `direction` a point has to move to come under a place in the image, or nearest to it: for dragging a plane
 * along its normal. Seen from the eye, the point moves on a line in the image; the foot of the perpendicular from (x, y)
 * on that line is taken back to space: with q(s) = q₀ + s q₁ the homogeneous pixel of the point moved by s, the place of the
 * foot along the line's image solves ((x, y) − q(s))·d = 0, which is linear in s once multiplied by w(s).
 * @param point where the drag began, m
 * @param direction of movement, any length
 * @returns lengths of `direction`; undefined where it points at the eye
 */
export function slide(
  scene: Scene,
  pane: number,
  point: Vec3,
  direction: Vec3,
  x: number,
  y: number,
): number | undefined {
  const { camera } = scene.panes[pane]!;
  const { rows } = projectionOf(camera, viewOf(scene.panes[pane]!, scene.pixelRatio));
  const row = (r: number, [X, Y, Z]: Vec3, one: number) =>
    rows[r]! * X + rows[r + 1]! * Y + rows[r + 2]! * Z + rows[r + 3]! * one;
  const [x0, y0, w0] = [row(0, point, 1), row(4, point, 1), row(12, point, 1)];
  const [x1, y1, w1] = [row(0, direction, 0), row(4, direction, 0), row(12, direction, 0)];
  // the image of the line has the direction of the derivative of (x0 + s x1, y0 + s y1) / (w0 + s w1), whatever s
  const dx = x1 * w0 - x0 * w1;
  const dy = y1 * w0 - y0 * w1;
  const perStep = (x * w1 - x1) * dx + (y * w1 - y1) * dy;
  const atStart = (x * w0 - x0) * dx + (y * w0 - y0) * dy;
  const s = -atStart / perStep;
  return Number.isFinite(s) ? s : undefined;
}
