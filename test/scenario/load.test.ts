import { describe, expect, test } from 'vitest';
import { EXAMPLES } from '../../src/scenario/examples.ts';
import { MAX_CELLS, MAX_STEPS } from '../../src/scenario/load/grid.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import type { Scenario } from '../../src/scenario/model.ts';
import { describeProblem, type Problem } from '../../src/scenario/reading.ts';
import { scenarioJsonSchema } from '../../src/scenario/schema.ts';
import { SIGNIFICANT, shortestWavelength } from '../../src/scenario/shortest.ts';
import { observerCell, stepsOf, timeStepOf } from '../../src/scenario/sites.ts';
import { isUsual } from '../../src/scenario/walls.ts';

/** The scenario of the reference text, as a value to be changed. */
const bench = () => structuredClone(EXAMPLES['bench-cable-pulse']) as unknown as Json;
interface Json {
  [key: string]: Json;
}

function sound(input: unknown): Scenario {
  const loaded = loadScenario(input);
  if ('problems' in loaded) throw new Error(loaded.problems.map(describeProblem).join('\n'));
  return loaded.scenario;
}

function problemsOf(input: unknown): readonly Problem[] {
  const loaded = loadScenario(input);
  return 'problems' in loaded ? loaded.problems : [];
}

/** The reference scenario with values set at paths; undefined takes the key away. */
function changed(changes: Record<string, unknown>): Json {
  const scenario = bench();
  for (const [path, value] of Object.entries(changes)) {
    const keys = path.split('.');
    const last = keys.pop()!;
    const parent = keys.reduce<Json>((node, key) => node[key as never] as Json, scenario);
    if (value === undefined) delete parent[last as never];
    else (parent as Record<string, unknown>)[last] = value;
  }
  return scenario;
}

const WAVEFORM = 'sources.0.current.waveform';
const dipole = (more: object = {}) => ({
  type: 'dipole',
  at: [0, 0, 0],
  direction: [0, 0, 1],
  length: '1 mm',
  current: { waveform: bench().sources![0]!.current!.waveform },
  ...more,
});
const loop = (more: object = {}) => ({
  type: 'loop',
  centre: [0, 0, 0],
  normal: [0, 0, 1],
  radius: '10 mm',
  current: { waveform: bench().sources![0]!.current!.waveform },
  ...more,
});
/** A current given at three places of the reference wire, 0.1 m long. */
const sampled = (more: object = {}) => ({
  profile: 'sampled',
  positions: [0, '50 mm', '100 mm'],
  samples: Array.from({ length: 41 }, (_, n) => {
    const i = Math.exp(-0.5 * ((n - 20) / 2.2) ** 2) * (n % 40 === 0 ? 0 : 1);
    return [`${n * 0.05} ns`, i, 0.5 * i, 0];
  }),
  ...more,
});
const far = { from: ['-1 m', '-1 m', '-1 m'], to: ['1 m', '1 m', '1 m'] };

/** What is changed, the path that must be named, and words of the remedy or limit. */
const refusals: [string, Record<string, unknown>, string, string][] = [
  ['no sources', { sources: undefined }, 'sources', 'is missing; it must be a list of 1 to 1000 sources'],
  ['an empty list of sources', { sources: [] }, 'sources', 'a list of 1 to 1000 sources'],
  ['too many sources', { sources: Array(1001).fill(dipole()) }, 'sources', 'a list of 1 to 1000 sources'],
  ['no grid', { grid: undefined }, 'grid', 'keys of the grid: cellSize'],
  ['no cell size', { 'grid.cellSize': undefined }, 'grid.cellSize', 'is missing; it must be a length above 0'],
  ['no box', { 'grid.box': undefined }, 'grid.box', 'keys of the box: from, to'],
  ['no duration', { duration: undefined }, 'duration', 'is missing; it must be a time above 0'],
  ['an unknown key', { tolerence: 0.1 }, 'tolerence', 'did you mean “tolerance”?'],
  ['an unknown key of a waveform', { [`${WAVEFORM}.sigmma`]: 1 }, `${WAVEFORM}.sigmma`, 'did you mean “sigma”?'],
  ['a key of the grid that does not exist', { 'grid.layers': 8 }, 'grid.layers', 'may have cellSize'],
  [
    'an unknown gridding',
    { 'grid.gridding': 'stairs' },
    'grid.gridding',
    'must be one of trilinear, nearest, staircase',
  ],
  ['a unit alone', { 'grid.cellSize': 'mm' }, 'grid.cellSize', 'such as "5 mm" or 0.005 (metres)'],
  ['a number as text', { duration: '3' }, 'duration', 'without a unit; it must be a time'],
  ['a wrong kind of unit', { 'observers.0.at.1': '5 kg' }, 'observers.0.at.1', 'a mass; it must be a length'],
  ['an infinite quantity', { duration: '1e400 s' }, 'duration', 'beyond the largest number'],
  ['a number that is none', { duration: Number.NaN }, 'duration', 'it must be a time above 0'],
  ['a size beyond measure', { 'planes.0.at': 1e200 }, 'planes.0.at', 'at most 1e+30'],
  ['a negative cell', { 'grid.cellSize': -0.005 }, 'grid.cellSize', 'a length above 0'],
  ['two cell sizes', { 'grid.cellSize': ['1 mm', '2 mm'] }, 'grid.cellSize', 'three lengths, dx, dy and dz'],
  ['one bad cell size of three', { 'grid.cellSize': [1, 1, '0 m'] }, 'grid.cellSize.2', 'a length above 0'],
  ['a Courant number above 1', { 'grid.courant': 1.2 }, 'grid.courant', 'need at most 9.629e-12 s (the Courant limit'],
  ['a Courant number of 0', { 'grid.courant': 0 }, 'grid.courant', 'above 0 and at most 1'],
  [
    'an unknown source',
    { 'sources.0.type': 'wier' },
    'sources.0.type',
    'did you mean “wire”?); a source may be dipole',
  ],
  ['a source planned for later', { 'sources.0.type': 'sheet' }, 'sources.0.type', 'a source may be dipole, wire, loop'],
  ['an unknown waveform', { [`${WAVEFORM}.type`]: 'trapezoid' }, `${WAVEFORM}.type`, 'gaussian, gaussianDerivative'],
  [
    'an unknown profile',
    { 'sources.0.current.profile': 'sinusoidale' },
    'sources.0.current.profile',
    'did you mean “sinusoidal”?); it must be one of uniform, travelling',
  ],
  [
    'a sinusoidal current without a wavenumber',
    { 'sources.0.current': { profile: 'sinusoidal', waveform: dipole().current.waveform } },
    'sources.0.current.wavenumber',
    'must have a wavenumber, such as "62.8 rad/m"',
  ],
  [
    'a wavenumber in metres',
    { 'sources.0.current': { profile: 'sinusoidal', wavenumber: '0.1 m', waveform: dipole().current.waveform } },
    'sources.0.current.wavenumber',
    'it must be a wavenumber, such as "62.8 rad/m"',
  ],
  [
    'a reflection of a uniform current',
    { 'sources.0.current': { reflection: { end: -1 }, waveform: dipole().current.waveform } },
    'sources.0.current.reflection',
    'belongs to the profile "travelling" or "waves"',
  ],
  [
    'a reflection that amplifies',
    { 'sources.0.current.reflection': { end: -1.2 } },
    'sources.0.current.reflection.end',
    'a number from -1 to 1',
  ],
  [
    'a decay of nothing',
    {
      'sources.0.current': {
        waves: [{ direction: 'forward', decayLength: 0 }],
        waveform: dipole().current.waveform,
      },
    },
    'sources.0.current.waves.0.decayLength',
    'a length above 0',
  ],
  ['a current without a waveform', { [WAVEFORM]: undefined }, WAVEFORM, 'an object that describes a waveform'],
  [
    'a sampled current with a waveform of its own',
    { 'sources.0.current': { ...sampled(), waveform: dipole().current.waveform } },
    WAVEFORM,
    'a sampled current has its own',
  ],
  [
    'positions that end before the wire does',
    { 'sources.0.current': sampled({ positions: [0, '50 mm', '90 mm'] }) },
    'sources.0.current.positions',
    'they must begin at 0 and end at the wire’s length, 0.1 m',
  ],
  [
    'positions that fall',
    { 'sources.0.current': sampled({ positions: [0, '0 mm', '100 mm'] }) },
    'sources.0.current.positions.1',
    'positions must rise',
  ],
  [
    'a row with a number too few',
    {
      'sources.0.current': sampled({
        samples: [
          [0, 0, 0, 0],
          [1e-10, 1, 0],
          [2e-10, 0, 0, 0],
        ],
      }),
    },
    'sources.0.current.samples.1',
    'has 3 numbers; it must have an instant and 3 currents',
  ],
  [
    'a row with a length in it',
    {
      'sources.0.current': sampled({
        samples: [
          [0, 0, 0, 0],
          [1e-10, '1 m', 0, 0],
          [2e-10, 0, 0, 0],
        ],
      }),
    },
    'sources.0.current.samples.1.1',
    'it must be a current',
  ],
  [
    'neither preset nor terms',
    { [WAVEFORM]: { type: 'heidler' } },
    `${WAVEFORM}.preset`,
    'must have a preset or a list of terms',
  ],
  [
    'an unknown preset',
    { [WAVEFORM]: { type: 'heidler', preset: 'iec61000' } },
    `${WAVEFORM}.preset`,
    'it must be one of iec61000-4-2, iec62305-first',
  ],
  [
    'an exponent below 1',
    { [WAVEFORM]: { type: 'heidler', terms: [{ amplitude: 1, tau1: '1 ns', tau2: '9 ns', n: 0.5 }] } },
    `${WAVEFORM}.terms.0.n`,
    'an exponent from 1 to 100',
  ],
  [
    'a ramp of half a period',
    { [WAVEFORM]: { type: 'rampedSine', amplitude: 1, frequency: '1 GHz', ramp: 0.5, hold: 2 } },
    `${WAVEFORM}.ramp`,
    'periods from 1 to',
  ],
  [
    'a table that names a file where none is read',
    { [WAVEFORM]: { type: 'table', file: 'pulse.csv' } },
    `${WAVEFORM}.file`,
    'give the samples instead',
  ],
  [
    'a table that goes back in time',
    {
      [WAVEFORM]: {
        type: 'table',
        samples: [
          [0, 0],
          [2e-9, 1],
          [1e-9, 0],
        ],
      },
    },
    WAVEFORM,
    'sample 3 is at 1e-9 s, not after 2e-9 s',
  ],
  [
    'a table that begins with a jump',
    {
      [WAVEFORM]: {
        type: 'table',
        samples: [
          [0, '0.4 A'],
          ['1 ns', 1],
          [2e-9, 0],
        ],
      },
    },
    WAVEFORM,
    'begin the table with 0 A or set "allowJump": true',
  ],
  [
    'a table that ends with a jump',
    {
      [WAVEFORM]: {
        type: 'table',
        samples: [
          [0, 0],
          ['1 ns', 1],
          [2e-9, 0.3],
        ],
      },
    },
    WAVEFORM,
    'begin and end the table with 0 A',
  ],
  ['a source without a type', { 'sources.0.type': undefined }, 'sources.0.type', 'must name the type of a source'],
  ['a source that is no object', { 'sources.0': 3 }, 'sources.0', 'an object that describes a source'],
  ['a speed above 1', { 'sources.0.current.speed': 1.5 }, 'sources.0.current.speed', 'above 0 and at most 1'],
  ['a speed of 0', { 'sources.0.current.speed': 0 }, 'sources.0.current.speed', 'above 0 and at most 1'],
  [
    'a speed of a uniform current',
    { 'sources.0.current.profile': 'uniform' },
    'sources.0.current.speed',
    'remove it or set profile',
  ],
  [
    'waves that are not listed',
    { 'sources.0.current.profile': 'waves', 'sources.0.current.speed': undefined },
    'sources.0.current.waves',
    'must have a list of waves',
  ],
  [
    'a wave with a negative delay',
    { 'sources.0.current': { waves: [{ direction: 'forward', delay: '-1 ns' }], waveform: dipole().current.waveform } },
    'sources.0.current.waves.0.delay',
    'a time of 0 or more',
  ],
  [
    'a wave in no direction',
    { 'sources.0.current': { waves: [{ direction: 'up' }], waveform: dipole().current.waveform } },
    'sources.0.current.waves.0.direction',
    'one of forward, backward',
  ],
  ['no amplitude', { [`${WAVEFORM}.amplitude`]: '0 A' }, `${WAVEFORM}.amplitude`, 'a source needs a current'],
  ['a sigma of 0', { [`${WAVEFORM}.sigma`]: 0 }, `${WAVEFORM}.sigma`, 'a time above 0'],
  ['a jump at t = 0', { [`${WAVEFORM}.delay`]: '0.3 ns' }, `${WAVEFORM}.delay`, 'or set "allowJump": true'],
  ['a pulse before t = 0', { [`${WAVEFORM}.delay`]: '-9 ns' }, `${WAVEFORM}.delay`, 'raise its delay'],
  [
    'a double exponential that decays faster than it rises',
    { [WAVEFORM]: { type: 'doubleExponential', amplitude: 1, alpha: '2 1/ns', beta: '1 1/ns' } },
    `${WAVEFORM}.alpha`,
    'exchange them or raise beta',
  ],
  [
    'a burst of too many cycles',
    { [WAVEFORM]: { type: 'modulatedGaussian', amplitude: 1, delay: 1e-3, sigma: 1e-4, frequency: '1 GHz' } },
    `${WAVEFORM}.frequency`,
    'lower frequency or sigma',
  ],
  ['one point', { 'sources.0.points': [[0, 0, 0]] }, 'sources.0.points', 'a list of 2 to 10000 points'],
  [
    'coincident points',
    {
      'sources.0.points': [
        [0, 0, 0],
        [0, 0, '5 mm'],
        [0, 0, 0.005],
      ],
    },
    'sources.0.points.2',
    'remove one of them',
  ],
  ['a point of two', { 'sources.0.points.1': [0, 0] }, 'sources.0.points.1', 'three lengths'],
  [
    'a wire outside',
    { 'sources.0.points.1': [0, 0, '1 m'] },
    'sources.0.points',
    'move the source or enlarge grid.box',
  ],
  ['a dipole in a wall', { 'sources.0': dipole({ at: [0, '150 mm', 0] }) }, 'sources.0.at', '0.15 m along y'],
  ['a loop that is too wide', { 'sources.0': loop({ radius: '0.2 m' }) }, 'sources.0.centre', 'enlarge grid.box'],
  ['a loop without a radius', { 'sources.0': loop({ radius: 0 }) }, 'sources.0.radius', 'a length above 0'],
  [
    'a loop without an axis',
    { 'sources.0': loop({ normal: [0, 0, 0] }) },
    'sources.0.normal',
    'a vector that is not zero',
  ],
  [
    'a wave round a loop',
    { 'sources.0': loop({ current: { profile: 'travelling', waveform: dipole().current.waveform } }) },
    'sources.0.current.profile',
    'one of uniform',
  ],
  ['no direction', { 'sources.0': dipole({ direction: [0, 0, 0] }) }, 'sources.0.direction', 'not zero'],
  ['a direction in metres', { 'sources.0': dipole({ direction: [0, 0, '1 m'] }) }, 'sources.0.direction.2', 'a number'],
  [
    'source names given twice',
    { sources: [dipole({ name: 'a' }), dipole({ name: 'a' })] },
    'sources.1.name',
    'choose another',
  ],
  [
    'observer names given twice',
    {
      observers: [
        { name: 'A', at: [0.1, 0, 0] },
        { name: 'A', at: [0, 0.1, 0] },
      ],
    },
    'observers.1.name',
    'choose another',
  ],
  ['an empty name', { 'observers.0.name': '  ' }, 'observers.0.name', 'or leave the key out'],
  ['an observer on a source', { 'observers.0.at': [0, 0, '2 mm'] }, 'observers.0.at', 'move it a cell away'],
  ['an empty box', { 'grid.box.to.1': '-150 mm' }, 'grid.box.to.1', 'exchange or move the corners'],
  ['too few cells', { 'grid.cellSize': '200 mm' }, 'grid.cellSize', 'use smaller cells or a larger box'],
  [
    'too many cells',
    { 'grid.box': far, 'grid.cellSize': '2 mm' },
    'grid.cellSize',
    'use larger cells or a smaller box',
  ],
  ['too many steps', { duration: '3 us' }, 'duration', 'shorten it or use larger cells'],
  ['less than a step', { duration: '1 ps' }, 'duration', 'lengthen it or use smaller cells'],
  ['an unknown boundary', { 'grid.boundary.type': 'cplm' }, 'grid.boundary.type', 'did you mean “cpml”?'],
  ['half a layer', { 'grid.boundary.layers': 0.5 }, 'grid.boundary.layers', 'a whole number from 1 to 128'],
  ['no layer', { 'grid.boundary.layers': 0 }, 'grid.boundary.layers', 'a whole number from 1 to 128'],
  ['layers of a conductor', { 'grid.boundary.type': 'pec' }, 'grid.boundary.layers', 'it may have type'],
  [
    'grazing',
    { 'grid.boundary': { type: 'higdon2', angles: ['0 deg', '86 deg'] } },
    'grid.boundary.angles.1',
    '0 to 85 degrees',
  ],
  ['one angle', { 'grid.boundary': { type: 'higdon2', angles: ['45 deg'] } }, 'grid.boundary.angles', 'two angles'],
  [
    'much damping',
    { 'grid.boundary': { type: 'liao', damping: 0.3 } },
    'grid.boundary.damping',
    'a number from 0 to 0.2',
  ],
  [
    'split fields damped beyond what rounding bears',
    { 'grid.boundary': { type: 'splitPml', sigmaFactor: 9 } },
    'grid.boundary.sigmaFactor',
    'the limit is 6; use 3.2 or less',
  ],
  ['a missing face', { 'grid.boundary': { 'x-': { type: 'pec' } } }, 'grid.boundary.z+', 'is missing'],
  ['a boundary that is a word', { 'grid.boundary': 'cpml' }, 'grid.boundary', 'an object that describes a boundary'],
  ['triple precision', { 'grid.precision': 'triple' }, 'grid.precision', 'one of single, double'],
  ['a negative mask', { 'grid.mask': '-1 mm' }, 'grid.mask', 'a length of 0 or more'],
  [
    'a medium faster than light',
    { 'medium.relativePermittivity': 0.5 },
    'medium.relativePermittivity',
    'from 1 to 1000000',
  ],
  ['a plane outside', { 'planes.0.at': '1 m' }, 'planes.0.at', 'move it or enlarge grid.box'],
  ['a plane along nothing', { 'planes.0.normal': 'w' }, 'planes.0.normal', 'one of x, y, z'],
  ['a tolerance of 0', { tolerance: 0 }, 'tolerance', 'above 0 and at most 1'],
  ['a tolerance without a sign', { tolerance: '5' }, 'tolerance', 'such as 0.05 or "5 %"'],
  ['a title that is a number', { title: 3 }, 'title', 'a text'],
  ['observers that are no list', { observers: {} }, 'observers', 'a list of at most 1000 observers'],
  ['a key of the prototype', { constructor: 1 }, 'constructor', 'is not a key of the scenario'],
];

describe('refusals name the path, the value and the remedy', () => {
  test.each(refusals)('%s', (_, changes, path, words) => {
    const scenario = changed(changes);
    const problems = problemsOf(scenario);
    const problem = problems.find((each) => each.path === path);
    expect(problems.map(describeProblem).join('\n')).toContain(`${path}: `);
    expect(problem!.message).toContain(words);
    expect(problem!.message).toMatch(/^[^\n]+\.$/);
    expect(problem!.message).not.toContain('Invalid input');
    const value = path.split('.').reduce<unknown>((node, key) => (node as Json)?.[key as never], scenario);
    if (path !== 'constructor') expect(problem!.value).toEqual(value);
  });

  test('a key named __proto__ is refused and changes nothing', () => {
    const text = JSON.stringify(bench()).replace('{', '{"__proto__":{"polluted":1},');
    expect(problemsOf(text).map(({ path }) => path)).toEqual(['__proto__']);
    expect(({} as Json).polluted).toBeUndefined();
  });

  test('all problems are told at once, of values alone and of values together', () => {
    const scenario = changed({
      [`${WAVEFORM}.sigma`]: 'mm',
      'grid.courant': 2,
      duration: '1 s',
      'planes.0.at': '9 m',
      foo: 1,
      bar: 2,
    });
    scenario.sources![1] = dipole({ at: [0, 0, '2 m'] }) as unknown as Json;
    expect(
      problemsOf(scenario)
        .map(({ path }) => path)
        .sort(),
    ).toEqual([`${WAVEFORM}.sigma`, 'bar', 'duration', 'foo', 'grid.courant', 'planes.0.at', 'sources.1.at'].sort());
  });

  test('text that is not JSON is located by line and column', () => {
    const table: [string, string][] = [
      ['{"a": 1,}', 'line 1, column 9'],
      ['', 'line 1, column 1'],
      ['{\n  "a": tru\n}', 'line 2, column 8'],
      ['{"a": 1\r\n "b": 2}', 'line 2, column 2'],
      ['[".\u0001"]', 'control character'],
      ['['.repeat(100_000), 'nested too deeply'],
    ];
    for (const [text, words] of table) expect(problemsOf(text)[0]!.message).toContain(words);
  });

  test('what is no object is refused', () => {
    for (const input of [null, undefined, 3, [], 'null', '[]', '"a"', '1e999', true])
      expect(problemsOf(input)).toHaveLength(1);
  });

  test('depth and size are bounded', () => {
    const deep = `${'{"a":'.repeat(50_000)}1${'}'.repeat(50_000)}`;
    expect(problemsOf(JSON.stringify(bench()).replace('"title":', `"deep":${deep},"title":`))[0]!.path).toBe('deep');
    const points = Array.from({ length: 10_001 }, (_, n) => [0, 0, n * 1e-6]);
    expect(problemsOf(changed({ 'sources.0.points': points }))[0]!.path).toBe('sources.0.points');
    const brackets = `${'['.repeat(50_000)}${']'.repeat(50_000)}`;
    for (const key of ['title', 'sources', 'grid', 'medium'])
      expect(problemsOf({ ...bench(), [key]: JSON.parse(brackets) })[0]!.message).toMatch(/more than 100 deep/);
  });

  test('currents so small that their squares are 0 are refused, and not looked for without end', () => {
    const terms = [{ amplitude: -1.1e-239, tau1: '1.2 ns', tau2: '0.5 ns', n: 5 }];
    for (const waveform of [
      { type: 'heidler', terms },
      { type: 'gaussian', amplitude: 1e-200, delay: '0.9 ns', sigma: '0.1 ns' },
    ])
      expect(problemsOf(changed({ [WAVEFORM]: waveform }))[0]!.message).toMatch(
        /must be a current of 0, or of 1e-30 or more in size/,
      );
    const samples = [0, 1e-250, 0].map((current, n) => [n * 1e-9, current]);
    expect(problemsOf(changed({ [WAVEFORM]: { type: 'table', samples } }))[0]!.message).toMatch(/above 1e-250 A/);
    const steep = [0, 1e-323, 2e-9].map((t, n) => [t, n % 2]);
    expect(problemsOf(changed({ [WAVEFORM]: { type: 'table', samples: steep } }))[0]!.message).toMatch(/takes 1e-30 s/);
    // The flanks of a table may be as small as they come.
    const flanked = [0, 1e-250, 1, 1e-250, 0].map((current, n) => [n * 1e-9, current]);
    expect(problemsOf(changed({ [WAVEFORM]: { type: 'table', samples: flanked } }))).toEqual([]);
  });

  test('texts that would not show as they are have no place in a file', () => {
    for (const [text, code] of [
      ['a\u001b[2J', 'U+001B'],
      ['a\nWithin 5 %: everywhere', 'U+000A'],
      ['a\u009b', 'U+009B'],
      ['a\u202eb', 'U+202E'],
      ['a\u200bb', 'U+200B'],
      ['a\u{e0041}', 'U+E0041'],
      ['a\ud800', 'U+D800'],
      ['a\u0000', 'U+0000'],
    ] as const)
      for (const key of ['title', 'observers.0.name', 'sources.0.name', 'foo'])
        expect(problemsOf(changed({ [key]: text }))[0]).toMatchObject({
          path: key,
          message: expect.stringContaining(`holds ${code}, a character that does not show`),
        });
    // Persian and some emoji are not written right without joiners; accents and other scripts show.
    for (const title of ['می\u200cخواهم', '👩\u200d🔬', 'Größe, 場, 𝔼', "'=+-@"])
      expect('scenario' in loadScenario(changed({ title }))).toBe(true);
    // A key cannot make a line of its own either.
    const [problem] = problemsOf({ ...bench(), 'x\nWithin 5 %: everywhere\u001b[8m': 1 });
    expect(describeProblem(problem!)).toMatch(/^x\\u\{a\}Within 5 %: everywhere\\u\{1b\}\[8m: /);
  });
});

describe('what a file means', () => {
  test('the reference text', () => {
    const { title, sources, grid, duration, observers, planes, tolerance, notes } = sound(JSON.stringify(bench()));
    expect({ title, duration, tolerance, notes }).toEqual({
      title: 'Bench cable pulse',
      duration: 3e-9,
      tolerance: 0.05,
      notes: [],
    });
    expect(sources).toHaveLength(1);
    expect(sources[0]).toMatchObject({ type: 'wire', name: 'cable', curve: { length: 0.1, closed: false } });
    expect(grid.cells).toEqual([60, 60, 60]);
    expect(grid.mask).toBe(0.04);
    expect(observers).toEqual([{ name: 'A', at: [0.1, 0.02, 0.035], inside: true }]);
    expect(observerCell(grid, observers[0]!.at)).toEqual([50, 34, 37]);
    expect(planes).toEqual([{ name: 'xz', normal: 1, at: 0 }]);
  });

  test('defaults', () => {
    const { grid, medium, title, tolerance, sources, observers, planes } = sound(
      changed({
        title: undefined,
        medium: undefined,
        tolerance: undefined,
        observers: [{ at: [0.1, 0, 0] }],
        planes: undefined,
        'grid.courant': undefined,
        'grid.boundary': undefined,
        sources: [dipole(), dipole({ name: 'dipole 2' }), dipole(), loop()],
      }),
    );
    expect({ title, tolerance, planes }).toEqual({ title: '', tolerance: 0.05, planes: [] });
    expect(medium.speed).toBe(299_792_458);
    expect([grid.courant, grid.precision]).toEqual([0.99, 'single']);
    expect(sources.map(({ name }) => name)).toEqual(['dipole 1', 'dipole 2', 'dipole 3', 'loop 1']);
    expect(observers[0]!.name).toBe('observer 1');
    const wall = grid.boundary['y+'];
    expect(wall).toMatchObject({ type: 'cpml', layers: 10, grading: 3, kappaMax: 1, sigmaFactor: 1 });
    // αmax/(2πε) with αmax = 0.05/(ηh) is 0.05 v/(2πh), since 1/(ηε) = v
    const expected = (0.05 * 299_792_458) / (2 * Math.PI * 0.005);
    expect(Math.abs((wall as { alphaFrequency: number }).alphaFrequency / expected - 1)).toBeLessThan(1e-14);
  });

  test('unequal cells: time step, mask, and the absorber of each face by its own normal', () => {
    const { grid, medium } = sound(changed({ 'grid.cellSize': ['5 mm', '4 mm', '2.5 mm'], 'grid.courant': 0.5 }));
    expect(grid.cells).toEqual([60, 75, 120]);
    expect(grid.mask).toBe(0.04);
    const dt = 0.5 / (medium.speed * Math.sqrt(1 / 0.005 ** 2 + 1 / 0.004 ** 2 + 1 / 0.0025 ** 2));
    expect(Math.abs(timeStepOf(grid, medium) / dt - 1)).toBeLessThan(4 * Number.EPSILON);
    const alpha = (face: 'x-' | 'y+' | 'z+') => (grid.boundary[face] as { alphaFrequency: number }).alphaFrequency;
    expect(Math.abs(alpha('z+') / alpha('x-') / 2 - 1)).toBeLessThan(1e-15);
    expect(Math.abs(alpha('y+') / alpha('x-') / 1.25 - 1)).toBeLessThan(1e-15);
  });

  test('every boundary has defaults for what it does not say', () => {
    const loaded = (type: string) => sound(changed({ 'grid.boundary': { type } })).grid.boundary['z-'];
    expect(loaded('higdon2')).toEqual({ type: 'higdon2', angles: [0, Math.PI / 4], damping: 0.02 });
    expect(loaded('liao')).toEqual({ type: 'liao', damping: 0.02 });
    expect(loaded('splitPml')).toEqual({ type: 'splitPml', layers: 10, grading: 3, sigmaFactor: 1 });
    for (const type of ['pec', 'pmc', 'mur1', 'mur2']) expect(loaded(type)).toEqual({ type });
    const angles = (given: unknown): readonly number[] => {
      const wall = sound(changed({ 'grid.boundary': { type: 'higdon2', angles: given } })).grid.boundary['x+'];
      return wall.type === 'higdon2' ? wall.angles : [];
    };
    expect(angles(['0 deg', '45 deg'])[1]).toBeCloseTo(Math.PI / 4, 15);
    expect(isUsual({ type: 'higdon2', angles: angles(['0 deg', '45 deg']) as [number, number], damping: 0.02 })).toBe(
      true,
    );
    expect(isUsual({ type: 'higdon2', angles: angles(['0 deg', '44 deg']) as [number, number], damping: 0.02 })).toBe(
      false,
    );
    expect(angles(['30 deg', 0.5])[0]).toBeCloseTo(Math.PI / 6, 15);
  });

  test('a wall must not read more cells than there are', () => {
    const narrow = { 'grid.box.from': ['-10 mm', '-150 mm', '-150 mm'], 'grid.box.to': ['10 mm', '150 mm', '150 mm'] };
    const problems = problemsOf(changed({ ...narrow, 'grid.boundary': { type: 'liao' }, observers: [] }));
    expect(problems.map(({ path }) => path)).toEqual(['grid.boundary']);
    expect(problems[0]!.message).toContain('reads 4 cells inward; there are 4 cells along x');
  });

  test('Mur’s second order is refused beside walls that make it grow', () => {
    const faces = (others: object) => ({
      ...Object.fromEntries(['x-', 'x+', 'y-', 'y+', 'z-', 'z+'].map((face) => [face, { type: 'mur1' }])),
      'x-': { type: 'mur2' },
      ...others,
    });
    sound(changed({ 'grid.boundary': faces({ 'x+': { type: 'liao' } }) }));
    const problems = problemsOf(changed({ 'grid.boundary': faces({ 'z+': { type: 'cpml' } }) }));
    expect(problems.map(({ path }) => path)).toEqual(['grid.boundary.x-']);
    expect(problems[0]!.message).toContain('unstable beside cpml (z+)');
  });

  test('one boundary for each face', () => {
    const faces = { 'x-': { type: 'pec' }, 'x+': { type: 'mur1' }, 'y-': { type: 'cpml', layers: 4 } };
    const rest = { 'y+': { type: 'pec' }, 'z-': { type: 'pec' }, 'z+': { type: 'pec' } };
    const { boundary } = sound(changed({ 'grid.boundary': { ...faces, ...rest } })).grid;
    expect([boundary['x-'].type, boundary['x+'].type]).toEqual(['pec', 'mur1']);
    expect(boundary['y-']).toMatchObject({ type: 'cpml', layers: 4 });
  });

  test('the box is rounded outwards, beyond a slack of 1e-9 cells', () => {
    const outwards = sound(changed({ 'grid.box.to.2': '151 mm' }));
    expect(outwards.grid.cells).toEqual([60, 60, 61]);
    expect(Math.abs(outwards.grid.box.to[2] - 0.155)).toBeLessThan(1e-16);
    expect(outwards.notes).toEqual([expect.stringContaining('rounded outwards from 0.151 m to 61 whole cells')]);
    const slack = sound(changed({ 'grid.box.to.2': 0.15 + 0.5e-9 * 0.005 }));
    expect([slack.grid.cells[2], slack.notes.length]).toEqual([60, 0]);
    expect(sound(changed({ 'grid.box.to.2': 0.15 + 2e-9 * 0.005 })).grid.cells[2]).toBe(61);
  });

  test('waves: a backward one starts at the far end', () => {
    const current = (waves: object[]) => ({ waves, waveform: bench().sources![0]!.current!.waveform });
    const waves = [
      { direction: 'forward', speed: 0.5, factor: 2 },
      { direction: 'backward', delay: '1 ns', factor: -1 },
    ];
    const { sources, medium } = sound(
      changed({ 'sources.0.current': current(waves), 'medium.relativePermittivity': 4 }),
    );
    const v = medium.speed;
    const wire = sources[0]!;
    if (wire.type === 'dipole') throw new Error('a wire was expected');
    expect(wire.terms[0]).toEqual({ factor: 2, delay: 0, slowness: 1 / (0.5 * v) });
    // I(s, t) = −w(t − 1 ns − (L − s)/v)
    const { factor, delay, slowness } = wire.terms[1]!;
    for (const s of [0, 0.03, 0.1])
      expect(Math.abs(delay + slowness * s - (1e-9 + (0.1 - s) / v))).toBeLessThan(1e-9 * 4 * Number.EPSILON);
    expect(factor).toBe(-1);
  });

  test('uniform and travelling', () => {
    const termsWith = (current: object) => {
      const wire = sound(changed({ 'sources.0.current': { ...current, waveform: dipole().current.waveform } }))
        .sources[0]!;
      return wire.type === 'dipole' ? [] : wire.terms;
    };
    const v = 299_792_458;
    expect(termsWith({})).toEqual([{ factor: 1, delay: 0, slowness: 0 }]);
    expect(termsWith({ profile: 'uniform' })).toEqual([{ factor: 1, delay: 0, slowness: 0 }]);
    expect(termsWith({ profile: 'travelling' })).toEqual([{ factor: 1, delay: 0, slowness: 1 / v }]);
    expect(termsWith({ profile: 'travelling', speed: 0.8 })).toEqual([
      { factor: 1, delay: 0, slowness: 1 / (0.8 * v) },
    ]);
  });

  test('waves that decay and are reflected: each bounce a wave of its own, later and smaller', () => {
    const current = {
      waves: [{ direction: 'forward', speed: 0.5, factor: 2, decayLength: '0.2 m' }],
      reflection: { start: 0.5, end: -1, count: 2 },
      waveform: dipole().current.waveform,
    };
    const wire = sound(changed({ 'sources.0.current': current })).sources[0]!;
    if (wire.type === 'dipole') throw new Error('a wire was expected');
    const v = 0.5 * 299_792_458;
    const way = 0.1 / v;
    const left = Math.exp(-0.5);
    // factor, and the instant and size at which each wave passes s = 25 mm
    const expected = [
      [2, 0.025 / v, Math.exp(-0.125)],
      [-2 * left, way + 0.075 / v, Math.exp(-0.375)],
      [-left * left, 2 * way + 0.025 / v, Math.exp(-0.125)],
    ];
    expect(wire.terms.length).toBe(3);
    wire.terms.forEach(({ factor, delay, slowness, profile }, n) => {
      const [wanted, instant, size] = expected[n]!;
      expect(factor).toBeCloseTo(wanted!, 14);
      expect(Math.abs(delay + slowness * 0.025 - instant!)).toBeLessThan(1e-9 * 8 * Number.EPSILON);
      expect(profile!.value(0.025)).toBeCloseTo(size!, 14);
    });
  });

  test('a sampled current: one filament for each place at which current flows, straight lines between', () => {
    const { sources, notes } = sound(changed({ 'sources.0.current': sampled() }));
    expect(sources.map(({ name }) => name)).toEqual(['cable, s = 0 m', 'cable, s = 50 mm']);
    expect(notes).toEqual([]);
    const current = (s: number, t: number) =>
      sources.reduce(
        (sum, source) =>
          sum + (source.type === 'dipole' ? 0 : source.terms[0]!.profile!.value(s) * source.waveform.value(t)),
        0,
      );
    expect(current(0, 1e-9)).toBeCloseTo(1, 12);
    expect(current(0.025, 1e-9)).toBeCloseTo(0.75, 12);
    expect(current(0.075, 1e-9)).toBeCloseTo(0.25, 12);
    expect(current(0.1, 1e-9)).toBe(0);
  });

  test('the preset pulses, scaled to a nominal peak; ramped sine and table with their defaults', () => {
    const waveformOf = (waveform: object) =>
      sound(changed({ [WAVEFORM]: waveform, duration: '3 ns' })).sources[0]!.waveform;
    expect(waveformOf({ type: 'heidler', preset: 'iec61000-4-2', amplitude: '30 A' }).spec).toEqual({
      type: 'heidler',
      terms: [
        { amplitude: 33.2, tau1: 1.1e-9, tau2: 2e-9, n: 1.8 },
        { amplitude: 18.6, tau1: 12e-9, tau2: 37e-9, n: 1.8 },
      ],
    });
    expect(waveformOf({ type: 'rampedSine', amplitude: '1 A', frequency: '1 GHz', hold: 2 }).spec).toEqual({
      type: 'rampedSine',
      amplitude: 1,
      frequency: 1e9,
      ramp: 3,
      hold: 2,
    });
    const samples = sampled().samples.map(([t, i]) => [t, i]);
    const { spec } = waveformOf({ type: 'table', samples, delay: '1 ns' });
    expect(spec.type === 'table' && [spec.times[0], spec.times[40]! - 3e-9 < 1e-24]).toEqual([1e-9, true]);
  });

  test('a table too coarse for its own spectrum, and small ends taken as 0, are noted', () => {
    const samples = Array.from({ length: 9 }, (_, n) => [n * 1e-10, [0, 1, -1, 1, -1, 1, -1, 1, 2e-4][n]]);
    const { notes } = sound(changed({ [WAVEFORM]: { type: 'table', samples } }));
    expect(notes.join()).toContain('ends with 0.0002 of its peak, which is taken as 0');
    expect(notes.join()).toContain('resolve frequencies up to 5 GHz');
  });

  test('directions are made units, whatever their length', () => {
    for (const size of [1e-300, 1, 1e300]) {
      const [source] = sound(changed({ 'sources.0': dipole({ direction: [3 * size, 0, 4 * size] }) })).sources;
      const { direction } = source as { direction: readonly number[] };
      [0.6, 0, 0.8].forEach((x, a) => {
        expect(Math.abs(direction[a]! - x)).toBeLessThan(2 * Number.EPSILON);
      });
    }
  });

  test('a closed polyline is closed', () => {
    const corner = ['0 mm', '0 mm', '0 mm'];
    const points = [corner, ['20 mm', 0, 0], [0, '20 mm', 0], corner];
    const wire = sound(changed({ 'sources.0.points': points })).sources[0]!;
    expect(wire).toMatchObject({ curve: { closed: true } });
  });

  test('jumps: a note above 1e-7, refused above 1e-3 unless allowed, by the waveform or for all', () => {
    const note = sound(changed({ [`${WAVEFORM}.delay`]: '0.45 ns' })).notes;
    expect(note).toEqual([expect.stringContaining('The current of “cable” jumps at t = 0 by 0.00004 of its peak')]);
    const large = { [`${WAVEFORM}.delay`]: '0.3 ns' };
    expect(sound(changed({ ...large, [`${WAVEFORM}.allowJump`]: true })).notes[0]).toContain('jumps');
    expect(sound(changed({ ...large, allowJump: true })).notes[0]).toContain('jumps');
    expect(problemsOf(changed({ ...large, allowJump: true, [`${WAVEFORM}.allowJump`]: false }))).toHaveLength(1);
  });

  test('observers outside are kept; on the upper walls they read the last cell; ties go down', () => {
    const at = [
      ['0.3 m', 0, 0],
      ['150 mm', '150 mm', '150 mm'],
      ['102.5 mm', '-97.5 mm', '102.6 mm'],
    ];
    const { observers, grid } = sound(changed({ observers: at.map((each) => ({ at: each })) }));
    expect(observers.map(({ inside }) => inside)).toEqual([false, true, true]);
    expect(observerCell(grid, observers[1]!.at)).toEqual([59, 59, 59]);
    expect(observerCell(grid, observers[2]!.at)).toEqual([50, 10, 51]);
  });

  test('notes: coarse cells, a small source, a run too short for an observer', () => {
    const { notes } = sound(
      changed({
        'grid.cellSize': '15 mm',
        'sources.0': loop({ radius: '2 mm' }),
        'observers.0.at': ['2 m', 0, 0],
      }),
    );
    expect(notes).toHaveLength(3);
    expect(notes[0]).toContain('Source “loop 1” is 12.6 mm long, less than one cell of 15 mm');
    expect(notes[1]).toContain('is 3.5 cells; 10 or more are usual');
    expect(notes[2]).toContain('Observer “A” sees nothing');
  });

  test('the limits are those that are stated', () => {
    // 440 cells along each axis with the absorber fit; 441 do not.
    const side = (cells: number) =>
      changed({ 'grid.box': { from: [-1, -1, -1], to: [-1, -1, -1].map((x) => x + 0.005 * (cells - 20)) } });
    expect(sound(side(440)).grid.cells).toEqual([420, 420, 420]);
    expect(problemsOf(side(441))[0]!.path).toBe('grid.cellSize');
    expect(MAX_CELLS.single).toBe(440 ** 3);
    const { grid, medium } = sound(bench());
    const dt = timeStepOf(grid, medium);
    expect(stepsOf(sound(changed({ duration: dt * MAX_STEPS })).duration, dt)).toBe(MAX_STEPS);
    expect(problemsOf(changed({ duration: dt * (MAX_STEPS + 1) }))[0]!.path).toBe('duration');
  });
});

test('shortest wavelength: the highest of all sources, in cells of the coarsest axis', () => {
  const fast = dipole({
    current: { waveform: { type: 'gaussian', amplitude: 1, delay: '0.45 ns', sigma: '0.05 ns' } },
  });
  const scenario = sound(changed({ sources: [fast, dipole()], 'grid.cellSize': ['2 mm', '3 mm', '2.5 mm'] }));
  const { frequency, wavelength, cells } = shortestWavelength(scenario);
  expect(frequency).toBe(scenario.sources[0]!.waveform.highestFrequency(SIGNIFICANT));
  expect(frequency).toBeGreaterThan(scenario.sources[1]!.waveform.highestFrequency(SIGNIFICANT));
  expect(wavelength).toBe(299_792_458 / frequency);
  expect(cells).toBe(wavelength / 0.003);
});

describe('examples', () => {
  test.each(Object.entries(EXAMPLES))('%s loads without a note and runs in seconds', (_, example) => {
    const scenario = sound(JSON.stringify(example));
    expect(scenario.notes).toEqual([]);
    const steps = stepsOf(scenario.duration, timeStepOf(scenario.grid, scenario.medium));
    expect(Math.max(...scenario.grid.cells)).toBeLessThanOrEqual(70);
    expect(steps).toBeLessThanOrEqual(500);
    expect(scenario.planes).toHaveLength(1);
  });
});

test('the JSON Schema describes every key and refuses unknown ones', () => {
  const schema = scenarioJsonSchema();
  expect(schema).toMatchObject({
    title: 'Fieldassay scenario',
    type: 'object',
    required: ['sources', 'grid', 'duration'],
  });
  expect(schema).not.toHaveProperty('$id');
  let keys = 0;
  const walk = (node: unknown, path: string): void => {
    if (typeof node !== 'object' || node === null) return;
    const { properties, additionalProperties } = node as Record<string, Record<string, { description?: string }>>;
    if (properties) {
      expect(additionalProperties, path).toBe(false);
      for (const [key, value] of Object.entries(properties)) {
        keys++;
        expect(value.description, `${path}.${key}`).toMatch(/\S/);
      }
    }
    for (const [key, value] of Object.entries(node)) walk(value, `${path}.${key}`);
  };
  walk(schema, '');
  expect(keys).toBeGreaterThan(50);
});
