import type { Scenario } from './model.ts';

/** −40 dB: the level of |ω I(ω)|, relative to its peak, down to which a frequency is significant. */
export const SIGNIFICANT = 0.01;

/**
 * The shortest significant wavelength: that of the highest frequency at which what any source radiates, |ω I(ω)|, is
 * `SIGNIFICANT` of its peak.
 * @returns frequency (Hz), wavelength (m), and how many cells, along the axis with the largest, make up the wavelength
 */
export function shortestWavelength(scenario: Pick<Scenario, 'sources' | 'medium' | 'grid'>): {
  frequency: number;
  wavelength: number;
  cells: number;
} {
  const frequency = Math.max(...scenario.sources.map(({ waveform }) => waveform.highestFrequency(SIGNIFICANT)));
  const wavelength = scenario.medium.speed / frequency;
  return { frequency, wavelength, cells: wavelength / Math.max(...scenario.grid.cellSize) };
}
