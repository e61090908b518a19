import { deflateRawSync } from 'node:zlib';
import fc from 'fast-check';
import { expect } from 'vitest';
import { fieldsOf, packedText, scenarioOfLink, unpackedText, withFields } from '../../src/app/link.ts';
import { EXAMPLES } from '../../src/scenario/examples.ts';

/** A text and the fields of a place come back from their address as they were. */
export const fuzzRoundTrips = () =>
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
  );

/** A sound link with some of its characters replaced, or cut short. */
const spoilt = fc
  .tuple(
    fc.constantFrom(...Object.values(EXAMPLES)),
    fc.array(fc.tuple(fc.nat(), fc.constantFrom(...'AZaz09-_%&=#')), { maxLength: 3 }),
    fc.double({ min: 0, max: 1, noNaN: true }),
  )
  .map(([example, changes, part]) => {
    const packed = [...deflateRawSync(JSON.stringify(example)).toString('base64url')];
    for (const [at, character] of changes) packed[at % packed.length] = character;
    const whole = packed.join('');
    return `#scenario=${part < 0.5 ? whole : whole.slice(0, Math.floor(whole.length * part))}`;
  });

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
  spoilt,
);

/** How addresses ended. */
export interface Seen {
  held: number;
  none: number;
  refused: number;
}

/** Any address holds a scenario, holds none, or is refused in words. */
export const fuzzLinks = (seen: Seen) =>
  fc.asyncProperty(address, async (hash) => {
    // The results of a server are for it to give.
    fc.pre(!/(^#?|&)results(=|&|$)/.test(hash));
    try {
      const text = await scenarioOfLink(hash);
      seen[text === null ? 'none' : 'held']++;
      expect(text === null || text.length < 8e6).toBe(true);
    } catch (error) {
      seen.refused++;
      expect((error as Error).message).toMatch(/^(The link names the example|The scenario in this link is damaged)/);
    }
  });
