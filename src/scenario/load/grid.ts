import type { z } from 'zod';
import { formatNumber, formatQuantity } from '../../elementary/quantity.ts';
import { type Axis, type Boundary, FACES, type Face, type Grid, type Medium, type Vec3 } from '../model.ts';
import type { Report } from '../reading.ts';
import { CPML_DEFAULTS, type gridSchema, HIGDON_DEFAULTS, LIAO_DEFAULTS, SPLIT_PML_DEFAULTS } from '../schema.ts';
import { CELL_SLACK, stepsOf, timeStepOf } from '../sites.ts';
import { cellsBehind, cellsRead } from '../walls.ts';

/** Cells of the lattice, absorbing layers included, that a 32-bit kernel holds beside its arrays for norms: 440³ singles. */
export const MAX_CELLS = { single: 440 ** 3, double: 440 ** 3 / 2 } as const;

/** Beyond this a run takes days on a desktop machine. */
export const MAX_STEPS = 200_000;

/** Fewer cells leave no room for a source beside the walls. */
const MIN_CELLS = 3;

/** The grid in SI units with its defaults; undefined where cells or box make none, which is reported. @param duration s */
export function buildGrid(
  given: z.output<typeof gridSchema>,
  medium: Medium,
  duration: number | undefined,
  notes: string[],
  report: Report,
): Grid | undefined {
  const { cellSize, box } = given;
  const courant = given.courant ?? 0.99;
  const precision = given.precision ?? 'single';
  if (courant > 1) {
    const wanted = formatExact(timeStepOf({ cellSize, courant }, medium));
    const limit = formatExact(timeStepOf({ cellSize, courant: 1 }, medium));
    report(
      ['grid', 'courant'],
      `is ${courant}, a time step of ${wanted} s; these cells need at most ${limit} s (the Courant limit, courant 1); lower courant`,
    );
  }

  const boxOfWholeCells = wholeCells(box, cellSize, notes, report);
  if (!boxOfWholeCells) return undefined;
  const { to, cells } = boxOfWholeCells;

  const boundary = boundaryOf(given.boundary, cellSize, medium);
  const across = [0, 1, 2].map((a) => {
    const [low, high] = [boundary[FACES[2 * a]!], boundary[FACES[2 * a + 1]!]];
    return cells[a]! + cellsBehind(low) + cellsBehind(high);
  });
  const total = across.reduce((product, n) => product * n, 1);
  if (!(total <= MAX_CELLS[precision])) {
    report(
      ['grid', 'cellSize'],
      `makes ${count(total)} cells with the absorber; the limit in ${precision} precision is ${count(MAX_CELLS[precision])}; use larger cells or a smaller box`,
    );
    return undefined;
  }

  const timeStep = timeStepOf({ cellSize, courant }, medium);
  checkWalls(boundary, across, given.boundary, { cellSize, timeStep }, medium, report);
  if (duration !== undefined) {
    const steps = stepsOf(duration, timeStep);
    if (!(steps <= MAX_STEPS))
      report(
        ['duration'],
        `makes ${count(steps)} steps of ${formatQuantity(timeStep, 's')}; the limit is ${count(MAX_STEPS)}; shorten it or use larger cells`,
      );
    if (duration < timeStep)
      report(
        ['duration'],
        `is ${formatQuantity(duration, 's')}, less than one time step, ${formatQuantity(timeStep, 's')}; lengthen it or use smaller cells`,
      );
  }
  const gridding = given.gridding ?? 'trilinear';
  const mask = given.mask ?? 8 * Math.max(...cellSize);
  return { cellSize, courant, box: { from: box.from, to }, cells, boundary, precision, gridding, mask };
}

/** The box with its upper corner rounded outwards to whole cells. */
function wholeCells(
  box: z.output<typeof gridSchema>['box'],
  cellSize: Vec3,
  notes: string[],
  report: Report,
): (Pick<Grid, 'cells'> & { to: Vec3 }) | undefined {
  const cells: [number, number, number] = [0, 0, 0];
  const to: [number, number, number] = [...box.to];
  let sound = true;
  for (const a of [0, 1, 2] as const) {
    const exact = (box.to[a] - box.from[a]) / cellSize[a];
    const corners = `its side from ${formatQuantity(box.from[a], 'm')} to ${formatQuantity(box.to[a], 'm')}`;
    if (!(exact > 0)) {
      report(
        ['grid', 'box', 'to', a],
        `must lie above box.from along ${'xyz'[a]}; ${corners} is empty; exchange or move the corners`,
      );
      sound = false;
      continue;
    }
    cells[a] = Math.ceil(exact - CELL_SLACK);
    to[a] = box.from[a] + cells[a] * cellSize[a];
    if (cells[a] < MIN_CELLS) {
      report(
        ['grid', 'cellSize'],
        `leaves ${cells[a]} cells of the box along ${'xyz'[a]}, ${corners}; at least ${MIN_CELLS} are needed; use smaller cells or a larger box`,
      );
      sound = false;
    } else if (cells[a] - exact > CELL_SLACK)
      notes.push(
        `The box ends at ${formatQuantity(to[a], 'm')} along ${'xyz'[a]}, rounded outwards from ${formatQuantity(box.to[a], 'm')} to ${cells[a]} whole cells.`,
      );
  }
  return sound ? { cells, to } : undefined;
}

type GivenBoundary = NonNullable<z.output<typeof gridSchema>['boundary']>;

type GivenWall = Extract<GivenBoundary, { type: string }>;

function boundaryOf(given: GivenBoundary | undefined, cellSize: Vec3, medium: Medium): Record<Face, Boundary> {
  const ofFace = (face: Face, normal: Axis): Boundary => {
    const wall: GivenWall = given === undefined ? { type: 'cpml' } : 'type' in given ? given : given[face];
    switch (wall.type) {
      case 'cpml':
        return {
          type: 'cpml',
          layers: wall.layers ?? CPML_DEFAULTS.layers,
          grading: wall.grading ?? CPML_DEFAULTS.grading,
          kappaMax: wall.kappaMax ?? CPML_DEFAULTS.kappaMax,
          alphaFrequency: wall.alphaFrequency ?? defaultAlphaFrequency(cellSize[normal], medium),
          sigmaFactor: wall.sigmaFactor ?? CPML_DEFAULTS.sigmaFactor,
        };
      case 'splitPml':
        return {
          type: 'splitPml',
          layers: wall.layers ?? SPLIT_PML_DEFAULTS.layers,
          grading: wall.grading ?? SPLIT_PML_DEFAULTS.grading,
          sigmaFactor: wall.sigmaFactor ?? SPLIT_PML_DEFAULTS.sigmaFactor,
        };
      case 'higdon2':
        return {
          type: 'higdon2',
          angles: wall.angles ?? HIGDON_DEFAULTS.angles,
          damping: wall.damping ?? HIGDON_DEFAULTS.damping,
        };
      case 'liao':
        return { type: 'liao', damping: wall.damping ?? LIAO_DEFAULTS.damping };
      default:
        return wall;
    }
  };
  return {
    'x-': ofFace('x-', 0),
    'x+': ofFace('x+', 0),
    'y-': ofFace('y-', 1),
    'y+': ofFace('y+', 1),
    'z-': ofFace('z-', 2),
    'z+': ofFace('z+', 2),
  };
}

/** Berenger's σmaxΔt/ε: above it e^(σΔt/ε) magnifies rounding (src/fdtd/boundaries/splitPml.ts). */
const MOST_LOST_A_STEP = 6;

/**
 * What may stand beside a wall of Mur's second order: next to conditions with other rims, or within layers that stretch what
 * it reads along itself, it grows (test/stress/stability.test.ts).
 */
const GOES_WITH_MUR_2: ReadonlySet<Boundary['type']> = new Set(['pec', 'mur1', 'mur2']);

/** What walls ask of the lattice as a whole. */
function checkWalls(
  boundary: Record<Face, Boundary>,
  across: readonly number[],
  given: GivenBoundary | undefined,
  { cellSize, timeStep }: { readonly cellSize: Vec3; readonly timeStep: number },
  medium: Medium,
  report: Report,
): void {
  const oneForAll = given === undefined || 'type' in given;
  const told = new Set<string>();
  FACES.forEach((face, f) => {
    const wall = boundary[face];
    const path = ['grid', 'boundary', ...(oneForAll ? [] : [face])];
    const a = f >> 1;
    const tell = (key: string | null, what: string) => {
      const full = key === null ? path : [...path, key];
      if (!told.has(full.join('.'))) report(full, what);
      told.add(full.join('.'));
    };
    if (cellsRead(wall) >= across[a]!)
      tell(
        null,
        `is ${wall.type}, which reads ${cellsRead(wall)} cells inward; there are ${across[a]} cells along ${'xyz'[a]}; use smaller cells, a larger box or another boundary`,
      );
    const beside = FACES.filter((other, o) => o >> 1 !== a && !GOES_WITH_MUR_2.has(boundary[other].type));
    if (wall.type === 'mur2' && beside.length > 0)
      tell(
        null,
        `is mur2, which is unstable beside ${boundary[beside[0]!].type} (${beside.join(', ')}); it goes with ${[...GOES_WITH_MUR_2].join(', ')}; use mur1 here, or one of these there`,
      );
    if (wall.type !== 'splitPml') return;
    const each = (0.8 * (wall.grading + 1) * medium.speed * timeStep) / cellSize[a]!;
    if (wall.sigmaFactor * each > MOST_LOST_A_STEP)
      tell(
        'sigmaFactor',
        `is ${wall.sigmaFactor}, with grading ${wall.grading} a loss σmaxΔt/ε of ${formatNumber(wall.sigmaFactor * each, 3)} a step; the limit is ${MOST_LOST_A_STEP}; use ${Math.floor((10 * MOST_LOST_A_STEP) / each) / 10} or less, or a lower grading`,
      );
  });
}

/** f_α = αmax/(2πε) of αmax = 0.05/(ηh), Hz; h (m) the cell along the normal. */
function defaultAlphaFrequency(h: number, medium: Medium): number {
  return 0.05 / (medium.impedance * h) / (2 * Math.PI * medium.permittivity);
}

/** A number of cells or steps for people. */
function count(n: number): string {
  return n < 1e6 ? String(n) : Number.isFinite(n) ? `${Number((n / 1e6).toPrecision(3))} million` : 'too many';
}

/** A number with the four digits that tell a value from its limit. */
function formatExact(x: number): string {
  return String(Number(x.toPrecision(4)));
}
