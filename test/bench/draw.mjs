/**
 * What one picture of the panes costs, in Node and, where there is one, in a Chromium without a GPU ($CHROMIUM, or one on
 * the path). Target: a median of 16.7 ms, so that turning the camera holds 60 pictures a second.
 */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';
import { build } from 'vite';

const WORKLOAD = fileURLToPath(new URL('drawing.ts', import.meta.url));
export const TARGET_MS = 1000 / 60;

/** The workload as one script; `Drawing.measureDrawing` in a page, a module's export in Node. */
async function bundled(format) {
  const [{ output }] = await build({
    configFile: false,
    logLevel: 'error',
    build: {
      write: false,
      minify: false,
      target: 'es2022',
      lib: { entry: WORKLOAD, formats: [format], name: 'Drawing' },
    },
  });
  return output[0].code;
}

async function inNode(folder) {
  const file = join(folder, 'drawing.mjs');
  writeFileSync(file, await bundled('es'));
  const { measureDrawing } = await import(pathToFileURL(file).href);
  return measureDrawing(() => {});
}

function chromiumPath() {
  const named = process.env.CHROMIUM;
  if (named) return named;
  return ['chromium', 'chromium-browser', 'google-chrome'].find(
    (name) => spawnSync(name, ['--version'], { stdio: 'ignore' }).status === 0,
  );
}

async function inChromium(folder) {
  const chromium = chromiumPath();
  if (!chromium) return undefined;
  const page = join(folder, 'drawing.html');
  const script = (await bundled('iife')).replaceAll('</script', '<\\/script');
  writeFileSync(
    page,
    `<canvas width="1280" height="800"></canvas><pre></pre><script>${script}
const context = document.querySelector('canvas').getContext('2d');
const present = ({ surface: { bytes, width, height } }) => context.putImageData(new ImageData(bytes, width, height), 0, 0);
document.querySelector('pre').textContent = JSON.stringify(Drawing.measureDrawing(present));
</script>`,
  );
  const { stdout, status, stderr } = spawnSync(
    chromium,
    [
      '--headless',
      '--no-sandbox',
      '--disable-gpu',
      '--disable-software-rasterizer',
      '--disable-background-networking',
      '--no-first-run',
      `--user-data-dir=${join(folder, 'profile')}`,
      '--dump-dom',
      pathToFileURL(page).href,
    ],
    { encoding: 'utf8', timeout: 120_000, maxBuffer: 1 << 26 },
  );
  const result = stdout?.match(/<pre>(\[.*?\])<\/pre>/)?.[1];
  if (!result) throw new Error(`Chromium ended with status ${status} and no result: ${stderr}`);
  return JSON.parse(result);
}

/** @returns {Promise<{ title: string, targetMs: number, results: object[] }>} one result for each host and case */
export async function benchDraw() {
  const folder = mkdtempSync(join(tmpdir(), 'drawing-'));
  try {
    const hosts = { node: await inNode(folder), chromium: await inChromium(folder) };
    return {
      title: 'One picture: three panes of three planes of 256² samples, 1280 × 800, milliseconds',
      targetMs: TARGET_MS,
      results: Object.entries(hosts).flatMap(([host, costs]) => (costs ?? []).map((cost) => ({ host, ...cost }))),
    };
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}
