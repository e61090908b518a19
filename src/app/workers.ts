/** The address of a script that the build put beside this one. */
const beside = (name: string): string => new URL(name, import.meta.url).href;

/** A worker at work for the page. */
export interface PageWorker<Request> {
  ask(request: Request, transfer?: Transferable[]): void;
  /** Ends it at once, whatever it is doing; what it had sent by then is not heard any more. */
  end(): void;
}

/**
 * Starts one of the page's workers.
 * @param take hears what it tells, until it is ended
 * @param fail hears, in words, that it could not be started, died, or told what cannot be read
 */
export function startWorker<Request, Report>(
  script: string,
  take: (report: Report) => void,
  fail: (message: string) => void,
): PageWorker<Request> {
  const worker = new Worker(beside(script), { type: 'module' });
  let heard = true;
  worker.addEventListener('message', ({ data }: MessageEvent<Report>) => heard && take(data));
  worker.addEventListener('error', ({ message }) => heard && fail(message || 'A worker could not be started.'));
  worker.addEventListener('messageerror', () => heard && fail('What a worker told could not be read.'));
  return {
    ask: (request, transfer = []) => worker.postMessage(request, transfer),
    end() {
      heard = false;
      worker.terminate();
    },
  };
}

/**
 * The one answer of a worker that is asked once.
 * @throws Error where it gives none
 */
export async function answerOf<Request, Answer>(script: string, request: Request): Promise<Answer> {
  let worker: PageWorker<Request> | undefined;
  try {
    return await new Promise<Answer>((resolve, reject) => {
      worker = startWorker<Request, Answer>(script, resolve, (message) => reject(new Error(message)));
      worker.ask(request);
    });
  } finally {
    worker?.end();
  }
}
