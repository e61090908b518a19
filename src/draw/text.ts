import type { Font, Glyph } from 'opentype.js';
import { parse } from 'opentype.js/dist/opentype.mjs';
import { blend, NEUTRALS, type Theme } from './colour.ts';
import type { Label } from './label.ts';
import type { Surface } from './surface.ts';

/**
 * Text in images where no canvas draws it. The outlines come from a font file (TrueType, OpenType or WOFF); the coverage
 * of a pixel is the part of it inside them.
 */

/** The font that comes with the project, as package specifiers: resolve and read them, and give the bytes below. */
export const FONT_FILES = [
  '@fontsource/inter/files/inter-latin-500-normal.woff',
  '@fontsource/inter/files/inter-greek-500-normal.woff',
] as const;

/** CSS pixels, by what the text is */
export const TEXT_SIZES: Readonly<Record<Label['role'], number>> = { title: 14, name: 12, tick: 11, scale: 11 };

/** Draws labels into a surface. */
export class TextPainter {
  private readonly fonts: readonly Font[];

  /** @param files bytes of font files; a character is taken from the first that has it, and left out where none has */
  constructor(files: readonly ArrayBuffer[]) {
    this.fonts = files.map((bytes) => parse(bytes));
  }

  /** Draws all labels of a scene; those of hidden points faintly. What may lie over the field is set off by a thin halo. */
  draw(surface: Surface, labels: readonly Label[], theme: Theme, pixelRatio: number): void {
    const { ink, muted, background } = NEUTRALS[theme];
    for (const label of labels) {
      const size = TEXT_SIZES[label.role] * pixelRatio;
      const { glyphs, width } = this.set(label.text, size);
      const left = label.x - width * { left: 0, center: 0.5, right: 1 }[label.align];
      const base = label.y + size * { top: 0.73, middle: 0.36, bottom: 0 }[label.baseline];
      const weight = label.hidden ? 0.5 : 1;
      const quiet = label.role === 'tick' || label.role === 'scale';
      const masks = glyphs.map(({ x, edges }) => coverageOf(edges, left + x, base));
      const step = Math.max(1, Math.round(pixelRatio));
      for (const [dx, dy] of label.role === 'title' ? [] : AROUND)
        for (const mask of masks) blendMask(surface, mask, dx * step, dy * step, background, weight / 2);
      for (const mask of masks) blendMask(surface, mask, 0, 0, quiet ? muted : ink, weight);
    }
  }

  /** The glyphs of a text whose baseline starts at the origin, and its width, pixels. */
  private set(text: string, size: number): { glyphs: { x: number; edges: readonly Edge[] }[]; width: number } {
    const glyphs: { x: number; edges: readonly Edge[] }[] = [];
    let x = 0;
    let before: Glyph | undefined;
    for (const character of text) {
      const font = this.fonts.find((one) => one.charToGlyphIndex(character) > 0);
      if (!font) continue;
      const glyph = font.charToGlyph(character);
      const scale = size / font.unitsPerEm;
      if (before) x += scale * font.getKerningValue(before, glyph);
      glyphs.push({ x, edges: edgesOf(glyph.getPath(0, 0, size).commands) });
      x += scale * (glyph.advanceWidth ?? 0);
      before = glyph;
    }
    return { glyphs, width: x };
  }
}

type Edge = readonly [x0: number, y0: number, x1: number, y1: number];

const AROUND = [
  [-1, -1],
  [0, -1],
  [1, -1],
  [-1, 0],
  [1, 0],
  [-1, 1],
  [0, 1],
  [1, 1],
] as const;

/** Straight edges of a path; a curve is four chords, which at sizes of text stay within a twentieth of a pixel. */
function edgesOf(commands: ReturnType<Glyph['getPath']>['commands']): Edge[] {
  const edges: Edge[] = [];
  let [x, y, startX, startY] = [0, 0, 0, 0];
  const lineTo = (toX: number, toY: number) => {
    edges.push([x, y, toX, toY]);
    [x, y] = [toX, toY];
  };
  for (const command of commands) {
    if (command.type === 'M') [x, y, startX, startY] = [command.x, command.y, command.x, command.y];
    else if (command.type === 'L') lineTo(command.x, command.y);
    else if (command.type === 'Z') lineTo(startX, startY);
    else {
      const { x1, y1 } = command;
      const [x2, y2] = command.type === 'C' ? [command.x2, command.y2] : [x1, y1];
      const [fromX, fromY] = [x, y];
      for (let n = 1; n <= 4; n++) {
        const t = n / 4;
        const s = 1 - t;
        // a quadratic curve is the same with its one control point twice, but for the weights
        const [w0, w1, w2, w3] =
          command.type === 'C' ? [s * s * s, 3 * s * s * t, 3 * s * t * t, t * t * t] : [s * s, 2 * s * t, 0, t * t];
        lineTo(w0 * fromX + w1 * x1 + w2 * x2 + w3 * command.x, w0 * fromY + w1 * y1 + w2 * y2 + w3 * command.y);
      }
    }
  }
  return edges;
}

/** Coverage of pixels, 0…1, row by row from (left, top). */
interface Mask {
  readonly left: number;
  readonly top: number;
  readonly width: number;
  readonly coverage: Float32Array;
}

/**
 * Coverage by outlines at an offset. Each edge adds to every pixel it passes the signed area between itself and the pixel's
 * right side, and the rest of its height to the next; the running sum along a row is then the coverage, exactly (Levien
 * 2016, “Inside the fastest font renderer in the world”, from memory). Outlines that overlap wind the same way.
 */
function coverageOf(edges: readonly Edge[], dx: number, dy: number): Mask {
  let [west, north, east, south] = [0, 0, 0, 0];
  for (const [x, y] of edges) {
    west = Math.min(west, x);
    north = Math.min(north, y);
    east = Math.max(east, x);
    south = Math.max(south, y);
  }
  const left = Math.floor(west + dx);
  const top = Math.floor(north + dy);
  const width = Math.ceil(east + dx) - left + 2;
  const height = Math.ceil(south + dy) - top + 1;
  const coverage = new Float32Array(width * height);
  for (const [x0, y0, x1, y1] of edges)
    addEdge(coverage, width, x0 + dx - left, y0 + dy - top, x1 + dx - left, y1 + dy - top);
  for (let row = 0; row < coverage.length; row += width) {
    let sum = 0;
    for (let n = row; n < row + width; n++) {
      sum += coverage[n]!;
      coverage[n] = Math.min(1, Math.abs(sum));
    }
  }
  return { left, top, width, coverage };
}

/** Blends one colour where a mask, moved by whole pixels, covers. */
function blendMask(surface: Surface, mask: Mask, dx: number, dy: number, colour: number, weight: number): void {
  const { left, top, width, coverage } = mask;
  for (let n = 0; n < coverage.length; n++) {
    const x = left + dx + (n % width);
    const y = top + dy + Math.floor(n / width);
    if (coverage[n] === 0 || x < 0 || y < 0 || x >= surface.width || y >= surface.height) continue;
    const k = y * surface.width + x;
    surface.pixels[k] = blend(surface.pixels[k]!, colour, coverage[n]! * weight);
  }
}

/** Adds one edge, pixel by pixel along it. */
function addEdge(area: Float32Array, width: number, x0: number, y0: number, x1: number, y1: number): void {
  if (y0 === y1) return;
  const turn = y0 < y1 ? 1 : -1;
  const [topX, topY, bottomX, bottomY] = y0 < y1 ? [x0, y0, x1, y1] : [x1, y1, x0, y0];
  const slope = (bottomX - topX) / (bottomY - topY);
  for (let row = Math.floor(topY); row < bottomY; row++) {
    const from = Math.max(topY, row);
    const to = Math.min(bottomY, row + 1);
    const [enter, exit] = [topX + (from - topY) * slope, topX + (to - topY) * slope];
    const near = Math.min(enter, exit);
    const far = Math.max(enter, exit);
    for (let column = Math.floor(near); column <= Math.floor(far); column++) {
      const enters = Math.max(near, column);
      const leaves = Math.min(far, column + 1);
      const part = far > near ? (leaves - enters) / (far - near) : 1;
      const rise = turn * (to - from) * part;
      const covered = column + 1 - (enters + leaves) / 2;
      area[row * width + column]! += rise * covered;
      area[row * width + column + 1]! += rise * (1 - covered);
    }
  }
}
