/** Threads that can run at once. */
export const threadsAvailable = (): number => (canShareMemory() ? (navigator.hardwareConcurrency ?? 1) : 1);

/** Whether threads can share memory here: only on a cross-origin isolated page. */
export const canShareMemory = (): boolean => globalThis.crossOriginIsolated === true;

/** Where the bundled worker lies. */
export const workerScript = (): string => new URL('./worker.js', import.meta.url).href;

/** Options for the pool's worker constructor. */
export const poolOptions = { workerType: 'web', workerOpts: { type: 'module' } } as const;

/** The host, for a result's `environment`. */
export const hostName = (): string => `browser, ${navigator.userAgent}`;

/** Bytes that one run may take: half of what the browser says the machine has (it says no more than 8 GiB), or 2 GiB. */
export const memoryLimit = (): number => ((navigator as { deviceMemory?: number }).deviceMemory ?? 4) * 0.5 * 2 ** 30;
