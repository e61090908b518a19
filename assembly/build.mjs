/**
 * Builds everything that is not in the repository: the WebAssembly kernels (as TypeScript modules that hold their bytes
 * in base64, in src/kernels/) and the bundles in dist/ (command line, worker, library; the page in dist/page/, the library for browsers in
 * dist/library/).
 *
 *   node assembly/build.mjs             build what is out of date
 *   node assembly/build.mjs --kernels   the kernels alone
 *
 * Each output folder carries a stamp, the hash of all that went into it; a build whose stamp is current does nothing.
 * A folder is filled under a temporary name beside its place and then renamed, so that no reader sees half of one.
 */
import { spawn } from 'node:child_process';
import { createHash } from 'node:crypto';
import { existsSync, mkdirSync, readdirSync, readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs';
import { availableParallelism } from 'node:os';
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
  return new Promise((done, fail) => {
    const child = spawn(process.execPath, [join(root, 'node_modules', script), ...args], { cwd: root });
    let output = '';
    for (const stream of [child.stdout, child.stderr])
      stream.setEncoding('utf8').on('data', (text) => {
        output += text;
      });
    child.on('error', fail);
    child.on('close', (status) => (status === 0 ? done() : fail(new Error(`${what} failed\n${output}`))));
  });
}

/** Does something with each of a list, as many at a time as the machine has processors. */
async function forEachAtOnce(list, act) {
  const left = [...list];
  const take = async () => {
    for (let item = left.shift(); item; item = left.shift()) await act(item);
  };
  await Promise.all(Array.from({ length: availableParallelism() }, take));
}

/** Fills `target` by `fill(folder)` unless its stamp says that it is current. */
async function refresh(target, inputs, fill) {
  const stamp = hashOf(inputs);
  const isCurrent = (folder) => {
    const file = join(folder, '.stamp');
    return existsSync(file) && readFileSync(file, 'utf8') === stamp;
  };
  if (isCurrent(target)) return;
  const fresh = `${target}.${process.pid}.new`;
  const old = `${target}.${process.pid}.old`;
  mkdirSync(fresh, { recursive: true });
  try {
    await fill(fresh);
    writeFileSync(join(fresh, '.stamp'), stamp);
    if (existsSync(target)) renameSync(target, old);
    renameSync(fresh, target);
  } catch (error) {
    // Another build may have put the very same folder there meanwhile.
    if (!isCurrent(target)) throw error;
  } finally {
    rmSync(fresh, { recursive: true, force: true });
    rmSync(old, { recursive: true, force: true });
  }
}

const inRoot = (...names) => names.map((name) => join(root, name));

async function buildKernels(folder) {
  await forEachAtOnce(Object.entries(config.kernels), async ([name, { entry, args }]) => {
    const wasm = join(folder, `${name}.wasm`);
    const given = [join(root, entry), '--outFile', wasm, ...config.flags, ...args];
    await run(`asc ${name}`, 'assemblyscript/bin/asc.js', given);
    const bytes = readFileSync(wasm).toString('base64');
    writeFileSync(
      join(folder, `${name}.ts`),
      `/** The bytes of ${entry}, compiled. */\nconst bytes: string =\n  '${bytes}';\nexport default bytes;\n`,
    );
    rmSync(wasm);
  });
}

async function buildBundles(folder) {
  const build = ['build', '--emptyOutDir', '--logLevel', 'warn', '--outDir'];
  await run('vite build', 'vite/bin/vite.js', [...build, folder]);
  const page = [...build, join(folder, 'page'), '--config', 'src/app/vite.config.ts'];
  await run('vite build of the page', 'vite/bin/vite.js', page);
  const library = [
    'build',
    '--logLevel',
    'warn',
    '--config',
    'assembly/library.vite.config.ts',
    '--outDir',
    join(folder, 'library'),
  ];
  await run('vite build of the library', 'vite/bin/vite.js', [...library, '--emptyOutDir']);
  await run('vite build of its worker', 'vite/bin/vite.js', [...library, '--emptyOutDir', 'false', '--mode', 'worker']);
}

try {
  const compiler = inRoot('asconfig.json', 'node_modules/assemblyscript/package.json');
  await refresh(join(root, 'src/kernels'), [...compiler, ...filesBelow(join(root, 'assembly'))], buildKernels);
  if (!process.argv.includes('--kernels')) {
    const common = inRoot('package.json', 'package-lock.json', 'vite.config.ts', 'assembly/library.vite.config.ts');
    await refresh(join(root, 'dist'), [...common, ...filesBelow(join(root, 'src'))], buildBundles);
  }
} catch (error) {
  process.stderr.write(`${error.message}\n`);
  process.exitCode = 3;
}
