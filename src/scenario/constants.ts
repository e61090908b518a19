import type { Medium } from './model.ts';

/** Speed of light in vacuum, m/s; exact by definition of the metre. */
export const SPEED_OF_LIGHT = 299_792_458;

/** Magnetic constant μ0, H/m. CODATA 2022 (relative uncertainty 1.6·10⁻¹⁰). */
export const MAGNETIC_CONSTANT = 1.25663706127e-6;

/** Electric constant ε0 = 1/(μ0 c²), F/m. */
export const ELECTRIC_CONSTANT = 1 / (MAGNETIC_CONSTANT * SPEED_OF_LIGHT * SPEED_OF_LIGHT);

/**
 * The homogeneous, lossless medium of relative permittivity εr and permeability μr: speed c/√(εr μr) in m/s, impedance
 * √(μ/ε) in Ω.
 */
export function mediumOf(relativePermittivity: number, relativePermeability: number): Medium {
  const permittivity = ELECTRIC_CONSTANT * relativePermittivity;
  const permeability = MAGNETIC_CONSTANT * relativePermeability;
  return {
    relativePermittivity,
    relativePermeability,
    permittivity,
    permeability,
    speed: SPEED_OF_LIGHT / Math.sqrt(relativePermittivity * relativePermeability),
    impedance: Math.sqrt(permeability / permittivity),
  };
}
