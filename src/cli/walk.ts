import { InputError } from './input.ts';
import { progressLine } from './progress.ts';

/** Milliseconds of work between looks at progress and interruption. */
const BREATH = 100;

/** Milliseconds before progress is shown at all. */
const PATIENCE = 700;

/** Goes through lists with progress, so that an interruption is heard, and says which row is refused. */
export class Walk {
  readonly #started = performance.now();
  #line: ReturnType<typeof progressLine> | undefined;

  constructor(readonly signal: AbortSignal) {}

  /**
   * @param rows whether the list is the rows of a file, whose numbers messages name
   * @throws InputError for a row that is refused; the signal's reason when aborted
   */
  async map<T, U>(stage: string, list: readonly T[], evaluate: (item: T) => U, rows = true): Promise<U[]> {
    const out: U[] = [];
    let breath = 0;
    for (const [n, item] of list.entries()) {
      const now = performance.now();
      if (now - breath > BREATH) {
        breath = now;
        if (now - this.#started > PATIENCE) {
          this.#line ??= progressLine(false);
          this.#line.show({ stage, fraction: n / list.length });
        }
        await new Promise((next) => setImmediate(next));
        this.signal.throwIfAborted();
      }
      try {
        out.push(evaluate(item));
      } catch (error) {
        if (error instanceof RangeError) throw new InputError(rows ? `row ${n + 2}: ${error.message}` : error.message);
        throw error;
      }
    }
    return out;
  }

  end(): void {
    this.#line?.end();
  }
}
