/**
 * What `npm pack` and `npm publish` do before and after (`prepack`, `postpack`):
 *
 *   node assembly/package.mjs begin   writes the declaration files, and a package.json of what a user needs
 *   node assembly/package.mjs end     puts the project's own package.json back
 *
 * Bundles hold what they use, so the packages that build them (a compiler of 100 MB among them) are none of the user's.
 */
import { spawnSync } from 'node:child_process';
import { existsSync, mkdirSync, readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs';
import { dirname, join, relative, resolve } from 'node:path';
import { fileURLToPath } from 'node:url';

const root = dirname(dirname(fileURLToPath(import.meta.url)));
const manifest = join(root, 'package.json');
const own = join(root, 'package.json.own');

/** What the bundles leave outside: the font's files are read from its package, the declarations name zod's types. */
const USED = ['@fontsource/inter', 'zod'];

if (process.argv[2] === 'begin') {
  putBack();
  writeDeclarations(join(root, 'dist/types'));
  const {
    scripts,
    dependencies,
    devDependencies: _,
    imports: __,
    ...rest
  } = JSON.parse(readFileSync(manifest, 'utf8'));
  const user = {
    ...rest,
    // Runs in this folder after packing, never where the package is installed.
    scripts: { postpack: scripts.postpack },
    dependencies: Object.fromEntries(USED.map((name) => [name, dependencies[name]])),
  };
  renameSync(manifest, own);
  writeFileSync(manifest, `${JSON.stringify(user, null, 2)}\n`);
} else putBack();

/** Also where a pack before this one was cut off. */
function putBack() {
  if (existsSync(own)) renameSync(own, manifest);
}

/** The declarations that src/index.ts leads to, and no others. */
function writeDeclarations(target) {
  const all = join(root, '.cache/types');
  rmSync(all, { recursive: true, force: true });
  rmSync(target, { recursive: true, force: true });
  const compiler = join(root, 'node_modules/typescript/bin/tsc');
  const { status, stdout } = spawnSync(
    process.execPath,
    [compiler, '-p', 'assembly/types.tsconfig.json', '--outDir', all],
    {
      cwd: root,
      encoding: 'utf8',
    },
  );
  if (status !== 0) throw new Error(`the declarations could not be written\n${stdout}`);
  const source = join(all, 'src');
  const seen = new Set();
  const take = (file) => {
    if (seen.has(file)) return;
    seen.add(file);
    const text = readFileSync(file, 'utf8').replace(/((?:from|import\()\s*['"]\.[^'"]*)\.ts(['"])/g, '$1.js$2');
    for (const [, specifier] of text.matchAll(/(?:from|import\()\s*['"](\.[^'"]*)\.js['"]/g))
      take(`${resolve(dirname(file), specifier)}.d.ts`);
    const place = join(target, relative(source, file));
    mkdirSync(dirname(place), { recursive: true });
    writeFileSync(place, text);
  };
  take(join(source, 'index.d.ts'));
}
