import { formatQuantity } from '../../elementary/quantity.ts';
import { type Curve, norm, polyline, sub } from '../curve.ts';
import { JUMP_REFUSED } from '../jump.ts';
import type { Source } from '../model.ts';
import { combOf, endsOf, isNegligible, type PhasorSpec, phasorsAlone } from '../phasors.ts';
import { hat } from '../profiles.ts';
import type { Path, Report } from '../reading.ts';
import { LIMITS } from '../schema.ts';
import { type Kind, parseQuantity, show } from '../units.ts';
import type { Waveform } from '../waveform.ts';
import { makeWaveform } from '../waveforms.ts';
import type { CurrentRules, GivenWire } from './given.ts';
import { buildWaveform } from './waveform.ts';

/** The polyline of a wire; undefined where two points in succession are one, which is reported. */
export function curveOf(given: GivenWire, path: Path, report: Report): Curve | undefined {
  let sound = true;
  for (let k = 1; k < given.points.length; k++) {
    if (norm(sub(given.points[k]!, given.points[k - 1]!)) > 0) continue;
    report(
      [...path, 'points', k],
      `is the same place as point ${k - 1}; consecutive points of a wire must differ; remove one of them`,
    );
    sound = false;
  }
  return sound ? polyline(given.points) : undefined;
}

/** Of the wire's length: how far the first and last position of a sampled current may be off its ends. */
const END_SLACK = 1e-6;

/**
 * A wire whose current is given at arc lengths, straight lines between them: I(s, t) = Σ hat_m(s) w_m(t), one filament for
 * each position at which current flows, all along the same curve.
 */
export function buildSampled(
  given: GivenWire,
  name: string,
  rules: CurrentRules,
  path: Path,
  report: Report,
): Source[] {
  const curve = curveOf(given, path, report);
  const stations = curve && stationsOf(given, curve, path, report);
  if (!stations) return [];
  const waveforms = given.current.phasors
    ? byFrequency(given.current.phasors, stations, name, rules, path, report)
    : byTime(given.current.samples, stations, name, rules, path, report);
  return stations.flatMap((s, m): Source[] => {
    const waveform = waveforms[m];
    const terms = [{ factor: 1, delay: 0, slowness: 0, profile: hat(stations, m) }];
    return waveform ? [{ type: 'wire', name: labelOf(name, s), curve, terms, waveform }] : [];
  });
}

const labelOf = (name: string, s: number): string => `${name}, s = ${formatQuantity(s, 'm')}`;

/** The arc lengths of a sampled current, from 0 to the wire's length; undefined where they are refused. */
function stationsOf(given: GivenWire, { length }: Curve, path: Path, report: Report): number[] | undefined {
  const { positions } = given.current;
  if (!positions) return undefined;
  const where = [...path, 'current', 'positions'];
  const slack = END_SLACK * length;
  if (Math.abs(positions[0]!) > slack || Math.abs(positions.at(-1)! - length) > slack) {
    report(
      where,
      `run from ${formatQuantity(positions[0]!, 'm')} to ${formatQuantity(positions.at(-1)!, 'm')}; they must begin at 0 and end at the wire’s length, ${formatQuantity(length, 'm')}; add the ends (with 0 A where no current flows)`,
    );
    return undefined;
  }
  const falling = positions.findIndex((s, m) => m > 0 && !(s > positions[m - 1]!));
  if (falling > 0) {
    report(
      [...where, falling],
      `is ${formatQuantity(positions[falling]!, 'm')}, not beyond the one before it; positions must rise; sort the columns`,
    );
    return undefined;
  }
  return positions.map((s, m) => (m === 0 ? 0 : m === positions.length - 1 ? length : s));
}

type GivenRows = GivenWire['current']['samples'];

/** The waveform of each station from samples in time; undefined where no current flows or one is refused. */
function byTime(
  samples: GivenRows,
  stations: readonly number[],
  name: string,
  { allowJump, notes }: CurrentRules,
  path: Path,
  report: Report,
): (Waveform | undefined)[] {
  const where = [...path, 'current', 'samples'];
  const table = rowsOf(samples, SAMPLE_ROW, stations.length, where, report);
  if (!table) return [];
  return stations.map((s, m) => {
    if (table.every((row) => row[m + 1] === 0)) return undefined;
    const column = { type: 'table' as const, samples: table.map((row): [number, number] => [row[0]!, row[m + 1]!]) };
    return buildWaveform(column, allowJump, labelOf(name, s), where, notes, report);
  });
}

/** The waveform of each station from peak phasors; undefined where no current flows or all are refused. */
function byFrequency(
  phasors: GivenRows,
  stations: readonly number[],
  name: string,
  rules: CurrentRules,
  path: Path,
  report: Report,
): (Waveform | undefined)[] {
  const where = [...path, 'current', 'phasors'];
  const table = rowsOf(phasors, PHASOR_ROW, stations.length, where, report);
  if (!table) return [];
  const frequencies = table.map(([f]) => f!);
  const falling = frequencies.findIndex((f, n) => f < 0 || (n > 0 && !(f - frequencies[n - 1]! > LEAST)));
  if (falling >= 0) {
    report(
      [...where, falling, 0],
      `is ${formatQuantity(frequencies[falling]!, 'Hz')}; frequencies must be 0 or more and rise from row to row; sort the rows`,
    );
    return [];
  }
  const turned = frequencies[0] === 0 ? stations.findIndex((_, m) => table[0]![2 * m + 2] !== 0) : -1;
  if (turned >= 0) {
    report(
      [...where, 0, 2 * turned + 2],
      `is ${table[0]![2 * turned + 2]} A, an imaginary part at 0 Hz, where a current is real; set it to 0`,
    );
    return [];
  }
  const specs = stations.map((_, m): PhasorSpec => {
    const column = (part: 0 | 1) => table.map((row) => row[1 + 2 * m + part]!);
    return { type: 'phasors', frequencies, re: column(0), im: column(1), scale: 0 };
  });
  const flows = ({ re, im }: PhasorSpec) => [...re, ...im].some((x) => Math.abs(x) > LEAST);
  if (!specs.some(flows)) {
    report(where, 'are 0 everywhere; a source needs a current; give phasors that are not 0');
    return [];
  }
  if (rules.asked === 'frequency') return specs.map((spec) => (flows(spec) ? phasorsAlone(spec) : undefined));
  const scale = pulseScale(specs.filter(flows), frequencies, name, rules, where, report);
  return specs.map((spec) => (scale !== undefined && flows(spec) ? makeWaveform({ ...spec, scale }) : undefined));
}

/** A (or Hz): less is nothing. */
const LEAST = 1 / LIMITS.magnitude;

/** Who takes phasors that make no pulse. */
const WITHOUT_PULSE = 'ask with `exact --frequencies` or `derive --steady`, which take them as they are';

/**
 * The largest current in time of a wire whose phasors make a pulse, A; undefined where they do not, which is reported: a
 * pulse needs multiples of one step, a period that holds the duration, a band that ends, and silence before t = 0.
 */
function pulseScale(
  specs: readonly PhasorSpec[],
  frequencies: readonly number[],
  name: string,
  { allowJump, duration, notes }: CurrentRules,
  where: Path,
  report: Report,
): number | undefined {
  const comb = combOf(frequencies);
  if ('reason' in comb) {
    report(
      where,
      `${comb.reason}, so no pulse is made of them; give them at equal steps from 0 Hz, or ${WITHOUT_PULSE}`,
    );
    return undefined;
  }
  const { step, first, count } = comb;
  const spacing = formatQuantity(step, 'Hz', 4);
  if (duration !== undefined && duration * step > 1 + COMB_SLACK) {
    report(
      where,
      `are ${spacing} apart and repeat after ${formatQuantity(1 / step, 's', 4)}; the duration is ${formatQuantity(duration, 's', 4)}; give them at steps of at most ${formatQuantity(1 / duration, 'Hz', 4)}, shorten duration, or ${WITHOUT_PULSE}`,
    );
    return undefined;
  }
  const { top, bottom, peak, jump, bend, missing } = endsOf(specs, comb);
  const [low, high] = [formatQuantity(first * step, 'Hz', 4), formatQuantity(frequencies.at(-1)!, 'Hz', 4)];
  const share = (part: number) => Number(part.toPrecision(2));
  if (top > JUMP_REFUSED) {
    report(
      where,
      `end at ${high} with ${share(top)} of the largest |f·I|; the limit is ${JUMP_REFUSED}; give higher frequencies, multiply them by the spectrum of a pulse that ends below, or ${WITHOUT_PULSE}`,
    );
    return undefined;
  }
  if (first > 1 && bottom > JUMP_REFUSED) {
    report(
      where,
      `begin at ${low}, ${first} times their step, with ${share(bottom)} of the largest |f·I|; the limit is ${JUMP_REFUSED}; give the frequencies below, or ${WITHOUT_PULSE}`,
    );
    return undefined;
  }
  const direct = frequencies[0] === 0;
  if (Math.max(jump, bend) > JUMP_REFUSED && !allowJump) {
    const what =
      jump > JUMP_REFUSED
        ? `start at t = 0 with ${share(jump)} of the peak`
        : `start at t = 0 with a slope of ${share(bend)} of the steepest`;
    const remedy =
      !direct && jump > JUMP_REFUSED
        ? `give 0 Hz too, taken as 0 A now (${formatQuantity(missing, 'A', 4)} there starts one of the stations with 0)`
        : 'delay the pulse (phasors times e^(−j2πf·delay)), give finer steps where it has not ended within their period';
    report(
      where,
      `${what}; the limit is ${JUMP_REFUSED}, for nothing flows before; ${remedy}, set "allowJump": true, or ${WITHOUT_PULSE}`,
    );
    return undefined;
  }
  const parts = [
    `The current of “${name}” is the sum of ${count} lines ${spacing} apart, ${low} to ${high}, over one period, ${formatQuantity(1 / step, 's', 4)}`,
    ...(direct ? [] : ['0 Hz is not given and taken as 0 A: no charge is left behind']),
    ...(isNegligible(top) ? [] : [`its highest lines still have ${share(top)} of the largest |f·I|`]),
    ...(isNegligible(jump) ? [] : [`it starts at t = 0 with ${share(jump)} of its peak`]),
  ];
  notes.push(`${parts.join('; ')}.`);
  return peak;
}

/** Of the period: how much longer the duration may be, for what files round away. */
const COMB_SLACK = 1e-4;

/** What a row holds: its first number, how many for each station, in words. */
interface RowForm {
  readonly first: Kind;
  readonly each: number;
  readonly words: (stations: number) => string;
}

const SAMPLE_ROW: RowForm = {
  first: 'time',
  each: 1,
  words: (stations) => `an instant and ${stations} currents, one for each position`,
};

const PHASOR_ROW: RowForm = {
  first: 'frequency',
  each: 2,
  words: (stations) => `a frequency and ${2 * stations} currents, real and imaginary part for each position`,
};

/** Rows of a sampled current in SI units; undefined where one is refused. */
function rowsOf(rows: GivenRows, form: RowForm, stations: number, path: Path, report: Report): number[][] | undefined {
  const table = rows?.map((row, n) => rowOf(row, form, stations, [...path, n], report));
  return table?.some((row) => row === undefined) ? undefined : (table as number[][] | undefined);
}

/** An instant or a frequency, and the currents of one row, in SI units. */
function rowOf(
  row: readonly (number | string)[],
  { first, each, words }: RowForm,
  stations: number,
  path: Path,
  report: Report,
): number[] | undefined {
  if (row.length !== each * stations + 1) {
    report(path, `has ${row.length} numbers; it must have ${words(stations)}`);
    return undefined;
  }
  const parsed = row.map((value, n) => parseQuantity(value, n === 0 ? first : 'current'));
  const wrong = parsed.findIndex((each) => 'reason' in each || Math.abs(each.value) > LIMITS.magnitude);
  if (wrong < 0) return parsed.map((each) => (each as { value: number }).value);
  const found = parsed[wrong]!;
  const tooLarge = `is ${show(row[wrong])}; it must be at most ${LIMITS.magnitude} in SI units`;
  report([...path, wrong], 'reason' in found ? found.reason : tooLarge);
  return undefined;
}
