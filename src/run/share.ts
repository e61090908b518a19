/**
 * Work that several cases ask for alike, done once: kept until the last of them has had it. Where it fails, whoever asks
 * next tries again by himself.
 */
export class Shared {
  readonly #left = new Map<string, number>();
  readonly #work = new Map<string, Promise<unknown>>();

  /** Announces one more asker of a key. */
  expect(key: string): void {
    this.#left.set(key, (this.#left.get(key) ?? 0) + 1);
  }

  async take<T>(key: string, make: () => Promise<T>): Promise<T> {
    const left = (this.#left.get(key) ?? 1) - 1;
    this.#left.set(key, left);
    const known = this.#work.get(key) as Promise<T> | undefined;
    const work = known ? known.catch(make) : make();
    if (left > 0) this.#work.set(key, work);
    else this.#work.delete(key);
    return await work;
  }
}
