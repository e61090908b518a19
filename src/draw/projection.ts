import { Box3, Matrix4, OrthographicCamera, PerspectiveCamera, Sphere, Vector3 } from 'three';

/** A rectangle of the image, pixels; y grows downwards. */
export interface Rectangle {
  readonly x: number;
  readonly y: number;
  readonly width: number;
  readonly height: number;
}

/** Whether a rectangle holds a place in the image. */
export function contains({ x, y, width, height }: Rectangle, px: number, py: number): boolean {
  return px >= x && px < x + width && py >= y && py < y + height;
}

/** A point or direction in space, m. */
export type Vec3 = readonly [number, number, number];

/** An axis-aligned box, m. */
export interface Box {
  readonly from: Vec3;
  readonly to: Vec3;
}

export type Camera = PerspectiveCamera | OrthographicCamera;

/**
 * World to pixels. Four rows of four: row·(X, Y, Z, 1) = (x·w, y·w, z·w, w), where (x, y) is the place in the image in
 * pixels (pixel n spans n…n+1) and z the depth, −1 at the near plane and 1 at the far one. x, y and z of a straight line
 * are linear in the image, whichever the camera: that is what the rasteriser steps along.
 */
export interface Projection {
  readonly view: Rectangle;
  readonly rows: Float64Array;
}

/** A camera of the same kind, place and field, for a view of these proportions; the one given stays as it is. */
function withAspect(camera: Camera, aspect: number): Camera {
  const copy = camera.clone();
  if (copy instanceof PerspectiveCamera) copy.aspect = aspect;
  else {
    const half = ((copy.top - copy.bottom) / 2) * aspect;
    const middle = (copy.left + copy.right) / 2;
    copy.left = middle - half;
    copy.right = middle + half;
  }
  copy.updateProjectionMatrix();
  copy.updateMatrixWorld();
  return copy;
}

/** The projection of a camera into a rectangle of the image; the height of the view is the camera's, its width follows. */
export function projectionOf(camera: Camera, view: Rectangle): Projection {
  const shown = withAspect(camera, view.width / view.height);
  const clip = new Matrix4().multiplyMatrices(shown.projectionMatrix, shown.matrixWorldInverse).elements;
  const rows = new Float64Array(16);
  const halfWidth = view.width / 2;
  const halfHeight = view.height / 2;
  for (let k = 0; k < 4; k++) {
    const [x, y, z, w] = [clip[4 * k]!, clip[4 * k + 1]!, clip[4 * k + 2]!, clip[4 * k + 3]!];
    rows[k] = halfWidth * x + (view.x + halfWidth) * w;
    rows[4 + k] = -halfHeight * y + (view.y + halfHeight) * w;
    rows[8 + k] = z;
    rows[12 + k] = w;
  }
  return { view, rows };
}

/** Homogeneous pixel coordinates (x·w, y·w, z·w, w) of a point in space. */
export function homogeneous({ rows }: Projection, [X, Y, Z]: Vec3): [number, number, number, number] {
  const row = (r: number) => rows[r]! * X + rows[r + 1]! * Y + rows[r + 2]! * Z + rows[r + 3]!;
  return [row(0), row(4), row(8), row(12)];
}

/** Place in the image and depth of a point; undefined nearer than the near plane or beyond the far one. */
export function pixelOf(projection: Projection, point: Vec3): { x: number; y: number; z: number } | undefined {
  const [x, y, z, w] = homogeneous(projection, point);
  return w > 0 && Math.abs(z) <= w ? { x: x / w, y: y / w, z: z / w } : undefined;
}

/** A rectangle in space: corner, and the two edges from it (not parallel; any length and angle). */
export interface Facet {
  readonly origin: Vec3;
  readonly u: Vec3;
  readonly v: Vec3;
}

/**
 * Of a facet, as linear functions of the pixel, f(x, y) = f[0]·x + f[1]·y + f[2]: with (a, b) the place on the facet
 * (0…1 along each edge) and w as above, a/w, b/w, 1/w and the depth z. A pixel sees the facet exactly where
 * 0 ≤ a/w ≤ 1/w, 0 ≤ b/w ≤ 1/w and −1 ≤ z ≤ 1, w > 0: half-planes of the image, so neither corners nor the near plane need
 * a clipper.
 */
export interface FacetMap {
  readonly a: Vec3;
  readonly b: Vec3;
  readonly inverseW: Vec3;
  readonly z: Vec3;
}

/**
 * Facet to pixel is the homography P: (x·w, y·w, w) = P (a, b, 1); its inverse gives (a, b, 1)/w = P⁻¹ (x, y, 1), and the
 * depth z = (row 3 of the projection)·P⁻¹ (x, y, 1).
 * @returns undefined where the facet is seen edge-on
 */
export function facetMap(projection: Projection, { origin, u, v }: Facet): FacetMap | undefined {
  const { rows } = projection;
  const along = (r: number, [x, y, z]: Vec3) => rows[r]! * x + rows[r + 1]! * y + rows[r + 2]! * z;
  const at = (r: number): Vec3 => [along(r, u), along(r, v), along(r, origin) + rows[r + 3]!];
  const [px, py, pz, pw] = [at(0), at(4), at(8), at(12)];
  // rows of the adjugate are cross products of the columns; written by rows of P: P⁻¹ = [py×pw, pw×px, px×py] / det
  const [c0, c1, c2] = [cross(py, pw), cross(pw, px), cross(px, py)];
  const determinant = px[0] * c0[0] + px[1] * c0[1] + px[2] * c0[2];
  if (determinant === 0 || !Number.isFinite(1 / determinant)) return undefined;
  const inverse = (k: 0 | 1 | 2): Vec3 => [c0[k] / determinant, c1[k] / determinant, c2[k] / determinant];
  const [a, b, inverseW] = [inverse(0), inverse(1), inverse(2)];
  const depth = (k: 0 | 1 | 2) => pz[0] * a[k] + pz[1] * b[k] + pz[2] * inverseW[k];
  return { a, b, inverseW, z: [depth(0), depth(1), depth(2)] };
}

function cross([ax, ay, az]: Vec3, [bx, by, bz]: Vec3): Vec3 {
  return [ay * bz - az * by, az * bx - ax * bz, ax * by - ay * bx];
}

/** Value of a linear function of the pixel. */
export function linear(f: Vec3, x: number, y: number): number {
  return f[0] * x + f[1] * y + f[2];
}

/**
 * A camera that sees the whole box in a view of the given proportions, z upwards.
 * @param kind the kind of camera; the perspective one has a vertical field of 30°
 * @param from direction from the box's centre to the eye, any length
 * @param aspect width over height of the view
 */
export function cameraFor(
  box: Box,
  kind: 'perspective' | 'orthographic',
  aspect: number,
  from: Vec3 = [0.9, -1.3, 0.75],
): Camera {
  const sphere = new Box3(new Vector3(...box.from), new Vector3(...box.to)).getBoundingSphere(new Sphere());
  const direction = new Vector3(...from).normalize();
  const fieldOfView = 30;
  const halfAngle = ((fieldOfView / 2) * Math.PI) / 180;
  // a tenth more than the box, for the lengths along its edges
  const radius = 1.1 * sphere.radius;
  const narrower = Math.min(1, aspect);
  const distance = radius / (Math.sin(halfAngle) * narrower);
  const halfHeight = radius / narrower;
  const camera =
    kind === 'perspective'
      ? new PerspectiveCamera(fieldOfView, aspect, distance / 100, distance * 10)
      : new OrthographicCamera(-halfHeight * aspect, halfHeight * aspect, halfHeight, -halfHeight, 0, distance * 10);
  camera.up.set(0, 0, 1);
  camera.position.copy(sphere.center).addScaledVector(direction, distance);
  camera.lookAt(sphere.center);
  camera.updateMatrixWorld();
  return camera;
}
