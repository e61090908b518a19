/**
 * Elementary functions whose last bits are the same on every host. A JavaScript engine may round `Math.exp` and its kin
 * as it likes, so results would differ between Node and browsers; these come from AssemblyScript's own library, compiled
 * once to WebAssembly, whose arithmetic is fully specified.
 */
export function exp(x: f64): f64 {
  return NativeMath.exp(x);
}

export function log(x: f64): f64 {
  return NativeMath.log(x);
}

export function expm1(x: f64): f64 {
  return NativeMath.expm1(x);
}

export function log1p(x: f64): f64 {
  return NativeMath.log1p(x);
}

export function pow(x: f64, y: f64): f64 {
  return NativeMath.pow(x, y);
}

export function sin(x: f64): f64 {
  return NativeMath.sin(x);
}

export function cos(x: f64): f64 {
  return NativeMath.cos(x);
}

export function asin(x: f64): f64 {
  return NativeMath.asin(x);
}

export function atan2(y: f64, x: f64): f64 {
  return NativeMath.atan2(y, x);
}
