import { NEUTRALS, paint, type Scale, type Theme } from './colour.ts';
import { type ColourBar, displayList, type PaneList } from './display.ts';
import type { Label } from './label.ts';
import { isSeen, Pen } from './pen.ts';
import type { Plane, Scene } from './scene.ts';
import { type Clip, fillFacet, Surface } from './surface.ts';

/** An image into which scenes are drawn, one after another. */
export class Picture {
  readonly surface: Surface;
  private readonly pen: Pen;
  private readonly painted = new WeakMap<Float32Array, Painted>();

  /** @param width, height pixels */
  constructor(width: number, height: number) {
    this.surface = new Surface(width, height);
    this.pen = new Pen(this.surface);
  }

  /**
   * Draws a scene over everything before. Planes are coloured only when their values, scale or the theme changed.
   * @returns the texts, which are the caller's to draw
   */
  draw(scene: Scene): Label[] {
    const neutrals = NEUTRALS[scene.theme];
    this.surface.clear(neutrals.background);
    return displayList(scene, (plane) => this.colours(plane, scene.theme)).flatMap((list) =>
      this.drawPane(list, neutrals.background, scene.pixelRatio),
    );
  }

  private drawPane(list: PaneList, background: number, pixelRatio: number): Label[] {
    const { surface, pen } = this;
    for (const { clip, facets } of list.layers)
      for (const { map, texture } of facets) fillFacet(surface, surface.clip(clip), map, texture);
    const clip = surface.clip(list.view);
    for (const stroke of list.strokes) pen.stroke(stroke, clip);
    for (const { x, y, z, radius, colour } of list.markers)
      if (isSeen(surface, clip, x, y, z)) {
        pen.ring(x, y, 0, radius + 1.5 * pixelRatio, background, 1, clip);
        pen.ring(x, y, 0, radius, colour, 1, clip);
      } else pen.ring(x, y, radius - 1.5 * pixelRatio, radius, colour, 0.8, clip);
    if (list.bar) this.drawBar(list.bar);
    return list.labels.map(({ label, anchor }) =>
      anchor ? { ...label, hidden: !isSeen(surface, clip, anchor.x, anchor.y, anchor.z) } : label,
    );
  }

  private drawBar({ rectangle, colours }: ColourBar): void {
    const { surface } = this;
    const { left, right, top, bottom }: Clip = surface.clip(rectangle);
    for (let y = top; y < bottom; y++)
      for (let x = left; x < right; x++) {
        const place = Math.floor(((x + 0.5 - rectangle.x) / rectangle.width) * colours.length);
        surface.pixels[y * surface.width + x] = colours[place]!;
      }
  }

  private colours(plane: Plane, theme: Theme): Uint32Array {
    const { values, scale, revision } = plane;
    const known = this.painted.get(values);
    if (known && known.scale === scale && known.theme === theme && known.revision === revision) return known.colours;
    // another plane of this scene may show the same values on another scale: its colours are not overwritten
    const colours = known?.scale === scale ? known.colours : new Uint32Array(values.length);
    paint(values, scale, theme, colours);
    this.painted.set(values, { scale, theme, revision, colours });
    return colours;
  }
}

interface Painted {
  readonly scale: Scale;
  readonly theme: Theme;
  readonly revision: number | undefined;
  readonly colours: Uint32Array;
}
