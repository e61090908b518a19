import type { GriddedSources } from '../../src/gridding/edges.ts';
import { chartFile } from '../../src/report/svg.ts';
import { DelayGrid, ElementList } from '../../src/retarded/delayGrid.ts';
import { constantsOf } from '../../src/retarded/elements.ts';
import { fieldOf } from '../../src/retarded/field.ts';
import { GriddedIntegrator } from '../../src/retarded/gridded.ts';
import { exactHistory } from '../../src/retarded/history.ts';
import { PART_NUMBERS, PartSums } from '../../src/retarded/partSums.ts';
import { viewOf } from '../../src/retarded/pieceView.ts';
import { prepareSources } from '../../src/retarded/prepare.ts';
import { KRONROD_POINTS } from '../../src/retarded/quadrature.ts';
import { framesOf, withBelow } from '../../src/run/planes.ts';
import { mediumOf } from '../../src/scenario/constants.ts';
import { type ArcPiece, circlePiece, type LinePiece, linePiece, polyline } from '../../src/scenario/curve.ts';
import { EXAMPLES } from '../../src/scenario/examples.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import type { Source, Vec3 } from '../../src/scenario/model.ts';
import type { Waveform } from '../../src/scenario/waveform.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import { instantsOf, samplePoints } from '../../src/trace/trace.ts';

/** One round of one job: how long it took, how much of it there was, and a sum that keeps it from being left out. */
export interface Round {
  readonly seconds: number;
  readonly work: number;
  readonly checksum: number;
}

export interface Job {
  readonly case: string;
  /** what `work` counts */
  readonly unit: string;
  round(): Round;
}

const vacuum = mediumOf(1, 1);
const h = 5e-3;
const SIGMA = 0.19e-9;
const timeStep = (0.99 * h) / (vacuum.speed * Math.sqrt(3));
const smooth = makeWaveform({ type: 'gaussianDerivative', amplitude: 1, sigma: SIGMA, delay: 9 * SIGMA });
const kinked = makeWaveform({ type: 'doubleExponential', amplitude: 1, alpha: 1e9, beta: 1e10 });

/**
 * An invented wire, of 228 edges and 1008 pairs unless told otherwise: columns of twelve edges that climb along the
 * diagonal of a grid, each edge with four or five pairs, delays growing along it; charges by continuity.
 */
export function inventedWire(waveform: Waveform, count = 228): GriddedSources {
  const axis = new Uint8Array(count);
  const node = new Int32Array(3 * count);
  const pairStart = [0];
  const weight: number[] = [];
  const delay: number[] = [];
  const charges = new Map<string, Map<number, number>>();
  for (let e = 0; e < count; e++) {
    const column = Math.floor(e / 12);
    axis[e] = e % 3;
    node[3 * e] = 20 + Math.floor(0.6 * column) + ((e >> 1) & 1);
    node[3 * e + 1] = 20 + Math.floor(0.45 * column) + ((e >> 2) & 1);
    node[3 * e + 2] = 20 + column + ((e >> 3) & 1);
    const pairs = e === 0 || e % 12 >= 7 ? 5 : 4;
    const lower = [...node.subarray(3 * e, 3 * e + 3)];
    const upper = lower.map((i, a) => (a === axis[e] ? i + 1 : i));
    for (let m = 0; m < pairs; m++) {
      const w = 0.1 + 0.01 * m;
      const t = ((column + m / 5) * h) / vacuum.speed;
      weight.push(w);
      delay.push(t);
      for (const [place, sign] of [
        [lower, -1],
        [upper, 1],
      ] as const) {
        const here = charges.get(place.join()) ?? new Map<number, number>();
        charges.set(place.join(), here);
        here.set(t, (here.get(t) ?? 0) + sign * w);
      }
    }
    pairStart.push(weight.length);
  }
  const chargeStart = [0];
  const chargeNode: number[] = [];
  const chargeWeight: number[] = [];
  const chargeDelay: number[] = [];
  for (const [place, here] of charges) {
    chargeNode.push(...place.split(',').map(Number));
    for (const [t, w] of here)
      if (Math.abs(w) > 1e-12) {
        chargeWeight.push(w);
        chargeDelay.push(t);
      }
    chargeStart.push(chargeWeight.length);
  }
  const waveforms = [waveform];
  return {
    edges: {
      count,
      axis,
      node,
      pairStart: Int32Array.from(pairStart),
      weight: Float64Array.from(weight),
      delay: Float64Array.from(delay),
      waveform: new Uint16Array(weight.length),
      waveforms,
    },
    charges: {
      count: charges.size,
      node: Int32Array.from(chargeNode),
      pairStart: Int32Array.from(chargeStart),
      weight: Float64Array.from(chargeWeight),
      delay: Float64Array.from(chargeDelay),
      waveform: new Uint16Array(chargeWeight.length),
      waveforms,
    },
  };
}

function timed(work: number, run: () => number): Round {
  const start = performance.now();
  const checksum = run();
  return { seconds: (performance.now() - start) / 1000, work, checksum };
}

/** Six components of the invented wire at one point, 1000 instants; the kernel is prepared, as for many points. */
function griddedJob(name: string, waveform: Waveform): Job {
  const origin: Vec3 = [-0.15, -0.15, -0.15];
  const gridded = inventedWire(waveform);
  const integrator = new GriddedIntegrator(gridded, origin, [h, h, h], vacuum, instantsOf(1000, timeStep), 1e-8);
  const point = samplePoints(Int32Array.of(45, 30, 34), origin, [h, h, h]);
  return {
    case: `history of 228 gridded edges, ${name} pulse`,
    unit: 'histories of six components, 1000 instants',
    round: () => timed(1, () => integrator.history(point, 0).values[700]!),
  };
}

/** Terms × instants, which a direct sum would have to evaluate one by one. */
export const TERMS = 2500;
export const INSTANTS = 1000;

function spreadingJob(): Job {
  const step = SIGMA / 20;
  const grid = new DelayGrid([smooth], step, INSTANTS, INSTANTS * step, 1e-8);
  const list = new ElementList();
  for (let n = 0; n < TERMS; n++) list.add(-(n * 7.31) % 60, 1e10 * (n % 3), n % 5, 1e-10 * (n % 7));
  const out = new Float64Array(INSTANTS);
  return {
    case: `sum of ${TERMS} delayed terms (q, w, w′) at ${INSTANTS} instants by delay spreading`,
    unit: 'terms × instants',
    round: () =>
      timed(TERMS * INSTANTS, () => {
        out.fill(0);
        grid.addHistory(out, 0, list);
        return out[INSTANTS / 2]!;
      }),
  };
}

function centreFed(): Source[] {
  const arm = 0.05;
  return [1, -1].map((sign) => ({
    type: 'wire',
    name: `arm ${sign}`,
    curve: polyline([
      [0, 0, 0],
      [0, 0, sign * arm],
    ]),
    terms: [
      { factor: sign, delay: 0, slowness: 1 / vacuum.speed },
      { factor: -sign, delay: (2 * arm) / vacuum.speed, slowness: -1 / vacuum.speed },
    ],
    waveform: smooth,
  }));
}

function closedFormJobs(): Job[] {
  const sources = centreFed();
  const field = fieldOf(prepareSources(sources, vacuum, 'best'), { potentials: false });
  const calls = 2000;
  const cells = Int32Array.from({ length: 3 * 100 }, (_, m) => 5 + ((m * 37) % 23));
  const points = samplePoints(cells, [1e-3, 0.7e-3, 2e-3], [h, h, h]);
  const instants = instantsOf(300, timeStep);
  const history = (method: 'best' | 'quadrature'): Job => ({
    case: `centre-fed wire, 600 sites × 300 instants, ${method === 'best' ? 'closed form' : 'quadrature'}`,
    unit: 'values',
    round: () =>
      timed(600 * 300, () => exactHistory(sources, vacuum, points, instants, { method }).values[200 * 300 + 200]!),
  });
  return [
    {
      case: 'centre-fed wire, closed form, one place and instant at a time',
      unit: 'fields (E and H)',
      round: () =>
        timed(calls, () => {
          let sum = 0;
          for (let n = 0; n < calls; n++) sum += field([0.05 + 1e-5 * n, 0.02, 0.01], 1.9e-9).E[2];
          return sum;
        }),
    },
    history('best'),
    history('quadrature'),
  ];
}

/** Parts that filaments are cut into, each of 15 elements, and instants of a round. */
const PARTS = 100;
export const ELEMENTS = PARTS * KRONROD_POINTS;
export const SUM_INSTANTS = 50;

/** E and B of the elements of a wave at 0.7 of full speed, part by part at one observer, with their error estimates. */
function elementJob(name: string, piece: LinePiece | ArcPiece, observer: Vec3): Job {
  const sums = new PartSums();
  const out = new Float64Array(PART_NUMBERS);
  const constants = constantsOf(vacuum);
  const view = viewOf(piece, observer);
  const carried = {
    terms: [{ factor: 1, delay: 0, slowness: 1 / (0.7 * vacuum.speed) }],
    waveform: makeWaveform({ type: 'gaussianDerivative', amplitude: 1, sigma: 0.4e-9, delay: 3e-9 }),
  };
  const wanted = { fields: true, potentials: false };
  const length = piece.length / PARTS;
  return {
    case: `E and B of ${ELEMENTS} elements ${name}, with error estimates`,
    unit: ELEMENT_UNIT,
    round: () =>
      timed(ELEMENTS * SUM_INSTANTS, () => {
        let sum = 0;
        for (let n = 0; n < SUM_INSTANTS; n++) {
          const t = 3e-9 + (5e-9 * n) / SUM_INSTANTS;
          for (let m = 0; m < PARTS; m++) {
            sums.integrate(constants, carried, view, m * length, (m + 1) * length, t, wanted, out, 0);
            sum += out[2]! + out[4]!;
          }
        }
        return sum;
      }),
  };
}

export const ELEMENT_UNIT = 'elements × instants';

function elementJobs(): Job[] {
  return [
    elementJob('on a straight wire', linePiece([0, 0, -0.5], [0, 0, 0.5], 0), [0.4, 0.2, 0.3]),
    elementJob('on a circle', circlePiece([0, 0, 0], [0, 0, 1], 0.16), [0.1, 0.2, 0.5]),
  ];
}

/** The default scenario, and places on its planes that lie beside its wire, not on it. */
const bench = (() => {
  const loaded = loadScenario(EXAMPLES['bench-cable-pulse']);
  if ('problems' in loaded) throw new Error(loaded.problems[0]!.message);
  const { sources, medium, grid } = loaded.scenario;
  return { sources, medium, from: grid.box.from, size: grid.box.to[0] - grid.box.from[0] };
})();
const BESIDE = 0.37e-3;
/** When the pulse is half way along the wire. */
const INSTANT = 1.07e-9;

/** Rows of the plane y = 0 of the default scenario at one instant, 256 points a row, E and H; returns a checksum. */
export function planeRows(first: number, last: number): number {
  const field = fieldOf(prepareSources(bench.sources, bench.medium, 'best'), { potentials: false });
  const at = (n: number, a: 0 | 1 | 2) => bench.from[a] + BESIDE + (bench.size * n) / 256;
  let sum = 0;
  for (let j = first; j < last; j++)
    for (let i = 0; i < 256; i++) {
      const { E, H } = field([at(i, 0), BESIDE, at(j, 2)], INSTANT);
      sum += E[2] + H[1];
    }
  return sum;
}

/** Frames of an animation, and samples along a side of its planes. */
const FRAMES = 120;
const SIDE = 128;

/** Rows of an animation's data: three planes of 128², 120 frames, nine components a sample as the page is given them. */
export function filmRows(first: number, last: number): number {
  const cell = bench.size / SIDE;
  const origin: Vec3 = [bench.from[0] + BESIDE, bench.from[1] + BESIDE, bench.from[2] + BESIDE];
  const step = (0.99 * cell) / (bench.medium.speed * Math.sqrt(3));
  const instants = instantsOf(Math.ceil(3e-9 / step), step, Math.ceil(3e-9 / step / FRAMES));
  let sum = 0;
  for (const normal of [0, 1, 2] as const)
    for (let j = first; j < last; j++) {
      const cells = Int32Array.from({ length: 3 * SIDE }, (_, n) => {
        const [i, a] = [Math.floor(n / 3), n % 3];
        return a === normal ? SIDE / 2 : a === (normal + 1) % 3 ? i : j;
      });
      const points = samplePoints(withBelow(cells, normal), origin, [cell, cell, cell]);
      const { values } = exactHistory(bench.sources, bench.medium, points, instants);
      const shape = [{ cells: SIDE, normal }];
      const { slices } = framesOf(values, instants.count, 0, instants.count, shape);
      sum += slices[0]!.reduce((total, v) => total + v, 0);
    }
  return sum;
}

/** Cost of six components at one point, seconds: against edges at 1000 instants, and against instants at 228 edges. */
export function costs(): { edges: [number, number][]; instants: [number, number][] } {
  const origin: Vec3 = [-0.15, -0.15, -0.15];
  const cost = (edges: number, instants: number) => {
    const integrator = new GriddedIntegrator(
      inventedWire(smooth, edges),
      origin,
      [h, h, h],
      vacuum,
      instantsOf(instants, timeStep),
      1e-8,
    );
    const point = samplePoints(Int32Array.of(60, 30, 34), origin, [h, h, h]);
    const rounds = Array.from({ length: 15 }, () => timed(1, () => integrator.history(point, 0).values[99]!).seconds);
    integrator.release();
    return rounds.toSorted((a, b) => a - b)[7]!;
  };
  cost(228, 1000);
  return {
    edges: [24, 60, 120, 228, 456, 912].map((n) => [n, cost(n, 1000)]),
    instants: [125, 250, 500, 1000, 2000, 4000].map((n) => [n, cost(228, n)]),
  };
}

/** The measured costs as a chart. */
export function costSvg({ edges, instants }: ReturnType<typeof costs>): string {
  const all = [...edges, ...instants];
  const domain = (k: 0 | 1): [number, number] => [
    Math.min(...all.map((point) => point[k])) / 1.5,
    Math.max(...all.map((point) => point[k])) * 1.5,
  ];
  return chartFile({
    title: 'Cost of six exact components at one point',
    description: 'Time against the number of edges at 1000 instants, and against instants at 228 edges.',
    x: { label: 'edges, or instants', unit: '', scale: 'log', domain: domain(0) },
    y: { label: 'time', unit: 's', scale: 'log', domain: domain(1) },
    series: [
      { name: 'edges, 1000 instants', colour: 'choice1', points: edges, dots: () => 'within' },
      { name: 'instants, 228 edges', colour: 'choice2', points: instants, dots: () => 'within' },
    ],
  });
}

export function jobs(): Job[] {
  return [
    griddedJob('smooth', smooth),
    griddedJob('kinked', kinked),
    spreadingJob(),
    ...elementJobs(),
    ...closedFormJobs(),
  ];
}
