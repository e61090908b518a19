import { CPML_DEFAULTS, HIGDON_DEFAULTS, LIAO_DEFAULTS, SPLIT_PML_DEFAULTS } from '../scenario/schema.ts';
import type { QuantityField } from './fields.ts';
import type { Draft } from './store.ts';

/** Keys of each waveform beside `type`, and what a new one begins with. */
export const WAVEFORM_FIELDS: Readonly<Record<string, readonly Omit<QuantityField, 'path'>[]>> = (() => {
  const amplitude = {
    name: 'amplitude',
    unit: 'A',
    help: 'Peak current, A; negative turns it round.',
    step: 0.1,
  } as const;
  const delay = {
    name: 'delay',
    unit: 'ns',
    help: 'Centre of the pulse, ns: at least 8.6 sigma keep the jump at t = 0 below rounding.',
    min: 0,
    max: 20,
    step: 0.01,
  } as const;
  const sigma = {
    name: 'sigma',
    unit: 'ns',
    help: 'Time scale of the pulse, ns, above 0: shorter means higher frequencies.',
    min: 0.01,
    max: 2,
    step: 0.005,
  } as const;
  return {
    gaussian: [amplitude, delay, sigma],
    gaussianDerivative: [amplitude, delay, sigma],
    modulatedGaussian: [
      amplitude,
      delay,
      sigma,
      { name: 'frequency', unit: 'GHz', help: 'Carrier frequency, GHz, above 0.', min: 0.05, max: 20, step: 0.05 },
    ],
    doubleExponential: [
      amplitude,
      { name: 'alpha', unit: '1/ns', help: 'Rate of decay, 1/ns; smaller than beta.', min: 0.01, max: 20, step: 0.01 },
      { name: 'beta', unit: '1/ns', help: 'Rate of rise, 1/ns; larger than alpha.', min: 0.02, max: 100, step: 0.01 },
    ],
    heidler: [amplitude],
    rampedSine: [
      amplitude,
      { name: 'frequency', unit: 'GHz', help: 'Frequency of the sine, GHz, above 0.', min: 0.05, max: 20, step: 0.05 },
      {
        name: 'ramp',
        unit: '',
        help: 'Periods that the rise and the fall each take, 1 or more.',
        min: 1,
        max: 20,
        step: 0.5,
        fallback: 3,
      },
      { name: 'hold', unit: '', help: 'Periods at full amplitude, 0 or more.', min: 0, max: 50, step: 0.5 },
    ],
    // Samples are edited in the text.
    table: [],
  };
})();

export const BEGINNINGS: Readonly<Record<string, Draft>> = {
  gaussian: { amplitude: '1 A', delay: '0.9 ns', sigma: '0.1 ns' },
  gaussianDerivative: { amplitude: '1 A', delay: '0.9 ns', sigma: '0.1 ns' },
  modulatedGaussian: { amplitude: '1 A', delay: '1.8 ns', sigma: '0.2 ns', frequency: '2 GHz' },
  doubleExponential: { amplitude: '1 A', alpha: '1 1/ns', beta: '10 1/ns' },
  heidler: { preset: 'iec61000-4-2', amplitude: '15 A' },
  rampedSine: { amplitude: '1 A', frequency: '2 GHz', ramp: 3, hold: 2 },
  table: {
    samples: [
      ['0 ns', '0 A'],
      ['0.3 ns', '0.1 A'],
      ['0.6 ns', '1 A'],
      ['0.9 ns', '0.1 A'],
      ['1.2 ns', '0 A'],
    ],
  },
};

const pulse = (): Draft => ({ waveform: { type: 'gaussianDerivative', ...BEGINNINGS.gaussianDerivative } });

/** Sources to add, at x. */
export const NEW_SOURCES: readonly {
  readonly name: string;
  readonly help: string;
  readonly made: (x: string) => Draft;
}[] = [
  {
    name: 'Add a wire',
    help: 'Adds a straight wire along z, 60 mm long, beside the others.',
    made: (x) => ({
      type: 'wire',
      points: [
        [x, '0 mm', '-30 mm'],
        [x, '0 mm', '30 mm'],
      ],
      current: { profile: 'uniform', ...pulse() },
    }),
  },
  {
    name: 'Add a loop',
    help: 'Adds a circle of current about z, 10 mm in radius, beside the others.',
    made: (x) => ({ type: 'loop', centre: [x, '0 mm', '0 mm'], normal: [0, 0, 1], radius: '10 mm', current: pulse() }),
  },
  {
    name: 'Add a dipole',
    help: 'Adds a short element of current along z, 5 mm long, beside the others.',
    made: (x) => ({ type: 'dipole', at: [x, '0 mm', '0 mm'], direction: [0, 0, 1], length: '5 mm', current: pulse() }),
  },
];

export const WAVEFORM_HELP = 'Time dependence of the current; zero before t = 0.';

const LAYERS: Omit<QuantityField, 'fallback'> = {
  path: ['layers'],
  name: 'layers',
  unit: '',
  help: 'Cells of absorber outside the box; a whole number.',
  min: 1,
  max: 32,
  step: 1,
};

const DAMPING: Omit<QuantityField, 'fallback'> = {
  path: ['damping'],
  name: 'damping',
  unit: '',
  help: 'Loss a cell that keeps the wall from drifting.',
  min: 0,
  max: 0.05,
  step: 0.001,
};

const incidence = (n: 0 | 1, name: string): QuantityField => ({
  path: ['angles', n],
  name,
  unit: 'deg',
  help: 'Angle of incidence that nothing returns from, degrees from the normal.',
  min: 0,
  max: 85,
  step: 1,
});

/** What is edited of a boundary that all faces share; paths from the boundary. */
export const BOUNDARY_FIELDS: Readonly<Record<string, readonly QuantityField[]>> = {
  higdon2: [
    incidence(0, 'first angle'),
    incidence(1, 'second angle'),
    { ...DAMPING, fallback: HIGDON_DEFAULTS.damping },
  ],
  liao: [{ ...DAMPING, fallback: LIAO_DEFAULTS.damping }],
  cpml: [{ ...LAYERS, fallback: CPML_DEFAULTS.layers }],
  splitPml: [{ ...LAYERS, fallback: SPLIT_PML_DEFAULTS.layers }],
};

/** A boundary as it is written when it is chosen: what its controls change stands in the file. */
export function chosenBoundary(type: string): object {
  if (type === 'cpml' || type === 'splitPml') return { type, layers: CPML_DEFAULTS.layers };
  return type === 'higdon2' ? { type, angles: ['0 deg', '45 deg'] } : { type };
}
