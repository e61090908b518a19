import { accessSync, constants, existsSync, readdirSync, realpathSync, statSync } from 'node:fs';
import { createServer, type IncomingMessage, type Server, type ServerResponse } from 'node:http';
import { join, resolve, sep } from 'node:path';
import { fileURLToPath } from 'node:url';
import sirv from 'sirv';
import { quoted } from '../report/words.ts';

/** Headers of every answer: not embedded, not guessed at, not kept, isolated from other origins. */
const HEADERS = {
  'Cross-Origin-Opener-Policy': 'same-origin',
  'Cross-Origin-Embedder-Policy': 'require-corp',
  'Cross-Origin-Resource-Policy': 'same-origin',
  'X-Content-Type-Options': 'nosniff',
  'Referrer-Policy': 'no-referrer',
  'Cache-Control': 'no-store',
};

const ALWAYS = "base-uri 'none'; form-action 'none'; frame-ancestors 'none'";

/** The page runs its own scripts, workers and WebAssembly, and nothing else; it asks nobody but this server. */
const PAGE_POLICY =
  "default-src 'none'; script-src 'self' 'wasm-unsafe-eval'; worker-src 'self'; style-src 'self'; " +
  `img-src 'self' data: blob:; font-src data:; media-src blob:; connect-src 'self'; ${ALWAYS}`;

/** A report runs nothing and asks nobody: its style is its own. */
const REPORT_POLICY = `default-src 'none'; style-src 'unsafe-inline'; img-src data:; ${ALWAYS}`;

/** Where the built page lies: beside the bundle that runs, or, from sources, in dist/. */
function pageFolder(): string {
  for (const place of ['./page', '../page', '../../dist/page']) {
    const path = fileURLToPath(new URL(place, import.meta.url));
    if (existsSync(`${path}/index.html`)) return path;
  }
  throw new Error('the page (dist/page) is missing: run `npm run build`');
}

/**
 * Whether a path leads to a file of a folder that can be read: no link out of it, no hidden file however it is written, no
 * pipe or device.
 */
function leadsIn(folder: string, path: string): boolean {
  try {
    const asked = decodeURI(path);
    if (/[/\\]\./.test(asked)) return false;
    const place = realpathSync(join(folder, asked === '/' ? 'index.html' : asked));
    if (!place.startsWith(realpathSync(folder) + sep) || !statSync(place).isFile()) return false;
    accessSync(place, constants.R_OK);
    return true;
  } catch {
    return false;
  }
}

/** What is in a result folder: its files, and the hashes of a survey's finished cases. */
function listing(folder: string): { readonly files: readonly string[]; readonly cases: readonly string[] } {
  const namesIn = (place: string) =>
    existsSync(place) ? readdirSync(place).filter((name) => !name.startsWith('.')) : [];
  return {
    files: namesIn(folder),
    cases: namesIn(join(folder, 'cases')).flatMap((name) => /^([0-9a-f]+)\.json$/.exec(name)?.[1] ?? []),
  };
}

type Answer = (request: IncomingMessage, response: ServerResponse, refuse: () => void) => void;

/**
 * Serves the page on the loopback address at /, and the files of a result folder: its report at /report.html, all of them
 * under /results/, which itself tells what there is: a survey that runs elsewhere is followed by it. Only to requests that
 * name the loopback host, so that no other site can reach it through a browser (DNS rebinding), and, where they tell from
 * which site they come (`Origin`), come from this one.
 * @param folder of results; null for none
 * @param port 0 for any free one
 * @throws Error when a folder is missing or the port is taken
 */
export async function servePage(folder: string | null, port: number): Promise<{ server: Server; url: string }> {
  if (folder !== null && !existsSync(folder))
    throw new Error(`there is no folder ${folder}: run \`fieldassay compare --out ${quoted(folder)}\` first`);
  const options = { dev: true, dotfiles: false, etag: false };
  const pages = pageFolder();
  const page: Answer = sirv(pages, options);
  const results: Answer = sirv(resolve(folder ?? pages), options);
  const server = createServer((request, response) => {
    const { port: own } = server.address() as { port: number };
    for (const [name, value] of Object.entries(HEADERS)) response.setHeader(name, value);
    const [path] = (request.url ?? '/').split('?') as [string];
    const ofResults = path === '/report.html' || path.startsWith('/results/');
    response.setHeader('Content-Security-Policy', ofResults ? REPORT_POLICY : PAGE_POLICY);
    const refuse = (status: number, text: string) => {
      response.writeHead(status, { 'Content-Type': 'text/plain; charset=utf-8' });
      response.end(`${text}\n`);
    };
    const hosts = [`127.0.0.1:${own}`, `localhost:${own}`, `[::1]:${own}`];
    const named = request.headersDistinct.host ?? [];
    if (named.length !== 1 || !hosts.includes(named[0]!))
      return refuse(421, 'This address serves the loopback host only.');
    const { origin } = request.headers;
    if (origin !== undefined && !hosts.some((host) => origin === `http://${host}`))
      return refuse(403, 'Pages of another origin get nothing here.');
    if (request.method !== 'GET' && request.method !== 'HEAD') return refuse(405, 'Only GET and HEAD.');
    if (path === '/results/' && folder !== null) {
      response.writeHead(200, { 'Content-Type': 'application/json' });
      response.end(JSON.stringify(listing(folder)));
      return;
    }
    const place = ofResults ? folder : pages;
    const file = path.startsWith('/results/') ? path.slice('/results'.length) : path;
    const missing = () => refuse(404, 'No such file here.');
    if (place === null || !leadsIn(place, file)) return missing();
    // Files are whole ones: what is asked of a range can be out of any.
    delete request.headers.range;
    request.url = file;
    (ofResults ? results : page)(request, response, missing);
  });
  await new Promise<void>((done, fail) => {
    server.once('error', (error: NodeJS.ErrnoException) =>
      fail(error.code === 'EADDRINUSE' ? new Error(`port ${port} is in use: choose another with --port`) : error),
    );
    server.listen(port, '127.0.0.1', done);
  });
  return { server, url: `http://127.0.0.1:${(server.address() as { port: number }).port}/` };
}
