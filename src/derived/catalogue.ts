import { z } from 'zod';
import { atan2 } from '../elementary/elementary.ts';
import { farField } from '../retarded/farField.ts';
import { farPhasorOf } from '../retarded/farPhasor.ts';
import { partsOf } from '../retarded/parts.ts';
import { steadyField } from '../retarded/spectral.ts';
import type { Complex, Drive } from '../retarded/waveformSpectrum.ts';
import type { Scenario, Vec3 } from '../scenario/model.ts';
import { amplitudeOf, bandAbove, pulseLevel, steadyLevel } from './levels.ts';
import { faradayResidual, fluxThrough, inducedVoltage, voltageAlong } from './paths.ts';
import { pulseAt } from './pulse.ts';
import {
  directivityOf,
  energySpectrum,
  largestCurrent,
  radiatedEnergy,
  radiatedEnergyBySpectrum,
  radiatedPower,
  radiationResistance,
} from './radiation.ts';
import { regionsAlong } from './regions.ts';
import { directionOf, tangentsOf } from './sphere.ts';

/**
 * What can be derived from the exact field of a scenario, each as a table: which columns it asks for, which it gives, and
 * how a row is found. The command line, and whoever else shows them, knows nothing more.
 */

const columnSchema = z.object({
  name: z.string(),
  unit: z.string().describe('SI, or deg, dBµV/m, dBµV/m/MHz; empty where there is none'),
  meaning: z.string(),
});
export type Column = z.infer<typeof columnSchema>;

export const derivedSchema = z.object({
  quantity: z.string(),
  drive: z
    .enum(['pulse', 'steady'])
    .describe('pulse: the waveforms of the scenario; steady: each is amplitude · e^(+jωt), values are peak amplitudes'),
  columns: z.array(columnSchema).readonly(),
  rows: z.array(z.array(z.union([z.number(), z.string(), z.null()])).readonly()).readonly(),
  findings: z
    .array(columnSchema.extend({ value: z.number().nullable() }))
    .readonly()
    .describe('what is said of all rows together'),
});

/** A derived quantity as `derive --json` writes it. */
export type Derived = z.infer<typeof derivedSchema>;
export type Finding = Derived['findings'][number];
export type Cell = number | string | null;

/** The published description of what `derive --json` prints (JSON Schema 2020-12). */
export const derivedJsonSchema = (): object => z.toJSONSchema(derivedSchema);

export interface Wishes {
  /** how the waveforms are taken where a frequency is asked for */
  readonly drive: Drive;
  /** instants of a voltage or a flux, evenly over the scenario's duration */
  readonly instants: number;
}

/** A table about to be made: `row` may take long and is called in order, `findings` after the last. */
export interface Work {
  readonly columns: readonly Column[];
  readonly items: readonly (readonly number[])[];
  row(item: readonly number[]): readonly Cell[];
  findings(rows: readonly (readonly Cell[])[]): readonly Finding[];
}

export interface Quantity {
  /** in a few words, for help */
  readonly about: string;
  /** columns of the input, each with its alternatives: `t|f` is an instant or a frequency */
  readonly asks: readonly string[];
  /** fewest rows of input */
  readonly least: number;
  begin(scenario: Scenario, rows: readonly (readonly number[])[], last: string, wishes: Wishes): Work;
}

const column = (name: string, unit: string, meaning: string): Column => ({ name, unit, meaning });
const PLACE = [column('x', 'm', 'place'), column('y', 'm', 'place'), column('z', 'm', 'place')];
const INSTANT = column('t', 's', 'instant');
const FREQUENCY = column('f', 'Hz', 'frequency');
const RADIAN = Math.PI / 180;

const complex = (name: string, unit: string, meaning: string): Column[] => [
  column(`${name}Re`, unit, `${meaning}, real part`),
  column(`${name}Im`, unit, `${meaning}, imaginary part`),
];

const finding = (name: string, unit: string, meaning: string, value: number | null): Finding => ({
  name,
  unit,
  meaning,
  value: value !== null && Number.isFinite(value) ? value : null,
});

const none = () => [];

/** V·e over two components of one direction. */
function projected(values: readonly Complex[], along: Vec3): Complex {
  const part = (p: 0 | 1) => along.reduce((sum, d, a) => sum + d * values[a]![p], 0);
  return [part(0), part(1)];
}

const farFieldQuantity: Quantity = {
  about: 'r·E far away by direction, in time (t is t − r/v) or by frequency',
  asks: ['thetaDeg', 'phiDeg', 't|f'],
  least: 1,
  begin({ sources, medium }, rows, last, { drive }) {
    const angles = [column('thetaDeg', 'deg', 'angle from z'), column('phiDeg', 'deg', 'angle from x towards y')];
    if (last === 't')
      return {
        columns: [
          ...angles,
          column('t', 's', 't − r/v, r from the origin'),
          column('rEtheta', 'V', 'r·E along growing theta'),
          column('rEphi', 'V', 'r·E along growing phi'),
          column('error', 'V', 'bound of the error'),
        ],
        items: rows,
        row([theta, phi, t]) {
          const direction = directionOf(theta! * RADIAN, phi! * RADIAN);
          const { values, error } = farField(sources, medium, direction, Float64Array.of(t!));
          const along = (e: Vec3) => e.reduce((sum, d, a) => sum + d * values[a]!, 0);
          const tangents = tangentsAt(theta!, phi!, direction);
          return [theta!, phi!, t!, along(tangents.theta), along(tangents.phi), error];
        },
        findings: none,
      };
    const far = farPhasorOf(sources, medium, drive);
    const unit = drive === 'pulse' ? 'V/Hz' : 'V';
    return {
      columns: [
        ...angles,
        FREQUENCY,
        ...complex('rEtheta', unit, 'r·E e^(jkr) along growing theta'),
        ...complex('rEphi', unit, 'r·E e^(jkr) along growing phi'),
        column('error', unit, 'bound of the error'),
      ],
      items: rows,
      row([theta, phi, f]) {
        const direction = directionOf(theta! * RADIAN, phi! * RADIAN);
        const { values, error } = far(direction, f!);
        const tangents = tangentsAt(theta!, phi!, direction);
        return [theta!, phi!, f!, ...projected(values, tangents.theta), ...projected(values, tangents.phi), error];
      },
      findings: none,
    };
  },
};

/** On the axis θ and φ are told apart by the azimuth that was asked for. */
function tangentsAt(theta: number, phi: number, direction: Vec3) {
  const [c, s] = [directionOf(Math.PI / 2, phi * RADIAN)[0], directionOf(Math.PI / 2, phi * RADIAN)[1]];
  const pole = direction[2] * direction[2] === 1 || theta % 180 === 0;
  return pole
    ? { theta: [c * direction[2], s * direction[2], 0] as Vec3, phi: [-s, c, 0] as Vec3 }
    : tangentsOf(direction);
}

const radiationQuantity: Quantity = {
  about:
    'radiated power (or a pulse’s energy per hertz), directivity, radiation resistance by frequency; radiated energy',
  asks: ['f'],
  least: 1,
  begin({ sources, medium }, rows, _last, { drive }) {
    const power = radiatedPower(sources, medium);
    const told = drive === 'steady' ? power : energySpectrum(sources, medium);
    const directivity = directivityOf(sources, medium);
    return {
      columns: [
        FREQUENCY,
        drive === 'steady'
          ? column('power', 'W', 'radiated')
          : column('energyDensity', 'J/Hz', 'radiated, on positive frequencies alone'),
        column('error', drive === 'steady' ? 'W' : 'J/Hz', 'bound of the error'),
        column('directivity', '', '4π times the largest intensity over all power, as a number'),
        column('thetaDeg', 'deg', 'where that is'),
        column('phiDeg', 'deg', 'where that is'),
        column('largestCurrent', 'A', 'largest amplitude anywhere along the sources in the steady state'),
        column('resistance', 'Ω', '2 · power/largestCurrent²'),
      ],
      items: rows,
      row([f]) {
        const radiated = told(f!);
        const steady = drive === 'steady' ? radiated : power(f!);
        const { value, direction } = directivity(f!);
        const current = largestCurrent(sources, medium, f!);
        const [x, y, up] = direction;
        return [
          f!,
          radiated.value,
          radiated.error,
          value,
          atan2(Math.sqrt(x * x + y * y), up) / RADIAN,
          atan2(y, x) / RADIAN,
          current,
          radiationResistance(steady.value, current),
        ];
      },
      findings() {
        if (drive === 'steady') return [finding('impedance', 'Ω', 'η = √(μ/ε) of the medium', medium.impedance)];
        const inTime = radiatedEnergy(sources, medium, { tolerance: 1e-8 });
        const bySpectrum = radiatedEnergyBySpectrum(sources, medium);
        return [
          finding('impedance', 'Ω', 'η = √(μ/ε) of the medium', medium.impedance),
          finding('energy', 'J', 'radiated by the pulse, from its far field in time', inTime.value),
          finding('energyError', 'J', 'bound of its error', inTime.error),
          finding('energyBySpectrum', 'J', 'the same from its spectrum (Parseval)', bySpectrum.value),
          finding('energyBySpectrumError', 'J', 'bound of its error', bySpectrum.error),
        ];
      },
    };
  },
};

const pulseQuantity: Quantity = {
  about: 'peak, its instant and 10–90 % rise time of the strongest component of E and H at places',
  asks: ['x', 'y', 'z'],
  least: 1,
  begin({ sources, medium }, rows) {
    const at = pulseAt(sources, medium);
    const of = (field: 'E' | 'H', unit: string) => [
      column(`${field}component`, '', 'the strongest; empty where the field vanishes'),
      column(`${field}peak`, unit, 'its largest size, with its sign'),
      column(`${field}peakTime`, 's', 'when'),
      column(`${field}riseTime`, 's', 'from 10 to 90 % of the peak; empty where it does not rise from below 10 %'),
    ];
    return {
      columns: [...PLACE, ...of('E', 'V/m'), ...of('H', 'A/m')],
      items: rows,
      row([x, y, z]) {
        const { E, H } = at([x!, y!, z!]);
        const cells = (pulse: typeof E): Cell[] =>
          pulse
            ? [pulse.component, pulse.peak, pulse.peakTime, Number.isNaN(pulse.riseTime) ? null : pulse.riseTime]
            : [null, null, null, null];
        return [x!, y!, z!, ...cells(E), ...cells(H)];
      },
      findings: none,
    };
  },
};

/** −20 dB: the band of a spectrum is told to this share of its largest line. */
const BAND = 0.1;

const spectrumQuantity: Quantity = {
  about: 'spectrum of E and H at places: V/m/Hz and dBµV/m/MHz, or with --steady V/m and dBµV/m',
  asks: ['x', 'y', 'z', 'f'],
  least: 1,
  begin({ sources, medium }, rows, _last, { drive }) {
    const at = steadyField(sources, medium, drive);
    const per = drive === 'pulse' ? '/Hz' : '';
    const names = ['x', 'y', 'z'];
    return {
      columns: [
        ...PLACE,
        FREQUENCY,
        column('E', `V/m${per}`, 'amplitude of the vector, √(Σ|E_c|²)'),
        drive === 'pulse'
          ? column('level', 'dBµV/m/MHz', '√2·E·1 MHz over 1 µV/m: what a receiver calibrated in rms shows')
          : column('level', 'dBµV/m', 'E/√2 over 1 µV/m: root mean square'),
        column('H', `A/m${per}`, 'amplitude of the vector'),
        ...names.flatMap((axis) => complex(`E${axis}`, `V/m${per}`, `E along ${axis}, e^(+jωt)`)),
        ...names.flatMap((axis) => complex(`H${axis}`, `A/m${per}`, `H along ${axis}, e^(+jωt)`)),
        column('errorE', `V/m${per}`, 'bound of the error of E'),
        column('errorH', `A/m${per}`, 'bound of the error of H'),
      ],
      items: rows,
      row([x, y, z, f]) {
        const { E, H, errorE, errorH } = at([x!, y!, z!], f!);
        const amplitude = amplitudeOf(E);
        const level = drive === 'pulse' ? pulseLevel(amplitude) : steadyLevel(amplitude);
        return [
          ...[x!, y!, z!, f!, amplitude, Number.isFinite(level) ? level : null, amplitudeOf(H)],
          ...[...E, ...H].flat(),
          errorE,
          errorH,
        ];
      },
      findings(found) {
        const places = new Set(found.map(([x, y, z]) => `${x} ${y} ${z}`));
        const lines = found.map((row) => [row[3] as number, row[4] as number] as const).sort(([a], [b]) => a - b);
        if (places.size !== 1 || lines.length < 3) return [];
        const { from, to } = bandAbove(
          lines.map(([f]) => f),
          lines.map(([, e]) => e),
          BAND,
        );
        return [
          finding('bandFrom', 'Hz', 'E is within 20 dB of its largest line from here; null: below the first', from),
          finding('bandTo', 'Hz', 'up to here; null: above the last', to),
        ];
      },
    };
  },
};

/** Instants evenly over the duration, from the first step on. */
const evenly = (duration: number, count: number): number[][] =>
  Array.from({ length: count }, (_, n) => [(duration * (n + 1)) / count]);

const placesOf = (rows: readonly (readonly number[])[]): Vec3[] => rows.map(([x, y, z]) => [x!, y!, z!]);

const voltageQuantity: Quantity = {
  about: 'voltage ∫ E·dl along the polyline of the places, instant by instant',
  asks: ['x', 'y', 'z'],
  least: 2,
  begin({ sources, medium, duration }, rows, _last, { instants }) {
    const voltage = voltageAlong(sources, medium, placesOf(rows));
    return {
      columns: [
        INSTANT,
        column('voltage', 'V', '∫ E·dl from the first place to the last'),
        column('error', 'V', 'bound of its error'),
      ],
      items: evenly(duration, instants),
      row([t]) {
        const { value, error } = voltage(t!);
        return [t!, value, error];
      },
      findings: (found) => [peakFinding(found, 'voltagePeak', 'V')],
    };
  },
};

function peakFinding(rows: readonly (readonly Cell[])[], name: string, unit: string): Finding {
  const largest = rows.reduce((most, row) => Math.max(most, Math.abs(row[1] as number)), 0);
  return finding(name, unit, 'the largest size among these instants', largest);
}

/** Below so many times its error a voltage is nothing to hold Faraday's law against. */
const MEANINGFUL = 1e3;

const fluxQuantity: Quantity = {
  about: 'magnetic flux ∮ A·dl through the loop of the places, and what it induces, ∮ E·dl, instant by instant',
  asks: ['x', 'y', 'z'],
  least: 3,
  begin({ sources, medium, duration }, rows, _last, { instants }) {
    const loop = placesOf(rows);
    const flux = fluxThrough(sources, medium, loop);
    const induced = inducedVoltage(sources, medium, loop);
    return {
      columns: [
        INSTANT,
        column('flux', 'Wb', '∮ A·dl, right-handed about the way round'),
        column('fluxError', 'Wb', 'bound of its error'),
        column('induced', 'V', '∮ E·dl = −dΦ/dt'),
        column('inducedError', 'V', 'bound of its error'),
      ],
      items: evenly(duration, instants),
      row([t]) {
        const [f, e] = [flux(t!), induced(t!)];
        return [t!, f.value, f.error, e.value, e.error];
      },
      findings(found) {
        const strongest = found.reduce((best, row) =>
          Math.abs(row[3] as number) > Math.abs(best[3] as number) ? row : best,
        );
        const { residual, scale } = faradayResidual(sources, medium, loop)(strongest[0] as number);
        return [
          peakFinding(found, 'fluxPeak', 'Wb'),
          finding(
            'faraday',
            '',
            '|∮E·dl + dΦ/dt| over the larger, where the induced voltage is largest; the difference dΦ/dt is right to 1e-7',
            scale > MEANINGFUL * (strongest[4] as number) ? residual / scale : null,
          ),
        ];
      },
    };
  },
};

const partsQuantity: Quantity = {
  about: 'near (1/r³), induction (1/r²) and radiation (1/r) parts of E and H, summed over current elements',
  asks: ['x', 'y', 'z', 't'],
  least: 1,
  begin({ sources, medium }, rows) {
    const parts = partsOf(sources, medium);
    const vector = (name: string, unit: string, meaning: string) =>
      ['x', 'y', 'z'].map((axis) => column(`${name}${axis}`, unit, `${meaning} along ${axis}`));
    return {
      columns: [
        ...PLACE,
        INSTANT,
        ...vector('Enear', 'V/m', 'near part of E'),
        ...vector('Einduction', 'V/m', 'induction part of E'),
        ...vector('Eradiation', 'V/m', 'radiation part of E'),
        ...vector('Hinduction', 'A/m', 'induction part of H'),
        ...vector('Hradiation', 'A/m', 'radiation part of H'),
        column('errorE', 'V/m', 'bound of the error of the parts of E'),
        column('errorH', 'A/m', 'bound of the error of the parts of H'),
      ],
      items: rows,
      row([x, y, z, t]) {
        const { E, H, errorE, errorH } = parts([x!, y!, z!], t!);
        return [
          ...[x!, y!, z!, t!],
          ...[...E.near, ...E.induction, ...E.radiation, ...H.induction, ...H.radiation],
          errorE,
          errorH,
        ];
      },
      findings(found) {
        const [x, y, z] = found[0] as readonly number[];
        const regions = regionsAlong(sources, medium);
        const { centre } = regions([1, 0, 0]);
        const line = [x! - centre[0], y! - centre[1], z! - centre[2]];
        const r = Math.sqrt(line.reduce((sum, d) => sum + d * d, 0));
        if (r === 0) return [];
        const { nearTo, radiationFrom } = regions(line.map((d) => d / r) as unknown as Vec3);
        const along = 'from the middle of the sources, towards the first place';
        return [
          finding('nearTo', 'm', `${along}: up to here the near part has the largest peak; null: nowhere`, nearTo),
          finding(
            'radiationFrom',
            'm',
            `${along}: from here on the radiation part has the largest peak; null: everywhere`,
            radiationFrom,
          ),
        ];
      },
    };
  },
};

export const DERIVED = {
  'far-field': farFieldQuantity,
  radiation: radiationQuantity,
  pulse: pulseQuantity,
  spectrum: spectrumQuantity,
  voltage: voltageQuantity,
  flux: fluxQuantity,
  parts: partsQuantity,
} as const satisfies Record<string, Quantity>;
export type DerivedName = keyof typeof DERIVED;
