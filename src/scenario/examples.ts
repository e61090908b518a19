/**
 * Invented scenarios, small enough to run in a second or two: what the page opens with, what `examples` prints, and
 * what a newcomer edits. Plain JSON, as a file would hold it.
 */

/** The time a wave takes along one arm of the centre-fed wire, 50 mm at the speed of light, s. */
const ARM_DELAY = 0.05 / 299_792_458;

const BENCH_PULSE = { type: 'gaussian', amplitude: '1 A', delay: '0.9 ns', sigma: '0.1 ns' };

const BENCH_GRID = {
  cellSize: '5 mm',
  courant: 0.99,
  box: { from: ['-150 mm', '-150 mm', '-150 mm'], to: ['150 mm', '150 mm', '150 mm'] },
  boundary: { type: 'cpml', layers: 10 },
};

/** −40 dB of the spectrum of the current at 3 GHz; the delay is 9 sigma. */
const ARM_PULSE = { type: 'gaussianDerivative', amplitude: '1 A', delay: '1.70638 ns', sigma: '0.189598 ns' };

const arm = (name: string, end: string, sign: 1 | -1) => ({
  type: 'wire',
  name,
  points: [
    ['0 mm', '0 mm', '0 mm'],
    ['0 mm', '0 mm', end],
  ],
  current: {
    waves: [
      { direction: 'forward', factor: sign },
      { direction: 'backward', factor: -sign, delay: ARM_DELAY },
    ],
    waveform: ARM_PULSE,
  },
});

export const EXAMPLES = {
  'bench-cable-pulse': {
    title: 'Bench cable pulse',
    medium: { relativePermittivity: 1, relativePermeability: 1 },
    sources: [
      {
        type: 'wire',
        name: 'cable',
        points: [
          ['0 mm', '0 mm', '-50 mm'],
          ['0 mm', '0 mm', '50 mm'],
        ],
        current: { profile: 'travelling', speed: 1, waveform: BENCH_PULSE },
      },
    ],
    grid: BENCH_GRID,
    duration: '3 ns',
    observers: [{ name: 'A', at: ['100 mm', '20 mm', '35 mm'] }],
    planes: [{ name: 'xz', normal: 'y', at: '0 mm' }],
    tolerance: 0.05,
  },
  'tilted-wire': {
    title: 'Uniform pulse on a wire across the grid lines',
    sources: [
      {
        type: 'wire',
        name: 'tilted',
        points: [
          ['-22.8 mm', '-20.1 mm', '-39.3 mm'],
          ['25.2 mm', '15.9 mm', '40.7 mm'],
        ],
        current: {
          profile: 'uniform',
          waveform: { type: 'gaussianDerivative', amplitude: '1 A', delay: '1.08 ns', sigma: '0.12 ns' },
        },
      },
    ],
    grid: {
      ...BENCH_GRID,
      box: { from: ['-120 mm', '-120 mm', '-120 mm'], to: ['120 mm', '120 mm', '120 mm'] },
      boundary: { type: 'cpml', layers: 8 },
    },
    duration: '2.8 ns',
    observers: [
      { name: 'near', at: ['50 mm', '0 mm', '20 mm'] },
      { name: 'far', at: ['100 mm', '95 mm', '90 mm'] },
    ],
    planes: [{ name: 'xz', normal: 'y', at: '0 mm' }],
  },
  'small-loop': {
    title: 'Small loop in a polymer, with a burst',
    medium: { relativePermittivity: 2.25 },
    sources: [
      {
        type: 'loop',
        name: 'loop',
        centre: ['0 mm', '0 mm', '0 mm'],
        normal: [1, 1, 2],
        radius: '12 mm',
        current: {
          waveform: {
            type: 'modulatedGaussian',
            amplitude: '20 mA',
            delay: '2.7 ns',
            sigma: '0.3 ns',
            frequency: '1 GHz',
          },
        },
      },
    ],
    grid: {
      cellSize: '4 mm',
      box: { from: ['-100 mm', '-100 mm', '-100 mm'], to: ['100 mm', '100 mm', '100 mm'] },
      boundary: { type: 'cpml', layers: 10 },
    },
    duration: '5 ns',
    observers: [
      { name: 'on axis', at: ['28 mm', '28 mm', '56 mm'] },
      { name: 'in plane', at: ['-60 mm', '60 mm', '0 mm'] },
    ],
    planes: [{ name: 'xy', normal: 'z', at: '0 mm' }],
  },
  'dipole-near-corner': {
    title: 'Short element near a corner of a box with simple walls',
    sources: [
      {
        type: 'dipole',
        name: 'element',
        at: ['61 mm', '58 mm', '63 mm'],
        direction: [0, 0, 1],
        length: '5 mm',
        current: { waveform: { type: 'gaussianDerivative', amplitude: '1 A', delay: '1.35 ns', sigma: '0.15 ns' } },
      },
    ],
    grid: {
      cellSize: '5 mm',
      box: { from: ['-100 mm', '-100 mm', '-100 mm'], to: ['100 mm', '100 mm', '100 mm'] },
      boundary: {
        'x-': { type: 'cpml' },
        'x+': { type: 'mur1' },
        'y-': { type: 'cpml' },
        'y+': { type: 'mur1' },
        'z-': { type: 'cpml' },
        'z+': { type: 'mur1' },
      },
    },
    duration: '4 ns',
    observers: [
      { name: 'centre', at: ['0 mm', '0 mm', '0 mm'] },
      { name: 'beside the wall', at: ['90 mm', '20 mm', '35 mm'] },
      { name: 'outside', at: ['300 mm', '0 mm', '0 mm'] },
    ],
    planes: [{ name: 'xz', normal: 'y', at: '55 mm' }],
  },
  'centre-fed-wire': {
    title: 'Centre-fed wire, its pulse reflected at both ends',
    sources: [arm('upper arm', '50 mm', 1), arm('lower arm', '-50 mm', -1)],
    grid: { ...BENCH_GRID, boundary: { type: 'cpml', layers: 8 } },
    duration: '4 ns',
    observers: [
      { name: 'beside', at: ['50 mm', '0 mm', '20 mm'] },
      { name: 'at a wall', at: ['140 mm', '20 mm', '30 mm'] },
      { name: 'in a corner', at: ['130 mm', '130 mm', '120 mm'] },
    ],
    planes: [{ name: 'xz', normal: 'y', at: '0 mm' }],
  },
  'resonant-wire': {
    title: 'Half-wave wire with a sinusoidal current, switched on and off over three periods',
    sources: [
      {
        type: 'wire',
        name: 'half-wave',
        points: [
          ['0 mm', '0 mm', '-75 mm'],
          ['0 mm', '0 mm', '75 mm'],
        ],
        current: {
          profile: 'sinusoidal',
          wavenumber: '20.944 rad/m',
          waveform: { type: 'rampedSine', amplitude: '1 A', frequency: '999 MHz', ramp: 3, hold: 1 },
        },
      },
    ],
    grid: {
      cellSize: '10 mm',
      box: { from: ['-200 mm', '-200 mm', '-200 mm'], to: ['200 mm', '200 mm', '200 mm'] },
      boundary: { type: 'cpml', layers: 10 },
    },
    duration: '8.5 ns',
    observers: [
      { name: 'beside', at: ['120 mm', '0 mm', '20 mm'] },
      { name: 'off the end', at: ['20 mm', '10 mm', '160 mm'] },
    ],
    planes: [{ name: 'xz', normal: 'y', at: '0 mm' }],
  },
  'lossy-strap': {
    title: 'Steep pulse along a lossy strap with a bend, reflected at its end',
    sources: [
      {
        type: 'wire',
        name: 'strap',
        points: [
          ['-80 mm', '5 mm', '0 mm'],
          ['60 mm', '5 mm', '0 mm'],
          ['60 mm', '5 mm', '-70 mm'],
        ],
        current: {
          waves: [{ direction: 'forward', speed: 0.8, decayLength: '0.9 m' }],
          reflection: { end: -0.5 },
          waveform: { type: 'heidler', terms: [{ amplitude: '15 A', tau1: '1.2 ns', tau2: '0.5 ns', n: 5 }] },
        },
      },
    ],
    grid: {
      cellSize: '10 mm',
      box: { from: ['-150 mm', '-120 mm', '-150 mm'], to: ['150 mm', '120 mm', '120 mm'] },
      boundary: { type: 'cpml', layers: 10 },
    },
    duration: '9 ns',
    observers: [
      { name: 'above', at: ['0 mm', '70 mm', '60 mm'] },
      { name: 'below', at: ['-40 mm', '-60 mm', '-80 mm'] },
    ],
    planes: [{ name: 'xz', normal: 'y', at: '0 mm' }],
  },
} as const;

export type ExampleName = keyof typeof EXAMPLES;
