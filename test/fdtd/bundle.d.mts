import type { GridSetup } from '../../src/fdtd/run.ts';

export function bundle(input: Record<string, string>): Promise<(name: string) => string>;
export function startFollowers(entry: string, setup: GridSetup): Promise<unknown>;
