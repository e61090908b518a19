import type { CaseResult, LadderResult, Outcome, SurveyResult } from '../compare/surveyResult.ts';
import { isDone } from '../compare/surveyResult.ts';
import { pow } from '../elementary/elementary.ts';
import { formatNumber, formatPercent, formatQuantity, formatScientific } from '../elementary/quantity.ts';
import type { ColourName } from './palette.ts';
import { caseName, choicesOf, frontCases } from './surveyWords.ts';
import type { Chart, Mark, Series } from './svg.ts';

type Point = readonly [number, number];

/** Curves of one chart, at most: more cannot be told apart. */
const MOST_CHOICES = 8;

export const choiceColour = (n: number): ColourName => `choice${(n % MOST_CHOICES) + 1}` as ColourName;

const PART_COLOUR: Readonly<Record<string, ColourName>> = {
  boundary: 'boundary',
  lattice: 'lattice',
  boundaryAndLattice: 'muted',
  gridding: 'gridding',
  quadrature: 'quadrature',
};

/** A logarithmic axis around positive values. */
function logDomain(values: readonly number[], room: number): [number, number] {
  const sound = values.filter((v) => v > 0 && Number.isFinite(v));
  return [Math.min(...sound) / room, Math.max(...sound) * room];
}

const pairs = (x: readonly number[], y: readonly (number | null)[]): Point[] =>
  x.flatMap((v, n) => (y[n] !== null && y[n]! > 0 ? [[v, y[n]!] as const] : []));

/** The same with the indices of the cases that the points stand for. */
const casePairs = (x: readonly number[], y: readonly (number | null)[], cases: readonly number[]) => ({
  points: pairs(x, y),
  keys: cases.filter((_, n) => y[n] !== null && y[n]! > 0).map(String),
});

/** Errors, total and parts, against cell size; a slope for comparison; what the grid convergence index would have said. */
export function ladderChart(ladder: LadderResult, tolerance: number | null): Chart | null {
  const { sizes, errors, parts, gci, expectedOrder } = ladder;
  const total = pairs(sizes, errors);
  if (total.length < 2) return null;
  const finest = total[total.length - 1]!;
  const slope = (h: number): Point => [h, finest[1] * pow(h / finest[0], expectedOrder)];
  const series: Series[] = [
    {
      name: `slope ${formatNumber(expectedOrder)}`,
      colour: 'muted',
      thin: true,
      dashed: true,
      points: sizes.map(slope),
    },
    ...parts.flatMap(({ part, errors: own, floors }): Series[] => {
      const points = pairs(
        sizes,
        own.map((e, n) => (e !== null && e >= (floors[n] ?? 0) ? e : null)),
      );
      if (points.length === 0) return [];
      return [{ name: PART_NAMES[part] ?? part, colour: PART_COLOUR[part] ?? 'muted', points, dots: () => 'within' }];
    }),
    {
      name: 'total',
      colour: 'ink',
      ...casePairs(sizes, errors, ladder.cases),
      dots: ([, e]) => (tolerance !== null && e > tolerance ? 'outside' : 'within'),
    },
  ];
  const marks: Mark[] = [
    ...(tolerance === null
      ? []
      : [{ axis: 'y' as const, at: tolerance, label: `tolerance ${formatPercent(tolerance, 3)}` }]),
    ...(gci.value === null
      ? []
      : [{ axis: 'y' as const, at: gci.value, label: `index of the finest grid ${formatPercent(gci.value)}` }]),
  ];
  const all = [...series.flatMap(({ points }) => points.map(([, e]) => e)), ...marks.map(({ at }) => at)];
  return {
    title: `Error against cell size${named(ladder.settings)}`,
    description:
      'Relative L2 of E pooled over the observers, total and parts above their floors, both axes logarithmic.',
    x: {
      label: 'cell size',
      unit: 'm',
      scale: 'log',
      domain: logDomain(sizes, 1.08),
      ticks: sizes,
      format: (value) => formatQuantity(value, 'm'),
    },
    y: { label: 'relative L2', unit: '', scale: 'log', domain: logDomain(all, 1.5), format: (v) => formatPercent(v) },
    series,
    marks,
  };
}

export const PART_NAMES: Readonly<Record<string, string>> = { boundaryAndLattice: 'boundary and lattice' };

const named = (settings: CaseResult['settings']): string => {
  const name = caseName(settings);
  return name === '' ? '' : `: ${name}`;
};

/** Total errors of all ladders in one. */
export function laddersChart({ ladders }: SurveyResult, tolerance: number | null): Chart | null {
  const series = ladders.slice(0, MOST_CHOICES).flatMap(({ settings, sizes, errors, cases }, n): Series[] => {
    const own = casePairs(sizes, errors, cases);
    return own.points.length < 2
      ? []
      : [
          {
            name: caseName(settings),
            colour: choiceColour(n),
            ...own,
            dots: ([, e]) => (tolerance !== null && e > tolerance ? 'outside' : 'within'),
          },
        ];
  });
  if (series.length < 2) return null;
  const sizes = [...new Set(ladders.flatMap((ladder) => ladder.sizes))].sort((a, b) => a - b);
  const errors = [
    ...series.flatMap(({ points }) => points.map(([, e]) => e)),
    ...(tolerance === null ? [] : [tolerance]),
  ];
  return {
    title: 'Total error against cell size',
    description: 'Relative L2 of E pooled over the observers, one curve a ladder, both axes logarithmic.',
    x: {
      label: 'cell size',
      unit: 'm',
      scale: 'log',
      domain: logDomain(sizes, 1.08),
      ticks: spread(sizes, 8),
      format: (value) => formatQuantity(value, 'm'),
    },
    y: {
      label: 'relative L2',
      unit: '',
      scale: 'log',
      domain: logDomain(errors, 1.5),
      format: (v) => formatPercent(v),
    },
    series,
    marks: tolerance === null ? [] : [{ axis: 'y', at: tolerance, label: `tolerance ${formatPercent(tolerance, 3)}` }],
  };
}

/** A list, or so many of it, evenly. */
const spread = <T>(list: readonly T[], most: number): readonly T[] =>
  list.length <= most
    ? list
    : Array.from({ length: most }, (_, n) => list[Math.floor((n * (list.length - 1)) / (most - 1))]!);

/** The reflection seen at the worst observer over time, every choice, with the exact field and the floor. */
export function reflectionTimeChart(result: SurveyResult): Chart | null {
  const shown = reflected(result);
  if (shown.length === 0) return null;
  const [first] = shown;
  const end = Math.max(...shown.map(({ seen }) => seen.time.t[seen.time.t.length - 1] ?? 0));
  const low = depthOf(shown.map(({ floor }) => floor));
  return {
    title: `What the walls send back, over time${onFinest(result)}`,
    description:
      'Largest component of what came back at each case’s worst observer, in decibels of the peak of the exact field.',
    x: { label: 'time', unit: 's', scale: 'linear', domain: [0, end] },
    y: { label: 'dB of the exact peak', unit: '', scale: 'linear', domain: [low, 5] },
    series: [
      { name: 'exact', colour: 'exact', thin: true, points: curve(first!.seen.time.t, first!.seen.time.exact, low) },
      ...shown.map(({ name, colour, seen }) => ({
        name,
        colour,
        points: curve(seen.time.t, seen.time.reflected, low),
      })),
    ],
    marks: floorMarks(shown.map(({ floor }) => floor)),
  };
}

/** The same by frequency. */
export function reflectionFrequencyChart(result: SurveyResult): Chart | null {
  const shown = reflected(result).filter(({ seen }) => seen.frequency.f.length > 1);
  if (shown.length === 0) return null;
  const ends = shown.flatMap(({ seen }) => [seen.frequency.f[0]!, seen.frequency.f[seen.frequency.f.length - 1]!]);
  const low = depthOf(shown.map(({ floor }) => floor));
  return {
    title: `What the walls send back, by frequency${onFinest(result)}`,
    description:
      'Spectrum of what came back over that of the exact field, where that is within 40 dB of its strongest.',
    x: { label: 'frequency', unit: 'Hz', scale: 'linear', domain: [0, Math.max(...(ends as number[]))] },
    y: { label: 'dB of the exact field', unit: '', scale: 'linear', domain: [low, 5] },
    series: shown.map(({ name, colour, seen }) => ({
      name,
      colour,
      points: curve(seen.frequency.f, seen.frequency.ratio, low),
    })),
    marks: floorMarks(shown.map(({ floor }) => floor)),
  };
}

/** Plane waves by their angle to the wall's normal. */
export function reflectionAngleChart(result: SurveyResult): Chart | null {
  // A wall is the same wall at any clearance.
  const walls = new Map(
    reflected(result).flatMap(({ angles }) =>
      angles.map((each) => [JSON.stringify({ ...each, faces: [] }), each] as const),
    ),
  );
  const distinct = [...walls.values()]
    .slice(0, MOST_CHOICES)
    .map((each, n) => ({ name: each.wall, colour: choiceColour(n), each }));
  if (distinct.length === 0) return null;
  const low = depthOf(distinct.map(({ each }) => each.floor));
  const [first] = distinct;
  return {
    title: `What a wall sends back, by angle, at ${formatQuantity(first!.each.frequency, 'Hz')}`,
    description: 'Reflection of plane waves with E along the wall, against the angle from its normal.',
    x: { label: 'angle from the normal (°)', unit: '', scale: 'linear', domain: [0, 90] },
    y: { label: '|R| (dB)', unit: '', scale: 'linear', domain: [low, 5] },
    series: distinct.map(({ name, colour, each }) => ({
      name,
      colour,
      points: curve(each.angle, each.reflected, low),
    })),
    marks: floorMarks(distinct.map(({ each }) => each.floor)),
  };
}

/** "; cells 5 mm", where cells are varied. */
function onFinest({ vary, cases }: SurveyResult): string {
  if (!vary.includes('grid.cellSize')) return '';
  const sizes = cases.filter(isDone).map(({ cellSize }) => Math.max(...cellSize));
  return `; cells ${formatQuantity(Math.min(...sizes), 'm')}`;
}

const curve = (x: readonly (number | null)[], y: readonly (number | null)[], low: number): Point[] =>
  x.map((v, n) => [v!, Math.max(y[n] ?? low, low)] as const);

/** Some way below the floor. */
const depthOf = (floors: readonly (number | null)[]): number =>
  Math.max(-190, Math.min(...floors.map((f) => f ?? -100)) - 25);

function floorMarks(floors: readonly (number | null)[]): Mark[] {
  const sound = floors.filter((f) => f !== null);
  if (sound.length === 0) return [];
  const highest = Math.max(...sound);
  return [{ axis: 'y', at: highest, label: 'floor: below it nothing is called a reflection' }];
}

/**
 * Cases with a reflection, each seen at its worst observer; where cell sizes are varied, those on the finest alone; of many,
 * some spread evenly.
 */
function reflected(result: SurveyResult) {
  const volume = ({ cellSize: [dx, dy, dz] }: Outcome) => dx * dy * dz;
  const finest = Math.min(...result.cases.filter(isDone).map(volume));
  const all = result.cases.flatMap((each) => {
    if (!isDone(each) || !each.reflection || each.reflection.observers.length === 0) return [];
    if (volume(each) > finest * (1 + 1e-9)) return [];
    const { observers, floor, angles } = each.reflection;
    const seen = observers.reduce((a, b) => ((b.peak ?? -Infinity) > (a.peak ?? -Infinity) ? b : a));
    return [{ name: choiceName(each, result), seen, floor, angles }];
  });
  const stride = Math.max(1, all.length / MOST_CHOICES);
  return Array.from({ length: Math.min(all.length, MOST_CHOICES) }, (_, n) => ({
    ...all[Math.floor(n * stride)]!,
    colour: choiceColour(n),
  }));
}

/** A case's walls, and whatever else is varied but cell sizes. */
function choiceName(each: CaseResult & Outcome, { vary }: Pick<SurveyResult, 'vary'>): string {
  const others = Object.fromEntries(
    Object.entries(each.settings).filter(([key]) => !key.startsWith('grid.boundary') && key !== 'grid.cellSize'),
  );
  const rest = caseName(others);
  const walls = vary.some((key) => key.startsWith('grid.boundary'));
  if (!walls) return caseName(each.settings);
  return rest === '' ? each.walls.description : `${each.walls.description}, ${rest}`;
}

/** Total error against what it costs; the line joins what nothing beats. */
export function costChart(result: SurveyResult, tolerance: number | null): Chart | null {
  const points = result.cases.flatMap((each, n) =>
    isDone(each) && each.budget.total.relativeL2
      ? [{ at: [each.cost.cellUpdates, each.budget.total.relativeL2] as const, each, key: String(n) }]
      : [],
  );
  if (points.length < 2) return null;
  const drawn = (list: typeof points) => ({
    points: list.map(({ at }) => at),
    keys: list.map(({ key }) => key),
    dots: () => 'within' as const,
  });
  const best = frontCases(result);
  const front = best.flatMap((each) => points.filter((point) => point.each === each));
  const beaten = points.filter(({ each }) => !best.includes(each));
  const errors = [...points.map(({ at }) => at[1]), ...(tolerance === null ? [] : [tolerance])];
  return {
    title: 'Error against cost',
    description: 'Every case: total relative L2 of E against cell updates; the line joins those that no other beats.',
    x: {
      label: 'cell updates of the grid in its box',
      unit: '',
      scale: 'log',
      domain: logDomain(
        points.map(({ at }) => at[0]),
        1.3,
      ),
      format: (v) => formatScientific(v, 1),
    },
    y: {
      label: 'relative L2',
      unit: '',
      scale: 'log',
      domain: logDomain(errors, 1.5),
      format: (v) => formatPercent(v),
    },
    series: [
      { name: 'no other is better and cheaper', colour: 'ink', ...drawn(front) },
      {
        name: 'beaten by another',
        colour: 'muted',
        thin: true,
        scatter: true,
        ...drawn(beaten),
      },
    ],
    marks: tolerance === null ? [] : [{ axis: 'y', at: tolerance, label: `tolerance ${formatPercent(tolerance, 3)}` }],
  };
}

/** Against the clearance, one curve for each combination of the other settings: the boundary's part of the error. */
export function clearanceChart(result: SurveyResult): Chart | null {
  if (!result.vary.includes('grid.clearance')) return null;
  const series = choicesOf(result.cases.filter(isDone), 'grid.clearance').flatMap(({ name, cases }, n): Series[] => {
    const points = cases
      .flatMap((each) => {
        const part = each.budget.boundary;
        return part?.relativeL2 && part.relativeL2 >= (part.floor ?? 0)
          ? [{ at: [each.walls.clearance, part.relativeL2] as const, key: String(result.cases.indexOf(each)) }]
          : [];
      })
      .sort((a, b) => a.at[0] - b.at[0]);
    const label = name === '' ? cases[0]!.walls.description : name;
    return points.length === 0 || n >= MOST_CHOICES
      ? []
      : [
          {
            name: label,
            colour: choiceColour(n),
            points: points.map(({ at }) => at),
            keys: points.map(({ key }) => key),
            dots: () => 'within',
          },
        ];
  });
  const all = series.flatMap(({ points }) => points);
  if (new Set(all.map(([x]) => x)).size < 2) return null;
  return {
    title: 'The walls’ part of the error against their clearance',
    description:
      'Relative L2 of the boundary part of E against the distance from the box around the sources to the walls.',
    x: {
      label: 'clearance',
      unit: 'm',
      scale: 'log',
      domain: logDomain(
        all.map(([x]) => x),
        1.08,
      ),
      ticks: spread(
        [...new Set(all.map(([x]) => x))].sort((a, b) => a - b),
        8,
      ),
      format: (v) => formatQuantity(v, 'm'),
    },
    y: {
      label: 'boundary part',
      unit: '',
      scale: 'log',
      domain: logDomain(
        all.map(([, y]) => y),
        1.5,
      ),
      format: (v) => formatPercent(v),
    },
    series,
  };
}
