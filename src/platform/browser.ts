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
