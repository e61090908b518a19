import { cos } from '../elementary/elementary.ts';
import { instantiate } from '../elementary/wasm.ts';
import bytes from '../kernels/retarded.ts';
import type { Waveform } from '../scenario/waveform.ts';

/** Kernel of assembly/retarded/; addresses in bytes. */
export interface Kernel {
  readonly memory: WebAssembly.Memory;
  heapBase(): number;
  setRule(points: number, phases: number, polynomials: number, bounds: number, parts: number, scratch: number): void;
  setWindow(firstCell: number, doubles: number, singles: number): void;
  spread(elements: number, count: number): void;
  setGridded(entries: number, pairs: number, gaussRules: number): void;
  setObserver(x: number, y: number, z: number, origin: number, perLength: number): void;
  reach(first: number, last: number, length: number, to: number): void;
  spreadCharges(first: number, last: number, axis: number, perSpeed: number, scale: number): void;
  spreadEdges(
    first: number,
    last: number,
    axis: number,
    acrossAxis: number,
    magnetic: boolean,
    length: number,
    perSpeed: number,
    scale: number,
  ): void;
  correlate(
    weights: number,
    weightBytes: number,
    cells: number,
    samples: number,
    sampleStride: number,
    out: number,
    from: number,
    blocks: number,
    taps: number,
  ): void;
}

/**
 * How a value of a waveform is made of its samples: `points` nodes, either on both sides of the place among equidistant
 * samples (`centred`: Lagrange's formula with the place in the middle interval), or within the place's own part of a
 * cell (`inCell`: Chebyshev nodes; the parts' bounds are where the waveform has kinks, so that none is crossed).
 */
export interface Rule {
  readonly kind: 'centred' | 'inCell';
  readonly points: number;
  /** samples in one time step */
  readonly phases: number;
  /** place of each sample in its cell, in time steps, ascending */
  readonly offsets: readonly number[];
  /** bounds of a cell's parts, from 0 to 1 (inCell) */
  readonly bounds: readonly number[];
  /** places of the nodes within a part: centred, in samples from the middle; inCell, on [−1, 1] */
  readonly nodes: readonly number[];
  /** the nodes' Lagrange polynomials as the kernel reads them (evenOdd) */
  readonly polynomials: Float64Array;
}

/** @param parts equal parts of a time step (centred: samples in it) */
export function centredRule(points: number, parts: number): Rule {
  const nodes = Array.from({ length: points }, (_, j) => j - (points - 1) / 2);
  return {
    kind: 'centred',
    points,
    phases: parts,
    offsets: Array.from({ length: parts }, (_, g) => g / parts),
    bounds: [],
    nodes,
    polynomials: evenOdd(nodes),
  };
}

/** @param kinks places of kinks in a cell, in time steps, in [0, 1) */
export function inCellRule(points: number, parts: number, kinks: readonly number[]): Rule {
  return ruleOfParts(points, [...kinks, ...Array.from({ length: parts + 1 }, (_, g) => g / parts)]);
}

/**
 * Parts that are halved `halvings` times towards each kink from later instants: for waveforms that start as a broken power
 * of time, which no polynomial follows near its start.
 */
export function gradedRule(points: number, halvings: number, kinks: readonly number[]): Rule {
  const parts = kinks.flatMap((kink) => [
    kink,
    ...Array.from({ length: halvings }, (_, g) => (kink + 2 ** -(g + 1)) % 1),
  ]);
  return ruleOfParts(points, [0, 1, ...parts]);
}

function ruleOfParts(points: number, all: readonly number[]): Rule {
  const bounds = [...new Set(all)].sort((a, b) => a - b);
  const nodes = Array.from({ length: points }, (_, j) => -cos((Math.PI * (j + 0.5)) / points));
  const offsets = bounds
    .slice(1)
    .flatMap((high, m) => nodes.map((x) => (bounds[m]! + high + x * (high - bounds[m]!)) / 2));
  const polynomials = evenOdd(nodes);
  return { kind: 'inCell', points, phases: offsets.length, offsets, bounds, nodes, polynomials };
}

/**
 * Lagrange's polynomials of symmetric nodes, a multiple of 4 of them: ℓ_j = even_j(x²) + x odd_j(x²) for the lower half, the
 * upper half being its mirror image. Two nodes at a time, highest power first: even_j, even_{j+1}, odd_j, odd_{j+1}.
 */
function evenOdd(nodes: readonly number[]): Float64Array {
  const half = nodes.length / 2;
  const table = new Float64Array(2 * half * half);
  for (let j = 0; j < half; j++) {
    let polynomial = [1]; // ascending powers
    nodes.forEach((node, m) => {
      if (m === j) return;
      const gain = 1 / (nodes[j]! - node);
      const next = new Array<number>(polynomial.length + 1).fill(0);
      polynomial.forEach((a, power) => {
        next[power + 1]! += gain * a;
        next[power]! -= gain * node * a;
      });
      polynomial = next;
    });
    for (let power = 0; power < half; power++) {
      const at = 4 * (half * Math.floor(j / 2) + half - 1 - power) + (j % 2);
      table[at] = polynomial[2 * power]!;
      table[at + 2] = polynomial[2 * power + 1]!;
    }
  }
  return table;
}

/** The rule's nodes around place u (time steps of source time): where they are, and their weights as the kernel makes them. */
export function stencil(rule: Rule, u: number): { times: number[]; weights: Float64Array } {
  const { points, phases, bounds, nodes } = rule;
  let x: number;
  let times: number[];
  if (rule.kind === 'centred') {
    const first = Math.floor(u * phases) - points / 2 + 1;
    x = u * phases - Math.floor(u * phases) - 0.5;
    times = nodes.map((_, j) => (first + j) / phases);
  } else {
    const cell = Math.floor(u);
    const part = bounds.findLastIndex((bound) => u - cell >= bound);
    const low = bounds[part]!;
    const high = bounds[part + 1]!;
    x = (2 * (u - cell) - low - high) / (high - low);
    times = nodes.map((node) => cell + (low + high + node * (high - low)) / 2);
  }
  const weights = new Float64Array(points);
  const half = points / 2;
  for (let j = 0; j < half; j++) {
    let even = 0;
    let odd = 0;
    for (let power = 0; power < half; power++) {
      const at = 4 * (half * Math.floor(j / 2) + power) + (j % 2);
      even = even * x * x + rule.polynomials[at]!;
      odd = odd * x * x + rule.polynomials[at + 2]!;
    }
    weights[j] = even + x * odd;
    weights[points - 1 - j] = even - x * odd;
  }
  return { times, weights };
}

/** Largest values of q, w, w′, and a bound on the errors of a rule on each of them. */
export interface RuleError {
  readonly peak: readonly [number, number, number];
  readonly error: readonly [number, number, number];
}

const TRIALS = 192;

/** Of the largest error found, for what lies between the trials. */
const BETWEEN_TRIALS = 2;

/** Where rules are tried, and what q, w and w′ are there. */
export interface Trials {
  /** places, time steps */
  readonly places: Float64Array;
  /** q, w, w′ at each */
  readonly exact: Float64Array;
  readonly peak: readonly [number, number, number];
}

/**
 * Places spread over a waveform's activity, closer to each other the nearer to its start (a double exponential starts much
 * faster than it ends).
 */
export function trialsOf(waveform: Waveform, step: number): Trials {
  const places = new Float64Array(TRIALS);
  const exact = new Float64Array(3 * TRIALS);
  const peak: [number, number, number] = [0, 0, 0];
  const end = waveform.lastActivity(1e-3);
  for (let n = 0; n < TRIALS; n++) {
    const part = (n + 0.5) / TRIALS;
    // Multiples of the golden ratio spread the places within a cell, whatever cells they are in.
    const u = Math.floor((end * part * part * part) / step) + ((n * 0.6180339887498949) % 1);
    places[n] = u;
    const own = exact.subarray(3 * n, 3 * n + 3);
    waveform.at(u * step, 2, own);
    for (let kind = 0; kind < 3; kind++) peak[kind] = Math.max(peak[kind]!, Math.abs(own[kind]!));
  }
  return { places, exact, peak };
}

/**
 * Measures a rule on a waveform sampled every `step` seconds.
 * @param enough part of the peak: what is worse is not measured to the end (Infinity: all is)
 */
export function measureRule(
  rule: Rule,
  waveform: Waveform,
  step: number,
  trials: Trials = trialsOf(waveform, step),
  enough = Number.POSITIVE_INFINITY,
): RuleError {
  const { places, exact, peak } = trials;
  const error: [number, number, number] = [0, 0, 0];
  const sample = new Float64Array(3);
  for (let n = 0; n < TRIALS; n++) {
    const { times, weights } = stencil(rule, places[n]!);
    const sum = [0, 0, 0];
    times.forEach((time, j) => {
      waveform.at(time * step, 2, sample);
      for (let kind = 0; kind < 3; kind++) sum[kind]! += weights[j]! * sample[kind]!;
    });
    for (let kind = 0; kind < 3; kind++) {
      error[kind] = Math.max(error[kind]!, BETWEEN_TRIALS * Math.abs(sum[kind]! - exact[3 * n + kind]!));
      if (error[kind]! > enough * peak[kind]!) return { peak, error };
    }
  }
  return { peak, error };
}

type RuleMaker = (kinks: readonly number[]) => Rule;

const centred =
  (points: number, parts: number): RuleMaker =>
  () =>
    centredRule(points, parts);
const inCell =
  (points: number, parts: number): RuleMaker =>
  (kinks) =>
    inCellRule(points, parts, kinks);

/** From cheap to dear. */
const CENTRED_RULES = [
  centred(4, 1),
  centred(8, 1),
  centred(12, 1),
  centred(12, 2),
  centred(12, 4),
  centred(12, 8),
  centred(12, 16),
  centred(12, 32),
];

const IN_CELL_RULES = [
  inCell(4, 1),
  inCell(8, 1),
  inCell(8, 2),
  inCell(8, 4),
  inCell(8, 8),
  inCell(8, 16),
  (kinks: readonly number[]) => gradedRule(8, 20, kinks),
  inCell(8, 32),
];

/** The last choices: many histories are asked for with the same waveforms and step. */
const chosen = new Map<string, Choice>();
const MOST_CHOSEN = 8;

interface Choice {
  readonly rule: Rule;
  readonly errors: readonly RuleError[];
}

/**
 * The cheapest rule whose error is at most `accuracy` of the peak of each of q, w, w′, for every waveform; the best there
 * is if none is, so that its measured error says so.
 */
export function chooseRule(waveforms: readonly Waveform[], step: number, accuracy: number): Choice {
  const key = JSON.stringify([step, accuracy, waveforms.map(({ spec }) => spec)]);
  const known = chosen.get(key);
  if (known) return known;
  if (chosen.size === MOST_CHOSEN) chosen.clear();
  const made = searchRule(waveforms, step, accuracy);
  chosen.set(key, made);
  return made;
}

function searchRule(waveforms: readonly Waveform[], step: number, accuracy: number): Choice {
  const kinks = waveforms.flatMap((waveform) => waveform.kinks);
  const places = [...new Set(kinks.map((kink) => kink / step - Math.floor(kink / step)))];
  const rules = (kinks.length === 0 ? CENTRED_RULES : IN_CELL_RULES).map((make) => () => make(places));
  const trials = waveforms.map((waveform) => trialsOf(waveform, step));
  const measured = (rule: Rule, enough: number) => {
    const errors = waveforms.map((waveform, m) => measureRule(rule, waveform, step, trials[m], enough));
    const worst = Math.max(...errors.flatMap(({ peak, error }) => error.map((e, n) => e / peak[n]!)));
    return { rule, errors, worst };
  };
  for (const make of rules) {
    const found = measured(make(), accuracy);
    if (found.worst <= accuracy) return found;
  }
  return rules.map((make) => measured(make(), Number.POSITIVE_INFINITY)).reduce((a, b) => (b.worst < a.worst ? b : a));
}

/** Elements of one waveform at one site: F, and coefficients of q, w, w′. */
export class ElementList {
  count = 0;
  data = new Float64Array(4 * 256);
  lowest = Number.POSITIVE_INFINITY;
  highest = Number.NEGATIVE_INFINITY;
  hasSlopes = false;

  clear(): void {
    this.count = 0;
    this.hasSlopes = false;
    this.lowest = Number.POSITIVE_INFINITY;
    this.highest = Number.NEGATIVE_INFINITY;
  }

  add(place: number, q: number, w: number, slope: number): void {
    if (q === 0 && w === 0 && slope === 0) return;
    if (4 * this.count === this.data.length) {
      const bigger = new Float64Array(2 * this.data.length);
      bigger.set(this.data);
      this.data = bigger;
    }
    const at = 4 * this.count++;
    this.data[at] = place;
    this.data[at + 1] = q;
    this.data[at + 2] = w;
    this.data[at + 3] = slope;
    if (slope !== 0) this.hasSlopes = true;
    if (place < this.lowest) this.lowest = place;
    if (place > this.highest) this.highest = place;
  }
}

/** Kernels that no grid uses: their memory, once touched, is used again. */
const idle: Kernel[] = [];

/** Outputs that one round of `correlate` makes. */
const BLOCK = 8;

/**
 * Waveforms sampled once for a run of equidistant instants, and the kernel that turns elements into histories.
 * Instants of one list are t₀ + n·step; lists may start at different t₀ (E and H) but share the samples, which are laid
 * out in source time.
 */
export class DelayGrid {
  readonly step: number;
  readonly count: number;
  readonly rule: Rule;
  readonly errors: readonly RuleError[];
  readonly kernel: Kernel;
  /** address of the `held` bytes */
  readonly held: number;
  readonly #waveforms: readonly Waveform[];
  #view = new Float64Array(0);
  /** cells of samples from source time 0 on, and zeros before it */
  #cells = 0;
  #lead = 0;
  #samples = 0;
  #sampleStride = 0;
  #out = 0;
  #fixed = 0;
  #free = 0;

  /**
   * @param latest the last instant of all lists, s
   * @param accuracy relative error asked of each of q, w, w′
   * @param held bytes of memory that the caller keeps its own data in
   */
  constructor(waveforms: readonly Waveform[], step: number, count: number, latest: number, accuracy: number, held = 0) {
    this.step = step;
    this.count = count;
    this.#waveforms = waveforms;
    const { rule, errors } = chooseRule(waveforms, step, accuracy);
    this.rule = rule;
    this.errors = errors;
    this.kernel = idle.pop() ?? (instantiate(bytes, {}) as unknown as Kernel);
    const { points, phases, bounds } = this.rule;
    let at = Math.ceil(this.kernel.heapBase() / 16) * 16;
    const polynomials = at;
    at += 8 * points * points;
    const boundsAt = at;
    at += 16 * Math.ceil((bounds.length + 1) / 2);
    const scratch = at;
    at += 8 * points;
    this.held = at;
    at += 16 * Math.ceil(held / 16);
    this.#fixed = at;
    this.reserve(at);
    const memory = new Float64Array(this.kernel.memory.buffer);
    memory.set(this.rule.polynomials, polynomials / 8);
    memory.set(bounds, boundsAt / 8);
    this.kernel.setRule(points, phases, polynomials, boundsAt, Math.max(0, bounds.length - 1), scratch);
    this.#sample(64, Math.ceil(latest / step) + points + 2 * BLOCK);
  }

  /** Gives the kernel back for the next grid; this one must not be used any more. */
  release(): void {
    idle.push(this.kernel);
  }

  /** All of the kernel's memory, as it is now. */
  #numbers(): Float64Array {
    const { buffer } = this.kernel.memory;
    if (this.#view.buffer !== buffer) this.#view = new Float64Array(buffer);
    return this.#view;
  }

  /** Grows memory to hold `bytes`. */
  reserve(bytes: number): void {
    const missing = bytes - this.kernel.memory.buffer.byteLength;
    if (missing > 0) this.kernel.memory.grow(Math.ceil(missing / 65536));
  }

  /** Samples the waveforms for `cells` cells, with room for elements that span `lead` cells. */
  #sample(lead: number, cells: number): void {
    const { phases, offsets } = this.rule;
    this.#lead = lead;
    this.#cells = cells;
    const length = 2 * Math.ceil((lead + this.#cells) / 2);
    this.#sampleStride = 8 * length;
    this.#samples = this.#fixed;
    const total = this.#waveforms.length * 3 * phases * length;
    this.#out = this.#samples + 8 * total;
    this.#free = this.#out + 16 * Math.ceil((this.count + BLOCK) / 2);
    this.reserve(this.#free);
    const memory = new Float64Array(this.kernel.memory.buffer, this.#samples, total);
    memory.fill(0);
    const sample = new Float64Array(3);
    this.#waveforms.forEach((waveform, m) => {
      offsets.forEach((offset, g) => {
        for (let n = 0; n < this.#cells; n++) {
          waveform.at((n + offset) * this.step, 2, sample);
          for (let kind = 0; kind < 3; kind++)
            memory[((m * 3 + kind) * phases + g) * length + lead + n] = sample[kind]!;
        }
      });
    });
  }

  /** The cells that elements between places `lowest` and `highest` touch. */
  window(lowest: number, highest: number): { first: number; cells: number } {
    const reach = this.rule.kind === 'centred' ? this.rule.points / 2 / this.rule.phases : 0;
    const first = Math.floor(lowest - reach);
    return { first, cells: Math.floor(highest + reach) - first + 1 };
  }

  /**
   * The history of elements of one waveform, added to out[n], n = 0 … count − 1. `fill` spreads the elements once their
   * weights are cleared and the window is set; `room` is memory it may use.
   * @param doubles the two kinds (0 q, 1 w, 2 w′) that are interleaved; `singles`: whether w′ alone is used too
   */
  correlateInto(
    out: Float64Array,
    waveform: number,
    window: { first: number; cells: number },
    doubles: readonly [number, number],
    singles: boolean,
    fill: (room: number) => void,
  ): void {
    const from = Math.max(0, -(window.first + window.cells - 1));
    if (from >= this.count) return;
    // Delays are not below 0, unless a wave is told to be launched before it.
    const last = window.first + window.cells + this.count + BLOCK;
    if (window.cells > this.#lead || last > this.#cells)
      this.#sample(Math.max(this.#lead, 2 * window.cells), Math.max(this.#cells, last));
    const { phases } = this.rule;
    const doubleAt = this.#free;
    const singleAt = doubleAt + 16 * window.cells * phases;
    const room = singleAt + 16 * Math.ceil((window.cells * phases) / 2);
    this.reserve(room + 16 * window.cells * phases);
    this.#numbers().fill(0, doubleAt / 8, room / 8);
    this.kernel.setWindow(window.first, doubleAt, singleAt);
    fill(room);
    const blocks = Math.ceil((this.count - from) / BLOCK);
    const numbers = this.#numbers();
    const result = this.#out / 8;
    numbers.fill(0, result, result + from + blocks * BLOCK);
    const correlate = (kind: number, weights: number, weightBytes: number) =>
      this.kernel.correlate(
        weights,
        weightBytes,
        window.cells,
        this.#samples + (waveform * 3 + kind) * phases * this.#sampleStride + 8 * this.#lead,
        this.#sampleStride,
        this.#out,
        from,
        blocks,
        room,
      );
    correlate(doubles[0], doubleAt, 16);
    correlate(doubles[1], doubleAt + 8, 16);
    if (singles) correlate(SLOPE_KIND, singleAt, 8);
    for (let n = from; n < this.count; n++) out[n]! += numbers[result + n]!;
  }

  /** The history of listed elements of one waveform, added to `out`. */
  addHistory(out: Float64Array, waveform: number, list: ElementList): void {
    if (list.count === 0) return;
    this.correlateInto(out, waveform, this.window(list.lowest, list.highest), [0, 1], list.hasSlopes, (room) => {
      this.reserve(room + 32 * list.count);
      const numbers = this.#numbers();
      const last = 4 * list.count;
      for (let n = 0; n < last; n++) numbers[room / 8 + n] = list.data[n]!;
      this.kernel.spread(room, list.count);
    });
  }
}

const SLOPE_KIND = 2;
