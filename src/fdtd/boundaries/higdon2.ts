import { cos } from '../../elementary/elementary.ts';
import type { Boundary } from '../../scenario/model.ts';
import { type BoundaryMethod, pathInCells } from './boundary.ts';

type Higdon2 = Extract<Boundary, { type: 'higdon2' }>;

/**
 * Higdon's second-order condition: a product of two one-way wave equations, each of which returns nothing of a plane wave
 * at its own angle a from the normal, with some damping ε,
 *   ∏_{a = a1, a2} (cos a ∂t − v∂n + vε) E = 0,
 * each factor centred half a cell inward and half a step back. With Z⁻¹ one step back, K one cell inward and ε = 2d/h,
 *   ∏ [cos a (1 − Z⁻¹)(1 + K) − s(1 + Z⁻¹)(K − 1) + ds(1 + Z⁻¹)(1 + K)] E0 = 0,   s = vΔt/h.
 * R. L. Higdon, Math. Comp. 47 (1986) 437 and 49 (1987) 65 (the damping is the second paper's).
 *
 * angles: 0° to 85°, default 0° and 45°. damping d: 0 to 0.2, default 0.02. A plane wave at angle θ returns
 *   ∏ (cos a − cos θ − 2jd/(kh))/(cos a + cos θ − 2jd/(kh)),
 * so damping costs most where cells are small; but with d = 0 a field that does not change in time is a double root, and what
 * is slow comes back the more. It needs no neighbours along the wall, so rims are like the rest. Stable for s ≤ 1.
 */
export const higdon2: BoundaryMethod<Higdon2> = {
  wall({ angles, damping }, at) {
    const s = pathInCells(at);
    const [first, second] = angles.map((angle) => factorOf(cos(angle), s, damping * s)) as [Factor, Factor];
    const whole = first.now[0] * second.now[0];
    // Products of powers of K, and of Z⁻¹.
    const nowNow = product(first.now, second.now);
    const nowOld = product(first.now, second.old);
    const oldNow = product(first.old, second.now);
    const older = product(first.old, second.old);
    return {
      type: 'linear',
      older: older.map((x) => -x / whole),
      old: nowOld.map((x, l) => -(x + oldNow[l]!) / whole),
      now: nowNow.slice(1).map((x) => -x / whole),
    };
  },
};

/** Coefficients of 1 and K, of the new values and of the old ones. */
interface Factor {
  readonly now: readonly [number, number];
  readonly old: readonly [number, number];
}

const factorOf = (cosine: number, s: number, damping: number): Factor => ({
  now: [cosine + s + damping, cosine - s + damping],
  old: [-cosine + s + damping, -cosine - s + damping],
});

/** (a0 + a1 K)(b0 + b1 K) */
const product = ([a0, a1]: readonly [number, number], [b0, b1]: readonly [number, number]): number[] => [
  a0 * b0,
  a0 * b1 + a1 * b0,
  a1 * b1,
];
