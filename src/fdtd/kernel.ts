import { instantiate, isValid } from '../elementary/wasm.ts';
import doubleLarge from '../kernels/fdtd-double-large.ts';
import doubleMedium from '../kernels/fdtd-double-medium.ts';
import doubleSmall from '../kernels/fdtd-double-small.ts';
import fusedLarge from '../kernels/fdtd-fused-large.ts';
import fusedMedium from '../kernels/fdtd-fused-medium.ts';
import fusedSmall from '../kernels/fdtd-fused-small.ts';
import singleLarge from '../kernels/fdtd-single-large.ts';
import singleMedium from '../kernels/fdtd-single-medium.ts';
import singleSmall from '../kernels/fdtd-single-small.ts';

/** Addresses and sizes fixed in assembly/fdtd/, bytes. */
export const FIELDS = 131072;
export const VECTOR = 16;
export const WINDOW_BYTES = 64;
export const STEP_BYTES = 64;
export const SAMPLE_GROUPS = 8;
export const BLOCK_BYTES = 64;
export const MOST_TILES = 64;
export const MOST_THREADS = 16;
/** wasm32 */
export const ADDRESS_LIMIT = 2 ** 32;

/**
 * The builds of the kernel: the distance between fields is a constant of the code, so there are a few, for lattices of
 * different size. A stride is 704 bytes more than a multiple of the page, so that the same cell of two fields does not
 * fall into the same cache set; asconfig.json holds the same numbers.
 */
export const BUILDS = [
  { size: 'small', stride: 16777920 },
  { size: 'medium', stride: 100664000 },
  { size: 'large', stride: 429441728 },
] as const;
export type BuildSize = (typeof BUILDS)[number]['size'];

const BYTES = {
  single: { small: singleSmall, medium: singleMedium, large: singleLarge },
  double: { small: doubleSmall, medium: doubleMedium, large: doubleLarge },
  fused: { small: fusedSmall, medium: fusedMedium, large: fusedLarge },
} as const;

/** The arithmetic of a build; `fused` is single precision with fused multiply-add, where the runtime has it. */
export type Arithmetic = keyof typeof BYTES;

/**
 * Whether this runtime has relaxed SIMD, whose multiply-add rounds once. Its results depend on the processor in their last
 * bits, so nothing uses it unasked.
 */
export const hasFusedMultiplyAdd = (): boolean => isValid(BYTES.fused.small);

/** What assembly/fdtd/index.ts exports; addresses are byte addresses, true comes back as 1. */
export interface GridKernel {
  lattice(cellsX: number, cellsY: number, cellsZ: number): void;
  coefficients(x: number, y: number, z: number): void;
  windows(low: number, high: number, tableElectric: number, tableMagnetic: number): void;
  layersX(rowMemory: number, memoryElectric: number, memoryMagnetic: number): void;
  layersY: LayerSetter;
  layersZ: LayerSetter;
  walls(linearFaces: number, mirroredFaces: number, records: number, bias: number): void;
  sources(starts: number, addresses: number): void;
  samples(count: number, addresses: number): void;
  fill(from: number, to: number, value: number): void;
  sweep(thread: number, threads: number, steps: number, count: number, gatheredBefore: number): number;
  march(thread: number, threads: number, blocks: number, count: number): number;
}

type LayerSetter = (
  low: number,
  high: number,
  profileElectric: number,
  profileMagnetic: number,
  memoryElectric: number,
  memoryMagnetic: number,
) => void;

/**
 * The kernel on a shared memory, one instance a thread.
 * @param interrupted asked by the leading thread about once a plane; true calls the run off
 */
export function gridKernel(
  arithmetic: Arithmetic,
  size: BuildSize,
  memory: WebAssembly.Memory,
  interrupted: () => boolean,
): GridKernel {
  const env = { memory, interrupted: () => (interrupted() ? 1 : 0) };
  return instantiate(BYTES[arithmetic][size], env) as unknown as GridKernel;
}
