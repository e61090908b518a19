import { type ChildProcess, spawn } from 'node:child_process';

/** The built command line, as it is installed. */
const MAIN = new URL('../../dist/main.js', import.meta.url).pathname;

/** A command that runs: what it has said, and how it ended. */
export class Running {
  said = '';
  readonly ended: Promise<number | null>;

  constructor(readonly child: ChildProcess) {
    for (const stream of [child.stdout!, child.stderr!])
      stream.setEncoding('utf8').on('data', (text) => {
        this.said += text;
      });
    this.ended = new Promise((done) => child.once('close', done));
  }

  /** Waits until it has said something. */
  async saying(text: string | RegExp): Promise<void> {
    await until(`“${text}” from ${this.child.spawnargs.slice(2).join(' ')}; it said: ${this.said}`, () =>
      typeof text === 'string' ? this.said.includes(text) : text.test(this.said),
    );
  }

  async kill(signal: NodeJS.Signals = 'SIGKILL'): Promise<number | null> {
    this.child.kill(signal);
    return await this.ended;
  }
}

/** Starts commands, and ends those that are left. */
export class Processes {
  readonly #all: Running[] = [];

  constructor(readonly folder: string) {}

  start(args: readonly string[], env: NodeJS.ProcessEnv = {}): Running {
    const { PGPASSWORD: _, PGSSLMODE: __, ...inherited } = process.env;
    const child = spawn(process.execPath, [MAIN, ...args], { cwd: this.folder, env: { ...inherited, ...env } });
    const running = new Running(child);
    this.#all.push(running);
    return running;
  }

  async end(): Promise<void> {
    await Promise.all(this.#all.map((running) => running.kill()));
  }
}

/** Waits until something holds, for so many seconds at most. */
export async function until(what: string, holds: () => boolean | Promise<boolean>, seconds = 60): Promise<void> {
  const patience = performance.now() + 1000 * seconds;
  while (!(await holds())) {
    if (performance.now() > patience) throw new Error(`waited in vain for ${what}`);
    await new Promise((next) => setTimeout(next, 50));
  }
}
