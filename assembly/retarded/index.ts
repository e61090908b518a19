/**
 * The inner loops of retarded histories: many elements, each a delayed copy of the same few waveforms, at one observer.
 *
 * Source time u = t − τ is laid out in cells of one time step, cell 0 starting at u = 0 (where a waveform starts), each
 * with the same G phases in it. An element of delay τ is seen at t_n = t₀ + nΔ at u = (n + F)Δ, F = (t₀ − τ)/Δ: the same
 * place within a cell at every instant. So its value there is, for all n at once, a fixed combination of the waveform at
 * p nearby phases, and the sum over elements needs only the sums of these weights (`spread`), which are then correlated
 * once with the sampled waveform (`correlate`).
 *
 *   weights   W[c][g]   one array for each of q, w, w′; c counts cells from `firstCell`, g phases
 *   samples   S[g][k]   waveform at source time (k + y_g)Δ; k from −`lead`, S = 0 for k < 0
 *   history   out[n] += Σ_c Σ_g W[c][g] S[g][n + firstCell + c]
 *
 * Two rules place the p nodes (see src/retarded/delayGrid.ts): `centred` takes equidistant phases on both sides, for
 * smooth waveforms; `inCell` takes p nodes of its own for each part of a cell, for waveforms with kinks, which lie on
 * the parts' bounds. Node weights are polynomials in the place x within the part, given by their coefficients.
 *
 * All memory is laid out by the host, which passes byte addresses; kernels allocate nothing.
 */

/** Nodes of the rule, an even number. */
let points: i32 = 8;
/** Phases in a cell. */
let phases: i32 = 1;
/** Coefficients of the node weights, highest power first: [power][node]. */
let polynomials: usize = 0;
/** Bounds of the parts of a cell (in cells, from 0 to 1) for `inCell`; no parts means `centred`. */
let bounds: usize = 0;
let parts: i32 = 0;
/** p numbers for the weights of one element. */
let scratch: usize = 0;
/** First cell of the weights, and the distance in bytes from one kind of weights to the next. */
let firstCell: i32 = 0;
let kindStride: usize = 0;

export function heapBase(): usize {
  return __heap_base;
}

export function setRule(p: i32, g: i32, coefficients: usize, cellBounds: usize, cellParts: i32, room: usize): void {
  points = p;
  phases = g;
  polynomials = coefficients;
  bounds = cellBounds;
  parts = cellParts;
  scratch = room;
}

export function setWindow(first: i32, stride: usize): void {
  firstCell = first;
  kindStride = stride;
}

/** Weights of the p nodes for an element at place F (in cells), left in `scratch`; returns the first node's offset in bytes. */
// @ts-ignore: decorator
@inline
function place(F: f64): usize {
  let offset: i32;
  let x: f64;
  if (parts == 0) {
    const fine = F * <f64>phases;
    const floor = Math.floor(fine);
    x = fine - floor - 0.5;
    offset = <i32>floor - (points >> 1) + 1 - firstCell * phases;
  } else {
    const floor = Math.floor(F);
    const y = F - floor;
    let part = 0;
    while (part < parts - 1 && y >= load<f64>(bounds + ((part + 1) << 3))) part++;
    const low = load<f64>(bounds + (part << 3));
    const high = load<f64>(bounds + ((part + 1) << 3));
    x = (2 * y - low - high) / (high - low);
    offset = (<i32>floor - firstCell) * phases + part * points;
  }
  const argument = f64x2.splat(x);
  const row = <usize>points << 3;
  for (let node: usize = 0; node < row; node += 16) {
    let at = polynomials + node;
    let value = v128.load(at);
    for (let power = 1; power < points; power++) {
      at += row;
      value = f64x2.add(f64x2.mul(value, argument), v128.load(at));
    }
    v128.store(scratch + node, value);
  }
  return <usize>offset << 3;
}

/** weights += amount · scratch */
// @ts-ignore: decorator
@inline
function deposit(weights: usize, amount: f64): void {
  const a = f64x2.splat(amount);
  const row = <usize>points << 3;
  for (let node: usize = 0; node < row; node += 16)
    v128.store(weights + node, f64x2.add(v128.load(weights + node), f64x2.mul(a, v128.load(scratch + node))));
}

/**
 * Spreads elements given one by one.
 * @param elements F, and coefficients of q, w, w′: 4 numbers each
 * @param weights address of the weights of q; those of w and w′ follow
 */
export function spread(elements: usize, count: i32, weights: usize): void {
  for (let n = 0; n < count; n++) {
    const at = weights + place(load<f64>(elements));
    const q = load<f64>(elements, 8);
    const w = load<f64>(elements, 16);
    const slope = load<f64>(elements, 24);
    if (q != 0) deposit(at, q);
    if (w != 0) deposit(at + kindStride, w);
    if (slope != 0) deposit(at + 2 * kindStride, slope);
    elements += 32;
  }
}

/**
 * out[n] += Σ_c Σ_g W[c][g] S[g][n + firstCell + c] for n from `from` to `from + 8·blocks − 1`.
 * @param samples address of S[0][0]
 * @param sampleStride bytes from one phase to the next
 */
export function correlate(
  weights: usize,
  cells: i32,
  samples: usize,
  sampleStride: usize,
  out: usize,
  from: i32,
  blocks: i32,
): void {
  const cellBytes = <usize>phases << 3;
  for (let block = 0; block < blocks; block++) {
    const n = from + 8 * block;
    let sum0 = f64x2.splat(0);
    let sum1 = sum0;
    let sum2 = sum0;
    let sum3 = sum0;
    for (let g: usize = 0; g < <usize>phases; g++) {
      let at = samples + g * sampleStride + (<usize>(n + firstCell) << 3);
      let weight = weights + (g << 3);
      for (let c = 0; c < cells; c++) {
        const a = v128.load_splat<f64>(weight);
        sum0 = f64x2.add(sum0, f64x2.mul(a, v128.load(at)));
        sum1 = f64x2.add(sum1, f64x2.mul(a, v128.load(at, 16)));
        sum2 = f64x2.add(sum2, f64x2.mul(a, v128.load(at, 32)));
        sum3 = f64x2.add(sum3, f64x2.mul(a, v128.load(at, 48)));
        at += 8;
        weight += cellBytes;
      }
    }
    const to = out + (<usize>n << 3);
    v128.store(to, f64x2.add(v128.load(to), sum0));
    v128.store(to, f64x2.add(v128.load(to, 16), sum1), 16);
    v128.store(to, f64x2.add(v128.load(to, 32), sum2), 32);
    v128.store(to, f64x2.add(v128.load(to, 48), sum3), 48);
  }
}
