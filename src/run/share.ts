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

/**
 * The same where nobody knows what will be asked for: the newest works are kept. Where one fails, whoever asks next tries
 * again by himself.
 */
export class Recent {
  readonly #work = new Map<string, Promise<unknown>>();

  /** @param most works that are kept */
  constructor(readonly most: number) {}

  async take<T>(key: string, make: () => Promise<T>): Promise<T> {
    const known = this.#work.get(key) as Promise<T> | undefined;
    const work = known ? known.catch(make) : make();
    this.#work.delete(key);
    this.#work.set(key, work);
    for (const oldest of this.#work.keys()) {
      if (this.#work.size <= this.most) break;
      this.#work.delete(oldest);
    }
    return await work;
  }
}
