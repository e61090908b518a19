/**
 * Builds everything that is not in the repository: the WebAssembly kernels (as TypeScript modules that hold their bytes
 * in base64, in src/kernels/) and the bundles in dist/ (command line, worker, library; the page in dist/page/).
 *
 *   node assembly/build.mjs             build what is out of date
 *   node assembly/build.mjs --kernels   the kernels alone
 *
 * Each output folder carries a stamp, the hash of all that went into it; a build whose stamp is current does nothing.
 * A folder is filled under a temporary name beside its place and then renamed, so that no reader sees half of one.
 */
import { spawnSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import { existsSync, mkdirSync, readdirSync, readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs';
import { dirname, join, relative } from 'node:path';
import { fileURLToPath } from 'node:url';

const root = dirname(dirname(fileURLToPath(import.meta.url)));
const config = JSON.parse(readFileSync(join(root, 'asconfig.json'), 'utf8'));

/** All files below a folder, sorted, so that a hash of them is the same on every machine. */
function filesBelow(folder) {
  return readdirSync(folder, { withFileTypes: true })
    .flatMap((entry) => (entry.isDirectory() ? filesBelow(join(folder, entry.name)) : [join(folder, entry.name)]))
    .sort();
}

function hashOf(files) {
  const hash = createHash('sha256').update(process.version);
  for (const file of files) hash.update(relative(root, file)).update('\0').update(readFileSync(file)).update('\0');
  return hash.digest('hex');
}

/** Runs a tool of node_modules with this Node; its output is shown only when it fails. */
function run(what, script, args) {
  const { status, stdout, stderr, error } = spawnSync(process.execPath, [join(root, 'node_modules', script), ...args], {
    cwd: root,
    encoding: 'utf8',
  });
  if (status !== 0) {
    process.stderr.write(`${what} failed\n${stdout ?? ''}${stderr ?? ''}${error?.message ?? ''}\n`);
    process.exit(3);
  }
}

/** Fills `target` by `fill(folder)` unless its stamp says that it is current. */
function refresh(target, inputs, fill) {
  const stamp = hashOf(inputs);
  const stampFile = join(target, '.stamp');
  if (existsSync(stampFile) && readFileSync(stampFile, 'utf8') === stamp) return;
  const fresh = `${target}.${process.pid}.new`;
  const old = `${target}.${process.pid}.old`;
  mkdirSync(fresh, { recursive: true });
  try {
    fill(fresh);
    writeFileSync(join(fresh, '.stamp'), stamp);
    if (existsSync(target)) renameSync(target, old);
    renameSync(fresh, target);
  } finally {
    rmSync(fresh, { recursive: true, force: true });
    rmSync(old, { recursive: true, force: true });
  }
}

function buildKernels(folder) {
  const lines = [];
  for (const [name, { entry, args }] of Object.entries(config.kernels)) {
    const wasm = join(folder, `${name}.wasm`);
    run(`asc ${name}`, 'assemblyscript/bin/asc.js', [join(root, entry), '--outFile', wasm, ...config.flags, ...args]);
    writeFileSync(
      join(folder, `${name}.ts`),
      `/** The bytes of ${entry}, compiled. */\nexport default '${readFileSync(wasm).toString('base64')}';\n`,
    );
    rmSync(wasm);
    lines.push(name);
  }
  return lines;
}

const common = ['package.json', 'package-lock.json', 'asconfig.json', 'vite.config.ts', 'vite.page.ts'].map((name) => join(root, name));
refresh(join(root, 'src/kernels'), [...common, ...filesBelow(join(root, 'assembly'))], buildKernels);

if (!process.argv.includes('--kernels')) {
  refresh(join(root, 'dist'), [...common, ...filesBelow(join(root, 'src'))], (folder) => {
    const vite = ['vite/bin/vite.js', ['build', '--emptyOutDir', '--logLevel', 'warn', '--outDir']];
    run('vite build', vite[0], [...vite[1], folder]);
    run('vite build of the page', vite[0], [...vite[1], join(folder, 'page'), '--config', 'vite.page.ts']);
  });
}
