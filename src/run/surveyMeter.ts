import type { Progress } from './progress.ts';

/** Progress of a survey: cases weighted by what they are guessed to take. */
export class SurveyMeter {
  readonly #costs: number[] = [];
  readonly #fractions: number[] = [];
  readonly #started = performance.now();
  #total = 0;
  #done = 0;
  #finished: number;
  #remark = '';

  /**
   * @param count cases in all
   * @param finished of them before
   */
  constructor(
    readonly onProgress: (progress: Progress) => void,
    readonly count: number,
    finished: number,
  ) {
    this.#finished = finished;
  }

  /** One more case that is to be run; its number. */
  add(cost: number): number {
    this.#total += cost;
    this.#fractions.push(0);
    return this.#costs.push(cost) - 1;
  }

  at(index: number, fraction: number): void {
    this.#move(index, Math.max(this.#fractions[index]!, 0.99 * fraction));
    this.report();
  }

  done(index: number): void {
    this.#move(index, 1);
    this.#finished++;
    this.report();
  }

  #move(index: number, fraction: number): void {
    this.#done += this.#costs[index]! * (fraction - this.#fractions[index]!);
    this.#fractions[index] = fraction;
  }

  /** Says more behind the number of cases, from the next report on. */
  remark(text: string): void {
    this.#remark = text;
  }

  report(): void {
    const fraction = this.#total > 0 ? Math.min(1, this.#done / this.#total) : Number(this.#finished === this.count);
    const elapsed = (performance.now() - this.#started) / 1000;
    this.onProgress({
      stage: `${this.#finished} of ${this.count} cases${this.#remark}`,
      fraction,
      ...(fraction > 0.02 && elapsed > 0.5 ? { secondsLeft: (elapsed / fraction) * (1 - fraction) } : {}),
    });
  }
}
