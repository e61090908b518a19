import type { Address } from './address.ts';

/** What a server said or did, in words that say what to do about it. */
export class ServerError extends Error {
  constructor(
    message: string,
    /** PostgreSQL's or the system's code; undefined where there is none */
    readonly code: string | undefined,
  ) {
    super(message);
    this.name = 'ServerError';
  }
}

/** Within this many seconds a server has to be there. */
export const CONNECT_SECONDS = 3;

/** Errors of the driver that have no code, by their beginnings. */
const DRIVER: readonly (readonly [beginning: RegExp, code: string])[] = [
  [/^timeout expired|connection timeout/, 'ETIMEDOUT'],
  [/^Query read timeout/, 'ETIMEDOUT'],
  [/^Connection terminated|^Client has encountered a connection error|^Client was closed/, 'ECONNRESET'],
  [/^There was an error establishing an SSL/, 'NOTPOSTGRES'],
  [/^received invalid response|^Unknown (message|authentication)/i, 'NOTPOSTGRES'],
  [/^The server does not support SSL/, 'NOTLS'],
  [/password must be a (non-empty )?string|client password must be/, 'NOPASSWORD'],
];

export function codeOf(error: unknown): string | undefined {
  const { code, message } = error as { code?: unknown; message?: unknown };
  if (typeof code === 'string') return code;
  return DRIVER.find(([beginning]) => beginning.test(String(message)))?.[1];
}

/** The connection is gone, or the server is for the moment: worth another attempt. */
export function isLoss(error: unknown): boolean {
  const code = codeOf(error) ?? '';
  return /^(08...|57P0[1235]|53300|ECONN.*|EPIPE|ETIMEDOUT|EHOSTUNREACH|ENETUNREACH|ENETDOWN|EAI_AGAIN|ENOTFOUND|ENOENT)$/.test(
    code,
  );
}

/** Two transactions were in each other's way: the same again will do. */
export const isCollision = (error: unknown): boolean => /^(40001|40P01)$/.test(codeOf(error) ?? '');

/** The server has no room for the moment. */
export const isFull = (error: unknown): boolean => /^(53100|53200)$/.test(codeOf(error) ?? '');

/**
 * An error of the server or on the way to it, told.
 * @param before whether a connection had been there before
 */
export function told(error: unknown, { name, host, port, database, user }: Address, before: boolean): ServerError {
  if (error instanceof ServerError) return error;
  const code = codeOf(error);
  const said = (error as Error)?.message ?? String(error);
  const text = (sentence: string) => new ServerError(sentence, code);
  switch (code) {
    case 'ENOTFOUND':
    case 'EAI_AGAIN':
      return text(`no host of the name ${host} is known; check the address after --queue`);
    case 'ECONNREFUSED':
      return text(
        `nothing answers at ${host}:${port} (connection refused); check host and port, and that the server runs and listens there`,
      );
    case 'ENOENT':
      return text(`there is no PostgreSQL socket in ${host}; check the address, and that the server runs`);
    case 'EHOSTUNREACH':
    case 'ENETUNREACH':
    case 'ENETDOWN':
      return text(`${host}:${port} cannot be reached from here; check the address and the network`);
    case 'ETIMEDOUT':
      return text(
        before
          ? `the server at ${name} no longer answers`
          : `${host}:${port} did not answer as a PostgreSQL server within ${CONNECT_SECONDS} s; check the address, the port and any firewall between`,
      );
    case 'ECONNRESET':
    case 'EPIPE':
      return text(
        before
          ? `the connection to ${name} was cut`
          : `${host}:${port} closed the connection instead of answering as a PostgreSQL server; check the port`,
      );
    case 'NOTPOSTGRES':
      return text(`what answers at ${host}:${port} is no PostgreSQL server; check the port`);
    case 'NOTLS':
      return text(`the server at ${host}:${port} has no TLS, which sslmode asks for; take sslmode=prefer or disable`);
    case 'NOPASSWORD':
      return text(`the server at ${name} asks for the password of “${user}”: set PGPASSWORD, or add it to ~/.pgpass`);
    case '28P01':
      return text(`the server at ${name} refuses the password of “${user}”; check PGPASSWORD`);
    case '28000':
      return text(`the server at ${name} does not let “${user}” in: ${said}`);
    case '3D000':
      return text(`the server at ${host}:${port} has no database “${database}”; make it with \`createdb ${database}\``);
    case '42501':
      return text(
        `“${user}” lacks a right in the database “${database}”: ${said}; ` +
          `its owner can grant it: GRANT CREATE ON DATABASE "${database}" TO "${user}" for the first start, and the ` +
          'schemas fieldassay and fieldassay_queue to whoever comes later',
      );
    case '53100':
      return text(`the disk of the server at ${name} is full (${said}); make room on it`);
    case '53200':
      return text(`the server at ${name} is out of memory (${said})`);
    case '53300':
      return text(`the server at ${name} has no connection left to give (${said}); raise its max_connections`);
    case '57P01':
    case '57P02':
    case '57P03':
      return text(`the server at ${name} is being stopped or started (${said})`);
    default:
      return /^(DEPTH_ZERO|SELF_SIGNED|UNABLE_TO|CERT_|ERR_TLS|ERR_SSL|EPROTO|ERR_OSSL)/.test(code ?? '')
        ? text(`TLS with ${host}:${port} fails: ${said}; check sslmode and sslrootcert`)
        : text(`the server at ${name} says: ${said}`);
  }
}
