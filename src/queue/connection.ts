import type { Socket } from 'node:net';
import pg from 'pg';
import type { Address } from './address.ts';
import { CONNECT_SECONDS, codeOf, isCollision, isFull, isLoss, ServerError, told } from './errors.ts';

/** Wakes who waits for it; rung while nobody does, it wakes the next at once. */
export class Bell {
  #rung = false;
  #wake = () => {};

  ring(): void {
    this.#rung = true;
    this.#wake();
  }

  /** Waits for it, no longer than so many milliseconds. @throws the signal's reason when aborted */
  async wait(longest: number, signal?: AbortSignal): Promise<void> {
    const woken = new AbortController();
    const wake = () => woken.abort();
    this.#wake = wake;
    signal?.addEventListener('abort', wake, { once: true });
    if (this.#rung || signal?.aborted) wake();
    await later(longest, woken.signal).catch(() => {});
    signal?.removeEventListener('abort', wake);
    this.#wake = () => {};
    this.#rung = false;
    signal?.throwIfAborted();
  }
}

/** Runs statements: in a transaction, or each by itself. */
export interface Statements {
  query<Row = Record<string, unknown>>(text: string, values?: readonly unknown[]): Promise<Row[]>;
}

export interface ConnectionOptions {
  readonly say: (text: string) => void;
  readonly signal?: AbortSignal;
  readonly waitsForRoom?: boolean;
}

/** Seconds for which a server that went away is waited for. */
const PATIENCE_SECONDS = 600;

/** Seconds after which a statement is given up: far more than any of ours takes. */
const STATEMENT_SECONDS = 30;

/** So old must a server be: what is used of it is there from then on. */
const OLDEST = 130000;

/**
 * One connection to a database, which comes back by itself: statements and transactions run in turn, and one that a lost
 * connection cut off is run again. They must bear that.
 */
export class Connection {
  #client: pg.Client | undefined;
  #last: Promise<unknown> = Promise.resolve();
  #closed = false;
  /** whether a server that goes away is waited for; before that, its absence is an error at once */
  patient = false;
  /** when the server was last lost; undefined while it is there */
  #lostAt: number | undefined;
  /** rung by what the server says on a channel */
  readonly #bells = new Map<string, Bell>();
  readonly #greetings: ((db: Statements) => Promise<void>)[] = [];

  private constructor(
    readonly address: Address,
    /** what this process is, for the server's list of connections */
    readonly application: string,
    /** hears, once, that the server was lost or has no room, and that it is back */
    readonly say: (text: string) => void,
    readonly signal: AbortSignal | undefined,
    /** whether a full disk is waited for like a server that is away: where work would be lost */
    readonly waitsForRoom: boolean,
  ) {}

  /**
   * Connects, and makes sure that a PostgreSQL server answers.
   * @throws ServerError within five seconds where it does not
   */
  static async open(
    address: Address,
    application: string,
    { say, signal, waitsForRoom = false }: ConnectionOptions,
  ): Promise<Connection> {
    const connection = new Connection(address, application, say, signal, waitsForRoom);
    signal?.throwIfAborted();
    try {
      connection.#client = await connection.#connect();
    } catch (error) {
      throw told(error, address, false);
    }
    return connection;
  }

  /** Does something now, and again on every new connection, before anything else. */
  async greet(act: (db: Statements) => Promise<void>): Promise<void> {
    await this.#inTurn((client) => act(statements(client)));
    this.#greetings.push(act);
  }

  /** Hears from now on what anybody says on a channel, `notify`. What is said while the connection is lost is not heard. */
  async listen(channel: string): Promise<Bell> {
    const bell = new Bell();
    this.#bells.set(channel, bell);
    await this.greet(async (db) => {
      await db.query(`listen ${channel}`);
    });
    return bell;
  }

  /**
   * One statement, or several without values.
   * @throws ServerError where the server refuses it, or stays away
   */
  async query<Row = Record<string, unknown>>(text: string, values?: readonly unknown[]): Promise<Row[]> {
    return await this.#inTurn(async (client) => {
      try {
        return await statements(client).query<Row>(text, values);
      } catch (error) {
        // Several statements may have begun a transaction of their own.
        if (!isLoss(error)) await client.query('rollback');
        throw error;
      }
    });
  }

  /**
   * Statements that hold together or not at all.
   * @throws ServerError where the server refuses one, or stays away; what `act` throws
   */
  async transaction<T>(act: (db: Statements) => Promise<T>): Promise<T> {
    return await this.#inTurn(async (client) => {
      await client.query('begin');
      // Whoever swallows an error must not pass for done.
      let failed: { readonly error: unknown } | undefined;
      const db = statements(client);
      const watched: Statements = {
        query: (text, values) =>
          db.query<never>(text, values).catch((error) => {
            failed ??= { error };
            throw error;
          }),
      };
      try {
        const result = await act(watched);
        if (failed) throw failed.error;
        await client.query('commit');
        return result;
      } catch (error) {
        if (!isLoss(error)) await client.query('rollback');
        throw failed ? failed.error : error;
      }
    });
  }

  /** Ends the connection; nothing can be asked afterwards. */
  async close(): Promise<void> {
    this.#closed = true;
    const client = this.#client;
    this.#client = undefined;
    if (!client) return;
    await Promise.race([client.end().catch(() => {}), later(1000)]);
    cut(client);
  }

  async #inTurn<T>(act: (client: pg.Client) => Promise<T>): Promise<T> {
    const turn = this.#last.then(() => this.#steadily(act));
    this.#last = turn.catch(() => {});
    return await turn;
  }

  async #steadily<T>(act: (client: pg.Client) => Promise<T>): Promise<T> {
    for (let attempt = 0; ; attempt++) {
      try {
        if (this.#closed) throw new ServerError(`the connection to ${this.address.name} is closed`, undefined);
        this.#client ??= await this.#connect();
        const result = await act(this.#client);
        if (this.#lostAt !== undefined) {
          this.#lostAt = undefined;
          this.say(`${this.address.name} is back`);
        }
        return result;
      } catch (error) {
        if (this.#closed) throw told(error, this.address, true);
        if (isCollision(error) && attempt < 10) continue;
        if (isLoss(error)) this.#drop();
        else if (!(isFull(error) && this.waitsForRoom)) throw codeOf(error) ? told(error, this.address, true) : error;
        const now = performance.now();
        const problem = told(error, this.address, true);
        if (!this.patient) throw problem;
        if (this.#lostAt === undefined) {
          this.#lostAt = now;
          this.say(`${problem.message}; trying again for ${PATIENCE_SECONDS / 60} minutes`);
        }
        if (now - this.#lostAt > 1000 * PATIENCE_SECONDS) throw problem;
        await later(Math.min(2000, 100 * 2 ** Math.min(attempt, 5)), this.signal);
      }
    }
  }

  async #connect(): Promise<pg.Client> {
    let failure: unknown;
    for (const way of this.address.ways) {
      const client = new pg.Client({
        ...way,
        application_name: this.application,
        connectionTimeoutMillis: 1000 * CONNECT_SECONDS,
        query_timeout: 1000 * STATEMENT_SECONDS,
        keepAlive: true,
        keepAliveInitialDelayMillis: 10_000,
      });
      // Losses show where something is asked; unheard, the event would end the process.
      client.on('error', () => {
        if (this.#client === client) this.#drop();
      });
      client.on('notification', ({ channel }) => this.#bells.get(channel)?.ring());
      try {
        await client.connect();
        await checkKind(client, this.address);
        for (const greeting of this.#greetings) await greeting(statements(client));
        return client;
      } catch (error) {
        cut(client);
        failure = error;
        // Only where one way of encryption is as good as the other is there another try.
        if (!/^(NOTLS|28000)$/.test(codeOf(error) ?? '')) break;
      }
    }
    throw failure;
  }

  #drop(): void {
    const client = this.#client;
    this.#client = undefined;
    if (client) cut(client);
  }
}

/** Ends a connection without waiting for the other side, which may be gone. */
function cut(client: pg.Client): void {
  (client as unknown as { connection: { stream: Socket } }).connection.stream.destroy();
}

function statements(client: pg.Client): Statements {
  return {
    async query<Row>(text: string, values?: readonly unknown[]) {
      const { rows } = await client.query(text, values as unknown[]);
      return rows as Row[];
    },
  };
}

/** @throws ServerError where the server speaks PostgreSQL's protocol and is none, is too old, or takes no changes */
async function checkKind(client: pg.Client, { name }: Address): Promise<void> {
  const { rows } = await client.query(
    `select version() as version, current_setting('server_version_num', true) as number, pg_is_in_recovery() as standby`,
  );
  const { version, number, standby } = rows[0] as { version: string; number: string | null; standby: boolean };
  if (!version.startsWith('PostgreSQL '))
    throw new ServerError(`what answers at ${name} is no PostgreSQL server: ${version}`, undefined);
  if (!(Number(number) >= OLDEST))
    throw new ServerError(
      `the server at ${name} is ${version}; PostgreSQL ${OLDEST / 10000} or later is needed`,
      undefined,
    );
  if (standby)
    throw new ServerError(`the server at ${name} is a standby, which takes no changes; name the primary`, undefined);
  // A machine that vanished without a word is noticed within half a minute.
  await client.query('set tcp_keepalives_idle = 10; set tcp_keepalives_interval = 5; set tcp_keepalives_count = 3');
}

/** Waits; an abortion cuts it short. */
export async function later(milliseconds: number, signal?: AbortSignal): Promise<void> {
  await new Promise<void>((done) => {
    const timer = setTimeout(end, milliseconds);
    function end(): void {
      clearTimeout(timer);
      signal?.removeEventListener('abort', end);
      done();
    }
    signal?.addEventListener('abort', end, { once: true });
    if (signal?.aborted) end();
  });
  signal?.throwIfAborted();
}
