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
 * Nodes are symmetric about x = 0, so node weights come in mirrored pairs, ℓ_j = even + x odd and ℓ_{p−1−j} = even − x odd.
 * Weights of two kinds that an element has together lie interleaved, so that each sum is read, raised and written in one
 * piece, at places that never overlap by half.
 *
 * All memory is laid out by the host, which passes byte addresses; kernels allocate nothing.
 */

/** Nodes of the rule, a multiple of 4. */
let points: i32 = 8;
/** Phases in a cell. */
let phases: i32 = 1;
/** Polynomials in x² of the node weights: for each two nodes j, j + 1 of the lower half, highest power first, [even, even, odd, odd]. */
let polynomials: usize = 0;
/** Bounds of the parts of a cell (in cells, from 0 to 1) for `inCell`; no parts means `centred`. */
let bounds: usize = 0;
let parts: i32 = 0;
/** p numbers for the weights of one element. */
let scratch: usize = 0;
/** First cell of the weights. */
let firstCell: i32 = 0;
/** Interleaved weights of two kinds (q and w, or w and w′), and those of w′ alone. */
let doubles: usize = 0;
let singles: usize = 0;

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

export function setWindow(first: i32, doubleWeights: usize, singleWeights: usize): void {
  firstCell = first;
  doubles = doubleWeights;
  singles = singleWeights;
}

/** Weights of the p nodes for an element at place F (in cells), left in `scratch`; returns the index of the first node. */
@inline
function place(F: f64): usize {
  let index: i32;
  let x: f64;
  if (parts == 0) {
    const fine = F * <f64>phases;
    const floor = Math.floor(fine);
    x = fine - floor - 0.5;
    index = <i32>floor - (points >> 1) + 1 - firstCell * phases;
  } else {
    const floor = Math.floor(F);
    const y = F - floor;
    let part = 0;
    while (part < parts - 1 && y >= load<f64>(bounds + ((part + 1) << 3))) part++;
    const low = load<f64>(bounds + (part << 3));
    const high = load<f64>(bounds + ((part + 1) << 3));
    x = (2 * y - low - high) / (high - low);
    index = (<i32>floor - firstCell) * phases + part * points;
  }
  const argument = f64x2.splat(x);
  const square = f64x2.mul(argument, argument);
  let at = polynomials;
  let lower = scratch;
  let upper = scratch + (<usize>points << 3);
  const half = points >> 1;
  for (let j = 0; j < half; j += 2) {
    let even = v128.load(at);
    let odd = v128.load(at, 16);
    at += 32;
    for (let power = 1; power < half; power++) {
      even = f64x2.add(f64x2.mul(even, square), v128.load(at));
      odd = f64x2.add(f64x2.mul(odd, square), v128.load(at, 16));
      at += 32;
    }
    odd = f64x2.mul(odd, argument);
    upper -= 16;
    v128.store(lower, f64x2.add(even, odd));
    const mirrored = f64x2.sub(even, odd);
    v128.store(upper, v128.shuffle<f64>(mirrored, mirrored, 1, 0));
    lower += 16;
  }
  return <usize>index;
}

/** weights of w′ += amount · scratch */
@inline
function depositOne(index: usize, amount: f64): void {
  let weights = singles + (index << 3);
  const end = scratch + (<usize>points << 3);
  for (let node = scratch; node < end; node += 8) {
    store<f64>(weights, load<f64>(weights) + amount * load<f64>(node));
    weights += 8;
  }
}

/** interleaved weights += amounts · scratch */
@inline
function depositTwo(index: usize, amounts: v128): void {
  let weights = doubles + (index << 4);
  const end = scratch + (<usize>points << 3);
  for (let node = scratch; node < end; node += 8) {
    v128.store(weights, f64x2.add(v128.load(weights), f64x2.mul(amounts, v128.load_splat<f64>(node))));
    weights += 16;
  }
}

@inline
function pairOf(first: f64, second: f64): v128 {
  return f64x2.replace_lane(f64x2.splat(first), 1, second);
}

/**
 * Spreads elements given one by one.
 * @param elements F, and coefficients of q, w, w′: 4 numbers each
 */
export function spread(elements: usize, count: i32): void {
  for (let n = 0; n < count; n++) {
    const index = place(load<f64>(elements));
    depositTwo(index, v128.load(elements, 8));
    const slope = load<f64>(elements, 24);
    if (slope != 0) depositOne(index, slope);
    elements += 32;
  }
}

/**
 * out[n] += Σ_c Σ_g W[c][g] S[g][n + firstCell + c] for n from `from` to `from + 8·blocks − 1`. Weights that are 0 (between
 * the ends of a long wire, or of phases that no element has) are left out beforehand.
 * @param weights address of W[0][0]
 * @param weightBytes from one phase of W to the next: 16 where two kinds are interleaved, else 8
 * @param samples address of S[0][0]
 * @param sampleStride bytes from one phase of S to the next
 * @param taps room for 16 bytes for each weight
 */
export function correlate(
  weights: usize,
  weightBytes: usize,
  cells: i32,
  samples: usize,
  sampleStride: usize,
  out: usize,
  from: i32,
  blocks: i32,
  taps: usize,
): void {
  let end = taps;
  for (let c = 0; c < cells; c++) {
    let sample = samples + (<usize>(from + firstCell + c) << 3);
    for (let g = 0; g < phases; g++) {
      const weight = load<f64>(weights);
      if (weight != 0) {
        store<f64>(end, weight);
        store<usize>(end, sample, 8);
        end += 16;
      }
      weights += weightBytes;
      sample += sampleStride;
    }
  }
  let to = out + (<usize>from << 3);
  let shift: usize = 0;
  for (let block = 0; block < blocks; block++) {
    let sum0 = v128.load(to);
    let sum1 = v128.load(to, 16);
    let sum2 = v128.load(to, 32);
    let sum3 = v128.load(to, 48);
    for (let tap = taps; tap < end; tap += 16) {
      const weight = v128.load_splat<f64>(tap);
      const at = load<usize>(tap, 8) + shift;
      sum0 = f64x2.add(sum0, f64x2.mul(weight, v128.load(at)));
      sum1 = f64x2.add(sum1, f64x2.mul(weight, v128.load(at, 16)));
      sum2 = f64x2.add(sum2, f64x2.mul(weight, v128.load(at, 32)));
      sum3 = f64x2.add(sum3, f64x2.mul(weight, v128.load(at, 48)));
    }
    v128.store(to, sum0);
    v128.store(to, sum1, 16);
    v128.store(to, sum2, 32);
    v128.store(to, sum3, 48);
    to += 64;
    shift += 64;
  }
}

/**
 * Currents on grid edges, charges at grid nodes. An entry (edge or node) is 32 bytes: x, y, z of the node (the lower one
 * of an edge) in m, then its first pair and the one after its last, i32 each. A pair is 16 bytes: weight, and delay in
 * cells. `origin` is t₀ and `perLength` 1/v, both in cells.
 */
let entries: usize = 0;
let pairs: usize = 0;
let observerX: f64 = 0;
let observerY: f64 = 0;
let observerZ: f64 = 0;
let origin: f64 = 0;
let perLength: f64 = 0;
/** Gauss rules by nearness, from far to near: 24 bytes each: least (distance/length)² , nodes, address of (x, weight) on [0, 1]. */
let gaussRules: usize = 0;

export function setGridded(entryAddress: usize, pairAddress: usize, rules: usize): void {
  entries = entryAddress;
  pairs = pairAddress;
  gaussRules = rules;
}

export function setObserver(x: f64, y: f64, z: f64, cellsAtFirst: f64, cellsPerLength: f64): void {
  observerX = x;
  observerY = y;
  observerZ = z;
  origin = cellsAtFirst;
  perLength = cellsPerLength;
}

/** The rule for a stretch of `length` at squared distance `distance2`; the last one serves whatever is nearer. */
@inline
function gaussRule(distance2: f64, length: f64): usize {
  let rule = gaussRules;
  const limit = distance2 / (length * length);
  while (load<f64>(rule) > limit) rule += 24;
  return rule;
}

/**
 * Charges, E along `axis`: ∂/∂(q, w) of (Q/R³ + Q̇/(vR²)) R.
 * @param perSpeed 1/v, s/m
 */
export function spreadCharges(first: i32, last: i32, axis: i32, perSpeed: f64, scale: f64): void {
  for (let n = first; n < last; n++) {
    const entry = entries + (<usize>n << 5);
    const x = observerX - load<f64>(entry);
    const y = observerY - load<f64>(entry, 8);
    const z = observerZ - load<f64>(entry, 16);
    const r = Math.sqrt(x * x + y * y + z * z);
    const along = axis == 0 ? x : axis == 1 ? y : z;
    const moving = (scale * along * perSpeed) / (r * r);
    const still = (scale * along) / (r * r * r);
    const seen = origin - r * perLength;
    const end = pairs + (<usize>load<i32>(entry, 28) << 4);
    const amounts = pairOf(still, moving);
    for (let pair = pairs + (<usize>load<i32>(entry, 24) << 4); pair < end; pair += 16)
      depositTwo(place(seen - load<f64>(pair, 8)), f64x2.mul(amounts, v128.load_splat<f64>(pair)));
  }
}

/** Of one edge and one observer: squared distance to its line, and where the foot of the perpendicular is on it. */
let rho2: f64 = 0;
let foot: f64 = 0;
/** The observer's coordinate that is across both the edge and the component (for B). */
let across: f64 = 0;

@inline
function lookAtEdge(entry: usize, axis: i32, acrossAxis: i32): void {
  const x = observerX - load<f64>(entry);
  const y = observerY - load<f64>(entry, 8);
  const z = observerZ - load<f64>(entry, 16);
  foot = axis == 0 ? x : axis == 1 ? y : z;
  across = acrossAxis == 0 ? x : acrossAxis == 1 ? y : z;
  rho2 = axis == 0 ? y * y + z * z : axis == 1 ? x * x + z * z : x * x + y * y;
}

/**
 * Edges along `axis`, each uniform. Electric (`magnetic` false), E along the edge: ∂/∂w′ of −∫ İ/(v²R) ds. Magnetic, B
 * along the axis across both `axis` and `acrossAxis`: ∂/∂(w, w′) of ∫ (I/R³ + İ/(vR²)) (ŝ×R) ds, of which ŝ×R is constant
 * along the edge, ± its `across` coordinate; the sign is in `scale`.
 */
export function spreadEdges(
  first: i32,
  last: i32,
  axis: i32,
  acrossAxis: i32,
  magnetic: bool,
  length: f64,
  perSpeed: f64,
  scale: f64,
): void {
  for (let n = first; n < last; n++) {
    const entry = entries + (<usize>n << 5);
    lookAtEdge(entry, axis, acrossAxis);
    const gain = magnetic ? scale * across : -scale * perSpeed * perSpeed;
    if (gain == 0) continue;
    const beyond = foot < 0 ? -foot : foot > length ? foot - length : 0;
    const start = pairs + (<usize>load<i32>(entry, 24) << 4);
    const end = pairs + (<usize>load<i32>(entry, 28) << 4);
    if (parts == 0) {
      const rule = gaussRule(rho2 + beyond * beyond, length);
      const count = load<i32>(rule, 8);
      let node = load<usize>(rule, 16);
      for (let m = 0; m < count; m++) {
        const off = foot - length * load<f64>(node);
        depositEdgeNode(off, gain * length * load<f64>(node, 8), magnetic, perSpeed, start, end);
        node += 16;
      }
    } else {
      // Between a foot inside the edge and its ends R rises; each pair is cut where its delay passes a part's bound.
      for (let pair = start; pair < end; pair += 16) {
        if (foot > 0)
          spreadStretch(foot > length ? foot - length : 0, foot, gain, magnetic, perSpeed, pair);
        if (foot < length)
          spreadStretch(foot < 0 ? -foot : 0, length - foot, gain, magnetic, perSpeed, pair);
      }
    }
  }
}

/** One Gauss node, `off` from the foot, for the pairs from `start` to `end`. */
@inline
function depositEdgeNode(
  off: f64,
  gain: f64,
  magnetic: bool,
  perSpeed: f64,
  start: usize,
  end: usize,
): void {
  const r2 = rho2 + off * off;
  const r = Math.sqrt(r2);
  const seen = origin - r * perLength;
  const near = magnetic ? gain / (r2 * r) : 0;
  const far = magnetic ? (gain * perSpeed) / r2 : gain / r;
  const amounts = pairOf(near, far);
  for (let pair = start; pair < end; pair += 16) {
    const index = place(seen - load<f64>(pair, 8));
    if (magnetic) depositTwo(index, f64x2.mul(amounts, v128.load_splat<f64>(pair)));
    else depositOne(index, far * load<f64>(pair));
  }
}

/** The stretch of an edge between `from` and `to` metres from the foot, cut at the bounds that one pair's delay passes. */
function spreadStretch(from: f64, to: f64, gain: f64, magnetic: bool, perSpeed: f64, pair: usize): void {
  const seen = origin - load<f64>(pair, 8);
  const lowest = seen - Math.sqrt(rho2 + to * to) * perLength;
  let off = from;
  let at = seen - Math.sqrt(rho2 + from * from) * perLength;
  let cell = Math.floor(at);
  let part = parts - 1;
  while (part > 0 && at - cell < load<f64>(bounds + (part << 3))) part--;
  for (;;) {
    const bound = cell + load<f64>(bounds + (part << 3));
    const reach = (seen - bound) / perLength;
    const next = bound > lowest ? Math.min(to, Math.sqrt(Math.max(reach * reach - rho2, 0))) : to;
    if (next > off) {
      const rule = gaussRule(rho2 + off * off, next - off);
      const count = load<i32>(rule, 8);
      let node = load<usize>(rule, 16);
      for (let m = 0; m < count; m++) {
        depositEdgeNode(
          off + (next - off) * load<f64>(node),
          gain * (next - off) * load<f64>(node, 8),
          magnetic,
          perSpeed,
          pair,
          pair + 16,
        );
        node += 16;
      }
      off = next;
    }
    if (bound <= lowest) break;
    if (part > 0) part--;
    else {
      part = parts - 1;
      cell -= 1;
    }
  }
}

/** The lowest and highest place F of entries, stored at `to`; edges count as `length` long, in any direction. */
export function reach(first: i32, last: i32, length: f64, to: usize): void {
  let lowest: f64 = Infinity;
  let highest: f64 = -Infinity;
  for (let n = first; n < last; n++) {
    const entry = entries + (<usize>n << 5);
    const x = observerX - load<f64>(entry);
    const y = observerY - load<f64>(entry, 8);
    const z = observerZ - load<f64>(entry, 16);
    const seen = origin - Math.sqrt(x * x + y * y + z * z) * perLength;
    const end = pairs + (<usize>load<i32>(entry, 28) << 4);
    for (let pair = pairs + (<usize>load<i32>(entry, 24) << 4); pair < end; pair += 16) {
      const at = seen - load<f64>(pair, 8);
      lowest = Math.min(lowest, at);
      highest = Math.max(highest, at);
    }
  }
  store<f64>(to, lowest - length * perLength);
  store<f64>(to, highest + length * perLength, 8);
}
