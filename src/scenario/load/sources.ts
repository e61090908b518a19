import { formatQuantity } from '../../elementary/quantity.ts';
import { mediumOf } from '../constants.ts';
import { circle, norm, scale } from '../curve.ts';
import { sourceBounds } from '../distance.ts';
import type { Grid, Medium, Source, Vec3 } from '../model.ts';
import { type Path, parts, type Report, uniqueNames } from '../reading.ts';
import { LIMITS, sourceSchema } from '../schema.ts';
import { CELL_SLACK } from '../sites.ts';
import type { Waveform } from '../waveform.ts';
import type { CurrentRules, GivenSource } from './given.ts';
import { buildSampled, curveOf } from './sampled.ts';
import { buildWaveform } from './waveform.ts';
import { termsOf } from './waves.ts';

/**
 * The sound sources of a file, each with its place in it (`index`): a sampled wire makes several. Reports what is wrong
 * with the others.
 */
export function buildSources(
  value: unknown,
  medium: Medium,
  rules: CurrentRules,
  report: Report,
): { index: number; source: Source }[] {
  const { allowJump, notes } = rules;
  const given = parts(sourceSchema, value, LIMITS.sources);
  const names = uniqueNames(given, ({ type }) => type, 'sources', report);
  return given.flatMap(({ index, given: source }, k) => {
    const path = ['sources', index];
    const name = names[k]!;
    if (source.type === 'wire' && source.current.profile === 'sampled')
      return buildSampled(source, name, rules, path, report).map((built) => ({ index, source: built }));
    const givenWaveform = source.current.waveform;
    if (!givenWaveform) return [];
    const waveform = buildWaveform(givenWaveform, allowJump, name, [...path, 'current', 'waveform'], notes, report);
    if (!waveform) return [];
    const built = buildSource(source, name, waveform, medium, path, report);
    return built ? [{ index, source: built }] : [];
  });
}

/** The sound sources of a scenario file that need not be sound itself: where they lie. */
export function readSources(value: unknown): Source[] {
  const rules: CurrentRules = { allowJump: true, duration: undefined, asked: 'frequency', notes: [] };
  return buildSources(value, mediumOf(1, 1), rules, () => {}).map(({ source }) => source);
}

function buildSource(
  given: GivenSource,
  name: string,
  waveform: Waveform,
  medium: Medium,
  path: Path,
  report: Report,
): Source | undefined {
  if (given.type === 'dipole') {
    const { at, length } = given;
    return { type: 'dipole', name, at, direction: unit(given.direction), length, waveform };
  }
  if (given.type === 'loop') {
    const curve = circle(given.centre, unit(given.normal), given.radius);
    return { type: 'loop', name, curve, terms: [{ factor: 1, delay: 0, slowness: 0 }], waveform };
  }
  const curve = curveOf(given, path, report);
  return curve && { type: 'wire', name, curve, terms: termsOf(given.current, curve.length, medium.speed), waveform };
}

/** A vector of length 1, without overflow on the way. */
function unit(v: Vec3): Vec3 {
  const scaled = scale(v, 1 / Math.max(...v.map(Math.abs)));
  return scale(scaled, 1 / norm(scaled));
}

/** Reports a source that is not at least a cell inside the box. */
export function checkInside(index: number, source: Source, grid: Grid, report: Report): void {
  const { from, to } = sourceBounds(source);
  const wrong = ([0, 1, 2] as const).filter(
    (a) =>
      from[a] < grid.box.from[a] + grid.cellSize[a] * (1 - CELL_SLACK) ||
      to[a] > grid.box.to[a] - grid.cellSize[a] * (1 - CELL_SLACK),
  );
  if (wrong.length === 0) return;
  const key = source.type === 'dipole' ? 'at' : source.type === 'wire' ? 'points' : 'centre';
  const reach = wrong
    .map(
      (a) =>
        `reaches from ${formatQuantity(from[a], 'm')} to ${formatQuantity(to[a], 'm')} along ${'xyz'[a]}, where the box spans ${formatQuantity(grid.box.from[a], 'm')} to ${formatQuantity(grid.box.to[a], 'm')}`,
    )
    .join(' and ');
  report(
    ['sources', index, key],
    `puts “${source.name}” outside the box or within a cell of its walls: it ${reach}; move the source or enlarge grid.box`,
  );
}
