import { contours as d3contours } from 'd3-contour';
import { OrthographicCamera, PerspectiveCamera } from 'three';
import { describe, expect, test } from 'vitest';
import { NEUTRALS, packed, toBytes } from '../../src/draw/colour.ts';
import { contours } from '../../src/draw/contour.ts';
import { displayList, imageStroke } from '../../src/draw/display.ts';
import { boxEdges, crossings, maskOutline, wire } from '../../src/draw/furniture.ts';
import { GHOST, Pen } from '../../src/draw/pen.ts';
import { Picture } from '../../src/draw/picture.ts';
import { projectionOf } from '../../src/draw/projection.ts';
import { type Plane, planeOfSamples, type Stroke } from '../../src/draw/scene.ts';
import { Surface } from '../../src/draw/surface.ts';
import { Chance, paneOf, SCALE, sceneOf } from './random.ts';

const BLACK = packed('#000000');
const WHITE = packed('#ffffff');

/** Ink laid down: sum over pixels of the darkness, 0…1 each. */
const inkOf = (surface: Surface) => surface.pixels.reduce((sum, pixel) => sum + 1 - toBytes(pixel)[0] / 255, 0);

function drawn(segments: readonly number[], width: number, ghost = 1, dash?: [number, number]): Surface {
  const surface = new Surface(120, 90);
  surface.clear(WHITE);
  const colours = new Uint32Array(segments.length / 3).fill(BLACK);
  const stroke = { segments: Float64Array.from(segments), colours, width, ghost, dash };
  new Pen(surface).stroke(stroke, { left: 0, right: 120, top: 0, bottom: 90 });
  return surface;
}

describe('strokes', () => {
  test('lay down their length times their width, and round ends', () => {
    const chance = new Chance(9);
    for (let n = 0; n < 50; n++) {
      const [x0, y0, x1, y1] = [0, 1, 2, 3].map((k) => chance.between(10, k % 2 ? 80 : 110)) as [
        number,
        number,
        number,
        number,
      ];
      const width = chance.between(1, 5);
      const length = Math.hypot(x1 - x0, y1 - y0);
      // the two half discs: ∫ coverage over r of a profile 1 up to w/2 − ½, 0 from w/2 + ½, is π(w²/4 + 1/12)
      const expected = length * width + Math.PI * (width ** 2 / 4 + 1 / 12);
      // pixels sample the profile at their centres: less than a hundredth for a slope of one a pixel, and blending truncates 1/256
      const ink = inkOf(drawn([x0, y0, 0, x1, y1, 0], width));
      expect(Math.abs(ink - expected)).toBeLessThan(0.02 * expected + 0.5);
    }
  });

  test('are no darker where their segments meet', () => {
    const [whole, halves] = [
      drawn([10, 40, 0, 90, 40, 0], 3, 1),
      drawn([10, 40, 0, 50, 40, 0, 50, 40, 0, 90, 40, 0], 3, 1),
    ];
    expect(halves.pixels).toEqual(whole.pixels);
  });

  test('dashes go on from segment to segment', () => {
    const broken: number[] = [];
    for (let n = 0; n < 16; n++) broken.push(10 + 5 * n, 40, 0, 15 + 5 * n, 40, 0);
    const [straight, pieces] = [drawn([10, 40, 0, 90, 40, 0], 2, 1, [7, 4]), drawn(broken, 2, 1, [7, 4])];
    expect(Math.abs(inkOf(pieces) - inkOf(straight))).toBeLessThan(1e-9 + 0.05 * inkOf(straight));
    // 80 pixels of 7 on, 4 off
    expect(Math.abs(inkOf(straight) / inkOf(drawn([10, 40, 0, 90, 40, 0], 2)) - 52 / 80)).toBeLessThan(0.05);
  });

  test('are cut at the near plane, not mirrored through the eye', () => {
    const camera = new PerspectiveCamera(60, 1, 0.1, 10);
    camera.position.set(0, 0, 1);
    camera.lookAt(0, 0, 0);
    camera.updateMatrixWorld();
    const projection = projectionOf(camera, { x: 0, y: 0, width: 100, height: 100 });
    const line: Stroke = { points: [0.05, 0.02, -1, 0.05, 0.02, 5], form: 'line', colour: BLACK, width: 1 };
    const { segments } = imageStroke(line, projection, 1);
    expect(segments[5]).toBeCloseTo(-1, 12);
    // both ends up and to the right of the middle, the cut one 20 times as far out: seen at 0.1 m instead of 2 m
    expect((segments[3]! - 50) / (segments[0]! - 50)).toBeCloseTo(20, 9);
    expect((segments[4]! - 50) / (segments[1]! - 50)).toBeCloseTo(20, 9);
    const behind: Stroke = { ...line, points: [0, 0, 2, 0, 0, 5] };
    expect(imageStroke(behind, projection, 1).segments).toHaveLength(0);
  });

  test('are faint behind a plane, whole before it and within it, however steep the view', () => {
    for (const degrees of [90, 60, 30, 10, 3]) {
      const camera = new OrthographicCamera(-1, 1, 1, -1, 0, 20);
      const angle = (degrees * Math.PI) / 180;
      camera.position.set(0, -5 * Math.cos(angle), 5 * Math.sin(angle));
      camera.lookAt(0, 0, 0);
      camera.updateMatrixWorld();
      const plane: Plane = {
        ...{ name: 'xy', origin: [-2, -2, 0], u: [4, 0, 0], v: [0, 4, 0], nu: 1, nv: 1, scale: SCALE },
        values: Float32Array.of(0),
      };
      const along = (z: number): Stroke => {
        const points = [-0.7, 0.11, z, 0.7, -0.13, z];
        return { points, form: 'line', colour: BLACK, width: 2 };
      };
      const ink = (strokes: Stroke[]) => {
        const picture = new Picture(200, 230);
        picture.draw(sceneOf({ ...paneOf(camera, [plane], 200, 230), strokes }));
        return inkOf(picture.surface);
      };
      const bare = ink([]);
      // two pixels or more off the plane, and all of it over the plane, where the view is steep
      const off = Math.min(0.2, 1.2 * Math.tan(angle));
      const [above, within, below] = [off, 0, -off].map((z) => ink([along(z)]) - bare);
      expect(within! / above!, `${degrees}°`).toBeGreaterThan(0.98);
      // blending truncates, and the faint parts more
      expect(Math.abs(below! / above! - GHOST), `${degrees}°`).toBeLessThan(0.05);
    }
  });
});

test('a stroke where two planes cross is seen all along, from every side', () => {
  const wall = (name: string, u: Plane['u']): Plane => ({
    ...{ name, origin: [-u[0], -u[1], -1], u: [2 * u[0], 2 * u[1], 0], v: [0, 0, 2], nu: 1, nv: 1, scale: SCALE },
    values: Float32Array.of(0),
  });
  const planes = [wall('xz', [1, 0, 0]), wall('yz', [0, 1, 0])];
  const strokes: Stroke[] = [{ points: [0, 0, -0.5, 0, 0, 0.5], form: 'line', colour: BLACK, width: 3 }];
  for (let n = 0; n < 24; n++)
    for (const height of [-3, -0.7, 0.4, 2]) {
      const camera = new PerspectiveCamera(30, 1, 0.1, 50);
      camera.up.set(0, 0, 1);
      camera.position.set(5 * Math.cos(0.26 * n + 0.05), 5 * Math.sin(0.26 * n + 0.05), height);
      camera.lookAt(0, 0, 0);
      camera.updateMatrixWorld();
      const black = (shown: readonly Plane[]) => {
        const picture = new Picture(200, 230);
        picture.draw(sceneOf({ ...paneOf(camera, shown, 200, 230), strokes }));
        return picture.surface.pixels.reduce((count, pixel) => count + (toBytes(pixel)[0] < 16 ? 1 : 0), 0);
      };
      expect(black(planes)).toBeGreaterThan(0.98 * black([]));
    }
});

describe('contours', () => {
  const plane = (nu: number, nv: number, f: (x: number, y: number) => number): Plane => {
    const values = Float32Array.from({ length: nu * nv }, (_, n) => f(n % nu, Math.floor(n / nu)));
    // so that positions are sample coordinates plus a half, as d3-contour has them
    return { name: 'xy', origin: [0, 0, 0], u: [nu, 0, 0], v: [0, nv, 0], nu, nv, values, scale: SCALE };
  };

  test('pass through the same points as those of d3-contour', () => {
    const wavy = plane(41, 37, (x, y) => Math.sin(x / 5) * Math.cos(y / 4) + 0.013 * x);
    for (const level of [-0.6, -0.1, 0.3, 0.7]) {
      const ours = contours(wavy, [level]);
      const points = new Set<string>();
      for (let n = 0; n < ours.length; n += 3) points.add(`${ours[n]!.toFixed(5)} ${ours[n + 1]!.toFixed(5)}`);
      const rings = d3contours().size([41, 37]).contour(Array.from(wavy.values), level).coordinates.flat(2);
      // its rings are closed along the border, outside the outermost samples
      const inside = rings.filter(([x, y]) => x! >= 0.5 && x! <= 40.5 && y! >= 0.5 && y! <= 36.5);
      const theirs = new Set(inside.map(([x, y]) => `${x!.toFixed(5)} ${y!.toFixed(5)}`));
      expect(points.size).toBeGreaterThan(30);
      expect([...points].sort()).toEqual([...theirs].sort());
    }
  });

  test('a circle has its own length and radius', () => {
    const round = plane(81, 81, (x, y) => Math.hypot(x - 40, y - 40));
    const segments = contours(round, [25]);
    let length = 0;
    for (let n = 0; n < segments.length; n += 6)
      length += Math.hypot(segments[n + 3]! - segments[n]!, segments[n + 4]! - segments[n + 1]!);
    // linear interpolation of a distance errs by 1/(8·25) of a cell; chords are shorter by (1/25)²/24
    expect(Math.abs(length / (2 * Math.PI * 25) - 1)).toBeLessThan(1 / 2000);
    for (let n = 0; n < segments.length; n += 3)
      expect(Math.abs(Math.hypot(segments[n]! - 40.5, segments[n + 1]! - 40.5) - 25)).toBeLessThan(1 / (8 * 24));
  });

  test('saddles are joined through their middle', () => {
    const saddle = (middle: number) => plane(2, 2, (x, y) => (x === y ? 1 + middle : -1 + middle));
    const corners = (segments: Float64Array) =>
      [0, 6].map(
        (n) => Math.sign(segments[n]! + segments[n + 3]! - 2) * Math.sign(segments[n + 1]! + segments[n + 4]! - 2),
      );
    // middle above zero: the low corners (1, 0) and (0, 1) are cut off, and the other way round
    expect(corners(contours(saddle(0.2), [0]))).toEqual([-1, -1]);
    expect(corners(contours(saddle(-0.2), [0]))).toEqual([1, 1]);
  });

  test('no line where a value is missing', () => {
    const holed = plane(3, 3, (x, y) => (x === 1 && y === 1 ? Number.NaN : x - 1));
    expect(contours(holed, [0.5])).toHaveLength(0);
  });
});

describe('furniture', () => {
  test('a box has twelve edges, four along each axis', () => {
    const { points } = boxEdges({ from: [0, 0, 0], to: [1, 2, 3] }, NEUTRALS.light);
    const lengths: number[] = [];
    for (let n = 0; n < points.length; n += 6)
      lengths.push(Math.hypot(...[0, 1, 2].map((k) => points[n + 3 + k]! - points[n + k]!)));
    expect(lengths.sort()).toEqual([1, 1, 1, 1, 2, 2, 2, 2, 3, 3, 3, 3]);
    expect(
      new Set(
        Array.from({ length: 24 }, (_, n) =>
          Array.from(points)
            .slice(3 * n, 3 * n + 3)
            .join(),
        ),
      ).size,
    ).toBe(8);
  });

  test('planes cross where both are', () => {
    const flat = (name: string, origin: Plane['origin'], u: Plane['u'], v: Plane['v']): Plane => ({
      ...{ name, origin, u, v, nu: 1, nv: 1, values: Float32Array.of(0), scale: SCALE },
    });
    const xy = flat('xy', [-1, -1, 0], [2, 0, 0], [0, 2, 0]);
    const xz = flat('xz', [-0.5, 0.25, -1], [3, 0, 0], [0, 0, 2]);
    const high = flat('high', [-1, -1, 3], [2, 0, 0], [0, 2, 0]);
    const points = Array.from(crossings([xy, xz, high], NEUTRALS.light).points);
    const ends = [points.slice(0, 3), points.slice(3, 6)].sort((one, other) => one[0]! - other[0]!);
    expect(points).toHaveLength(6);
    for (const k of [0, 1, 2]) {
      expect(ends[0]![k]).toBeCloseTo([-0.5, 0.25, 0][k]!, 12);
      expect(ends[1]![k]).toBeCloseTo([1, 0.25, 0][k]!, 12);
    }
  });

  test('the mask’s outline keeps its distance from the source', () => {
    const step = 0.01;
    const plane = planeOfSamples(
      'xz',
      [-0.295, 0.02, -0.295],
      [step, 0, 0],
      [0, 0, step],
      60,
      60,
      new Float32Array(3600),
      SCALE,
    );
    const { points } = maskOutline(plane, [[0, 0, -0.1, 0, 0, 0.1]], 0.08, BLACK);
    expect(points.length).toBeGreaterThan(100);
    for (let n = 0; n < points.length; n += 3) {
      const [x, y, z] = [points[n]!, points[n + 1]!, points[n + 2]!];
      const distance = Math.hypot(x, y, Math.max(0, Math.abs(z) - 0.1));
      // linear interpolation of a distance over a cell: h²/(8R)
      expect(Math.abs(distance - 0.08)).toBeLessThan((1.1 * step ** 2) / (8 * 0.07));
    }
  });

  test('a wire shows its current, set off by a wider stroke', () => {
    const [under, over] = wire([0, 0, 0, 0, 0, 1], [-1, 1], SCALE, 'light', NEUTRALS.light);
    expect(under!.width).toBeGreaterThan(over!.width);
    const [first, last] = Array.from(over!.colour as Uint32Array, (colour) => toBytes(colour));
    expect(first![2]).toBeGreaterThan(first![0]);
    expect(last![0]).toBeGreaterThan(last![2]);
  });
});

describe('labels', () => {
  const camera = new OrthographicCamera(-2, 2, 2, -2, 0, 20);
  camera.position.set(0, -5, 0);
  camera.up.set(0, 0, 1);
  camera.lookAt(0, 0, 0);
  camera.updateMatrixWorld();
  const plane: Plane = {
    ...{ name: 'xz', origin: [-1, 0, -1], u: [2, 0, 0], v: [0, 0, 2], nu: 1, nv: 1, scale: SCALE },
    values: Float32Array.of(0.3),
  };
  const pane = {
    ...paneOf(camera, [plane], 300, 300),
    title: 'Grid field',
    scale: SCALE,
    axes: { from: [-0.9, -0.9, -0.9], to: [0.9, 0.9, 0.9] } as const,
    markers: [
      { at: [0.3, -0.5, 0.2] as const, name: 'before', colour: BLACK },
      { at: [0.3, 0.5, -0.2] as const, name: 'behind', colour: BLACK },
    ],
  };
  const labels = new Picture(300, 300).draw(sceneOf(pane));
  const find = (text: string) => labels.find((label) => label.text === text);

  test('tell what is hidden', () => {
    expect(find('before')?.hidden).toBe(false);
    expect(find('behind')?.hidden).toBe(true);
  });

  test('name the pane, the ends of its scale and what it shows', () => {
    expect(find('Grid field')?.role).toBe('title');
    for (const text of ['−1', '1', 'Ez, V/m'])
      expect(labels.some((label) => label.role === 'scale' && label.text === text)).toBe(true);
  });

  test('give real lengths at the ticks', () => {
    expect(find('x, mm')).toBeDefined();
    const tick = find('500')!;
    // the view is 226 pixels high for 4 m, its middle at (150, 143)
    const tickOn = labels.filter((label) => label.role === 'tick' && label.text === '500');
    expect(tickOn.some(({ x }) => Math.abs(x - (150 + (0.5 * 226) / 4)) < 1e-6)).toBe(true);
    expect(tick.hidden).toBe(false);
  });

  test('a scene is projected to a list that holds all of it', () => {
    const [list] = displayList(sceneOf(pane), () => new Uint32Array(1));
    expect(list!.layers).toHaveLength(1);
    expect(list!.layers[0]!.facets).toHaveLength(1);
    expect(list!.markers).toHaveLength(2);
    expect(list!.bar?.rectangle.y).toBeGreaterThan(list!.view.y + list!.view.height);
  });
});
