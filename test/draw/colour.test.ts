import { converter, wcagContrast } from 'culori';
import { describe, expect, test } from 'vitest';
import {
  colourOf,
  type DecibelScale,
  type KindScale,
  MAPS,
  NEUTRALS,
  paint,
  type SignedScale,
  type Theme,
  toBytes,
  valueAt,
} from '../../src/draw/colour.ts';

type Rgb = readonly [number, number, number];

const toOklab = converter('oklab');
const toLinear = converter('lrgb');
const fromLinear = converter('rgb');
const THEMES: readonly Theme[] = ['light', 'dark'];

const rgbOf = (colour: number) => toBytes(colour).slice(0, 3) as unknown as Rgb;
const oklab = ([r, g, b]: Rgb) => toOklab({ mode: 'rgb', r: r / 255, g: g / 255, b: b / 255 });
const hex = (colour: number) =>
  `#${rgbOf(colour)
    .map((byte) => byte.toString(16).padStart(2, '0'))
    .join('')}`;

/** What rounding to bytes can do to the lightness: half a byte in each channel, all the same way. */
function lightnessRounding(rgb: Rgb): number {
  return [0, 1, 2].reduce((sum, k) => {
    const moved = (by: number) => oklab(rgb.map((byte, n) => byte + (n === k ? by : 0)) as unknown as Rgb).l;
    return sum + Math.abs(moved(0.5) - moved(-0.5)) / 2;
  }, 0);
}

/**
 * Simulated vision, on linear RGB, full severity: G. M. Machado, M. M. Oliveira, L. A. F. Fernandes, “A
 * Physiologically-based Model for Simulation of Color Vision Deficiency”, IEEE Trans. Vis. Comput. Graph. 15 (2009)
 * 1291–1298, the table of matrices that accompanies it.
 */
const VISION: Record<string, readonly (readonly [number, number, number])[]> = {
  normal: [
    [1, 0, 0],
    [0, 1, 0],
    [0, 0, 1],
  ],
  protan: [
    [0.152286, 1.052583, -0.204868],
    [0.114503, 0.786281, 0.099216],
    [-0.003882, -0.048116, 1.051998],
  ],
  deutan: [
    [0.367322, 0.860646, -0.227968],
    [0.280085, 0.672501, 0.047413],
    [-0.01182, 0.04294, 0.968881],
  ],
  tritan: [
    [1.255528, -0.076749, -0.178779],
    [-0.078411, 0.930809, 0.147602],
    [0.004733, 0.691367, 0.3039],
  ],
};

function seen(colour: number, vision: string): Rgb {
  const [R, G, B] = rgbOf(colour);
  const { r, g, b } = toLinear({ mode: 'rgb', r: R / 255, g: G / 255, b: B / 255 });
  const [r2, g2, b2] = VISION[vision]!.map(([fromR, fromG, fromB]) =>
    Math.min(1, Math.max(0, fromR * r + fromG * g + fromB * b)),
  ) as [number, number, number];
  const shown = fromLinear({ mode: 'lrgb', r: r2, g: g2, b: b2 });
  return [shown.r * 255, shown.g * 255, shown.b * 255];
}

/** Euclidean distance in OKLab; just noticeable is 0.02 (CSS Color Module Level 4, §13.2.1). */
function distance(one: Rgb, other: Rgb): number {
  const [p, q] = [oklab(one), oklab(other)];
  return Math.hypot(p.l - q.l, p.a - q.a, p.b - q.b);
}
const NOTICEABLE = 0.02;

describe.each(THEMES)('colour maps, %s theme', (theme) => {
  const { signed, decibels } = MAPS[theme];

  test('every colour tells its place', () => {
    for (const { table, places } of [signed, decibels]) expect(places.size).toBe(table.length);
    expect(signed.table.length % 2).toBe(1);
  });

  test('the signed map has one lightness slope, the same on both arms', () => {
    const half = (signed.table.length - 1) / 2;
    const zero = oklab(rgbOf(signed.table[half]!));
    const limit = oklab(rgbOf(signed.table[2 * half]!));
    expect(Math.hypot(zero.a, zero.b)).toBeLessThan(1e-3);
    for (let n = 0; n <= half; n++) {
      const expected = zero.l + ((limit.l - zero.l) * n) / half;
      for (const colour of [signed.table[half + n]!, signed.table[half - n]!]) {
        // of this colour, and of the two that the straight line is drawn through
        const rounding = 3 * lightnessRounding(rgbOf(colour));
        expect(Math.abs(oklab(rgbOf(colour)).l - expected)).toBeLessThan(rounding);
      }
    }
  });

  test('the signs stay apart in every kind of colour vision', () => {
    const half = (signed.table.length - 1) / 2;
    const rows = Object.keys(VISION).map((vision) => {
      const apart = (s: number) => {
        const n = Math.round(s * half);
        return distance(seen(signed.table[half + n]!, vision), seen(signed.table[half - n]!, vision));
      };
      return { vision, 0.1: apart(0.1), 0.25: apart(0.25), 0.5: apart(0.5), 1: apart(1) };
    });
    console.table(rows);
    for (const row of rows) {
      expect(row[0.25]).toBeGreaterThan(NOTICEABLE);
      expect(row[0.5]).toBeGreaterThan(row[0.25]);
      expect(row[1]).toBeGreaterThan(5 * NOTICEABLE);
    }
  });

  test('each arm, and the map for errors, is monotone in lightness in every kind of colour vision', () => {
    const half = (signed.table.length - 1) / 2;
    const arms = {
      negative: signed.table.slice(0, half + 1).reverse(),
      positive: signed.table.slice(half),
      errors: decibels.table,
    };
    for (const vision of Object.keys(VISION))
      for (const [name, colours] of Object.entries(arms)) {
        const lightness = Array.from(colours, (colour) => oklab(seen(colour, vision)).l);
        const turn = Math.sign(lightness.at(-1)! - lightness[0]!);
        // a tenth of the map is far above the rounding of its colours
        const stride = Math.floor(colours.length / 10);
        for (let n = 0; n + stride < colours.length; n++)
          expect(turn * (lightness[n + stride]! - lightness[n]!), `${vision}, ${name}, ${n}`).toBeGreaterThan(0);
      }
  });

  test('text has a contrast of 4.5; lines of 3, on the page and on a field of zero', () => {
    const { background, ink, muted, line } = NEUTRALS[theme];
    const zero = signed.table[(signed.table.length - 1) / 2]!;
    for (const text of [ink, muted]) expect(wcagContrast(hex(text), hex(background))).toBeGreaterThan(4.5);
    for (const ground of [background, zero]) expect(wcagContrast(hex(line), hex(ground))).toBeGreaterThan(3);
  });
});

describe('scales', () => {
  const signed: SignedScale = { kind: 'signed', limit: 12.5, label: 'Ez, V/m' };
  const errors: DecibelScale = { kind: 'decibels', reference: 4, from: -80, to: 0, label: 'error, dB' };

  test('a colour gives back its value to half a step', () => {
    for (const theme of THEMES) {
      const step = (2 * signed.limit) / (MAPS[theme].signed.table.length - 1);
      for (let n = 0; n <= 1000; n++) {
        const value = signed.limit * (n / 500 - 1);
        expect(Math.abs(valueAt(colourOf(value, signed, theme), signed, theme)! - value)).toBeLessThanOrEqual(
          (step / 2) * (1 + 1e-12),
        );
      }
      const stepInDecibels = 80 / (MAPS[theme].decibels.table.length - 1);
      for (let n = 0; n <= 1000; n++) {
        const dB = -80 + (80 * n) / 1000;
        const value = errors.reference * 10 ** (dB / 20);
        const back = valueAt(colourOf(-value, errors, theme), errors, theme)!;
        expect(Math.abs(back - dB)).toBeLessThanOrEqual((stepInDecibels / 2) * (1 + 1e-9));
      }
    }
  });

  test('beyond the ends: the ends; NaN is transparent; zero error is the least', () => {
    expect(valueAt(colourOf(1e9, signed, 'light'), signed, 'light')).toBe(12.5);
    expect(valueAt(colourOf(Number.NEGATIVE_INFINITY, signed, 'light'), signed, 'light')).toBe(-12.5);
    expect(valueAt(colourOf(0, errors, 'light'), errors, 'light')).toBe(-80);
    expect(colourOf(Number.NaN, signed, 'dark')).toBe(0);
    expect(valueAt(NEUTRALS.dark.background, signed, 'dark')).toBeUndefined();
  });

  test('kinds have their own colours', () => {
    const kinds = ['boundary', 'lattice', 'gridding'].map((name, n) => ({ name, colour: 0xff000000 + n }));
    for (const some of [kinds, kinds.slice(0, 1)]) {
      const scale: KindScale = { kind: 'kinds', kinds: some, label: 'largest part' };
      const colours = new Uint32Array(some.length + 1);
      paint([...some.keys(), Number.NaN], scale, 'light', colours);
      expect(Array.from(colours)).toEqual([...some.map(({ colour }) => colour), 0]);
      some.forEach(({ colour }, n) => {
        expect(valueAt(colour, scale, 'light')).toBe(n);
      });
      expect(valueAt(1, scale, 'light')).toBeUndefined();
    }
  });

  test('painting many values is colouring each', () => {
    const values = Float32Array.from({ length: 4001 }, (_, n) => (n / 2000 - 1) * 20);
    values[7] = Number.NaN;
    for (const scale of [signed, errors])
      for (const theme of THEMES) {
        const colours = new Uint32Array(values.length);
        paint(values, scale, theme, colours);
        expect(colours).toEqual(Uint32Array.from(values, (value) => colourOf(value, scale, theme)));
      }
  });
});
