import type { z } from 'zod';
import { formatQuantity } from '../elementary/quantity.ts';
import { mediumOf } from './constants.ts';
import { firstArrival } from './distance.ts';
import type { Asked } from './load/given.ts';
import { buildGrid } from './load/grid.ts';
import { buildObservers, buildPlanes } from './load/places.ts';
import { buildSources, checkInside } from './load/sources.ts';
import type { Medium, Scenario } from './model.ts';
import { type Problem, part, type Report, readObject, reporter, reportIssue } from './reading.ts';
import { gridSchema, mediumSchema, scenarioSchema } from './schema.ts';
import { shortestWavelength } from './shortest.ts';

export type Loaded = { readonly scenario: Scenario } | { readonly problems: readonly Problem[] };

/** Below this the grid's dispersion alone is some 3 %. */
const CELLS_PER_WAVELENGTH_NOTED = 10;

/**
 * Reads and checks a scenario.
 * @param input the text of a scenario file, or what JSON.parse made of it
 * @param asked `frequency` where nothing but steady states will be asked for: currents given by frequency need not make a
 *   pulse then, and have no value in time
 * @returns the scenario in SI units with all defaults filled in, or every problem found, in the order of the file's
 *   sections. It throws nothing.
 */
export function loadScenario(input: unknown, asked: Asked = 'time'): Loaded {
  const read = readObject(input, 'The scenario', 'sources, grid and duration');
  if ('problems' in read) return read;
  const { file } = read;
  const problems: Problem[] = [];
  const report = reporter(file, 'The scenario', problems);
  for (const issue of scenarioSchema.safeParse(file).error?.issues ?? []) reportIssue(issue, [], file, report);
  const scenario = build(file, asked, report);
  return problems.length === 0 && scenario ? { scenario } : { problems };
}

/**
 * The scenario of what is sound in the file, reporting what is wrong with values taken together. Undefined where a
 * part it needs is missing; the schema has then reported that.
 */
function build(file: Record<string, unknown>, asked: Asked, report: Report): Scenario | undefined {
  const notes: string[] = [];
  const shape = scenarioSchema.shape;
  const title = part(shape.title, file.title) ?? '';
  const duration = part(shape.duration, file.duration);
  const tolerance = part(shape.tolerance, file.tolerance) ?? 0.05;
  const allowJump = part(shape.allowJump, file.allowJump) ?? false;
  const medium = mediumFrom(part(mediumSchema.optional(), file.medium));
  const givenGrid = part(gridSchema, file.grid);
  const grid = givenGrid && buildGrid(givenGrid, medium, duration, notes, report);
  const sources = buildSources(file.sources, medium, { allowJump, duration, asked, notes }, report);
  if (grid)
    for (const [n, { index, source }] of sources.entries())
      if (sources[n - 1]?.index !== index) checkInside(index, source, grid, report);
  const all = sources.map(({ source }) => source);
  const observers = buildObservers(file.observers, grid, all, report);
  const planes = buildPlanes(file.planes, grid, report);
  if (!grid || duration === undefined || all.length === 0) return undefined;

  const scenario = { title, medium, sources: all, grid, duration, observers, planes, tolerance, notes };
  noteResolution(scenario, notes);
  for (const { name, at } of observers)
    if (!all.some((source) => firstArrival([source], medium, at) < duration))
      notes.push(
        `Observer “${name}” sees nothing: the first field arrives at ${formatQuantity(firstArrival(all, medium, at), 's')}, the run ends at ${formatQuantity(duration, 's')}.`,
      );
  return scenario;
}

function mediumFrom(given: z.output<typeof mediumSchema> | undefined): Medium {
  return mediumOf(given?.relativePermittivity ?? 1, given?.relativePermeability ?? 1);
}

function noteResolution(scenario: Omit<Scenario, 'notes'>, notes: string[]): void {
  const coarsest = Math.max(...scenario.grid.cellSize);
  for (const source of scenario.sources) {
    const size = source.type === 'dipole' ? source.length : source.curve.length;
    if (source.type !== 'dipole' && size < coarsest)
      notes.push(
        `Source “${source.name}” is ${formatQuantity(size, 'm')} long, less than one cell of ${formatQuantity(coarsest, 'm')}: the grid sees it as a blur.`,
      );
  }
  const { frequency, wavelength, cells } = shortestWavelength(scenario);
  if (cells < CELLS_PER_WAVELENGTH_NOTED)
    notes.push(
      `The shortest significant wavelength, ${formatQuantity(wavelength, 'm')} at ${formatQuantity(frequency, 'Hz')} (−40 dB of what radiates), is ${Number(cells.toPrecision(2))} cells; ${CELLS_PER_WAVELENGTH_NOTED} or more are usual.`,
    );
}
