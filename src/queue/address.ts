import pg from 'pg';

/** A PostgreSQL database: how it is reached, and how it is named where others may read it. */
export interface Address {
  /** the ways to reach it, tried in turn: with TLS and without where either will do */
  readonly ways: readonly pg.ClientConfig[];
  /** host:port/database, without credentials */
  readonly name: string;
  /** the URL without credentials and parameters */
  readonly url: string;
  readonly host: string;
  readonly port: number;
  readonly database: string;
  readonly user: string;
}

/** Modes of TLS as PostgreSQL's own programs have them; `no-verify` is the driver's. */
const MODES = ['disable', 'allow', 'prefer', 'require', 'verify-ca', 'verify-full', 'no-verify'];

const WANTED = 'it must be postgres://HOST/DATABASE, or postgres://USER@HOST:PORT/DATABASE?sslmode=require';

/**
 * Reads a URL as PostgreSQL's programs do: what it leaves out comes from PGHOST, PGPORT, PGUSER, PGDATABASE, PGSSLMODE,
 * the password from PGPASSWORD or ~/.pgpass. The URL itself is never repeated: it may hold a password.
 */
export function readAddress(text: string): { readonly address: Address } | { readonly problem: string } {
  let url: URL;
  try {
    url = new URL(text);
  } catch {
    return { problem: `the address after --queue cannot be read; ${WANTED}` };
  }
  if (url.protocol !== 'postgres:' && url.protocol !== 'postgresql:')
    return { problem: `the address after --queue begins with ${url.protocol}//; ${WANTED}` };
  const mode = url.searchParams.get('sslmode') ?? process.env.PGSSLMODE ?? 'prefer';
  if (!MODES.includes(mode))
    return { problem: `sslmode is none that PostgreSQL knows; there are ${MODES.slice(0, -1).join(', ')}` };
  try {
    const ways = waysOf(url, mode);
    const { host, port, user = '', database = '' } = new pg.Client(ways[0]);
    const name = `${host}:${port}/${database}`;
    return { address: { ways, name, url: `postgres://${name}`, host, port, database, user } };
  } catch (error) {
    return { problem: `the address after --queue cannot be used: ${(error as Error).message}` };
  }
}

function waysOf(url: URL, mode: string): pg.ClientConfig[] {
  const choice = new URL(url);
  choice.searchParams.delete('sslmode');
  // The driver has PGSSLMODE mean something of its own.
  const plain = { connectionString: choice.href, ssl: false };
  const own = url.searchParams.has('ssl') || url.searchParams.has('uselibpqcompat');
  if (own && url.searchParams.get('sslmode') === null) return [{ connectionString: url.href }];
  const encrypted = { connectionString: choice.href, ssl: { rejectUnauthorized: false } };
  switch (mode) {
    case 'disable':
      return [plain];
    case 'allow':
      return [plain, encrypted];
    case 'prefer':
      return new pg.Client(plain).host.startsWith('/') ? [plain] : [encrypted, plain];
    case 'no-verify':
      return [encrypted];
    default: {
      const strict = new URL(url);
      strict.searchParams.set('sslmode', mode);
      strict.searchParams.set('uselibpqcompat', 'true');
      return [{ connectionString: strict.href }];
    }
  }
}
