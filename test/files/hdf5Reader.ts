import { createRequire } from 'node:module';

/** As much of a reader's groups and data sets as is looked at. */
export interface Read {
  readonly attrs: Record<string, unknown>;
  readonly keys: string[];
  readonly shape: number[];
  readonly dtype: string;
  readonly value: ArrayLike<number> & Iterable<number>;
  get(path: string): Read;
}

/** Reads an HDF5 file with a library that shares no code with the one that wrote it. */
export function readHdf5(bytes: Uint8Array): Read {
  const { File } = createRequire(import.meta.url)('jsfive');
  return new File(Uint8Array.from(bytes).buffer, 'file.h5');
}
