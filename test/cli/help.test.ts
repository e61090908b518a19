import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { SMALL } from '../run/surveyFolder.ts';

/** The examples that end each command's help, pasted as they stand into a folder that holds the files they name. */
const MAIN = new URL('../../dist/main.js', import.meta.url).pathname;
const helps = new Map<string, string>();
const help = (command = '') => {
  const ask = () =>
    spawnSync(process.execPath, [MAIN, ...(command ? [command] : []), '--help'], { encoding: 'utf8' }).stdout;
  helps.set(command, helps.get(command) ?? ask());
  return helps.get(command)!;
};

const commands = [
  ...help()
    .split('Commands:')[1]!
    .matchAll(/^ {2}([a-z]+) /gm),
].map(([, name]) => name!);
const examples = commands
  .filter((name) => name !== 'help')
  .concat('')
  .flatMap((command) => {
    const lines = [...help(...(command ? [command] : [])).matchAll(/^Example: fieldassay (.*)$/gm)].map(
      ([, line]) => line!,
    );
    return lines.length > 0 ? lines.map((line) => ({ command, line })) : [{ command, line: '' }];
  });

test('every command has an example of its own', () => {
  expect(commands.length).toBeGreaterThan(9);
  for (const command of commands.filter((name) => name !== 'help'))
    expect(help(command)).toMatch(new RegExp(`^Example: .*fieldassay ${command}\\b`, 'm'));
});

let folder = '';
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'fieldassay-help-'));
  writeFileSync(join(folder, 'points.csv'), 'x,y,z,t\n0.1,0.2,0.3,4e-9\n0.2,0.2,0.3,5e-9\n');
  writeFileSync(join(folder, 'lines.csv'), 'x,y,z,f\n0.1,0.2,0.3,1e9\n0.2,0.2,0.3,2e9\n');
  writeFileSync(join(folder, 'frequencies.csv'), 'f\n1e8\n1e9\n');
  writeFileSync(join(folder, 'directions.csv'), 'thetaDeg,phiDeg,t\n60,30,4e-9\n90,0,4e-9\n');
  writeFileSync(
    join(folder, 'mine.json'),
    JSON.stringify({ ...SMALL, observers: [{ ...SMALL.observers[0], name: 'A' }] }),
  );
  // The survey file that its help shows.
  writeFileSync(join(folder, 'survey.json'), help('survey').match(/^ {2}(\{ "scenario".*\})$/m)![1]!);
  const header = 'time,Probe 1 [V/m]';
  const rows = Array.from({ length: 60 }, (_, n) => `${n * 0.05},${Math.exp(-((n * 0.05 - 2) ** 2))}`);
  writeFileSync(join(folder, 'probes.csv'), `${[header, ...rows].join('\n')}\n`);
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

/** A shell runs the line, so that its quotes and redirections count. */
const paste = (line: string) =>
  spawnSync('sh', ['-c', `fieldassay() { "$NODE" "$MAIN" "$@"; }\nfieldassay ${line}`], {
    cwd: folder,
    encoding: 'utf8',
    env: { ...process.env, NODE: process.execPath, MAIN },
    timeout: 100_000,
  });

/** Those that serve until they are stopped, or need a database, are told apart from the others by what they ask for. */
const standing = ({ line }: { line: string }) => /^view|--queue|--serve|--shard|--merge/.test(line);

test.each(examples)('$command ends its help with an example: $line', ({ line }) => expect(line).not.toBe(''));

test.each(examples.filter((example) => example.line && !standing(example)))(
  'works when pasted: fieldassay $line',
  ({ line }) => {
    const { status, stderr } = paste(line);
    // 0 within tolerance, 1 outside it: done either way.
    expect([0, 1], stderr).toContain(status);
  },
  110_000,
);

test.each(examples.filter(standing))('asks for options that there are: fieldassay $line', ({ command, line }) => {
  const told = help(command);
  for (const [option] of line.matchAll(/--[a-z-]+/g)) expect(told).toContain(option);
});
