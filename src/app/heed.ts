import type { z } from 'zod';

/**
 * Has a worker answer the page's requests. What is no request is refused in words before anything is done, and so is
 * whatever an answer throws: nobody waits for a worker that says nothing.
 * @param form of the requests
 * @param refuse tells why there is no answer; it gets the message as it came
 */
export function heed<Request>(
  form: z.ZodType<Request>,
  answer: (request: Request) => void | Promise<void>,
  refuse: (error: Error, data: unknown) => void,
): void {
  addEventListener('message', async ({ data }: MessageEvent<unknown>) => {
    try {
      const read = form.safeParse(data);
      if (read.success) await answer(read.data);
      else {
        const [{ path, message }] = read.error.issues as [z.core.$ZodIssue];
        throw new Error(`A worker was asked for something that is no request: ${path.join('.') || 'it'}: ${message}`);
      }
    } catch (error) {
      refuse(error instanceof Error ? error : new Error(String(error)), data);
    }
  });
}
