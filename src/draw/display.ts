import { axes } from './axes.ts';
import { barOf, NEUTRALS, type Scale } from './colour.ts';
import { crossings, planeOutline } from './furniture.ts';
import { type ImageLabel, type Label, shortNumber } from './label.ts';
import { GHOST, type ImageStroke } from './pen.ts';
import {
  contains,
  type FacetMap,
  facetMap,
  type Projection,
  pixelOf,
  projectionOf,
  type Rectangle,
} from './projection.ts';
import type { Marker, Pane, Plane, Scene, Stroke } from './scene.ts';
import type { Texture } from './surface.ts';

/** A pane as the rasteriser draws it: everything in image pixels, nothing left to decide but what hides what. */
export interface PaneList {
  readonly view: Rectangle;
  readonly layers: readonly { readonly clip: Rectangle; readonly facets: readonly ImageFacet[] }[];
  readonly strokes: readonly ImageStroke[];
  readonly markers: readonly ImageMarker[];
  readonly bar?: ColourBar | undefined;
  readonly labels: readonly ImageLabel[];
}

export interface ImageFacet {
  readonly map: FacetMap;
  readonly texture: Texture;
}

export interface ImageMarker {
  readonly x: number;
  readonly y: number;
  readonly z: number;
  readonly radius: number;
  readonly colour: number;
}

export interface ColourBar {
  readonly rectangle: Rectangle;
  /** from left to right, equally wide */
  readonly colours: ArrayLike<number>;
}

const TITLE_HEIGHT = 30;
const BAR_HEIGHT = 44;

/** The part of a pane that shows space: its area without the title's strip and the colour bar's. */
export function viewOf({ area, scale, barRoom }: Pane, pixelRatio: number): Rectangle {
  const above = TITLE_HEIGHT * pixelRatio;
  const below = scale || barRoom ? BAR_HEIGHT * pixelRatio : 0;
  return { x: area.x, y: area.y + above, width: area.width, height: area.height - above - below };
}

/**
 * Projects a scene.
 * @param colours the colours of a plane's values, packed
 */
export function displayList(scene: Scene, colours: (plane: Plane) => Uint32Array): PaneList[] {
  return scene.panes.map((pane, n) => paneList(scene, pane, n, colours));
}

function paneList(scene: Scene, pane: Pane, n: number, colours: (plane: Plane) => Uint32Array): PaneList {
  const { theme, pixelRatio } = scene;
  const neutrals = NEUTRALS[theme];
  const view = viewOf(pane, pixelRatio);
  const projection = projectionOf(pane.camera, view);
  const frame = pane.axes ? axes(pane.axes, projection, neutrals, pixelRatio, n) : { strokes: [], labels: [] };
  const rims = [...pane.planes.map((plane) => planeOutline(plane, neutrals)), crossings(pane.planes, neutrals)];
  const strokes = [...rims, ...pane.strokes].map((stroke) => imageStroke(stroke, projection, pixelRatio));
  const divider = pane.overlay ? [dividerStroke(view, dividerOf(pane, view), neutrals.ink, pixelRatio)] : [];
  const named = imageMarkers(pane.markers, projection, pixelRatio, n);
  const bar = pane.scale && colourBar(pane.scale, scene, pane.area, n);
  const own = [titleLabel(pane, pixelRatio, n), ...(bar?.labels ?? [])];
  return {
    view,
    layers: layersOf(pane, projection, colours),
    strokes: [...frame.strokes, ...strokes, ...divider],
    markers: named.markers,
    bar,
    labels: [...frame.labels, ...named.labels, ...own.map((label) => ({ label }))],
  };
}

/** Where the divider of a pane with an overlay stands, image pixels; the right end of the view without one. */
export function dividerOf({ overlay }: Pane, view: Rectangle): number {
  return view.x + Math.round(view.width * (overlay?.divider ?? 1));
}

/** The planes on the left of the divider, and those on its right; planes seen edge-on are left out. */
function layersOf(pane: Pane, projection: Projection, colours: (plane: Plane) => Uint32Array): PaneList['layers'] {
  const { view } = projection;
  const divider = dividerOf(pane, view);
  const facets = (planes: readonly Plane[]) =>
    planes.flatMap((plane) => {
      const map = facetMap(projection, plane);
      return map ? [{ map, texture: { nu: plane.nu, nv: plane.nv, colours: colours(plane) } }] : [];
    });
  const left = { clip: { ...view, width: divider - view.x }, facets: facets(pane.planes) };
  if (!pane.overlay) return [left];
  const right = { ...view, x: divider, width: view.x + view.width - divider };
  return [left, { clip: right, facets: facets(pane.overlay.planes) }];
}

/** The markers that lie in the view, with their names beside them. */
function imageMarkers(markers: readonly Marker[], projection: Projection, pixelRatio: number, pane: number) {
  const radius = 4.5 * pixelRatio;
  const seen = markers.flatMap(({ at, name, colour }) => {
    const anchor = pixelOf(projection, at);
    return anchor && contains(projection.view, anchor.x, anchor.y) ? [{ anchor, name, colour }] : [];
  });
  const style = { pane, align: 'left', baseline: 'middle', role: 'name', hidden: false } as const;
  return {
    markers: seen.map(({ anchor, colour }): ImageMarker => ({ ...anchor, radius, colour })),
    labels: seen.map(({ anchor, name }): ImageLabel => {
      const label = { ...style, x: anchor.x + radius + 4 * pixelRatio, y: anchor.y, text: name };
      return { label, anchor };
    }),
  };
}

function titleLabel({ area, title }: Pane, pixelRatio: number, pane: number): Label {
  const place = { x: area.x + 10 * pixelRatio, y: area.y + (TITLE_HEIGHT / 2) * pixelRatio };
  return { ...place, pane, text: title, align: 'left', baseline: 'middle', role: 'title', hidden: false };
}

/** A stroke in the image, cut at the near plane, where a line would otherwise come back from behind the eye. */
export function imageStroke(stroke: Stroke, { rows }: Projection, pixelRatio: number): ImageStroke {
  const { points, form, colour, width, dash, ghost = GHOST } = stroke;
  const count = points.length / 3;
  const step = form === 'line' ? 1 : 2;
  const most = Math.max(0, form === 'line' ? count - 1 : count / 2);
  const segments = new Float64Array(6 * most);
  const colours = new Uint32Array(2 * most);
  const row = (r: number, k: number) =>
    rows[r]! * points[k]! + rows[r + 1]! * points[k + 1]! + rows[r + 2]! * points[k + 2]! + rows[r + 3]!;
  let drawn = 0;
  for (let n = 0; n + 1 < count; n += step) {
    const [from, to] = [3 * n, 3 * n + 3];
    const [x0, y0, z0, w0] = [row(0, from), row(4, from), row(8, from), row(12, from)];
    const [x1, y1, z1, w1] = [row(0, to), row(4, to), row(8, to), row(12, to)];
    // beyond the near plane z·w + w ≥ 0, linear along the segment
    const before = z0 + w0;
    const after = z1 + w1;
    if (before <= 0 && after <= 0) continue;
    const cut = before / (before - after);
    const put = (t: number, at: number) => {
      const w = w0 + t * (w1 - w0);
      segments[at] = (x0 + t * (x1 - x0)) / w;
      segments[at + 1] = (y0 + t * (y1 - y0)) / w;
      segments[at + 2] = (z0 + t * (z1 - z0)) / w;
    };
    put(before > 0 ? 0 : cut, 6 * drawn);
    put(after > 0 ? 1 : cut, 6 * drawn + 3);
    colours[2 * drawn] = colourAt(colour, n);
    colours[2 * drawn + 1] = colourAt(colour, n + 1);
    drawn++;
  }
  return {
    segments: segments.subarray(0, 6 * drawn),
    colours: colours.subarray(0, 2 * drawn),
    width: width * pixelRatio,
    dash: dash && [dash[0] * pixelRatio, dash[1] * pixelRatio],
    ghost,
  };
}

function colourAt(colour: number | Uint32Array, vertex: number): number {
  return typeof colour === 'number' ? colour : colour[vertex]!;
}

function dividerStroke(view: Rectangle, x: number, colour: number, pixelRatio: number): ImageStroke {
  return {
    segments: Float64Array.of(x, view.y, -1, x, view.y + view.height, -1),
    colours: Uint32Array.of(colour, colour),
    width: 2 * pixelRatio,
    ghost: 1,
  };
}

/** The colour bar of a scale with its ends, or its kinds, and its name, in the strip below the view. */
function colourBar(scale: Scale, scene: Scene, area: Rectangle, pane: number): ColourBar & { labels: Label[] } {
  const { theme, pixelRatio } = scene;
  const gap = 6 * pixelRatio;
  const share = scale.kind === 'kinds' ? 0.8 : 0.5;
  const width = Math.round(Math.min((scale.kind === 'kinds' ? 320 : 200) * pixelRatio, area.width * share));
  const height = Math.round(10 * pixelRatio);
  const x = Math.round(area.x + (area.width - width) / 2);
  const y = Math.round(area.y + area.height - BAR_HEIGHT * pixelRatio + gap);
  const text = { pane, role: 'scale', hidden: false } as const;
  const below = { ...text, y: y + height + gap, align: 'center', baseline: 'top' } as const;
  const beside = { ...text, y: y + height / 2, baseline: 'middle' } as const;
  const { colours, ends } = barOf(scale, theme);
  const [from, to] = ends;
  const labels: Label[] =
    scale.kind === 'kinds'
      ? scale.kinds.map(({ name }, n) => ({ ...below, x: x + (width * (n + 0.5)) / scale.kinds.length, text: name }))
      : [
          { ...beside, x: x - gap, text: shortNumber(from), align: 'right' },
          { ...beside, x: x + width + gap, text: shortNumber(to), align: 'left' },
          { ...below, x: x + width / 2, text: scale.label },
        ];
  return { rectangle: { x, y, width, height }, colours, labels };
}
