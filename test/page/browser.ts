import { spawnSync } from 'node:child_process';
import { createReadStream, createWriteStream, existsSync, mkdirSync, renameSync, rmSync, writeFileSync } from 'node:fs';
import { createRequire } from 'node:module';
import { dirname, join, resolve } from 'node:path';
import { pipeline } from 'node:stream/promises';
import { createBrotliDecompress } from 'node:zlib';
import { type Browser, chromium } from 'playwright-core';
import { extract } from 'tar-fs';

/**
 * A real Chromium for the page's tests: `$CHROMIUM`, one of the system's, or the one inside a package, which is unpacked
 * once, so that `npm ci && npm test` needs nothing installed. The tests never skip themselves: without a browser they fail.
 */

/** No GPU and no software stand-in for one either: the second flag is what proves that the page needs none. */
const FLAGS = [
  '--headless',
  '--no-sandbox',
  '--disable-gpu',
  '--disable-software-rasterizer',
  '--disable-quic',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
];

const SYSTEM = ['google-chrome', 'google-chrome-stable', 'chromium', 'chromium-browser'];

interface Place {
  readonly path: string;
  readonly environment: Readonly<Record<string, string>>;
}

export function systemBrowser(): string | undefined {
  const named = process.env.CHROMIUM;
  if (named) return named;
  const found = SYSTEM.find((name) => spawnSync(name, ['--version'], { stdio: 'ignore' }).status === 0);
  return found && spawnSync('sh', ['-c', `command -v ${found}`], { encoding: 'utf8' }).stdout.trim();
}

/** Unpacks the package's browser, its libraries and a font into a cache folder; Linux on x64. */
export async function packagedBrowser(): Promise<Place> {
  const entry = createRequire(import.meta.url).resolve('@sparticuz/chromium');
  const archives = resolve(dirname(entry), '../../bin');
  const cache = resolve('.cache/chromium');
  if (!existsSync(join(cache, 'chromium'))) {
    const fresh = `${cache}.${process.pid}.new`;
    rmSync(fresh, { recursive: true, force: true });
    mkdirSync(fresh, { recursive: true });
    const unpacked = (name: string) => createReadStream(join(archives, name));
    await pipeline(
      unpacked('chromium.br'),
      createBrotliDecompress({ chunkSize: 2 ** 21 }),
      createWriteStream(join(fresh, 'chromium'), { mode: 0o755 }),
    );
    for (const name of ['al2023.tar.br', 'fonts.tar.br'])
      await pipeline(unpacked(name), createBrotliDecompress(), extract(fresh));
    writeFileSync(
      join(fresh, 'fonts.conf'),
      `<?xml version="1.0"?><!DOCTYPE fontconfig SYSTEM "fonts.dtd"><fontconfig><dir>${cache}/fonts</dir><cachedir>${cache}/fonts-cache</cachedir></fontconfig>`,
    );
    mkdirSync(dirname(cache), { recursive: true });
    try {
      renameSync(fresh, cache);
    } catch (error) {
      // Another test file was quicker.
      if (!existsSync(join(cache, 'chromium'))) throw error;
      rmSync(fresh, { recursive: true, force: true });
    }
  }
  return {
    path: join(cache, 'chromium'),
    environment: { LD_LIBRARY_PATH: join(cache, 'lib'), FONTCONFIG_FILE: join(cache, 'fonts.conf') },
  };
}

/** Starts a browser; it is the caller's to close. */
export async function launchBrowser(...flags: readonly string[]): Promise<Browser> {
  const system = systemBrowser();
  const { path, environment } = system ? { path: system, environment: {} } : await packagedBrowser();
  return await chromium.launch({
    executablePath: path,
    args: [...FLAGS, ...flags],
    env: { ...(process.env as Record<string, string>), ...environment },
  });
}
