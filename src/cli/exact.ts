import Papa from 'papaparse';
import { formatQuantity } from '../elementary/quantity.ts';
import { fieldOf } from '../retarded/field.ts';
import { prepareSources } from '../retarded/prepare.ts';
import { fieldBySpectrum, type SpectralValue, type SteadyValue, steadyField } from '../retarded/spectral.ts';
import { Refusal } from '../run/compare.ts';
import { type Residuals, residualsOf } from '../run/residuals.ts';
import { type Disagreement, disagreement, type PeaksAt } from '../run/routes.ts';
import { distanceToSources, firstArrival } from '../scenario/distance.ts';
import { loadScenario } from '../scenario/load.ts';
import type { Medium, Source, Vec3 } from '../scenario/model.ts';
import { readRows } from './rows.ts';
import { Walk } from './walk.ts';

export const ROUTES = ['retarded', 'spectral'] as const;

export interface ExactOptions {
  /** retarded integrals, or spectra and back (which are then held against the integrals) */
  readonly route: (typeof ROUTES)[number];
  /** the file asks for frequencies, in the steady state, instead of instants */
  readonly frequencies: boolean;
}

/** What two routes, and the potentials of one of them, say of each other. */
export interface RoutesCompared {
  readonly disagreement: readonly Disagreement[];
  /** of the retarded route at the first places; null where no field reaches them */
  readonly residuals: Residuals | null;
}

/** A row of the points file: x, y, z (m) and t (s) or f (Hz). */
type Row = readonly [x: number, y: number, z: number, at: number];

const QUANTITIES = ['Ex', 'Ey', 'Ez', 'Hx', 'Hy', 'Hz', 'Bx', 'By', 'Bz', 'phi', 'Ax', 'Ay', 'Az'];
const ERRORS = ['errorE', 'errorH'];

/**
 * The exact field at the points and instants (or frequencies) of a CSV file.
 * @returns CSV in the order of the file, SI units; and, where two routes were taken, how far they are apart
 * @throws Refusal for a scenario with problems; InputError naming row, column and value of a file that cannot be used,
 *   or row and source of a point that lies on one
 */
export async function exactCommand(
  scenarioInput: unknown,
  pointsFile: string,
  { route, frequencies }: ExactOptions,
  signal: AbortSignal,
): Promise<{ csv: string; routes?: RoutesCompared }> {
  const loaded = loadScenario(scenarioInput, frequencies ? 'frequency' : 'time');
  if ('problems' in loaded) throw new Refusal(loaded.problems);
  const { sources, medium } = loaded.scenario;
  const rows = readRows(pointsFile, ['x', 'y', 'z', frequencies ? 'f' : 't']).rows as unknown as readonly Row[];
  const walk = new Walk(signal);
  try {
    if (frequencies) {
      const at = steadyField(sources, medium);
      const values = await walk.map('the steady state', rows, ([x, y, z, f]) => flatPhasors(at([x, y, z], f)));
      return {
        csv: csvOf(
          'f',
          QUANTITIES.flatMap((name) => [`${name}Re`, `${name}Im`]),
          rows,
          values,
        ),
      };
    }
    const at = fieldOf(prepareSources(sources, medium, 'best'));
    const integrals = await walk.map('the exact field', rows, ([x, y, z, t]) => at([x, y, z], t));
    if (route === 'retarded') return { csv: csvOf('t', QUANTITIES, rows, integrals.map(flat)) };
    const spectral = await spectralValues(sources, medium, rows, walk);
    return {
      csv: csvOf('t', QUANTITIES, rows, spectral.values.map(flat)),
      routes: {
        disagreement: disagreement(spectral.values, integrals, spectral.peaks, medium),
        residuals: residualsOf(sources, medium, rows.map(pointOf), Math.max(...rows.map(([, , , t]) => t))),
      },
    };
  } finally {
    walk.end();
  }
}

/** The field by spectra, point by point: all instants of one point share its lines. */
async function spectralValues(
  sources: readonly Source[],
  medium: Medium,
  rows: readonly Row[],
  walk: Walk,
): Promise<{ values: SpectralValue[]; peaks: PeaksAt[] }> {
  const groups = new Map<string, number[]>();
  rows.forEach(([x, y, z], n) => {
    const key = `${x} ${y} ${z}`;
    groups.set(key, [...(groups.get(key) ?? []), n]);
  });
  const first = [...groups.values()].map(([n]) => firstArrival(sources, medium, pointOf(rows[n!]!)));
  const stretches = [...groups.values()].map((members, g) => Math.max(...members.map((n) => rows[n]![3])) - first[g]!);
  const at = fieldBySpectrum(sources, medium, Math.max(0, ...stretches));
  const values = new Array<SpectralValue>(rows.length);
  const peaks = new Array<PeaksAt>(rows.length);
  await walk.map('the field by spectra', [...groups.values()], (members) => {
    const found = at(
      pointOf(rows[members[0]!]!),
      members.map((n) => rows[n]![3]),
    );
    const here = { ...found.peaks(), distance: distanceToSources(sources, pointOf(rows[members[0]!]!)) };
    members.forEach((n, m) => {
      values[n] = found.values[m]!;
      peaks[n] = here;
    });
  });
  return { values, peaks };
}

const pointOf = ([x, y, z]: Row): Vec3 => [x, y, z];

type Value = Pick<SpectralValue, 'E' | 'H' | 'B' | 'phi' | 'A' | 'errorE' | 'errorH'>;

const flat = ({ E, H, B, phi, A, errorE, errorH }: Value): number[] => [...E, ...H, ...B, phi, ...A, errorE, errorH];

const flatPhasors = ({ E, H, B, phi, A, errorE, errorH }: SteadyValue): number[] => [
  ...[...E, ...H, ...B, phi, ...A].flat(),
  errorE,
  errorH,
];

function csvOf(
  at: 't' | 'f',
  quantities: readonly string[],
  rows: readonly Row[],
  values: readonly (readonly number[])[],
): string {
  const table = [['x', 'y', 'z', at, ...quantities, ...ERRORS], ...rows.map((row, n) => [...row, ...values[n]!])];
  return `${Papa.unparse(table as unknown[][], { newline: '\n' })}\n`;
}

/** What `exact --route spectral` says of the two routes. */
export function disagreementText({ disagreement: list, residuals }: RoutesCompared): string {
  const unit = { E: 'V/m', H: 'A/m', phi: 'V', A: 'V·s/m' } as const;
  const name = { E: 'E', H: 'H', phi: 'φ', A: 'A' } as const;
  const rows = list.map(
    ({ quantity, largest, row, peak }) =>
      `  ${name[quantity].padEnd(3)}${largest.toExponential(1).padStart(9)} of ${formatQuantity(peak, unit[quantity])}, row ${row + 2}`,
  );
  const left = residuals
    ? [
        ['E = −∇φ − ∂A/∂t and B = ∇×A', residuals.potentials],
        ['∇·A + εμ ∂φ/∂t = 0', residuals.gauge],
        ['wave equation of φ and A', residuals.wave],
      ].map(([equation, x]) => `  ${(x as number).toExponential(1).padStart(7)}  ${equation}`)
    : ['  no field reaches them'];
  return [
    'Spectral against retarded route, largest difference relative to the peak at the same point:',
    ...rows,
    'Retarded route by differences of its own potentials at the first places, relative to the largest term:',
    ...left,
    '',
  ].join('\n');
}
