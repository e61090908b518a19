import { decibels } from '../elementary/elementary.ts';
import { formatNumber, formatQuantity } from '../elementary/quantity.ts';
import { type Chart, chartSvg } from '../report/svg.ts';
import type { Scenario, Source } from '../scenario/model.ts';
import { shortestWavelength } from '../scenario/shortest.ts';
import { h } from './dom.ts';

const SAMPLES = 360;
const LINES = 90;

/** dB below its peak that a preview shows of a spectrum. */
const DEPTH = -80;

/** |ω W(ω)| at frequencies up to `highest`: of w′, sampled over the window; a preview, so the host's functions do. */
function radiatedSpectrum({ waveform }: Source, duration: number, highest: number): [number, number][] {
  const step = duration / SAMPLES;
  const slopes = Float64Array.from({ length: SAMPLES }, (_, n) => waveform.slope((n + 0.5) * step));
  return Array.from({ length: LINES }, (_, k) => {
    const frequency = ((k + 0.5) / LINES) * highest;
    let [re, im] = [0, 0];
    for (let n = 0; n < SAMPLES; n++) {
      const phase = 2 * Math.PI * frequency * (n + 0.5) * step;
      re += slopes[n]! * Math.cos(phase);
      im += slopes[n]! * Math.sin(phase);
    }
    return [frequency, Math.hypot(re, im)];
  });
}

/** What a source's current looks like in time and by frequency, and how finely the grid resolves it. */
export function waveformPreview(scenario: Scenario, source: Source): HTMLElement {
  const { duration } = scenario;
  const { waveform, name } = source;
  const { frequency, wavelength, cells } = shortestWavelength(scenario);
  const size = { width: 290, height: 170 };
  const points = Array.from({ length: SAMPLES + 1 }, (_, n) => {
    const t = (n / SAMPLES) * duration;
    return [t, waveform.value(t)] as const;
  });
  const values = points.map(([, value]) => value);
  const inTime: Chart = {
    title: `Current of ${name}`,
    description: 'The current at the source’s first point against time.',
    x: { label: 'time', unit: 's', scale: 'linear', domain: [0, duration] },
    y: {
      label: 'w(t)',
      unit: 'A',
      scale: 'linear',
      domain: [Math.min(0, ...values) * 1.06, Math.max(...values, 0) * 1.06 || waveform.peak],
    },
    series: [{ name: 'w', colour: 'ink', points }],
  };
  const highest = frequency * 1.5;
  const spectrum = radiatedSpectrum(source, duration, highest);
  const peak = Math.max(...spectrum.map(([, size]) => size));
  const byFrequency: Chart = {
    title: 'What radiates: |ω W|',
    description: 'Spectrum of the current’s rate of change, in decibels of its peak.',
    x: { label: 'frequency', unit: 'Hz', scale: 'linear', domain: [0, highest] },
    y: { label: 'dB of peak', unit: '', scale: 'linear', domain: [DEPTH, 5] },
    series: [
      {
        name: '|ω W|',
        colour: 'ink',
        points: spectrum.map(([f, size]) => [f, Math.max(DEPTH, decibels(size / peak))] as const),
      },
    ],
    marks: [{ axis: 'x', at: frequency, label: `−40 dB: ${formatQuantity(frequency, 'Hz', 2)}` }],
  };
  const figure = (chart: Chart) => {
    const element = h('figure', {});
    element.innerHTML = chartSvg(chart, size).text;
    return element;
  };
  return h(
    'div',
    { className: 'preview' },
    figure(inTime),
    figure(byFrequency),
    h(
      'p',
      {},
      `${formatNumber(cells, 3)} cells per shortest wavelength (${formatQuantity(wavelength, 'm')} at ${formatQuantity(frequency, 'Hz', 2)}, −40 dB of what radiates). Ten or more are usual.`,
    ),
  );
}
