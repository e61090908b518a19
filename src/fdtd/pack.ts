import type { WaveformSpec } from '../scenario/waveform.ts';
import { makeWaveform } from '../scenario/waveforms.ts';
import type { GridProblem } from './problem.ts';

/** A problem as it can be sent to another thread: functions do not travel, so waveforms go as their specifications. */
export interface PackedProblem {
  readonly problem: Omit<GridProblem, 'currents'> & { readonly currents: Omit<GridProblem['currents'], 'waveforms'> };
  readonly waveforms: readonly WaveformSpec[];
}

/** For the way to another thread; structured-cloneable. */
export function packProblem(problem: GridProblem): PackedProblem {
  const { waveforms, ...currents } = problem.currents;
  return { problem: { ...problem, currents }, waveforms: waveforms.map((w) => w.spec) };
}

/** The same problem again, with waveforms rebuilt from their specifications. */
export function unpackProblem({ problem, waveforms }: PackedProblem): GridProblem {
  return { ...problem, currents: { ...problem.currents, waveforms: waveforms.map(makeWaveform) } };
}
