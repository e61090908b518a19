import { describe, expect, test } from 'vitest';
import { lengthUnit, shortNumber } from '../../src/draw/label.ts';
import { type Box, cameraFor, homogeneous, pixelOf, projectionOf } from '../../src/draw/projection.ts';
import { Chance } from './random.ts';

const corners = ({ from, to }: Box) =>
  Array.from({ length: 8 }, (_, n) => {
    const at = (k: 0 | 1 | 2) => (n & (1 << k) ? to : from)[k];
    return [at(0), at(1), at(2)] as const;
  });

describe.each(['perspective', 'orthographic'] as const)('a camera for a box, %s', (kind) => {
  test('sees all of it, from every side, in views wide and narrow', () => {
    const chance = new Chance(11);
    for (let n = 0; n < 60; n++) {
      const [from, size] = [chance.vector(3), chance.vector(1)];
      const to = [0, 1, 2].map((k) => from[k]! + 0.01 + Math.abs(size[k]!)) as unknown as Box['to'];
      const view = { x: 10, y: 20, width: chance.between(100, 900), height: chance.between(100, 900) };
      const camera = cameraFor({ from, to }, kind, view.width / view.height, chance.vector(1));
      const projection = projectionOf(camera, view);
      for (const corner of corners({ from, to })) {
        const at = pixelOf(projection, corner)!;
        expect(at.x).toBeGreaterThan(view.x);
        expect(at.x).toBeLessThan(view.x + view.width);
        expect(at.y).toBeGreaterThan(view.y);
        expect(at.y).toBeLessThan(view.y + view.height);
      }
    }
  });

  test('shows its middle in the middle of the view, and z upwards', () => {
    const box = { from: [-1, 0, 2], to: [3, 1, 4] } as const;
    const view = { x: 100, y: 50, width: 200, height: 100 };
    const projection = projectionOf(cameraFor(box, kind, 2), view);
    const middle = pixelOf(projection, [1, 0.5, 3])!;
    expect(middle.x).toBeCloseTo(200, 9);
    expect(middle.y).toBeCloseTo(100, 9);
    const above = pixelOf(projection, [1, 0.5, 3.5])!;
    expect(above.x).toBeCloseTo(200, 9);
    expect(above.y).toBeLessThan(99);
  });

  test('is left as it is by a view of other proportions, where equal lengths stay equal', () => {
    const box = { from: [-1, -1, -1], to: [1, 1, 1] } as const;
    const camera = cameraFor(box, kind, 1, [0, -1, 0]);
    const before = camera.projectionMatrix.toArray();
    const projection = projectionOf(camera, { x: 0, y: 0, width: 300, height: 100 });
    expect(camera.projectionMatrix.toArray()).toEqual(before);
    const [middle, right, up] = [
      pixelOf(projection, [0, 0, 0])!,
      pixelOf(projection, [0.5, 0, 0])!,
      pixelOf(projection, [0, 0, 0.5])!,
    ];
    expect(right.x - middle.x).toBeCloseTo(middle.y - up.y, 9);
  });
});

test('homogeneous pixels behind the eye have a negative w, and no pixel', () => {
  const projection = projectionOf(cameraFor({ from: [-1, -1, -1], to: [1, 1, 1] }, 'perspective', 1, [1, 0, 0]), {
    ...{ x: 0, y: 0, width: 100, height: 100 },
  });
  expect(homogeneous(projection, [100, 0, 0])[3]).toBeLessThan(0);
  expect(pixelOf(projection, [100, 0, 0])).toBeUndefined();
});

describe('numbers beside ticks', () => {
  test.each([
    [0, '0'],
    [-150, '−150'],
    [0.1 + 0.2, '0.3'],
    [1234.5, '1230'],
    [-2.5e-7, '−2.5e−7'],
  ])('%d is written %s', (value, text) => {
    expect(shortNumber(value)).toBe(text);
  });

  test.each([
    [2000, 'km'],
    [1, 'm'],
    [0.15, 'mm'],
    [0.0009, 'µm'],
    [2e-7, 'nm'],
    [1e-12, 'nm'],
    [0, 'nm'],
  ])('%d m is told in %s', (length, name) => {
    expect(lengthUnit(length).name).toBe(name);
  });
});
