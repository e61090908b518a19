import { describe, expect, test } from 'vitest';
import { colourOf, NEUTRALS, valueAt } from '../../src/draw/colour.ts';
import { viewOf } from '../../src/draw/display.ts';
import { paneAt, pick, pickMarker, slide } from '../../src/draw/pick.ts';
import { Picture } from '../../src/draw/picture.ts';
import { pixelOf, projectionOf, type Vec3 } from '../../src/draw/projection.ts';
import type { Plane } from '../../src/draw/scene.ts';
import { Chance, paneOf, SCALE, sceneOf } from './random.ts';

const onPlane = ({ origin, u, v }: Plane, a: number, b: number): Vec3 => {
  const at = (k: 0 | 1 | 2) => origin[k] + a * u[k] + b * v[k];
  return [at(0), at(1), at(2)];
};

describe.each(['perspective', 'orthographic'] as const)('picking, %s', (kind) => {
  test('is the inverse of projection', () => {
    const chance = new Chance(77);
    let picked = 0;
    for (let n = 0; n < 400; n++) {
      const plane = chance.plane('a');
      const pane = paneOf(chance.camera(kind, 0.2, 3), [plane]);
      const scene = sceneOf(pane);
      const point = onPlane(plane, chance.between(0.01, 0.99), chance.between(0.01, 0.99));
      const pixel = pixelOf(projectionOf(pane.camera, viewOf(pane, 1)), point);
      if (!pixel || paneAt(scene, pixel.x, pixel.y) !== 0) continue;
      const hit = pick(scene, pixel.x, pixel.y)!;
      // rounding of a point of size 1 seen at up to 1e4 times the slope
      for (const k of [0, 1, 2] as const) expect(Math.abs(hit.point[k] - point[k])).toBeLessThan(1e-10);
      expect(hit.value).toBe(plane.values[hit.j * plane.nu + hit.i]);
      picked++;
    }
    expect(picked).toBeGreaterThan(60);
  });

  test('gives the very sample that was drawn, of several planes', () => {
    const chance = new Chance(78);
    let [drawn, empty] = [0, 0];
    for (let n = 0; n < 20; n++) {
      const planes = ['a', 'b', 'c'].map((name) => chance.plane(name));
      const bare = paneOf(chance.camera(kind, 0.2, 3), planes);
      const scene = sceneOf(bare);
      const picture = new Picture(160, 150);
      picture.draw(scene);
      let same = 0;
      for (let y = 30; y < 150; y += 3)
        for (let x = 0; x < 160; x += 3) {
          const hit = pick(scene, x + 0.5, y + 0.5);
          const pixel = picture.surface.pixels[y * 160 + x]!;
          const shown = valueAt(pixel, SCALE, 'light');
          if (hit && colourOf(hit.value, SCALE, 'light') === pixel) same++;
          // else it lies under an outline, whose colour is no value's
          else if (hit) expect(shown).toBeUndefined();
          else if (pixel === NEUTRALS.light.background) empty++;
        }
      drawn += same;
    }
    expect(drawn).toBeGreaterThan(2000);
    expect(empty).toBeGreaterThan(2000);
  });

  test('a drag along a direction follows the pointer', () => {
    const chance = new Chance(79);
    let dragged = 0;
    for (let n = 0; n < 200; n++) {
      const pane = paneOf(chance.camera(kind, 0.2, 3), []);
      const scene = sceneOf(pane);
      const [point, direction] = [chance.vector(1), chance.vector(1)];
      const by = chance.between(-1, 1);
      const moved = [0, 1, 2].map((k) => point[k]! + by * direction[k]!) as unknown as Vec3;
      const projection = projectionOf(pane.camera, viewOf(pane, 1));
      const pixel = pixelOf(projection, moved);
      if (!pixelOf(projection, point) || !pixel) continue;
      expect(Math.abs(slide(scene, 0, point, direction, pixel.x, pixel.y)! - by)).toBeLessThan(1e-9);
      dragged++;
    }
    expect(dragged).toBeGreaterThan(60);
  });
});

test('holes are looked through, and the divider decides which planes answer', () => {
  const camera = new Chance(3).camera('orthographic', 0, 2);
  camera.position.set(0, 0, 4);
  camera.up.set(0, 1, 0);
  camera.lookAt(0, 0, 0);
  camera.updateMatrixWorld();
  const flat = (name: string, z: number, value: number): Plane => ({
    ...{ name, origin: [-1, -1, z], u: [2, 0, 0], v: [0, 2, 0], nu: 1, nv: 1, scale: SCALE },
    values: Float32Array.of(value),
  });
  const planes = [flat('hole', 1, Number.NaN), flat('far', 0, 0.25)];
  const pane = { ...paneOf(camera, planes), overlay: { divider: 0.5, planes: [flat('exact', 0, 0.75)] } };
  const scene = sceneOf(pane);
  expect(pick(scene, 70, 90)?.plane.name).toBe('far');
  expect(pick(scene, 90, 90)?.plane.name).toBe('exact');
  expect(pick(scene, 70, 10)).toBeUndefined();
  expect(pick(scene, 1, 90)).toBeUndefined();
});

test('the nearest marker within reach', () => {
  const camera = new Chance(4).camera('orthographic', 0, 2);
  camera.position.set(0, 0, 4);
  camera.up.set(0, 1, 0);
  camera.lookAt(0, 0, 0);
  camera.updateMatrixWorld();
  const markers = [
    { at: [0, 0, 0] as const, name: 'A', colour: 0 },
    { at: [0.1, 0, 0] as const, name: 'B', colour: 0 },
  ];
  const scene = sceneOf({ ...paneOf(camera, []), markers });
  // the view is 160 × 120 from y = 30: the origin is at (80, 90), and 1 m is 50 pixels
  expect(pickMarker(scene, 81, 91, 6)?.name).toBe('A');
  expect(pickMarker(scene, 84, 90, 6)?.name).toBe('B');
  expect(pickMarker(scene, 80, 100, 6)).toBeUndefined();
});
