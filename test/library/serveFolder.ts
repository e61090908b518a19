import { createServer } from 'node:http';
import type { AddressInfo } from 'node:net';
import sirv from 'sirv';

/** Serves a folder on the loopback address. @param isolated whether its pages may share memory between threads */
export async function serveFolder(folder: string, isolated: boolean): Promise<{ url: string; end: () => void }> {
  const files = sirv(folder, { dev: true });
  const server = createServer((request, response) => {
    if (isolated) {
      response.setHeader('Cross-Origin-Opener-Policy', 'same-origin');
      response.setHeader('Cross-Origin-Embedder-Policy', 'require-corp');
    }
    files(request, response);
  });
  await new Promise<void>((done) => server.listen(0, '127.0.0.1', done));
  const { port } = server.address() as AddressInfo;
  return {
    url: `http://127.0.0.1:${port}/`,
    end: () => {
      server.closeAllConnections();
      server.close();
    },
  };
}
