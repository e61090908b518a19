import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { decode, decodeApng } from 'fast-png';
import opentype from 'opentype.js';
import { describe, expect, test } from 'vitest';
import { packed, toBytes } from '../../src/draw/colour.ts';
import type { Label } from '../../src/draw/label.ts';
import { animatedPng, png } from '../../src/draw/png.ts';
import { Surface } from '../../src/draw/surface.ts';
import { FONT_FILES, TEXT_SIZES, TextPainter } from '../../src/draw/text.ts';
import { Chance } from './random.ts';

function noise(seed: number): Surface {
  const chance = new Chance(seed);
  const surface = new Surface(37, 23);
  for (let n = 0; n < surface.pixels.length; n++)
    surface.pixels[n] = (0xff000000 | Math.floor(chance.between(0, 0x1000000))) >>> 0;
  return surface;
}

const rgb = (surface: Surface) => Array.from(surface.pixels, (pixel) => toBytes(pixel).slice(0, 3)).flat();

describe('files', () => {
  test('a PNG gives back every pixel', () => {
    const surface = noise(1);
    const image = decode(png(surface), { checkCrc: true });
    expect([image.width, image.height, image.channels, image.depth]).toEqual([37, 23, 3, 8]);
    expect(Array.from(image.data)).toEqual(rgb(surface));
  });

  test('an animated PNG gives back every picture, and a plain reader its first', () => {
    const surfaces = [1, 2, 3].map(noise);
    const file = animatedPng(surfaces.map(png), 25);
    const animation = decodeApng(file, { checkCrc: true });
    expect([animation.numberOfFrames, animation.numberOfPlays]).toEqual([3, 0]);
    animation.frames.forEach((frame, n) => {
      expect(frame.delayNumber / frame.delayDenominator).toBe(1 / 25);
      expect(Array.from(frame.data)).toEqual(rgb(surfaces[n]!));
    });
    expect(Array.from(decode(file).data)).toEqual(rgb(surfaces[0]!));
  });

  test('an animation of nothing is refused', () => {
    expect(() => animatedPng([], 25)).toThrow('0 pictures');
  });
});

describe('text', () => {
  const require = createRequire(import.meta.url);
  const files = FONT_FILES.map((name) => {
    const bytes = readFileSync(require.resolve(name));
    return bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.byteLength) as ArrayBuffer;
  });
  const painter = new TextPainter(files);
  const label: Label = {
    ...{ pane: 0, x: 60, y: 30, text: '', align: 'center', baseline: 'middle', role: 'title', hidden: false },
  };
  const drawn = (changes: Partial<Label>) => {
    const surface = new Surface(120, 60);
    surface.clear(packed('#ffffff'));
    painter.draw(surface, [{ ...label, ...changes }], 'light', 2);
    return surface;
  };
  const inkOf = (surface: Surface) => {
    const full = 255 - toBytes(packed('#1b1d21'))[0];
    return surface.pixels.reduce((sum, pixel) => sum + (255 - toBytes(pixel)[0]) / full, 0);
  };

  test('covers the area of its outlines', () => {
    const font = opentype.parse(files[0]!);
    for (const text of ['8', 'm', 'Q', 'µ', '−']) {
      let area = 0;
      let [x, y] = [0, 0];
      for (const command of font.charToGlyph(text).getPath(0, 0, 2 * TEXT_SIZES.title).commands) {
        if (command.type === 'Z') continue;
        // Green's theorem with each curve finely divided; every contour of this font is explicitly closed
        const steps = command.type === 'Q' ? 200 : 1;
        const [fromX, fromY] = [x, y];
        for (let n = 1; n <= steps && command.type !== 'M'; n++) {
          const t = n / steps;
          const [toX, toY] =
            command.type === 'Q'
              ? [
                  (1 - t) ** 2 * fromX + 2 * t * (1 - t) * command.x1 + t * t * command.x,
                  (1 - t) ** 2 * fromY + 2 * t * (1 - t) * command.y1 + t * t * command.y,
                ]
              : [command.x, command.y];
          area += (x * toY - toX * y) / 2;
          [x, y] = [toX, toY];
        }
        [x, y] = [command.x, command.y];
      }
      const ink = inkOf(drawn({ text }));
      // four chords a curve, and blending truncates at up to 1/256 for each pixel of the rim
      expect(Math.abs(ink / Math.abs(area) - 1), text).toBeLessThan(0.02);
    }
  });

  test('stands where it is told', () => {
    const columns = (surface: Surface) => {
      const inked = Array.from(surface.pixels.keys()).filter((n) => surface.pixels[n] !== packed('#ffffff'));
      return [Math.min(...inked.map((n) => n % 120)), Math.max(...inked.map((n) => n % 120))] as const;
    };
    expect(columns(drawn({ text: 'nnn', align: 'left' }))[0]).toBeGreaterThanOrEqual(60);
    expect(columns(drawn({ text: 'nnn', align: 'right' }))[1]).toBeLessThanOrEqual(60);
    const [left, right] = columns(drawn({ text: 'nnn' }));
    expect(Math.abs((left + right + 1) / 2 - 60)).toBeLessThan(1.5);
  });

  test('at the border, and in characters no font has, does no harm', () => {
    expect(inkOf(drawn({ text: 'mmmm', x: 0, y: 0 }))).toBeGreaterThan(0);
    expect(inkOf(drawn({ text: '漢' }))).toBe(0);
    expect(inkOf(drawn({ text: 'λ' }))).toBeGreaterThan(0);
  });
});
