import { predictGridField, predictLatticeError } from '../../src/lattice/predict.ts';
import { predictGridFieldBySpectrum, predictLatticeErrorBySpectrum } from '../../src/lattice/spectral.ts';
import { type CaseSpec, designedField, latticeCase, minus, normOf } from './cases.ts';
import { griddedField, historyOf } from './exactFields.ts';
import { yeeField } from './yeeReference.ts';

/** Predicted over measured error, L2 in time, at one observer. */
export interface Outcome {
  readonly part: 'lattice' | 'lattice + gridding';
  readonly field: 'E' | 'H';
  /** distance in cells */
  readonly cells: number;
  /** measured error relative to the field */
  readonly measured: number;
  /** predicted/measured, time form and spectrum */
  readonly time: number;
  readonly spectrum: number;
  /** what the prediction leaves, relative to the field */
  readonly timeLeft: number;
  readonly spectrumLeft: number;
}

/**
 * Runs Yee's scheme and predicts the same: lattice + gridding against the designed source, and for dipoles, whose edges
 * are few, the lattice alone against their filaments.
 */
export function measure(spec: CaseSpec): { label: string; outcomes: Outcome[] } {
  const c = latticeCase(spec);
  const edges = c.gridded.edges;
  const args = [edges, c.lattice, c.points, c.instants] as const;
  const grid = yeeField(...args);
  const designed = designedField(c);
  const outcomes: Outcome[] = [];
  const judge = (part: Outcome['part'], measured: Float64Array, time: Float64Array, spectrum: Float64Array) => {
    const timeLeft = minus(time, measured);
    const spectrumLeft = minus(spectrum, measured);
    for (let point = 0; point < c.points.count; point++)
      for (const first of [0, 3] as const) {
        const size = (values: Float64Array) => normOf(values, c.instants.count, point, first);
        outcomes.push({
          part,
          field: first === 0 ? 'E' : 'H',
          cells: c.distances[point]!,
          measured: size(measured) / size(designed),
          time: size(time) / size(measured),
          spectrum: size(spectrum) / size(measured),
          timeLeft: size(timeLeft) / size(designed),
          spectrumLeft: size(spectrumLeft) / size(designed),
        });
      }
  };
  judge(
    'lattice + gridding',
    minus(grid, designed),
    minus(predictGridField(...args), designed),
    minus(predictGridFieldBySpectrum(...args), designed),
  );
  if (c.source.type === 'dipole') {
    const filaments = historyOf(griddedField(edges, c.lattice.cellSize, c.lattice.medium), c.points, c.instants);
    judge('lattice', minus(grid, filaments), predictLatticeError(...args), predictLatticeErrorBySpectrum(...args));
  }
  return { label: `${c.label}  ${c.instants.count} steps  ${edges.count} edges`, outcomes };
}

/** Prints a case as a table. */
export function print({ label, outcomes }: { label: string; outcomes: Outcome[] }): void {
  const rows = outcomes.map((o) => ({
    part: o.part,
    field: o.field,
    'cells away': o.cells.toFixed(1),
    'measured, %': (100 * o.measured).toFixed(3),
    'time form': o.time.toFixed(4),
    spectrum: o.spectrum.toFixed(4),
    'time left, %': (100 * o.timeLeft).toFixed(4),
    'spectrum left, %': (100 * o.spectrumLeft).toFixed(4),
  }));
  console.log(label);
  console.table(rows);
}

/** The worst of predicted/measured and its inverse, and the median of what is left. */
export function summary(outcomes: readonly Outcome[], form: 'time' | 'spectrum') {
  const factors = outcomes.map((o) => Math.max(o[form], 1 / o[form])).sort((a, b) => a - b);
  const left = outcomes.map((o) => (form === 'time' ? o.timeLeft : o.spectrumLeft)).sort((a, b) => a - b);
  return {
    outcomes: outcomes.length,
    'median factor': factors[factors.length >> 1]!,
    'worst factor': factors.at(-1)!,
    'median left, %': 100 * left[left.length >> 1]!,
    'most left, %': 100 * left.at(-1)!,
  };
}
