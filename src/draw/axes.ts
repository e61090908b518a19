import { ticks } from 'd3-array';
import type { Neutrals } from './colour.ts';
import { type ImageLabel, lengthUnit, shortNumber } from './label.ts';
import { GHOST, type ImageStroke } from './pen.ts';
import { type Box, contains, type Projection, pixelOf, type Rectangle, type Vec3 } from './projection.ts';

const AXES = ['x', 'y', 'z'] as const;
const TICK = 5;
/** room that a length takes, CSS pixels */
const ROOM = { width: 28, height: 13 };
/** width of “z, mm”, CSS pixels */
const NAME_WIDTH = 40;

/**
 * Ticks and lengths along three edges of a box, one for each axis: of the four edges the one that is lowest in the image,
 * or leftmost for an axis that stands upright, so that no axis runs through the picture. In a common unit.
 * @param pane index that the labels carry
 */
export function axes(
  box: Box,
  projection: Projection,
  { line }: Neutrals,
  pixelRatio: number,
  pane: number,
): { strokes: ImageStroke[]; labels: ImageLabel[] } {
  const { from, to } = box;
  const unit = lengthUnit(Math.max(...from.map(Math.abs), ...to.map(Math.abs)));
  const middle = pixelOf(projection, [0, 1, 2].map((k) => (from[k]! + to[k]!) / 2) as unknown as Vec3);
  const visible = (point: Vec3) => {
    const at = pixelOf(projection, point);
    return at && contains(projection.view, at.x, at.y) ? at : undefined;
  };
  const segments: number[] = [];
  const labels: ImageLabel[] = [];
  for (let axis = 0; middle && axis < 3; axis++) {
    const edge = edgeForAxis(box, axis, projection);
    if (!edge) continue;
    const { start, end, pointAt } = edge;
    const length = Math.hypot(end.x - start.x, end.y - start.y);
    const spacing =
      pixelRatio *
      Math.min((ROOM.width * length) / Math.abs(end.x - start.x), (ROOM.height * length) / Math.abs(end.y - start.y));
    if (length < 2 * spacing) continue;
    const outwards = awayFrom(middle, start, end, length);
    const others = labels.slice();
    const label = (text: string, at: Pixel, distance: number) => {
      const place = within(projection.view, beside(at, outwards, distance), NAME_WIDTH * pixelRatio);
      // two axes may end in one corner: the second length there is left out
      const crowded = others.some(
        ({ label: { x, y } }) =>
          Math.abs(x - place.x) < ROOM.width * pixelRatio && Math.abs(y - place.y) < ROOM.height * pixelRatio,
      );
      if (!crowded) labels.push({ label: { pane, text, role: 'tick', hidden: false, ...place }, anchor: at });
    };
    const [low, high] = [from[axis]! / unit.size, to[axis]! / unit.size];
    for (const value of spacedTicks(low, high, length / spacing)) {
      const at = visible(pointAt(value * unit.size));
      if (!at) continue;
      const tick = TICK * pixelRatio;
      segments.push(at.x, at.y, at.z, at.x + tick * outwards.x, at.y + tick * outwards.y, at.z);
      label(shortNumber(value), at, 9 * pixelRatio);
    }
    const centre = visible(pointAt((from[axis]! + to[axis]!) / 2));
    if (centre) label(`${AXES[axis]}, ${unit.name}`, centre, 34 * pixelRatio);
  }
  const colours = new Uint32Array(segments.length / 3).fill(line);
  return { strokes: [{ segments: Float64Array.from(segments), colours, width: pixelRatio, ghost: GHOST }], labels };
}

/** A text's place, shifted along x so that the text does not leave the view. */
function within<T extends { readonly x: number; readonly align: string }>(view: Rectangle, place: T, width: number): T {
  const before = { left: 0, center: width / 2, right: width }[place.align] ?? 0;
  const x = Math.min(view.x + view.width - width + before, Math.max(view.x + before, place.x));
  return { ...place, x };
}

/** As many round numbers between two ends as stand at least the `room`-th part of their distance apart. */
function spacedTicks(low: number, high: number, room: number): number[] {
  for (let count = Math.ceil(room) + 1; count > 1; count--) {
    const values = ticks(low, high, count);
    if (values.length > 1 && (values[1]! - values[0]!) * room >= high - low) return values;
  }
  return ticks(low, high, 1);
}

type Pixel = { readonly x: number; readonly y: number; readonly z: number };

/** The edge of a box that carries an axis, and its ends in the image; undefined where an end is out of depth. */
function edgeForAxis({ from, to }: Box, axis: number, projection: Projection) {
  const candidates = [0, 1, 2, 3].flatMap((corner) => {
    const pointAt = (value: number): Vec3 => {
      const point: [number, number, number] = [0, 0, 0];
      point[axis] = value;
      point[(axis + 1) % 3] = (corner & 1 ? to : from)[(axis + 1) % 3]!;
      point[(axis + 2) % 3] = (corner & 2 ? to : from)[(axis + 2) % 3]!;
      return point;
    };
    const start = pixelOf(projection, pointAt(from[axis]!));
    const end = pixelOf(projection, pointAt(to[axis]!));
    return start && end ? [{ start, end, pointAt }] : [];
  });
  const upright = candidates.every(({ start, end }) => Math.abs(end.y - start.y) > 2 * Math.abs(end.x - start.x));
  const merit = ({ start, end }: { start: Pixel; end: Pixel }) => (upright ? -(start.x + end.x) : start.y + end.y);
  return candidates.sort((one, other) => merit(other) - merit(one))[0];
}

/** Unit normal of an edge in the image, on the side away from `middle`. */
function awayFrom(middle: Pixel, start: Pixel, end: Pixel, length: number): { x: number; y: number } {
  const x = -(end.y - start.y) / length;
  const y = (end.x - start.x) / length;
  const side = x * (start.x - middle.x) + y * (start.y - middle.y) < 0 ? -1 : 1;
  return { x: side * x, y: side * y };
}

/** Place and alignment of a text at a distance from a point, so that it grows away from it. */
function beside(at: Pixel, direction: { x: number; y: number }, distance: number) {
  const { x, y } = direction;
  return {
    x: at.x + distance * x,
    y: at.y + distance * y,
    align: x > 0.5 ? 'left' : x < -0.5 ? 'right' : 'center',
    baseline: y > 0.7 ? 'top' : y < -0.7 ? 'bottom' : 'middle',
  } as const;
}
