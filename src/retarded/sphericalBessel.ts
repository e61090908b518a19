import { cos, sin } from '../elementary/elementary.ts';

/**
 * Spherical Bessel functions of the first kind j₀(x) … j_L(x), x ≥ 0: upwards from j₀ = sin x/x while the order is below
 * x, where that is stable; elsewhere downwards from an order so high that its value does not matter, scaled to j₀ or j₁
 * (Miller's algorithm; Abramowitz & Stegun 10.1.19 and 10.5, from memory). Overwrites `out`, whose length is L + 1.
 */
export function sphericalBessel(x: number, out: Float64Array): void {
  const last = out.length - 1;
  if (x === 0) {
    out.fill(0);
    out[0] = 1;
    return;
  }
  const first = sin(x) / x;
  // Series where sin x/x² − cos x/x cancels: j₁ = x/3 − x³/30 + …
  const second = x < 0.1 ? (x / 3) * (1 - (x * x) / 10 + x ** 4 / 280 - x ** 6 / 15120) : (first - cos(x)) / x;
  if (x > last) {
    out[0] = first;
    if (last > 0) out[1] = second;
    for (let l = 1; l < last; l++) out[l + 1] = ((2 * l + 1) / x) * out[l]! - out[l - 1]!;
    return;
  }
  // Above max(L, x) the functions fall with every order by more than half, so that 60 orders are worth all digits.
  let above = 0;
  let here = 1e-280;
  for (let l = last + Math.ceil(x) + 60; l > 0; l--) {
    if (l <= last) out[l] = here;
    const below = ((2 * l + 1) / x) * here - above;
    above = here;
    here = below;
    if (Math.abs(here) > 1e200) {
      here *= 1e-200;
      above *= 1e-200;
      for (let m = l; m <= last; m++) out[m]! *= 1e-200;
    }
  }
  out[0] = here;
  const scale = Math.abs(first) >= Math.abs(second) || last === 0 ? first / here : second / above;
  for (let l = 0; l <= last; l++) out[l]! *= scale;
}
