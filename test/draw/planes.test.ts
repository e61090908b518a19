import { Matrix3, PerspectiveCamera, Vector3 } from 'three';
import { describe, expect, test } from 'vitest';
import { colourOf, NEUTRALS } from '../../src/draw/colour.ts';
import { viewOf } from '../../src/draw/display.ts';
import { boxEdges } from '../../src/draw/furniture.ts';
import { Picture } from '../../src/draw/picture.ts';
import { type Camera, facetMap, projectionOf, type Rectangle } from '../../src/draw/projection.ts';
import { type Plane, planeOfSamples } from '../../src/draw/scene.ts';
import { fillFacet, Surface } from '../../src/draw/surface.ts';
import { Chance, paneOf, SCALE, sceneOf } from './random.ts';

/**
 * What a pixel shows, worked out by itself: the ray from the near plane to the far one (unprojected by the camera's inverse
 * matrices), met with each plane by solving three equations. Shares nothing with the rasteriser but the camera.
 */
function lookedAt(camera: Camera, view: Rectangle, planes: readonly Plane[], x: number, y: number) {
  const ndc = (z: number) =>
    new Vector3((2 * (x - view.x)) / view.width - 1, 1 - (2 * (y - view.y)) / view.height, z).unproject(camera);
  const from = ndc(-1);
  const ray = ndc(1).sub(from);
  const met = planes.flatMap((plane, index) => {
    const [u, v, origin] = [plane.u, plane.v, plane.origin].map((p) => new Vector3(...p)) as [
      Vector3,
      Vector3,
      Vector3,
    ];
    // a·u + b·v − t·ray = from − origin
    const system = new Matrix3().set(u.x, v.x, -ray.x, u.y, v.y, -ray.y, u.z, v.z, -ray.z);
    if (system.determinant() === 0) return [];
    const solution = from.clone().sub(origin).applyMatrix3(system.invert());
    const [a, b, t] = [solution.x, solution.y, solution.z];
    if (!(a >= 0 && a < 1 && b >= 0 && b < 1 && t >= 0 && t <= 1)) return [];
    return [{ t, index, sample: Math.floor(b * plane.nv) * plane.nu + Math.floor(a * plane.nu) }];
  });
  return met.sort((one, other) => one.t - other.t);
}

/** The camera as projectionOf shows it in this view. */
function shaped(camera: Camera, view: Rectangle): Camera {
  const copy = camera.clone();
  const aspect = view.width / view.height;
  if (copy instanceof PerspectiveCamera) copy.aspect = aspect;
  else {
    copy.left = copy.bottom * aspect;
    copy.right = copy.top * aspect;
  }
  copy.updateProjectionMatrix();
  return copy;
}

function draw(camera: Camera, view: Rectangle, planes: readonly Plane[], width: number, height: number): Surface {
  const surface = new Surface(width, height);
  surface.clear(NEUTRALS.light.background);
  const projection = projectionOf(camera, view);
  for (const plane of planes) {
    const map = facetMap(projection, plane);
    const colours = Uint32Array.from(plane.values, (value) => colourOf(value, SCALE, 'light'));
    if (map) fillFacet(surface, surface.clip(view), map, { nu: plane.nu, nv: plane.nv, colours });
  }
  return surface;
}

/** How many pixels agree with the reference, differ, or are undecided: within a thousandth of a pixel of an edge. */
function compare(camera: Camera, planes: readonly Plane[]) {
  const view = { x: 3, y: 5, width: 97, height: 83 };
  const surface = draw(camera, view, planes, 104, 91);
  const reference = shaped(camera, view);
  const count = { agreed: 0, covered: 0, differing: 0, undecided: 0 };
  for (let y = 0; y < surface.height; y++)
    for (let x = 0; x < surface.width; x++) {
      const colour = surface.pixels[y * surface.width + x]!;
      const inView = x >= 3 && x < 100 && y >= 5 && y < 88;
      if (!inView) {
        expect(colour).toBe(NEUTRALS.light.background);
        continue;
      }
      const answers = [
        [0, 0],
        [1e-3, 0],
        [-1e-3, 0],
        [0, 1e-3],
        [0, -1e-3],
      ].map(([dx, dy]) => {
        const [first, second] = lookedAt(reference, view, planes, x + 0.5 + dx!, y + 0.5 + dy!);
        // the store of depths holds single precision
        if (first && second && depthOf(reference, first.t, second.t) < 1e-6) return -1;
        return first ? colourOf(planes[first.index]!.values[first.sample]!, SCALE, 'light') : NEUTRALS.light.background;
      });
      if (answers.some((answer) => answer !== answers[0] || answer === -1)) count.undecided++;
      else if (answers[0] === colour) count.agreed++;
      else count.differing++;
      if (colour !== NEUTRALS.light.background) count.covered++;
    }
  return count;
}

/** Difference in depth (−1…1) of two points of one ray at fractions t of its way from near to far. */
function depthOf(camera: Camera, t0: number, t1: number): number {
  const depth = (t: number) => {
    if (!(camera instanceof PerspectiveCamera)) return 2 * t - 1;
    const { near, far } = camera;
    const distance = near + t * (far - near);
    return (far + near - (2 * far * near) / distance) / (far - near);
  };
  return Math.abs(depth(t1) - depth(t0));
}

describe('planes against a ray for each pixel', () => {
  test.each(['perspective', 'orthographic'] as const)('%s: random cameras and planes', (kind) => {
    const chance = new Chance(20 + kind.length);
    const total = { agreed: 0, covered: 0, differing: 0, undecided: 0 };
    let cut = 0;
    for (let n = 0; n < 36; n++) {
      const planes = ['a', 'b', 'c'].slice(0, 1 + (n % 3)).map((name) => chance.plane(name));
      const camera = chance.camera(kind, 0.5, 2.5);
      const count = compare(camera, planes);
      for (const key of ['agreed', 'covered', 'differing', 'undecided'] as const) total[key] += count[key];
      if (planes.some((plane) => cutsNearPlane(camera, plane))) cut++;
    }
    console.table([{ kind, ...total, 'scenes that cut the near plane': cut }]);
    expect(total.differing).toBe(0);
    expect(cut).toBeGreaterThan(8);
    expect(total.covered).toBeGreaterThan(36 * 97 * 83 * 0.1);
    // of pixels that show a plane, samples being a few pixels wide, far fewer than a hundredth lie that near to an edge
    expect(total.undecided).toBeLessThan(0.01 * total.covered);
  });

  test('views along a plane, down to a thousandth of a degree', () => {
    const rows = [10, 1, 0.1, 0.01, 0.001].map((degrees) => {
      const camera = new PerspectiveCamera(40, 1, 0.01, 100);
      const angle = (degrees * Math.PI) / 180;
      camera.position.set(0.1, -2 * Math.cos(angle), 2 * Math.sin(angle));
      camera.lookAt(0, 0, 0);
      camera.updateMatrixWorld();
      const values = Float32Array.from({ length: 900 }, (_, n) => ((n * 37) % 101) / 50 - 1);
      const plane: Plane = {
        ...{ name: 'xy', origin: [-1, -3, 0], u: [2, 0, 0], v: [0, 4, 0], nu: 30, nv: 30, values, scale: SCALE },
      };
      return { degrees, ...compare(camera, [plane]) };
    });
    console.table(rows);
    for (const { differing } of rows) expect(differing).toBe(0);
  });

  test('a plane seen exactly edge-on is not drawn', () => {
    const camera = new PerspectiveCamera(40, 1, 0.01, 100);
    camera.position.set(0, 0, 2);
    camera.lookAt(0, 0, 0);
    camera.updateMatrixWorld();
    const view = { x: 0, y: 0, width: 50, height: 50 };
    const facet = { origin: [0, -1, -1], u: [0, 2, 0], v: [0, 0, 1] } as const;
    expect(facetMap(projectionOf(camera, view), facet)).toBeUndefined();
  });
});

function cutsNearPlane(camera: Camera, { origin, u, v }: Plane): boolean {
  const beyond = [
    [0, 0],
    [1, 0],
    [0, 1],
    [1, 1],
  ].map(([a, b]) => {
    const corner = new Vector3(...origin).addScaledVector(new Vector3(...u), a!).addScaledVector(new Vector3(...v), b!);
    return -corner.applyMatrix4(camera.matrixWorldInverse).z > camera.near;
  });
  return beyond.includes(true) && beyond.includes(false);
}

describe('what hides what', () => {
  const camera = new PerspectiveCamera(40, 1, 0.1, 50);
  camera.position.set(0, 0, 5);
  camera.lookAt(0, 0, 0);
  camera.updateMatrixWorld();
  const flat = (name: string, z: number, value: number): Plane => ({
    ...{ name, origin: [-1, -1, z], u: [2, 0, 0], v: [0, 2, 0], nu: 1, nv: 1, scale: SCALE },
    values: Float32Array.of(value),
  });
  const middle = (planes: readonly Plane[]) => {
    const picture = new Picture(101, 101);
    picture.draw(sceneOf(paneOf(camera, planes, 101, 101)));
    return picture.surface.pixels[60 * 101 + 53];
  };

  test('the nearer plane, in whichever order they are given', () => {
    const [near, far] = [flat('near', 0.5, 0.7), flat('far', -0.5, -0.7)];
    expect(middle([near, far])).toBe(colourOf(0.7, SCALE, 'light'));
    expect(middle([far, near])).toBe(colourOf(0.7, SCALE, 'light'));
  });

  test('a hole in it shows the farther one', () => {
    expect(middle([flat('near', 0.5, Number.NaN), flat('far', -0.5, -0.7)])).toBe(colourOf(-0.7, SCALE, 'light'));
  });

  test('right of a divider other planes', () => {
    const picture = new Picture(100, 100);
    const [grid, exact] = [flat('grid', 0, 0.7), flat('exact', 0, -0.7)];
    const pane = { ...paneOf(camera, [grid], 100, 100), overlay: { divider: 0.5, planes: [exact] } };
    picture.draw(sceneOf(pane));
    expect(picture.surface.pixels[60 * 100 + 45]).toBe(colourOf(0.7, SCALE, 'light'));
    expect(picture.surface.pixels[60 * 100 + 55]).toBe(colourOf(-0.7, SCALE, 'light'));
  });
});

test('panes keep to their own view, whatever the camera sees', () => {
  const chance = new Chance(5);
  let inside = 0;
  for (let n = 0; n < 20; n++) {
    const planes = ['a', 'b', 'c'].map((name) => chance.plane(name));
    const bare = paneOf(chance.camera('perspective', 0.01, 1), planes);
    const strokes = [boxEdges({ from: [-1, -1, -1], to: [1, 1, 1] }, NEUTRALS.light)];
    const pane = { ...bare, strokes, area: { x: 40, y: 30, width: 60, height: 70 } };
    const picture = new Picture(150, 140);
    picture.draw(sceneOf(pane));
    const view = viewOf(pane, 1);
    for (let y = 0; y < 140; y++)
      for (let x = 0; x < 150; x++) {
        if (picture.surface.pixels[y * 150 + x] === NEUTRALS.light.background) continue;
        expect(x >= view.x && x < view.x + view.width && y >= view.y && y < view.y + view.height).toBe(true);
        inside++;
      }
  }
  expect(inside).toBeGreaterThan(5000);
});

test('colours follow the values: a new array or revision is seen, the scale and the theme too', () => {
  const camera = new Chance(1).camera('orthographic', 0, 2);
  camera.position.set(0, 0, 3);
  camera.lookAt(0, 0, 0);
  camera.updateMatrixWorld();
  const picture = new Picture(80, 110);
  const values = Float32Array.of(0.5);
  const plane = planeOfSamples('xy', [0, 0, 0], [1, 0, 0], [0, 1, 0], 1, 1, values, SCALE);
  const shown = (one: Plane, theme: 'light' | 'dark' = 'light') => {
    picture.draw({ ...sceneOf(paneOf(camera, [one], 80, 110)), theme });
    return picture.surface.pixels[72 * 80 + 42];
  };
  expect(shown(plane)).toBe(colourOf(0.5, SCALE, 'light'));
  values[0] = -0.5;
  expect(shown({ ...plane, revision: 1 })).toBe(colourOf(-0.5, SCALE, 'light'));
  const wide = { ...SCALE, limit: 2 };
  expect(shown({ ...plane, revision: 1, scale: wide })).toBe(colourOf(-0.5, wide, 'light'));
  expect(shown({ ...plane, revision: 1, scale: wide }, 'dark')).toBe(colourOf(-0.5, wide, 'dark'));
  expect(shown({ ...plane, values: Float32Array.of(1) })).toBe(colourOf(1, SCALE, 'light'));
});

test('one set of values on two scales in one picture', () => {
  const camera = new Chance(1).camera('orthographic', 0, 2);
  camera.position.set(0, 0, 3);
  camera.lookAt(0, 0, 0);
  camera.updateMatrixWorld();
  const wide = { ...SCALE, limit: 2 };
  const plane = planeOfSamples('xy', [0, 0, 0], [1, 0, 0], [0, 1, 0], 1, 1, Float32Array.of(0.5), SCALE);
  const left = paneOf(camera, [plane], 80, 110);
  const right = { ...paneOf(camera, [{ ...plane, scale: wide }], 80, 110), area: { ...left.area, x: 80 } };
  const picture = new Picture(160, 110);
  picture.draw(sceneOf(left, right));
  expect(picture.surface.pixels[72 * 160 + 42]).toBe(colourOf(0.5, SCALE, 'light'));
  expect(picture.surface.pixels[72 * 160 + 122]).toBe(colourOf(0.5, wide, 'light'));
});
