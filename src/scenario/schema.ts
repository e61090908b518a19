/**
 * The scenario file: what may stand in it, with units, defaults and limits. Checks here see one value at a time; what
 * takes several together (a source in its box, steps in a duration) is checked by load.ts.
 *
 * Messages are predicates, "is -1; it must be …": the name of the key is put before them by whoever knows its path.
 */
import { z } from 'zod';
import { HEIDLER_EXPONENTS, HEIDLER_PRESETS } from './heidler.ts';
import { FACES, GRIDDINGS } from './model.ts';
import { nearest } from './nearest.ts';
import { SHORTEST_RAMP } from './rampedSine.ts';
import { KINDS, type Kind, type Parsed, parseFraction, parseQuantity, show } from './units.ts';

export const LIMITS = {
  sources: 1000,
  observers: 1000,
  planes: 100,
  pointsPerWire: 10_000,
  wavesPerWire: 100,
  bounces: 100,
  heidlerTerms: 20,
  samples: 10_000,
  stations: 200,
  lines: 2000,
  /** of a sine, in periods: a pulse solver answers longer ones badly */
  periods: 1e5,
  layers: 128,
  /** cells across one sigma of phase: more is a continuous wave, which a pulse solver answers badly */
  cyclesPerSigma: 1000,
  /** of any length, time, frequency, rate or current in SI units: their squares and cubes neither overflow nor vanish */
  magnitude: 1e30,
  least: 1e-30,
  text: 1000,
  name: 100,
} as const;

/** An error function for zod: one predicate for a value that is missing or of the wrong sort. */
export const expected =
  (wanted: string) =>
  ({ input }: { readonly input?: unknown }): string =>
    input === undefined ? `is missing; it must be ${wanted}` : `is ${show(input)}; it must be ${wanted}`;

/**
 * An object that refuses unknown keys; one line of its message for each.
 * @param what names the object in the message
 */
export function record<Shape extends z.core.$ZodLooseShape>(what: string, shape: Shape) {
  const known = Object.keys(shape);
  return z.strictObject(shape, {
    error: (issue) =>
      issue.code === 'unrecognized_keys'
        ? issue.keys.map((key) => unknownKey(String(key), what, known)).join('\n')
        : expected(`an object with the keys of ${what}: ${known.join(', ')}`)(issue),
  });
}

export function unknownKey(key: string, what: string, known: readonly string[]): string {
  return `is not a key of ${what}${nearest(key, known)}; it may have ${known.join(', ')}`;
}

/** The key that tells one of several objects apart. */
const tag = <const Name extends string>(name: Name, meaning: string) => z.literal(name).describe(meaning);

/** One of several objects, told apart by `type`. */
function oneOf<const Options extends readonly [z.core.$ZodTypeDiscriminable, ...z.core.$ZodTypeDiscriminable[]]>(
  what: string,
  types: readonly string[],
  options: Options,
) {
  return z.discriminatedUnion('type', options, {
    error: ({ input }) => {
      if (typeof input !== 'object' || input === null || Array.isArray(input))
        return expected(`an object that describes ${what}, its type one of ${types.join(', ')}`)({ input });
      const type = Object.hasOwn(input, 'type') ? (input as { type: unknown }).type : undefined;
      if (type === undefined) return `is missing; it must name the type of ${what}: ${types.join(', ')}`;
      const hint = typeof type === 'string' ? nearest(type, types) : '';
      return `is ${show(type)}${hint}; ${what} may be ${types.join(', ')}`;
    },
  });
}

function transformed(parse: (given: number | string) => Parsed, wanted: string) {
  return z.union([z.number(), z.string()], { error: expected(wanted) }).transform((given, ctx) => {
    const parsed = parse(given);
    if ('value' in parsed) return parsed.value;
    ctx.addIssue({ code: 'custom', message: parsed.reason });
    return z.NEVER;
  });
}

type Range = 'any' | 'size' | 'positive' | 'not negative';

/** A quantity with a unit, within a range. */
function quantity(kind: Kind, range: Range = 'any') {
  const { words, example } = KINDS[kind];
  const size = `${words} of 0, or of ${LIMITS.least} or more in size`;
  const wanted = { any: words, size, positive: `${words} above 0`, 'not negative': `${words} of 0 or more` }[range];
  return transformed((given) => {
    const parsed = parseQuantity(given, kind);
    if ('reason' in parsed) return parsed;
    if (Math.abs(parsed.value) > LIMITS.magnitude)
      return { reason: `is ${show(given)}; it must be at most ${LIMITS.magnitude} in SI units` };
    const { value } = parsed;
    const inRange = {
      any: true,
      size: value === 0 || Math.abs(value) >= LIMITS.least,
      positive: value >= LIMITS.least,
      'not negative': value >= 0,
    }[range];
    return inRange ? parsed : { reason: `is ${show(given)}; it must be ${wanted}, such as ${example}` };
  }, `${wanted}, such as ${example}`);
}

const point = (wanted: string) =>
  z.tuple([quantity('length'), quantity('length'), quantity('length')], {
    error: expected(`${wanted}: three lengths, such as ["0 mm", "20 mm", "-50 mm"]`),
  });

const number = (wanted: string) => z.number({ error: expected(wanted) });

/** A direction: three plain numbers, not all zero, of any length. */
const direction = z
  .tuple([number('a number'), number('a number'), number('a number')], {
    error: expected('a direction: three numbers, such as [0, 0, 1]'),
  })
  .refine((v) => v.some((x) => x !== 0), {
    error: 'is [0, 0, 0], which points nowhere; give a vector that is not zero',
  });

export const text = (limit: number, wanted: string) =>
  z.string({ error: expected(wanted) }).max(limit, { error: `is too long; it must be at most ${limit} characters` });

const name = text(LIMITS.name, `a name of at most ${LIMITS.name} characters`)
  .refine((given) => given.trim() !== '', { error: 'is empty; give a name, or leave the key out' })
  .optional();

export const choice = <const Names extends readonly [string, ...string[]]>(names: Names) =>
  z.enum(names, {
    error: ({ input }) =>
      input === undefined
        ? `is missing; it must be one of ${names.join(', ')}`
        : `is ${show(input)}${typeof input === 'string' ? nearest(input, names) : ''}; it must be one of ${names.join(', ')}`,
  });
const list = <Item extends z.ZodType>(item: Item, least: number, most: number, what: string) => {
  const wanted = `a list of ${least > 0 ? `${least} to ${most}` : `at most ${most}`} ${what}`;
  return z
    .array(item, { error: expected(wanted) })
    .min(least, { error: expected(wanted) })
    .max(most, { error: expected(wanted) });
};

const amplitude = (what: string) =>
  quantity('current', 'size')
    .refine((value) => value !== 0, { error: 'is 0; a source needs a current, such as "1 A"' })
    .describe(`${what}, A`);
const delay = quantity('time').describe(
  'Instant of the centre of the pulse, s. Nothing flows before t = 0: at least 8.6 sigma keep the jump there below rounding.',
);
const sigma = quantity('time', 'positive').describe('Time scale sigma, s; u = (t − delay)/sigma.');
const allowJump = z
  .boolean({ error: expected('true or false') })
  .optional()
  .describe('Accept a jump at t = 0 above 1e-3 of the peak (default: that of the scenario).');

export const WAVEFORMS = [
  'gaussian',
  'gaussianDerivative',
  'modulatedGaussian',
  'doubleExponential',
  'heidler',
  'rampedSine',
  'table',
] as const;

/** A file beside the scenario, which the command line reads and puts in place of its name. */
const file = (columns: string) =>
  text(LIMITS.text, 'the name of a CSV file')
    .optional()
    .describe(`CSV file with the columns ${columns}, relative to the scenario.`);

/** Columns of a table's file. */
export const TABLE_COLUMNS = 't,I (s and A)';
export const STATION_COLUMNS =
  't, then one of current for each arc length that the header names (s, A and m), such as t,0,0.05,0.1; or f, then real and ' +
  'imaginary part of the peak phasor of e^(+jωt) at each (Hz and A), such as f,0Re,0Im,0.05Re,0.05Im';

/** A number of periods, whole or not. */
const periods = (least: number) => {
  const error = expected(`a number of periods from ${least} to ${LIMITS.periods}`);
  return z.number({ error }).gte(least, { error }).lte(LIMITS.periods, { error });
};

/** A table in the file itself, under one of some keys, or the name of a CSV file; nothing else and not both. */
function oneOfTables(keys: readonly string[]) {
  return (given: Record<string, unknown>, ctx: z.core.$RefinementCtx): void => {
    const wrong = (key: string, message: string) => ctx.addIssue({ code: 'custom', path: [key], message });
    const found = [...keys, 'file'].filter((key) => given[key] !== undefined);
    if (found.length === 0) wrong(keys[0]!, `is missing; a table must have ${keys.join(' or ')} or name a file`);
    for (const key of found.slice(1)) wrong(key, `stands beside ${found[0]}; a table has one or the other; remove one`);
    if (found[0] === 'file')
      wrong(
        'file',
        `is ${show(given.file)}, and files are read by the command line alone; give the ${keys.join(' or ')} instead`,
      );
  };
}

const waveform = oneOf('a waveform', WAVEFORMS, [
  record('a Gaussian', {
    type: tag('gaussian', 'w = amplitude · exp(−u²/2).'),
    amplitude: amplitude('Peak current'),
    delay,
    sigma,
    allowJump,
  }),
  record('a Gaussian derivative', {
    type: tag('gaussianDerivative', 'w = −amplitude · √e · u · exp(−u²/2).'),
    amplitude: amplitude('Peak current'),
    delay,
    sigma,
    allowJump,
  }),
  record('a modulated Gaussian', {
    type: tag('modulatedGaussian', 'w = amplitude · exp(−u²/2) · sin(2π · frequency · (t − delay)).'),
    amplitude: amplitude('Peak of the envelope'),
    delay,
    sigma,
    frequency: quantity('frequency', 'positive').describe('Carrier frequency, Hz.'),
    allowJump,
  }).refine(({ frequency, sigma }) => frequency * sigma <= LIMITS.cyclesPerSigma, {
    path: ['frequency'],
    error: ({ input }) => {
      const { frequency, sigma } = input as { frequency: number; sigma: number };
      const cycles = Number((frequency * sigma).toPrecision(3));
      return `makes ${cycles} cycles in one sigma; a pulse may have at most ${LIMITS.cyclesPerSigma}; lower frequency or sigma`;
    },
  }),
  record('a double exponential', {
    type: tag('doubleExponential', 'w = k · (exp(−alpha·t) − exp(−beta·t)), k such that the peak is amplitude.'),
    amplitude: amplitude('Peak current'),
    alpha: quantity('rate', 'positive').describe('Rate of decay, 1/s; smaller than beta.'),
    beta: quantity('rate', 'positive').describe('Rate of rise, 1/s.'),
    allowJump,
  }).refine(({ alpha, beta }) => alpha < beta, {
    path: ['alpha'],
    error: ({ input }) => {
      const { alpha, beta } = input as { alpha: number; beta: number };
      return `is ${alpha} 1/s, not below beta, ${beta} 1/s; the decay must be slower than the rise: exchange them or raise beta`;
    },
  }),
  record('a Heidler pulse', {
    type: tag(
      'heidler',
      'w = Σ amplitude/η · xⁿ/(1 + xⁿ) · exp(−t/tau2), x = t/tau1, η = exp(−(tau1/tau2)(n·tau2/tau1)^(1/n)).',
    ),
    preset: choice(Object.keys(HEIDLER_PRESETS) as [keyof typeof HEIDLER_PRESETS, ...(keyof typeof HEIDLER_PRESETS)[]])
      .optional()
      .describe('A published pulse: iec61000-4-2 (contact discharge) or iec62305-first (10/350 µs stroke).'),
    amplitude: amplitude('With a preset: its nominal peak (default: 15 A at 4 kV, 200 kA)').optional(),
    terms: list(
      record('a term', {
        amplitude: amplitude('Amplitude of the term'),
        tau1: quantity('time', 'positive').describe('Time of rise, s.'),
        tau2: quantity('time', 'positive').describe('Time of decay, s.'),
        n: number('a number')
          .refine((n) => n >= HEIDLER_EXPONENTS.least && n <= HEIDLER_EXPONENTS.most, {
            error: expected(`an exponent from ${HEIDLER_EXPONENTS.least} to ${HEIDLER_EXPONENTS.most}`),
          })
          .describe('Exponent of the rise.'),
      }),
      1,
      LIMITS.heidlerTerms,
      'terms',
    )
      .optional()
      .describe('Terms whose sum is the pulse, in place of a preset.'),
    allowJump,
  }).superRefine(({ preset, amplitude, terms }, ctx) => {
    const wrong = (key: string, message: string) => ctx.addIssue({ code: 'custom', path: [key], message });
    if (preset && terms)
      wrong('terms', `stands beside preset ${show(preset)}; a pulse has one or the other; remove one`);
    if (!preset && !terms) wrong('preset', 'is missing; a Heidler pulse must have a preset or a list of terms');
    if (amplitude !== undefined && !preset)
      wrong('amplitude', 'belongs to a preset; give the amplitude of each term instead');
  }),
  record('a ramped sine', {
    type: tag(
      'rampedSine',
      'w = amplitude · r(t) · sin(2π · frequency · t), r rising from 0 to 1, staying, falling to 0.',
    ),
    amplitude: amplitude('Peak of the sine'),
    frequency: quantity('frequency', 'positive').describe('Frequency, Hz.'),
    ramp: periods(SHORTEST_RAMP).optional().describe('Periods that the rise and the fall each take (default 3).'),
    hold: periods(0).describe('Periods between them, at full amplitude.'),
    allowJump,
  }),
  record('a table', {
    type: tag('table', 'The natural cubic spline through samples; zero before the first and after the last.'),
    samples: z
      .array(
        z.tuple([quantity('time'), quantity('current')], {
          error: expected('a sample: an instant and a current, such as ["1 ns", "0.2 A"]'),
        }),
        { error: expected(`a list of 3 to ${LIMITS.samples} samples`) },
      )
      .min(3, { error: expected(`a list of 3 to ${LIMITS.samples} samples`) })
      .max(LIMITS.samples, { error: expected(`a list of 3 to ${LIMITS.samples} samples`) })
      .optional()
      .describe('Samples [t, I] in order of time, beginning and ending with no current.'),
    file: file(TABLE_COLUMNS),
    delay: quantity('time').optional().describe('Added to every instant of the table, s (default 0).'),
    allowJump,
  }).superRefine(oneOfTables(['samples'])),
]).describe('Time dependence w(t) of the current; zero for t < 0.');

const speed = number('a fraction of the speed of waves in the medium, above 0 and at most 1')
  .gt(0, { error: expected('above 0 and at most 1, the speed of waves in the medium') })
  .lte(1, { error: expected('above 0 and at most 1, the speed of waves in the medium') })
  .optional()
  .describe("Speed of the wave along the wire, relative to the medium's speed, above 0 and at most 1 (default 1).");

const wave = record('a wave', {
  direction: choice(['forward', 'backward']).describe(
    'forward: factor · w(t − delay − s/v); backward: factor · w(t − delay − (L − s)/v).',
  ),
  speed,
  delay: quantity('time', 'not negative').optional().describe('Delay of this wave, s, 0 or more (default 0).'),
  factor: number('a number')
    .refine((value) => Math.abs(value) <= LIMITS.magnitude, { error: expected(`at most ${LIMITS.magnitude} in size`) })
    .optional()
    .describe('Factor of this wave (default 1).'),
  decayLength: quantity('length', 'positive')
    .optional()
    .describe('Way along the wire on which the wave falls to 1/e, m (default: it does not).'),
});

const coefficient = number('a number from -1 to 1')
  .gte(-1, { error: expected('a number from -1 to 1') })
  .lte(1, { error: expected('a number from -1 to 1') })
  .optional();

const reflection = record('the reflections', {
  start: coefficient.describe('Of the current at the first point: -1 open, 0 matched (default), 1 shorted.'),
  end: coefficient.describe('The same at the last point.'),
  count: z
    .int({ error: expected(`a whole number from 1 to ${LIMITS.bounces}`) })
    .gte(1, { error: expected(`a whole number from 1 to ${LIMITS.bounces}`) })
    .lte(LIMITS.bounces, { error: expected(`a whole number from 1 to ${LIMITS.bounces}`) })
    .optional()
    .describe('How often a wave is reflected before it counts as absorbed (default 1).'),
});

export const PROFILES = ['uniform', 'travelling', 'waves', 'sinusoidal', 'sampled'] as const;

/** Which keys belong to which profile. */
const KEYS_OF_PROFILE = {
  speed: ['travelling'],
  waves: ['waves'],
  reflection: ['travelling', 'waves'],
  wavenumber: ['sinusoidal'],
  positions: ['sampled'],
  samples: ['sampled'],
  phasors: ['sampled'],
  file: ['sampled'],
} as const satisfies Record<string, readonly (typeof PROFILES)[number][]>;

const currentOfWire = record("a wire's current", {
  profile: choice(PROFILES)
    .optional()
    .describe(
      'uniform: I = w(t) (default); travelling: one forward wave; waves: the sum of `waves` (default if they are given); sinusoidal: I = sin(k(L/2 − |s − L/2|)) w(t); sampled: currents given at arc lengths, in time or by frequency, straight lines between them.',
    ),
  speed,
  waves: list(wave, 1, LIMITS.wavesPerWire, 'waves').optional().describe('Travelling waves whose sum is the current.'),
  reflection: reflection.optional().describe('What becomes of travelling waves at the ends (default: absorbed).'),
  wavenumber: quantity('wavenumber', 'positive').optional().describe('k of a sinusoidal current, rad/m.'),
  positions: list(quantity('length', 'not negative'), 2, LIMITS.stations, 'arc lengths')
    .optional()
    .describe('Arc lengths of the columns of `samples` or `phasors`, m, rising from 0 to the length of the wire.'),
  samples: list(
    z
      .array(z.union([z.number(), z.string()], { error: expected('a number, or a text with a unit') }), {
        error: expected('a list of an instant and one current for each position'),
      })
      .max(LIMITS.stations + 1, { error: expected(`a list of at most ${LIMITS.stations + 1} numbers`) }),
    3,
    LIMITS.samples,
    'samples',
  )
    .optional()
    .describe('Rows [t, I at the first position, I at the second, …] in order of time (s and A).'),
  phasors: list(
    z
      .array(z.union([z.number(), z.string()], { error: expected('a number, or a text with a unit') }), {
        error: expected('a list of a frequency and two currents for each position'),
      })
      .max(2 * LIMITS.stations + 1, { error: expected(`a list of at most ${2 * LIMITS.stations + 1} numbers`) }),
    1,
    LIMITS.lines,
    'rows',
  )
    .optional()
    .describe(
      'In place of samples: rows [f, Re I at the first position, Im I there, Re I at the second, …] of peak phasors of e^(+jωt), in order of frequency (Hz and A). In time they are taken together, I(t) = Re Σ I e^(j2πft) over one period 1/Δf: frequencies are then multiples of Δf without gaps, and nothing flows at t = 0.',
    ),
  file: file(STATION_COLUMNS),
  waveform: waveform.optional(),
}).superRefine((current, ctx) => {
  const wrong = (key: string, message: string) => ctx.addIssue({ code: 'custom', path: [key], message });
  const profile = current.profile ?? (current.waves ? 'waves' : 'uniform');
  for (const [key, profiles] of Object.entries(KEYS_OF_PROFILE))
    if (
      current[key as keyof typeof KEYS_OF_PROFILE] !== undefined &&
      !(profiles as readonly string[]).includes(profile)
    )
      wrong(
        key,
        `belongs to the profile ${profiles.map((name) => `"${name}"`).join(' or ')}, not to "${profile}"; remove it or set profile`,
      );
  if (profile === 'waves' && !current.waves)
    wrong('waves', 'is missing; the profile "waves" must have a list of waves');
  if (profile === 'sinusoidal' && current.wavenumber === undefined)
    wrong('wavenumber', 'is missing; the profile "sinusoidal" must have a wavenumber, such as "62.8 rad/m"');
  if (profile === 'sampled') {
    oneOfTables(['samples', 'phasors'])(current, ctx);
    if ((current.samples || current.phasors) && !current.positions)
      wrong('positions', 'is missing; a sampled current must have the arc lengths of its columns');
    if (current.waveform) wrong('waveform', 'belongs to the other profiles; a sampled current has its own; remove it');
  } else if (!current.waveform)
    wrong(
      'waveform',
      `is missing; it must be an object that describes a waveform, its type one of ${WAVEFORMS.join(', ')}`,
    );
});

const uniformCurrent = record("a loop's current", {
  profile: choice(['uniform']).optional().describe('uniform: I = w(t), the only profile of a loop.'),
  waveform,
});

export const SOURCES = ['dipole', 'wire', 'loop'] as const;

export const sourceSchema = oneOf('a source', SOURCES, [
  record('a dipole', {
    type: tag('dipole', 'A point Hertzian element.'),
    name: name.describe('Unique name (default: dipole 1, dipole 2, …).'),
    at: point('its position').describe('Position, m.'),
    direction: direction.describe('Direction of the moment: any vector that is not zero.'),
    length: quantity('length', 'positive').describe('Length of the element, m; its moment is w(t) · length.'),
    current: record("a dipole's current", { waveform }).describe('Current in the element.'),
  }),
  record('a wire', {
    type: tag('wire', 'A polyline of thin filament.'),
    name: name.describe('Unique name (default: wire 1, wire 2, …).'),
    points: list(point('a point of the wire'), 2, LIMITS.pointsPerWire, 'points').describe(
      'Corners of the wire, m, in the direction of positive current; closed if the last is the first.',
    ),
    current: currentOfWire.describe('Current along the wire; charge follows by continuity, at the ends too.'),
  }),
  record('a loop', {
    type: tag('loop', 'A circle of thin filament.'),
    name: name.describe('Unique name (default: loop 1, loop 2, …).'),
    centre: point('its centre').describe('Centre of the circle, m.'),
    normal: direction.describe('Axis of the circle: any vector that is not zero; current flows right-handed about it.'),
    radius: quantity('length', 'positive').describe('Radius of the circle, m.'),
    current: uniformCurrent.describe('Current round the loop.'),
  }),
]);

export const BOUNDARIES = ['pec', 'pmc', 'mur1', 'mur2', 'higdon2', 'liao', 'cpml', 'splitPml'] as const;

/** Defaults of a CPML; that of alphaFrequency depends on cells and medium, see load.ts. */
export const CPML_DEFAULTS = { layers: 10, grading: 3, kappaMax: 1, sigmaFactor: 1 } as const;

/** Defaults of a split-field PML: those of a CPML. */
export const SPLIT_PML_DEFAULTS = { layers: 10, grading: 3, sigmaFactor: 1 } as const;

/** Angles, rad, at which Higdon's condition returns nothing, and its damping. */
export const HIGDON_DEFAULTS = { angles: [0, Math.PI / 4], damping: 0.02 } as const;
/** Nearer to grazing a condition for one angle returns nearly all of every other. */
const STEEPEST_ANGLE = (85 * Math.PI) / 180;

export const LIAO_DEFAULTS = { damping: 0.02 } as const;

const within = (low: number, high: number, what: string) => {
  const error = expected(`${what} from ${low} to ${high}`);
  return z.number({ error }).gte(low, { error }).lte(high, { error }).optional();
};

const layers = (fallback: number) =>
  z
    .int({ error: expected(`a whole number from 1 to ${LIMITS.layers}`) })
    .gte(1, { error: expected(`a whole number from 1 to ${LIMITS.layers}`) })
    .lte(LIMITS.layers, { error: expected(`a whole number from 1 to ${LIMITS.layers}`) })
    .optional()
    .describe(`Cells of thickness, outside the box (default ${fallback}).`);

const incidence = transformed((given) => {
  const parsed = parseQuantity(given, 'angle');
  const inRange = 'reason' in parsed || (parsed.value >= 0 && parsed.value <= STEEPEST_ANGLE);
  return inRange ? parsed : { reason: `is ${show(given)}; it must be an angle from 0 to 85 degrees, such as "45 deg"` };
}, 'an angle from 0 to 85 degrees, such as "45 deg"');

const damping = (fallback: number) =>
  within(0, 0.2, 'a number').describe(
    `Damping d a cell; 0 is the undamped original, which drifts (default ${fallback}).`,
  );

const boundary = oneOf('a boundary', BOUNDARIES, [
  record('a perfect conductor', { type: tag('pec', 'Perfect electric conductor: the worst case, for scale.') }),
  record('a magnetic conductor', {
    type: tag('pmc', 'Perfect magnetic conductor: tangential H vanishes; a plane of symmetry.'),
  }),
  record('a Mur boundary', { type: tag('mur1', 'First-order absorbing wall (Mur 1981).') }),
  record('a second-order Mur boundary', {
    type: tag('mur2', 'Second-order absorbing wall, first-order at its rims (Mur 1981).'),
  }),
  record('a Higdon boundary', {
    type: tag('higdon2', 'Second-order absorbing wall for two angles of incidence (Higdon 1986, 1987).'),
    angles: z
      .tuple([incidence, incidence], { error: expected('two angles of incidence, such as ["0 deg", "45 deg"]') })
      .optional()
      .describe('Angles from the normal that nothing returns from, rad (default 0° and 45°).'),
    damping: damping(HIGDON_DEFAULTS.damping),
  }),
  record('a Liao boundary', {
    type: tag('liao', 'Multi-transmitting wall of order 2 (Liao and others 1984).'),
    damping: damping(LIAO_DEFAULTS.damping),
  }),
  record('a CPML', {
    type: tag('cpml', 'Convolutional perfectly matched layer (Roden & Gedney 2000).'),
    layers: layers(CPML_DEFAULTS.layers),
    grading: within(0, 10, 'an exponent').describe(
      `Exponent m of σ = σmax (depth/thickness)^m and of κ (default ${CPML_DEFAULTS.grading}).`,
    ),
    kappaMax: within(1, 100, 'a number').describe(`κ at the outer end (default ${CPML_DEFAULTS.kappaMax}).`),
    alphaFrequency: quantity('frequency', 'not negative')
      .optional()
      .describe(
        'f_α = αmax/(2πε), Hz; α falls linearly to 0 at the outer end (default: that of αmax = 0.05/(ηh), h the cell along the normal).',
      ),
    sigmaFactor: within(0, 100, 'a number').describe(
      `σmax in units of 0.8 (grading + 1)/(ηh) (default ${CPML_DEFAULTS.sigmaFactor}).`,
    ),
  }),
  record('a split-field PML', {
    type: tag('splitPml', 'Perfectly matched layer of split fields (Berenger 1994).'),
    layers: layers(SPLIT_PML_DEFAULTS.layers),
    grading: within(0, 10, 'an exponent').describe(
      `Exponent m of σ = σmax (depth/thickness)^m (default ${SPLIT_PML_DEFAULTS.grading}).`,
    ),
    sigmaFactor: within(0, 100, 'a number').describe(
      `σmax in units of 0.8 (grading + 1)/(ηh); σmaxΔt/ε may be 6 at most (default ${SPLIT_PML_DEFAULTS.sigmaFactor}).`,
    ),
  }),
]).describe('What the wall does to outgoing waves.');

/** The message of a union of two forms of one thing: the plain one first, then a list or an object of such. */
export const TWO_FORMS = 'has one of two forms';

const boundaryOfFaces = record(
  'the faces of the box',
  Object.fromEntries(FACES.map((face) => [face, boundary])) as Record<(typeof FACES)[number], typeof boundary>,
);

export const gridSchema = record('the grid', {
  cellSize: z
    .union(
      [
        quantity('length', 'positive'),
        z.tuple([quantity('length', 'positive'), quantity('length', 'positive'), quantity('length', 'positive')], {
          error: expected('three lengths, dx, dy and dz'),
        }),
      ],
      { error: TWO_FORMS },
    )
    .transform((size): [number, number, number] => (typeof size === 'number' ? [size, size, size] : size))
    .describe('Cell size, m: one length, or dx, dy, dz.'),
  courant: number('a number above 0 and at most 1')
    .gt(0, { error: expected('a number above 0 and at most 1') })
    .optional()
    .meta({ maximum: 1 })
    .describe('Courant number S; the time step is S / (v √(1/dx² + 1/dy² + 1/dz²)) (default 0.99).'),
  box: record('the box', {
    from: point('the lower corner').describe('Lower corner, m; node (0, 0, 0) lies there.'),
    to: point('the upper corner').describe('Upper corner, m; rounded outwards to whole cells.'),
  }).describe('Working region; absorbing layers lie outside it. Sources lie inside.'),
  boundary: z
    .union([boundary, boundaryOfFaces], { error: TWO_FORMS })
    .optional()
    .describe('One boundary for all faces, or one for each of x-, x+, y-, y+, z-, z+ (default: cpml with 10 layers).'),
  precision: choice(['single', 'double'])
    .optional()
    .describe('Precision of the fields on the grid (default single; double to measure below −80 dB).'),
  gridding: choice(GRIDDINGS)
    .optional()
    .describe(
      'How currents are put on edges: trilinear (default, second order), nearest or staircase, as other solvers may do it.',
    ),
  mask: quantity('length', 'not negative')
    .optional()
    .describe('Samples nearer to a source than this are left out of box norms, m (default: 8 of the largest cell).'),
});

export const mediumSchema = record('the medium', {
  relativePermittivity: within(1, 1e6, 'a number').describe('ε/ε0, from 1 (default 1).'),
  relativePermeability: within(1, 1e6, 'a number').describe('μ/μ0, from 1 (default 1).'),
});

export const observerSchema = record('an observer', {
  name: name.describe('Unique name (default: observer 1, observer 2, …).'),
  at: point('its position').describe('Position, m; on the grid it is the nearest node.'),
});

export const planeSchema = record('a plane', {
  name: name.describe('Unique name (default: plane 1, plane 2, …).'),
  normal: choice(['x', 'y', 'z']).describe('Axis the plane is normal to.'),
  at: quantity('length').describe('Coordinate along the normal, m, within the box.'),
});

export const scenarioSchema = record('the scenario', {
  title: text(LIMITS.text, 'a text').optional().describe('Title of reports (default: none).'),
  medium: mediumSchema.optional().describe('Homogeneous, lossless medium (default: vacuum).'),
  sources: list(sourceSchema, 1, LIMITS.sources, 'sources').describe('Known currents.'),
  grid: gridSchema.describe('The grid solver’s cells, box and walls.'),
  duration: quantity('time', 'positive').describe('How long the field is computed, s.'),
  observers: list(observerSchema, 0, LIMITS.observers, 'observers')
    .optional()
    .describe('Points whose field is traced. Outside the box they have an exact field but no grid trace.'),
  planes: list(planeSchema, 0, LIMITS.planes, 'planes').optional().describe('Planes shown as pictures and trust maps.'),
  tolerance: transformed((given) => {
    const parsed = parseFraction(given);
    return 'value' in parsed && !(parsed.value > 0 && parsed.value <= 1)
      ? { reason: `is ${show(given)}; it must be above 0 and at most 1 (100 %)` }
      : parsed;
  }, 'a fraction, such as 0.05 or "5 %"')
    .optional()
    .describe('Largest relative error that is good enough, 0.05 or "5 %" (default 0.05).'),
  allowJump: z
    .boolean({ error: expected('true or false') })
    .optional()
    .describe('Accept waveforms that jump at t = 0 by more than 1e-3 of their peak (default false).'),
});

/** The JSON Schema of scenario files, as an editor reads it. */
export function scenarioJsonSchema(): Record<string, unknown> {
  return { ...z.toJSONSchema(scenarioSchema, { io: 'input' }), title: 'Fieldassay scenario' };
}
