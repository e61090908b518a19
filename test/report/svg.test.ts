import { describe, expect, it } from 'vitest';
import { markup } from '../../src/report/markup.ts';
import { type Chart, chartLayout, chartSvg } from '../../src/report/svg.ts';
import { printable } from '../../src/scenario/text.ts';

const chart: Chart = {
  title: 'Ez',
  description: 'a line',
  x: { label: 'time', unit: 's', scale: 'linear', domain: [0, 3e-9] },
  y: { label: 'Ez', unit: 'V/m', scale: 'linear', domain: [-1, 1] },
  series: [
    {
      name: 'exact',
      colour: 'exact',
      points: [
        [0, -1],
        [1.5e-9, 0],
        [3e-9, 1],
      ],
    },
  ],
};
const ticks = (svg: string): string[] =>
  [...svg.matchAll(/<text x="[^"]*" y="[^"]*" text-anchor="[^"]*">([^<]*)</g)].map(([, t]) => t!);

describe('charts', () => {
  it('put points where the axes say: lower left, middle, upper right of the plot', () => {
    expect(chartSvg(chart).text).toContain('d="M62,238L304,146L546,54"');
  });

  it('label a linear axis in a suitable prefix', () => {
    const { text } = chartSvg(chart);
    expect(text).toContain('>time (ns)<');
    expect(ticks(text)).toEqual(expect.arrayContaining(['0', '0.5', '3', '−1', '1']));
  });

  it('label an axis at the places that are asked for, in whatever order they come', () => {
    const x = { label: 'h', unit: '', scale: 'log' as const, domain: [4, 12] as const, ticks: [10, 7, 5] };
    expect(ticks(chartSvg({ ...chart, x, series: [] }).text).filter((t) => ['5', '7', '10'].includes(t))).toEqual([
      '5',
      '7',
      '10',
    ]);
  });

  it('label a logarithmic axis by 1, 2, 5 over a short range and by decades over a long one', () => {
    const over = (domain: [number, number]) =>
      ticks(chartSvg({ ...chart, x: { label: 'r', unit: '', scale: 'log', domain }, series: [] }).text).filter(
        (t) => !t.startsWith('−') && t !== '0.5' && t !== 'r',
      );
    expect(over([1, 30])).toEqual(expect.arrayContaining(['1', '2', '5', '10', '20']));
    const decades = over([0.01, 100]);
    expect(decades).toEqual(expect.arrayContaining(['0.01', '0.1', '1', '10', '100']));
    expect(decades).not.toContain('2');
  });

  it('halves a logarithmic decade at √10', () => {
    const { text } = chartSvg({
      ...chart,
      x: { label: 'r', unit: 'm', scale: 'log', domain: [1, 10] },
      series: [
        {
          name: 'e',
          colour: 'ink',
          points: [
            [1, -1],
            [Math.sqrt(10), 0],
          ],
        },
      ],
    });
    expect(text).toContain('d="M62,238L304,146"');
  });

  it('tell grid from exact by dash as well as colour, and red means outside only', () => {
    const { text } = chartSvg({
      ...chart,
      series: [
        {
          name: 'grid solver',
          colour: 'grid',
          dashed: true,
          points: [
            [0, 0],
            [1e-9, 0],
          ],
        },
        {
          name: 'E',
          colour: 'ink',
          points: [
            [0, 0],
            [1e-9, 0.5],
          ],
          dots: ([, y]) => (y > 0.1 ? 'outside' : 'within'),
        },
      ],
    });
    expect(text).toContain('class="series dashed" stroke="var(--grid)"');
    expect(text.match(/var\(--outside\)/g)).toHaveLength(1);
  });

  it('keep peaks when they thin out long signals', () => {
    const points = Array.from({ length: 50_000 }, (_, n) => [(n / 50_000) * 3e-9, n === 31_234 ? 1 : 0] as const);
    const { text } = chartSvg({ ...chart, series: [{ name: 'spike', colour: 'exact', points }] });
    const path = text.match(/ d="([^"]*)"/)![1]!;
    expect(path).toContain(',54L');
    expect(path.length).toBeLessThan(40_000);
  });

  it('set labels of marks where neither a line nor another label runs', () => {
    const size = { width: 300, height: 200 };
    const rising: Chart = {
      ...chart,
      series: [
        {
          name: 'w',
          colour: 'ink',
          points: [
            [0, 1],
            [2.2e-9, 1],
            [3e-9, -1],
          ],
        },
      ],
      marks: [
        { axis: 'x', at: 2e-9, label: 'here' },
        { axis: 'x', at: 2.1e-9, label: 'and there' },
      ],
    };
    const { x, y, right, bottom } = chartLayout(rising, size);
    const labels = [
      ...chartSvg(rising, size).text.matchAll(/mark-label" x="([\d.]+)" y="([\d.]+)" text-anchor="(\w+)">([^<]*)</g),
    ];
    expect(labels.map(([, , , , text]) => text)).toEqual(['here', 'and there']);
    const rooms = labels.map(([, px, py, anchor, text]) => {
      const from = anchor === 'end' ? Number(px) - 6.4 * text!.length : Number(px);
      return { from, to: from + 6.4 * text!.length, high: Number(py) - 11, low: Number(py) };
    });
    for (const { from, to, high, low } of rooms) {
      expect(to).toBeLessThanOrEqual(right + 10);
      expect(low).toBeLessThanOrEqual(bottom);
      // the level part of the line, then its fall
      expect(from < x(2.2e-9) && high < y(1)).toBe(false);
      for (const t of [2.2e-9, 2.4e-9, 2.6e-9, 2.8e-9, 3e-9]) {
        const at = y(1 - (2 * (t - 2.2e-9)) / 0.8e-9);
        expect(x(t) > from && x(t) < to && at > high && at < low).toBe(false);
      }
    }
    const [one, two] = rooms;
    expect(one!.from < two!.to && two!.from < one!.to && one!.high < two!.low && two!.high < one!.low).toBe(false);
  });

  it('leave out lengths along x that would run into one another', () => {
    const crowded: Chart = {
      ...chart,
      x: { label: 'r', unit: 'm', scale: 'log', domain: [1e-2, 3e-1], format: (r) => `${Math.round(r * 1000)} mm` },
      series: [],
    };
    const { text } = chartSvg(crowded, { width: 220, height: 200 });
    const shown = [...text.matchAll(/x="([\d.]+)" y="175" text-anchor="middle">([^<]*)</g)];
    expect(shown.length).toBeGreaterThan(1);
    shown.slice(1).forEach(([, px, word], n) => {
      const [, before, last] = shown[n]!;
      expect(Number(px) - Number(before)).toBeGreaterThan(3.2 * (word!.length + last!.length));
    });
  });

  it('escape what they are given', () => {
    const { text } = chartSvg({ ...chart, title: '<b>&"' });
    expect(text).toContain('<title>&lt;b&gt;&amp;&quot;</title>');
  });
});

describe('markup', () => {
  it('escapes strings, not markup, in lists too; null is nothing', () => {
    expect(markup`<p>${['<', markup`<b>${"'"}</b>`]}${null}${3}</p>`.text).toBe('<p>&lt;<b>&#39;</b>3</p>');
  });

  it('shows controls and writing marks by their codes, and keeps line breaks', () => {
    expect(printable('a\u0000\u001b\u009b\u2066é中')).toBe('a\\u{0}\\u{1b}\\u{9b}\\u{2066}é中');
    expect(markup`${'a\nb\r'}`.text).toBe('a\nb\\u{d}');
  });
});
