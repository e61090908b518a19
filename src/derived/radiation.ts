import { cos, sin } from '../elementary/elementary.ts';
import { farField } from '../retarded/farField.ts';
import { farPhasorOf, squareOf } from '../retarded/farPhasor.ts';
import { KRONROD_POINTS, kronrod } from '../retarded/quadrature.ts';
import { type Drive, linesOf } from '../retarded/waveformSpectrum.ts';
import { sourceBounds } from '../scenario/distance.ts';
import { JUMP_NOTED } from '../scenario/jump.ts';
import type { Filament, Medium, Source, Vec3 } from '../scenario/model.ts';
import { largest } from '../scenario/search.ts';
import type { Waveform } from '../scenario/waveform.ts';
import { largestDirection, overSphere } from './sphere.ts';

/**
 * What sources radiate, from their exact far field. η is the impedance of the medium, μv; 376.73 Ω in vacuum, where
 * handbooks that write 120π are 0.07 % higher. Balanis, Antenna Theory, 4th ed., chapters 2 and 4 (from memory).
 */

/** A number with a bound on its error and how many directions it took. */
export interface Radiated {
  readonly value: number;
  readonly error: number;
  readonly directions: number;
}

/** Relative error asked of integrals over directions. */
const SPHERE_ACCURACY = 1e-10;

/** The diagonal of the box around all sources, m. */
export function extentOf(sources: readonly Source[]): number {
  const bounds = sources.map(sourceBounds);
  const sides = [0, 1, 2].map(
    (a) => Math.max(...bounds.map(({ to }) => to[a]!)) - Math.min(...bounds.map(({ from }) => from[a]!)),
  );
  return Math.sqrt(sides.reduce((sum, side) => sum + side * side, 0));
}

/** ∮ |rE|² dΩ at a frequency: V² in the steady state, V²/Hz² of a pulse. */
function intensityOf(sources: readonly Source[], medium: Medium, drive: Drive): (frequency: number) => Radiated {
  const far = farPhasorOf(sources, medium, drive);
  const extent = extentOf(sources);
  return (frequency) => {
    let off = 0;
    const square = (direction: Vec3) => {
      const phasor = far(direction, frequency);
      const value = squareOf(phasor);
      off = Math.max(off, 2 * Math.sqrt(value) * phasor.error);
      return value;
    };
    const { value, error, directions } = overSphere(square, harmonicsOf(extent, medium, frequency), SPHERE_ACCURACY);
    return { value, error: error + 4 * Math.PI * off, directions };
  };
}

/** kd */
const harmonicsOf = (extent: number, medium: Medium, frequency: number): number =>
  (2 * Math.PI * frequency * extent) / medium.speed;

const times = ({ value, error, directions }: Radiated, factor: number): Radiated => ({
  value: value * factor,
  error: error * factor,
  directions,
});

/**
 * Power radiated in the steady state: P = ∮ |rE|²/(2η) dΩ, W.
 * @throws (from what it returns) RangeError for a frequency that is not above 0
 */
export function radiatedPower(sources: readonly Source[], medium: Medium): (frequency: number) => Radiated {
  const intensity = intensityOf(sources, medium, 'steady');
  return (frequency) => times(intensity(frequency), 1 / (2 * medium.impedance));
}

/**
 * Energy that the pulse radiates per hertz, on positive frequencies alone: dU/df = (2/η) ∮ |rE(f)|² dΩ, J/Hz.
 * @throws (from what it returns) RangeError for a frequency that is not above 0
 */
export function energySpectrum(sources: readonly Source[], medium: Medium): (frequency: number) => Radiated {
  const intensity = intensityOf(sources, medium, 'pulse');
  return (frequency) => times(intensity(frequency), 2 / medium.impedance);
}

/** Samples in a waveform's time scale: the trapezoidal rule is then right to rounding for smooth pulses. */
const SAMPLES = 4;

/** The far field is followed until the source's w′ has fallen to this part of its peak. */
const SPENT = 1e-12;

/** Instants at most: of a pulse with a tail much longer than its rise. */
const MOST_INSTANTS = 200_000;

/** Instants t − r/v, r from the origin, from before anything of any source is felt in any direction until all is gone. */
export function farInstants(sources: readonly Source[], medium: Medium): Float64Array {
  let lead = 0;
  let last = 0;
  for (const source of sources) {
    const { from, to } = sourceBounds(source);
    const reach = Math.sqrt(from.reduce((sum, x, a) => sum + Math.max(x * x, to[a]! * to[a]!), 0)) / medium.speed;
    lead = Math.max(lead, reach);
    const delays =
      source.type === 'dipole'
        ? [0]
        : source.terms.flatMap(({ delay, slowness }) => [delay, delay + slowness * source.curve.length]);
    last = Math.max(last, source.waveform.lastActivity(SPENT) + Math.max(...delays) + reach);
  }
  const finest = Math.min(...sources.map(({ waveform }) => waveform.timeScale)) / SAMPLES;
  const count = 2 * Math.ceil(Math.min(MOST_INSTANTS, (last + lead) / finest) / 2) + 1;
  return Float64Array.from({ length: count }, (_, n) => ((last + lead) * n) / (count - 1) - lead);
}

/**
 * Energy that the pulse radiates, U = ∮ ∫ |rE|²/η dt dΩ, J, by its far field in time: the trapezoidal rule in t
 * (spectrally accurate for smooth pulses), whose error is what every second instant alone gives.
 * @throws RangeError for a current that jumps: what it radiates has no finite energy
 */
export function radiatedEnergy(
  sources: readonly Source[],
  medium: Medium,
  { instants = farInstants(sources, medium), tolerance = SPHERE_ACCURACY } = {},
): Radiated {
  refuseJumps(sources);
  const step = (instants.at(-1)! - instants[0]!) / (instants.length - 1);
  let off = 0;
  const fluence = (direction: Vec3) => {
    const { values, error } = farField(sources, medium, direction, instants);
    let fine = 0;
    let coarse = 0;
    values.forEach((v, m) => {
      fine += v * v;
      if ((m % instants.length) % 2 === 0) coarse += v * v;
    });
    off = Math.max(off, Math.abs(fine - 2 * coarse) + 2 * error * Math.sqrt(fine * instants.length));
    return fine;
  };
  const highest = Math.max(...sources.map(({ waveform }) => waveform.highestFrequency(LOUD)));
  const found = overSphere(fluence, harmonicsOf(extentOf(sources), medium, highest), tolerance);
  return times({ ...found, error: found.error + 4 * Math.PI * off }, step / medium.impedance);
}

/** Frequencies up to this level of |ωW| decide how many directions the first rule has. */
const LOUD = 0.1;

function refuseJumps(sources: readonly Source[]): void {
  for (const { name, waveform } of sources)
    if (waveform.jump > JUMP_NOTED)
      throw new RangeError(
        `the current of source “${name}” jumps at t = 0 by ${waveform.jump} of its peak; energy is radiated finitely only ` +
          `below ${JUMP_NOTED}. Raise its delay.`,
      );
}

/** Where the energy spectrum ends: this level of |ωW|; 1e-18 in energy for smooth pulses, a kink's spectrum has no end. */
const SILENT = { smooth: 1e-9, kinked: 0.1 };

const silentLevel = ({ kinks, jump }: Waveform): number =>
  kinks.length === 0 || jump > 0 ? SILENT.smooth : SILENT.kinked;

/** Relative error asked of the integral over frequencies. */
const SPECTRUM_ACCURACY = 1e-9;

/** Intervals at most: a kink's spectrum never ends. */
const MOST_INTERVALS = 60;

/**
 * The same energy by its spectrum, U = ∫₀^∞ dU/df df (Parseval), J: Gauss–Kronrod over adaptive intervals up to where the
 * waveforms' spectra end.
 * @throws RangeError as `radiatedEnergy`
 */
export function radiatedEnergyBySpectrum(sources: readonly Source[], medium: Medium): Radiated {
  refuseJumps(sources);
  const spectrum = energySpectrum(sources, medium);
  const top = Math.max(...sources.map(({ waveform }) => waveform.highestFrequency(silentLevel(waveform))));
  let directions = 0;
  const interval = (from: number, to: number) => {
    let value = 0;
    let difference = 0;
    let inner = 0;
    const half = (to - from) / 2;
    for (let m = 0; m < KRONROD_POINTS; m++) {
      const line = spectrum(from + half * (1 + kronrod.nodes[m]!));
      directions += line.directions;
      inner += half * kronrod.weights[m]! * line.error;
      value += half * kronrod.weights[m]! * line.value;
      difference += half * kronrod.differences[m]! * line.value;
    }
    return { from, to, value, error: Math.abs(difference), inner };
  };
  // The spectrum's peak lies far below its end.
  const loud = Math.min(top / 2, Math.max(...sources.map(({ waveform }) => waveform.highestFrequency(LOUD))));
  const intervals = [interval(0, loud), interval(loud, top)];
  // Beyond the top it falls at least as 1/f².
  const beyond = spectrum(top).value * top;
  for (;;) {
    const value = intervals.reduce((sum, i) => sum + i.value, 0);
    const error = intervals.reduce((sum, i) => sum + i.error, 0);
    if (error <= Math.max(SPECTRUM_ACCURACY * value, beyond / 10) || intervals.length === MOST_INTERVALS)
      return { value, error: error + beyond + intervals.reduce((sum, i) => sum + i.inner, 0), directions };
    const worst = intervals.reduce((w, { error: e }, m) => (e > intervals[w]!.error ? m : w), 0);
    const { from, to } = intervals[worst]!;
    intervals.splice(worst, 1, interval(from, (from + to) / 2), interval((from + to) / 2, to));
  }
}

/** The pattern of a frequency in numbers. */
export interface Directivity {
  /** D = 4π max |rE|²/∮ |rE|² dΩ, dimensionless */
  readonly value: number;
  readonly error: number;
  /** unit vector along which it radiates most */
  readonly direction: Vec3;
}

/**
 * Directivity at a frequency: D = 4π U_max/P.
 * @throws (from what it returns) RangeError for a frequency that is not above 0, or where nothing is radiated
 */
export function directivityOf(sources: readonly Source[], medium: Medium): (frequency: number) => Directivity {
  const far = farPhasorOf(sources, medium, 'steady');
  const power = intensityOf(sources, medium, 'steady');
  const extent = extentOf(sources);
  return (frequency) => {
    const total = power(frequency);
    if (total.value === 0) throw new RangeError(`nothing is radiated at ${frequency} Hz, so there is no directivity.`);
    const harmonics = harmonicsOf(extent, medium, frequency);
    const { direction, value } = largestDirection((n) => squareOf(far(n, frequency)), harmonics);
    const D = (4 * Math.PI * value) / total.value;
    return { value: D, error: (D * total.error) / total.value, direction };
  };
}

/** Radiation resistance R = 2P/|I|², Ω, for a current of amplitude |I| that flows while power P is radiated. */
export const radiationResistance = (power: number, current: number): number => (2 * power) / (current * current);

/** |amplitude| of a source's waveform in the steady state, A. */
function steadyAmplitude({ waveform }: Source, frequency: number): number {
  const [re, im] = linesOf([waveform], 'steady')(frequency)[0]!.value;
  return Math.sqrt(re * re + im * im);
}

/**
 * |I(s)| in the steady state, A: the complex sum of a filament's waves at an arc length.
 * @param frequency Hz; @param s m
 */
export function currentAmplitude(source: Filament, frequency: number, s: number): number {
  const omega = 2 * Math.PI * frequency;
  const amplitude = steadyAmplitude(source, frequency);
  let re = 0;
  let im = 0;
  for (const { factor, delay, slowness, profile } of source.terms) {
    const size = amplitude * factor * (profile ? profile.value(s) : 1);
    const phase = omega * (delay + slowness * s);
    re += size * cos(phase);
    im -= size * sin(phase);
  }
  return Math.sqrt(re * re + im * im);
}

/** Places along a wavelength of current at which its maximum is looked for before it is refined. */
const STATIONS = 24;

/** The largest |I| anywhere on any source in the steady state, A: what handbooks refer a dipole's resistance to. */
export function largestCurrent(sources: readonly Source[], medium: Medium, frequency: number): number {
  let most = 0;
  for (const source of sources) {
    if (source.type === 'dipole') {
      most = Math.max(most, steadyAmplitude(source, frequency));
      continue;
    }
    const { length } = source.curve;
    const slowest = Math.max(1 / medium.speed, ...source.terms.map(({ slowness }) => Math.abs(slowness)));
    const count = Math.ceil(STATIONS * (1 + frequency * slowest * length));
    const at = (s: number) => currentAmplitude(source, frequency, Math.min(s, length));
    most = Math.max(most, largest(at, 0, length, length / count));
  }
  return most;
}
