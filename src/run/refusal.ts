import type { Problem } from '../scenario/load.ts';

/** The scenario was refused: nothing was computed. */
export class Refusal extends Error {
  constructor(readonly problems: readonly Problem[]) {
    super(problems.map(({ path, message }) => (path ? `${path}: ${message}` : message)).join('\n'));
    this.name = 'Refusal';
  }
}
