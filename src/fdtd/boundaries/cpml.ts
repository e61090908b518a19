import { exp, pow } from '../../elementary/elementary.ts';
import type { Boundary } from '../../scenario/model.ts';
import type { BoundaryMethod } from './boundary.ts';

type Cpml = Extract<Boundary, { type: 'cpml' }>;

/**
 * Convolutional perfectly matched layer: coordinates stretched by κ + σ/(α + jωε) (the complex-frequency-shifted
 * tensor), the convolution done recursively, backed by a perfect conductor.
 * J. A. Roden, S. D. Gedney, Microw. Opt. Technol. Lett. 27 (2000) 334.
 *
 * With d the relative depth, E at whole and H at half cells, and m the grading:
 *   σ = σmax d^m,  σmax = sigmaFactor · 0.8(m + 1)/(ηh);   κ = 1 + (κmax − 1) d^m;   α = αmax (1 − d);
 *   b = exp(−(σ/κ + α)Δt/ε),   a = σ(b − 1)/(κ(σ + κα));   ψ ← bψ + aΔ,  Δ ← Δ/κ + ψ.
 * αmax = 2πε·alphaFrequency is given as a frequency, so that it does not move when the grid is refined. With α = 0 a
 * layer leaks static fields: a pulse that leaves charge behind drifts.
 *
 * 0 ≤ b < 1, so ψ cannot grow by itself; stable in practice (no proof) wherever Yee's scheme is.
 */
export const cpml: Required<BoundaryMethod<Cpml>> = {
  stretch(boundary, depth, { cell, timeStep, medium }) {
    const graded = pow(depth, boundary.grading);
    const sigma = ((boundary.sigmaFactor * 0.8 * (boundary.grading + 1)) / (medium.impedance * cell)) * graded;
    const kappa = 1 + (boundary.kappaMax - 1) * graded;
    const alpha = 2 * Math.PI * medium.permittivity * boundary.alphaFrequency * (1 - depth);
    const b = exp((-(sigma / kappa + alpha) * timeStep) / medium.permittivity);
    const a = sigma === 0 ? 0 : (sigma * (b - 1)) / (kappa * (sigma + kappa * alpha));
    return { b, a, inverseKappa: 1 / kappa };
  },
  wall: () => ({ type: 'held' }),
};
