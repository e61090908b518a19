import { type ChildProcess, spawn } from 'node:child_process';
import { resolve } from 'node:path';

/** The built command line, as a user has it. */
export const COMMAND = resolve('dist/main.js');

export interface Served {
  readonly url: string;
  readonly end: () => void;
}

/** Starts `fieldassay view` and waits for its address, which stands first and alone on a line of standard output. */
export async function serveBuiltPage(...args: string[]): Promise<Served> {
  const server: ChildProcess = spawn(process.execPath, [COMMAND, 'view', ...args], {
    stdio: ['ignore', 'pipe', 'pipe'],
  });
  const url = await new Promise<string>((done, fail) => {
    let [out, errors] = ['', ''];
    server.stdout!.on('data', (data) => {
      out += data;
      if (out.includes('\n')) done(out.split('\n')[0]!);
    });
    server.stderr!.on('data', (data) => {
      errors += data;
    });
    server.once('exit', (status) => fail(new Error(`view ended with status ${status}: ${errors}`)));
  });
  return { url, end: () => server.kill() };
}
