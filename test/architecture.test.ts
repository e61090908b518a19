import { readdirSync, readFileSync } from 'node:fs';
import { dirname, join, relative, resolve, sep } from 'node:path';
import { describe, expect, test } from 'vitest';

/**
 * The import table of DEVELOPERS.md as code. Rooms are the folders of src/; a room may import what its row lists, and
 * itself. The two solvers share the question and never a method: neither appears in the other's row.
 */
const MAY_IMPORT: Record<string, readonly string[]> = {
  elementary: ['kernels'],
  scenario: ['elementary'],
  trace: [],
  gridding: ['scenario', 'elementary'],
  fdtd: ['scenario', 'trace', 'gridding', 'elementary', 'kernels'],
  retarded: ['scenario', 'trace', 'gridding', 'elementary', 'kernels'],
  derived: ['scenario', 'trace', 'retarded', 'elementary'],
  lattice: ['scenario', 'trace', 'gridding', 'elementary'],
  compare: ['trace', 'elementary'],
  files: ['scenario', 'trace', 'elementary'],
  queue: ['scenario', 'compare', 'run', 'platform', 'elementary'],
  report: ['scenario', 'trace', 'compare', 'files', 'elementary'],
  draw: ['trace', 'elementary'],
  platform: [],
  run: ['scenario', 'trace', 'gridding', 'fdtd', 'retarded', 'derived', 'lattice', 'compare', 'platform', 'elementary'],
  scene: ['scenario', 'trace', 'compare', 'run', 'report', 'draw', 'elementary'],
  cli: ['*', '!app'],
  app: ['*', '!cli'],
  index: ['*', '!cli', '!app'],
};

/** Kernels belong to one room each: a solver must not reach the other's. */
const KERNELS: Record<string, RegExp> = { elementary: /^elementary/, fdtd: /^fdtd/, retarded: /^retarded/ };

const root = resolve(dirname(new URL(import.meta.url).pathname), '..');

function sourcesBelow(folder: string): string[] {
  return readdirSync(folder, { withFileTypes: true }).flatMap((entry) => {
    const path = join(folder, entry.name);
    if (entry.isDirectory()) return sourcesBelow(path);
    return /\.(ts|mjs)$/.test(entry.name) ? [path] : [];
  });
}

const roomOf = (file: string) => {
  const parts = relative(join(root, 'src'), file).split(sep);
  return parts.length === 1 ? parts[0]!.replace(/\.ts$/, '') : parts[0]!;
};

/** Relative specifiers and package-internal ones (#platform) of a file; type imports count. */
function importsOf(text: string): string[] {
  return [...text.matchAll(/(?:from|import)\s*\(?\s*['"]([.#][^'"]+)['"]/g)].map((match) => match[1]!);
}

/** Not the generated kernels, nor a fresh set of them that a build is still filling. */
const files = sourcesBelow(join(root, 'src')).filter((file) => !roomOf(file).startsWith('kernels'));

function violations(file: string, text: string): string[] {
  const room = roomOf(file);
  const allowed = MAY_IMPORT[room];
  if (!allowed) return [`${relative(root, file)}: there is no room “${room}” in the import table`];
  return importsOf(text).flatMap((specifier) => {
    const target = specifier === '#platform' ? join(root, 'src/platform/node.ts') : resolve(dirname(file), specifier);
    const other = roomOf(target);
    // The package's own name and version are everybody's.
    if (other === room || target === join(root, 'package.json')) return [];
    const permitted = allowed.includes('*') ? !allowed.includes(`!${other}`) : allowed.includes(other);
    if (!permitted) return [`${relative(root, file)} imports ${specifier}: ${room} may not import ${other}`];
    const kernel = KERNELS[room];
    if (other === 'kernels' && kernel && !kernel.test(target.split(sep).at(-1)!))
      return [`${relative(root, file)} imports ${specifier}: the kernel of another room`];
    return [];
  });
}

describe('architecture', () => {
  test('every import follows the table', () => {
    expect(files.length).toBeGreaterThan(10);
    expect(files.flatMap((file) => violations(file, readFileSync(file, 'utf8')))).toEqual([]);
  });

  test('the test itself notices a solver that imports the other, and a foreign kernel', () => {
    expect(violations(join(root, 'src/fdtd/x.ts'), "import { a } from '../retarded/y.ts';")).toHaveLength(1);
    expect(violations(join(root, 'src/compare/x.ts'), "import type { a } from '../scenario/model.ts';")).toHaveLength(
      1,
    );
    expect(violations(join(root, 'src/retarded/x.ts'), "import b from '../kernels/fdtd-f32.ts';")).toHaveLength(1);
    expect(violations(join(root, 'src/run/x.ts'), "import { a } from '../retarded/y.ts';")).toHaveLength(0);
  });

  test('kernels in assembly/ keep to their own folder', () => {
    for (const file of sourcesBelow(join(root, 'assembly')).filter((name) => name.endsWith('.ts')))
      for (const specifier of importsOf(readFileSync(file, 'utf8'))) {
        const room = relative(join(root, 'assembly'), file).split(sep)[0];
        const other = relative(join(root, 'assembly'), resolve(dirname(file), specifier)).split(sep)[0];
        expect(other, `${relative(root, file)} imports ${specifier}`).toBe(room);
      }
  });

  test('what reaches a result uses elementary functions that round alike on every host', () => {
    const hostMath =
      /\bMath\.(exp|expm1|log|log2|log10|log1p|pow|sin|cos|tan|asin|acos|atan|atan2|sinh|cosh|tanh|cbrt|hypot)\b/;
    const rooms = new Set([
      'scenario',
      'trace',
      'gridding',
      'fdtd',
      'retarded',
      'derived',
      'lattice',
      'compare',
      'run',
    ]);
    const found = files
      .filter((file) => rooms.has(roomOf(file)))
      .flatMap((file) =>
        readFileSync(file, 'utf8')
          .split('\n')
          .flatMap((line, n) =>
            hostMath.test(line) && !/^\s*(\*|\/\/)/.test(line)
              ? [`${relative(root, file)}:${n + 1}: ${line.trim()}`]
              : [],
          ),
      );
    expect(found).toEqual([]);
  });
});
