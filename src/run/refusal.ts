import { describeProblem, type Problem } from '../scenario/reading.ts';

/** The scenario was refused: nothing was computed. Its message has a line a problem. */
export class Refusal extends Error {
  constructor(readonly problems: readonly Problem[]) {
    super(problems.map(describeProblem).join('\n'));
    this.name = 'Refusal';
  }
}
