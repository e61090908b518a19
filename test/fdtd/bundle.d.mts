import type { GridSetup } from '../../src/fdtd/run.ts';

export interface Followers {
  follow(setup: GridSetup): Promise<unknown>;
  stop(): Promise<unknown>;
}

export function bundle(input: Record<string, string>): Promise<(name: string) => string>;
export function startFollowers(entry: string, count: number): Followers;
