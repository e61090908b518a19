/**
 * What the driver prepares for each step of a batch, 64 bytes a step: which cells to update, where the step's source
 * values are, and where its samples go.
 */
export const STEP_BYTES: usize = 64;
export const SAMPLE_GROUPS: i32 = 8;

/** The cells to update: planes [z0, z1), rows [y0, y1), vectors [x0, x1). */
@inline
export function planeFrom(step: usize): i32 {
  return load<i32>(step);
}
@inline
export function planeTo(step: usize): i32 {
  return load<i32>(step, 4);
}
@inline
export function rowFrom(step: usize): i32 {
  return load<i32>(step, 8);
}
@inline
export function rowTo(step: usize): i32 {
  return load<i32>(step, 12);
}
@inline
export function vectorFrom(step: usize): i32 {
  return load<i32>(step, 16);
}
@inline
export function vectorTo(step: usize): i32 {
  return load<i32>(step, 20);
}

/** Address of what each source edge loses in this step. */
@inline
export function sourceValues(step: usize): usize {
  return load<u32>(step, 24);
}

/** Counts steps from 0 over the whole run. */
@inline
export function stepNumber(step: usize): i32 {
  return load<i32>(step, 28);
}

/** Address to which sample group g writes in this step; 0 when it does not read this step. */
@inline
export function sampleBuffer(step: usize, g: i32): usize {
  return load<u32>(step + (<usize>g << 2), 32);
}
