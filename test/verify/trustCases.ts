import { readFileSync } from 'node:fs';
import { gunzipSync } from 'node:zlib';
import { type FieldOptions, fieldOf } from '../../src/retarded/field.ts';
import { prepareSources } from '../../src/retarded/prepare.ts';
import { mediumOf } from '../../src/scenario/constants.ts';
import { circle, polyline } from '../../src/scenario/curve.ts';
import type { Medium, Profile, Source, Vec3, WaveTerm } from '../../src/scenario/model.ts';
import { decaying, hat, standing } from '../../src/scenario/profiles.ts';
import type { WaveformSpec } from '../../src/scenario/waveform.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';

/** Questions with reference answers, as test/oracle/trust.py writes them. */
export interface TrustCase {
  readonly kind: string;
  readonly place: string;
  readonly source:
    | { readonly type: 'dipole'; readonly at: Vec3; readonly direction: Vec3; readonly length: number }
    | { readonly type: 'wire'; readonly points: readonly Vec3[]; readonly terms: readonly GivenTerm[] }
    | {
        readonly type: 'loop';
        readonly centre: Vec3;
        readonly normal: Vec3;
        readonly radius: number;
        readonly terms: readonly GivenTerm[];
      };
  readonly waveform: WaveformSpec;
  /** εr, μr */
  readonly medium: readonly [number, number];
  readonly point: Vec3;
  readonly t: number;
  /** E, B, φ, A */
  readonly field: readonly number[];
  /** what E, B, φ and A of the reference are rounded to */
  readonly sure: readonly number[];
}

/** factor, delay, slowness times v, profile */
type GivenTerm = readonly [number, number, number, GivenProfile | null];
type GivenProfile =
  | { readonly kind: 'decaying'; readonly direction: 'forward' | 'backward'; readonly decay: number }
  | { readonly kind: 'standing'; readonly wavenumber: number }
  | { readonly kind: 'hat'; readonly stations: readonly number[]; readonly m: number };

export function trustCases(): TrustCase[] {
  return JSON.parse(gunzipSync(readFileSync(new URL('../oracle/trust.json.gz', import.meta.url))).toString());
}

function profileOf(given: GivenProfile | null, length: number): { profile?: Profile } {
  if (!given) return {};
  if (given.kind === 'standing') return { profile: standing(length, given.wavenumber) };
  if (given.kind === 'decaying') return { profile: decaying(length, given.decay, given.direction) };
  return { profile: hat([...given.stations, length], given.m) };
}

export function sourceOf({ kind, source, waveform }: TrustCase, { speed }: Medium): Source {
  const common = { name: kind, waveform: makeWaveform(waveform) };
  if (source.type === 'dipole') return { ...source, ...common };
  const curve = source.type === 'loop' ? circle(source.centre, source.normal, source.radius) : polyline(source.points);
  const terms = source.terms.map(
    ([factor, delay, slowness, profile]): WaveTerm => ({
      factor,
      delay,
      slowness: slowness / speed,
      ...profileOf(profile, curve.length),
    }),
  );
  return { ...common, type: source.type, curve, terms };
}

export const QUANTITIES = ['E', 'H', 'φ', 'A'] as const;

/** One answer: for E, H, φ and A the true error, the estimate of it, and the size of the field (H against E/η, …). */
export interface Judged {
  readonly converged: boolean;
  readonly evaluations: number;
  readonly error: readonly number[];
  readonly estimate: readonly number[];
  readonly size: readonly number[];
  /** of the reference: before and after it became a double */
  readonly reference: readonly number[];
  readonly rounding: readonly number[];
}

export function judged(given: TrustCase, options: FieldOptions): Judged {
  const medium = mediumOf(...given.medium);
  const source = sourceOf(given, medium);
  const value = fieldOf(prepareSources([source], medium, options.method ?? 'best'), options)(given.point, given.t);
  const exact = (from: number, count: number) => given.field.slice(from, from + count);
  const off = (a: readonly number[], b: readonly number[]) => Math.sqrt(a.reduce((s, x, n) => s + (x - b[n]!) ** 2, 0));
  const sizeOf = (a: readonly number[]) =>
    off(
      a,
      a.map(() => 0),
    );
  const groups: readonly (readonly [number[], readonly number[], number])[] = [
    [exact(0, 3), value.E, value.errorE],
    [exact(3, 3).map((x) => x / medium.permeability), value.H, value.errorH],
    [exact(6, 1), [value.phi], value.errorPhi],
    [exact(7, 3), value.A, value.errorA],
  ];
  const [E, H, phi, A] = groups.map(([reference]) => sizeOf(reference)) as [number, number, number, number];
  const size = [E, Math.max(H, E / medium.impedance), Math.max(phi, A * medium.speed), Math.max(A, phi / medium.speed)];
  const sure = given.sure.map((x, g) => (g === 1 ? x / medium.permeability : x));
  return {
    converged: value.converged,
    evaluations: value.evaluations,
    error: groups.map(([reference, found]) => off(reference, found)),
    estimate: groups.map(([, , estimate]) => estimate),
    size,
    reference: sure.map((x, g) => x + Number.EPSILON * [E, H, phi, A][g]!),
    rounding: value.rounding,
  };
}

/** What estimates are worth over a list of cases. */
export interface Worth {
  /** errors looked at: four a case */
  readonly errors: number;
  /** of them at most their estimate */
  readonly covered: number;
  /** errors above what rounding explains */
  readonly aboveRounding: number;
  /** of them within 100 times of their estimate */
  readonly close: number;
  /** error above 1e-8 of the field though the estimate says less */
  readonly untold: number;
  /** estimates of at most 1e-8 of the field */
  readonly sharp: number;
  readonly evaluationsPerCase: number;
}

/** The part of a field that counts as exact, and how far an estimate may lie above an error. */
const EXACT = 1e-8;
const CLOSE = 100;

export function worthOf(cases: readonly TrustCase[], options: FieldOptions): Worth {
  const worth = { errors: 0, covered: 0, aboveRounding: 0, close: 0, untold: 0, sharp: 0 };
  let evaluations = 0;
  for (const given of cases) {
    const { error, estimate, size, reference, rounding, evaluations: own } = judged(given, options);
    evaluations += own;
    error.forEach((e, g) => {
      // What no instant and place feels says nothing of estimates.
      if (size[g] === 0) return;
      worth.errors++;
      if (e <= estimate[g]! + reference[g]!) worth.covered++;
      if (e > 2 * rounding[g]! + reference[g]!) {
        worth.aboveRounding++;
        if (estimate[g]! <= CLOSE * e) worth.close++;
      }
      if (estimate[g]! <= EXACT * size[g]!) {
        worth.sharp++;
        if (e > EXACT * size[g]! + reference[g]!) worth.untold++;
      }
    });
  }
  return { ...worth, evaluationsPerCase: evaluations / cases.length };
}
