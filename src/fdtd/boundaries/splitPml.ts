import { exp, pow } from '../../elementary/elementary.ts';
import type { Boundary } from '../../scenario/model.ts';
import { type BoundaryMethod, PLAIN } from './boundary.ts';

type SplitPml = Extract<Boundary, { type: 'splitPml' }>;

/**
 * Berenger's perfectly matched layer: every component is split by the direction of the difference that drives it,
 * E_x = E_xy + E_xz, and each part is damped by the conductivity of its own direction (σ* / μ = σ / ε for H),
 *   ε ∂t E_xy + σ_y E_xy = ∂y H_z,   ε ∂t E_xz + σ_z E_xz = −∂z H_y,
 * with exponential time stepping
 *   E_xy ← D E_xy + (Δt/ε) g Δ,   D = e^(−σΔt/ε),   g = (1 − D)/(σΔt/ε),   Δ the difference quotient,
 * backed by a perfect conductor. J.-P. Berenger, J. Comput. Phys. 114 (1994) 185.
 *
 * As it is marched here, the field holds the sum, and a memory variable of the layer holds the part. The field grows by
 * the part's growth, Δt/ε · [gΔ − (1 − D) M] with M the part in units of Δt/ε; written with ψ = −M (1 − D)/D this is
 *   ψ ← bψ + aΔ,  Δ ← iΔ + ψ,   b = D,  i = g/D,  a = −(1 − D) g/D,
 * the recursion of the kernel's stretched stencil, and the numbers are Berenger's (test/fdtd/splitPml.test.ts marches the
 * split fields themselves beside it).
 *
 * In the continuum it is the same layer as CPML with κ = 1 and α = 0: coordinates stretched by 1 + σ/(jωε). On the
 * lattice they differ: CPML convolves with Δ of the present step (i = 1, a = D − 1), Berenger's parts with an average of
 * the present and the last one. Neither keeps a static field (the stretch is infinite at zero frequency), so a pulse that
 * leaves charge behind drifts; CPML's α is the cure.
 *
 * Depth, grading and σmax as in CPML: σ = σmax d^m, σmax = sigmaFactor · 0.8(m + 1)/(ηh). layers: 1 to 128, default 10.
 * grading m: 0 to 10, default 3. sigmaFactor: default 1, limited by σmaxΔt/ε ≤ 6, above which 1/D magnifies rounding.
 * Stable in practice wherever Yee's scheme is; the split system is only weakly well-posed (Abarbanel & Gottlieb 1997).
 */
export const splitPml: Required<BoundaryMethod<SplitPml>> = {
  stretch({ grading, sigmaFactor }, depth, { cell, timeStep, medium }) {
    const sigma = ((sigmaFactor * 0.8 * (grading + 1)) / (medium.impedance * cell)) * pow(depth, grading);
    const lost = (sigma * timeStep) / medium.permittivity;
    if (lost === 0) return PLAIN;
    const b = exp(-lost);
    // 1 − e^(−x) loses its digits where x is small.
    const gone = lost < 1e-4 ? lost * (1 - (lost / 2) * (1 - lost / 3)) : 1 - b;
    const inverseKappa = gone / lost / b;
    return { b, a: -gone * inverseKappa, inverseKappa };
  },
  wall: () => ({ type: 'held' }),
};
