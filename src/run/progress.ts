export interface Progress {
  /** what is being done, for a sentence: "the grid in its box" */
  readonly stage: string;
  /** of the whole, from 0 to 1 */
  readonly fraction: number;
  /** guessed from the time taken so far; absent while it cannot be */
  readonly secondsLeft?: number;
}

/** Turns progress within stages into progress of the whole, stages weighted by the work they are guessed to be. */
export class ProgressMeter {
  readonly #starts: number[];
  readonly #total: number;
  readonly #started = performance.now();
  #stage = 0;

  constructor(
    readonly onProgress: (progress: Progress) => void,
    readonly stages: readonly (readonly [name: string, work: number])[],
  ) {
    let sum = 0;
    this.#starts = stages.map(([, work]) => {
      sum += work;
      return sum - work;
    });
    this.#total = sum;
  }

  /** Begins a stage. */
  enter(stage: number): void {
    this.#stage = stage;
    this.at(0);
  }

  /** Reports how far the stage is, from 0 to 1. */
  at(fractionOfStage: number): void {
    const [stage, work] = this.stages[this.#stage]!;
    const fraction = this.#total > 0 ? (this.#starts[this.#stage]! + work * fractionOfStage) / this.#total : 0;
    const elapsed = (performance.now() - this.#started) / 1000;
    this.onProgress({
      stage,
      fraction,
      ...(fraction > 0.05 && elapsed > 0.5 ? { secondsLeft: (elapsed / fraction) * (1 - fraction) } : {}),
    });
  }
}
