import { deflateRawSync } from 'node:zlib';
import fc from 'fast-check';
import { expect, test } from 'vitest';
import { fieldsOf, packedText, scenarioOfLink, unpackedText, withFields } from '../../src/app/link.ts';
import { EXAMPLES } from '../../src/scenario/examples.ts';

test('a text and the fields of a place come back from their address as they were', async () => {
  await fc.assert(
    fc.asyncProperty(
      fc.string({ unit: 'grapheme' }),
      fc.dictionary(fc.stringMatching(/^[a-z]{1,8}$/), fc.string({ unit: 'grapheme' }), { maxKeys: 4 }),
      async (text, fields) => {
        const packed = await packedText(text);
        expect(packed).toMatch(/^[\w-]*$/);
        expect(await unpackedText(packed)).toBe(text);
        const { scenario: _, ...others } = fields;
        const read = fieldsOf(withFields(`#scenario=${packed}`, new Map(Object.entries(others))));
        expect(Object.fromEntries(read)).toEqual({ ...others, scenario: packed });
      },
    ),
    { seed: 51, numRuns: 500 },
  );
});

test('a short link that unpacks to more than any scenario is refused, not unpacked', async () => {
  const packed = (bytes: number) => deflateRawSync(Buffer.alloc(bytes, 'a')).toString('base64url');
  expect((await unpackedText(packed(7e6))).length).toBe(7e6);
  const bomb = packed(2e8);
  expect(bomb.length).toBeLessThan(1e6);
  await expect(unpackedText(bomb)).rejects.toThrow('longer than 8 MB');
  await expect(scenarioOfLink(`#scenario=${bomb}`)).rejects.toThrow('damaged');
});

test('any address holds a scenario, none, or is refused in words', async () => {
  const address = fc.oneof(
    fc.constantFrom(...Object.keys(EXAMPLES)).map((name) => `#example=${name}&at=ladders`),
    fc.string({ maxLength: 40 }),
    fc
      .tuple(
        fc.constantFrom('#scenario=', '#example=', '#at=%', '&', '#=', '#__proto__='),
        fc.oneof(
          fc.string({ maxLength: 30 }),
          fc.base64String({ maxLength: 40 }),
          fc.constantFrom('%', '%E0%A4', ...Object.keys(EXAMPLES)),
        ),
      )
      .map(([head, tail]) => head + tail),
  );
  const seen = { held: 0, none: 0, refused: 0 };
  await fc.assert(
    fc.asyncProperty(address, async (hash) => {
      // The results of a server are for it to give.
      fc.pre(!/(^#?|&)results(=|&|$)/.test(hash));
      try {
        const text = await scenarioOfLink(hash);
        seen[text === null ? 'none' : 'held']++;
      } catch (error) {
        seen.refused++;
        expect((error as Error).message).toMatch(/^(The link names the example|The scenario in this link is damaged)/);
      }
    }),
    { seed: 52, numRuns: 500 },
  );
  console.log(seen);
  expect(Math.min(seen.held, seen.none, seen.refused)).toBeGreaterThan(10);
});
