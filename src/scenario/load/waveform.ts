import { formatQuantity } from '../../elementary/quantity.ts';
import { HEIDLER_PRESETS } from '../heidler.ts';
import { JUMP_NOTED, JUMP_REFUSED } from '../jump.ts';
import type { Path, Report } from '../reading.ts';
import { SIGNIFICANT } from '../shortest.ts';
import { resolved } from '../table.ts';
import type { Waveform, WaveformSpec } from '../waveform.ts';
import { makeWaveform } from '../waveforms.ts';
import type { GivenWaveform } from './given.ts';

/** A waveform by what the file gives; undefined where it makes none or jumps too far at t = 0, which is reported. */
export function buildWaveform(
  given: GivenWaveform,
  allowJumpAnywhere: boolean,
  source: string,
  path: Path,
  notes: string[],
  report: Report,
): Waveform | undefined {
  const { allowJump = allowJumpAnywhere } = given;
  let waveform: Waveform;
  try {
    const spec = specOf(given, source, notes);
    if (!spec) return undefined;
    waveform = makeWaveform(spec);
  } catch (error) {
    // What the schema lets through and no waveform can be made of: a pulse that is over before t = 0, a broken table.
    const key = given.type === 'table' ? [] : ['delay'];
    report([...path, ...key], `leaves no current: ${(error as Error).message.replace(/\.$/, '')}`);
    return undefined;
  }
  if (waveform.spec.type === 'table') noteBand(waveform, waveform.spec.times, source, notes);
  const jump = Number(waveform.jump.toPrecision(2));
  if (waveform.jump > JUMP_REFUSED && !allowJump) {
    const [key, remedy] =
      given.type === 'table'
        ? [[], 'begin the table with 0 A']
        : [['delay'], 'raise delay (8.6 sigma suffice for a Gaussian)'];
    report(
      [...path, ...key],
      `makes the current jump at t = 0 by ${jump} of its peak; the limit is ${JUMP_REFUSED}; ${remedy} or set "allowJump": true`,
    );
    return undefined;
  }
  if (waveform.jump > JUMP_NOTED)
    notes.push(
      `The current of “${source}” jumps at t = 0 by ${jump} of its peak and radiates a front that no grid resolves; raise its delay to be rid of it.`,
    );
  return waveform;
}

/** The specification in SI units with presets and defaults filled in; nothing where the schema has refused it. */
function specOf(given: GivenWaveform, source: string, notes: string[]): WaveformSpec | undefined {
  if (given.type === 'heidler') {
    if (given.terms) return { type: 'heidler', terms: given.terms };
    const { amplitude, terms } = HEIDLER_PRESETS[given.preset!];
    const gain = (given.amplitude ?? amplitude) / amplitude;
    return { type: 'heidler', terms: terms.map((term) => ({ ...term, amplitude: gain * term.amplitude })) };
  }
  if (given.type === 'rampedSine') {
    const { type, amplitude, frequency, ramp = 3, hold } = given;
    return { type, amplitude, frequency, ramp, hold };
  }
  if (given.type === 'table') return given.samples && tableSpec(given.samples, given.delay ?? 0, source, notes);
  const { allowJump: _, ...spec } = given;
  return spec;
}

/**
 * A table whose first and last current, where they are not 0 but small, are set to 0: the spline has no jumps then. One
 * that starts at t = 0 keeps its jump, as other waveforms do.
 */
function tableSpec(
  samples: readonly (readonly [number, number])[],
  delay: number,
  source: string,
  notes: string[],
): WaveformSpec {
  const times = samples.map(([t]) => t + delay);
  const currents = samples.map(([, i]) => i);
  const peak = currents.reduce((most, i) => Math.max(most, Math.abs(i)), 0);
  for (const m of times[0]! > 0 ? [0, times.length - 1] : [times.length - 1]) {
    const part = Math.abs(currents[m]!) / peak;
    if (!(part > 0 && part <= JUMP_REFUSED)) continue;
    if (part > JUMP_NOTED)
      notes.push(
        `The table of “${source}” ${m === 0 ? 'begins' : 'ends'} with ${Number(part.toPrecision(2))} of its peak, which is taken as 0.`,
      );
    currents[m] = 0;
  }
  return { type: 'table', times, currents };
}

/** What a table does between its samples is a guess where its spectrum reaches beyond what they resolve. */
function noteBand(waveform: Waveform, times: readonly number[], source: string, notes: string[]): void {
  const limit = resolved(times);
  if (waveform.highestFrequency(SIGNIFICANT) > limit)
    notes.push(
      `The samples of “${source}” resolve frequencies up to ${formatQuantity(limit, 'Hz')}, where what radiates is still above −40 dB: between them the current is a guess of the spline; sample it more finely.`,
    );
}
