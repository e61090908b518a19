import { existsSync } from 'node:fs';
import { createServer, type Server } from 'node:http';
import { resolve } from 'node:path';
import sirv from 'sirv';

/** Headers of every answer: no script, nothing from elsewhere, no embedding, isolated from other origins. */
const HEADERS = {
  'Content-Security-Policy':
    "default-src 'none'; style-src 'unsafe-inline'; img-src data:; base-uri 'none'; form-action 'none'; frame-ancestors 'none'",
  'Cross-Origin-Opener-Policy': 'same-origin',
  'Cross-Origin-Embedder-Policy': 'require-corp',
  'Cross-Origin-Resource-Policy': 'same-origin',
  'X-Content-Type-Options': 'nosniff',
  'Referrer-Policy': 'no-referrer',
  'Cache-Control': 'no-store',
};

/**
 * Serves the result folder on the loopback address: files of that folder only, and only to requests that name the
 * loopback host, so that no other site can reach it through a browser (DNS rebinding).
 * @param port 0 for any free one
 * @throws Error when the folder is missing or the port is taken
 */
export async function serveFolder(folder: string, port: number): Promise<{ server: Server; url: string }> {
  if (!existsSync(folder))
    throw new Error(`there is no folder ${folder}: run \`fieldassay compare --out ${folder}\` first`);
  const files = sirv(resolve(folder), { dev: true, dotfiles: false, etag: false });
  const server = createServer((request, response) => {
    const { port: own } = server.address() as { port: number };
    for (const [name, value] of Object.entries(HEADERS)) response.setHeader(name, value);
    const refuse = (status: number, text: string) => {
      response.writeHead(status, { 'Content-Type': 'text/plain; charset=utf-8' });
      response.end(`${text}\n`);
    };
    if (![`127.0.0.1:${own}`, `localhost:${own}`, `[::1]:${own}`].includes(request.headers.host ?? ''))
      return refuse(421, 'This address serves the loopback host only.');
    if (request.method !== 'GET' && request.method !== 'HEAD') return refuse(405, 'Only GET and HEAD.');
    if (request.url === '/') request.url = '/report.html';
    files(request, response, () => refuse(404, 'No such file in the result folder.'));
  });
  await new Promise<void>((done, fail) => {
    server.once('error', (error: NodeJS.ErrnoException) =>
      fail(error.code === 'EADDRINUSE' ? new Error(`port ${port} is in use: choose another with --port`) : error),
    );
    server.listen(port, '127.0.0.1', done);
  });
  return { server, url: `http://127.0.0.1:${(server.address() as { port: number }).port}/` };
}
