import { describe, expect, test } from 'vitest';
import { firstEcho } from '../../src/app/echo.ts';
import { lineOf } from '../../src/app/editor.ts';
import { shownNumber, writtenNumber } from '../../src/app/fields.ts';
import { linkOf, scenarioOfLink } from '../../src/app/link.ts';
import { Store } from '../../src/app/store.ts';
import { EXAMPLES } from '../../src/scenario/examples.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import { textOf } from '../../src/scenario/text.ts';

describe('scenarios as text', () => {
  test('every example is written so that it reads back the same', () => {
    for (const example of Object.values(EXAMPLES)) expect(JSON.parse(textOf(example))).toEqual(example);
    expect(textOf({ at: ['1 mm', '2 mm', 3] })).toBe('{\n  "at": ["1 mm", "2 mm", 3]\n}\n');
  });

  test('a place is found at its line, a missing one at the line of what should hold it', () => {
    const text = textOf(EXAMPLES['dipole-near-corner']);
    const lines = text.split('\n');
    const expectAt = (path: string, fragment: string) =>
      expect(lines[lineOf(text, path) - 1], path).toContain(fragment);
    expectAt('duration', '"duration"');
    expectAt('sources.0.current.waveform.sigma', '"sigma"');
    expectAt('grid.boundary.y+', '"y+"');
    expectAt('observers.2.at.1', '["300 mm"');
    expectAt('grid.mask', '"grid"');
    expect(lineOf('{\n  "a": [1,\n  }', '')).toBe(3);
  });
});

describe('links', () => {
  test('bring any scenario back, examples by their names', async () => {
    const text = textOf(EXAMPLES['small-loop']);
    expect(await linkOf(text)).toBe('#example=small-loop');
    const own = text.replace('Small loop', 'Schleife “ø”');
    const link = await linkOf(own);
    expect(link).toMatch(/^#scenario=[\w-]+$/);
    expect(await scenarioOfLink(link)).toBe(own);
    expect(await scenarioOfLink('#example=small-loop')).toBe(text);
    expect(await scenarioOfLink('')).toBeNull();
  });

  test('that are damaged are told so', async () => {
    const link = await linkOf(`${textOf(EXAMPLES['small-loop'])} `);
    await expect(scenarioOfLink(link.slice(0, -9))).rejects.toThrow('damaged');
    await expect(scenarioOfLink('#scenario=%%%')).rejects.toThrow('damaged');
    await expect(scenarioOfLink('#example=nothing')).rejects.toThrow('there are bench-cable-pulse');
  });
});

describe('the store', () => {
  test('undoes and redoes, and keeps the last sound scenario while the text is unsound', () => {
    const store = new Store('light');
    const first = textOf(EXAMPLES['bench-cable-pulse']);
    store.setText(first);
    store.edit((draft) => {
      draft.duration = '2 ns';
    });
    expect(store.state.scenario!.duration).toBe(2e-9);
    store.setText('{');
    expect(store.state.problems).toHaveLength(1);
    expect(store.state.scenario!.duration).toBe(2e-9);
    store.undo();
    store.undo();
    expect(store.state.text).toBe(first);
    expect(store.canUndo).toBe(false);
    store.redo();
    expect(store.state.scenario!.duration).toBe(2e-9);
    expect(store.state.problems).toEqual([]);
  });

  test('numbers keep their value through the controls’ units', () => {
    const length = { path: [], name: 'x', unit: 'mm', help: '' } as const;
    expect(shownNumber('5 mm', length)).toBe(5);
    expect(shownNumber(0.0125, length)).toBe(12.5);
    expect(shownNumber('1 inch', length)).toBe(25.4);
    expect(writtenNumber(25.4, length)).toBe('25.4 mm');
    expect(writtenNumber(0.1 + 0.2, { ...length, unit: '' })).toBe(0.3);
  });
});

test('the first echo comes by way of the mirror image in the nearest wall', () => {
  const loaded = loadScenario(EXAMPLES['dipole-near-corner']);
  if ('problems' in loaded) throw new Error(loaded.problems[0]!.message);
  const { scenario } = loaded;
  // source at (61, 58, 63) mm, box ±100 mm: z+ is nearest to source and point; the image of z = 35 mm is at 165 mm
  const { time, face } = firstEcho(scenario, [0.09, 0.02, 0.035]);
  const detour = Math.hypot(0.029, 0.038, 0.102) / 299_792_458;
  const besideX = Math.hypot(0.11 - 0.061, 0.038, 0.028) / 299_792_458;
  expect(face).toBe('x+');
  expect(besideX).toBeLessThan(detour);
  // w = −√e u exp(−u²/2) first exceeds 1 % of its peak at u = −3.57, found in steps of a 4000th of the window
  const begins = scenario.sources[0]!.waveform.spec as { delay: number; sigma: number };
  expect(Math.abs(time - besideX - (begins.delay - 3.57 * begins.sigma))).toBeLessThan(3e-12);
});
