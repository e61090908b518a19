import { EXAMPLES, type ExampleName } from '../scenario/examples.ts';
import { textOf } from './store.ts';

/**
 * The address bar holds the scenario: `#example=NAME` for a built-in one as it is, else `#scenario=` and the text,
 * deflated and in URL-safe base64, so that a link reproduces what its sender saw. `#results` is the scenario of the
 * result folder that is served with the page.
 */
export async function linkOf(text: string): Promise<string> {
  const name = (Object.keys(EXAMPLES) as ExampleName[]).find((key) => textOf(EXAMPLES[key]) === text);
  if (name) return `#example=${name}`;
  const bytes = await through(new TextEncoder().encode(text), new CompressionStream('deflate-raw'));
  const binary = Array.from(bytes, (byte) => String.fromCharCode(byte)).join('');
  return `#scenario=${btoa(binary).replace(/\+/g, '-').replace(/\//g, '_').replace(/=+$/, '')}`;
}

/**
 * The scenario that an address holds; null where it holds none.
 * @throws Error where what it holds is damaged or names no example
 */
export async function scenarioOfLink(hash: string): Promise<string | null> {
  if (hash === '#results') return await scenarioOfResults();
  const [, key, value] = /^#(example|scenario)=(.*)$/.exec(hash) ?? [];
  if (key === undefined || value === undefined) return null;
  if (key === 'example') {
    if (!Object.hasOwn(EXAMPLES, value))
      throw new Error(`The link names the example “${value}”; there are ${Object.keys(EXAMPLES).join(', ')}.`);
    return textOf(EXAMPLES[value as ExampleName]);
  }
  try {
    const binary = atob(value.replace(/-/g, '+').replace(/_/g, '/'));
    const bytes = Uint8Array.from(binary, (character) => character.charCodeAt(0));
    return new TextDecoder('utf-8', { fatal: true }).decode(
      await through(bytes, new DecompressionStream('deflate-raw')),
    );
  } catch {
    throw new Error(
      'The scenario in this link is damaged: it may have been cut off. Ask for the link or the file again.',
    );
  }
}

async function scenarioOfResults(): Promise<string> {
  const answer = await fetch('results/result.json');
  if (!answer.ok)
    throw new Error('The result folder holds no result.json: run `fieldassay compare SCENARIO --out DIR`.');
  return textOf(((await answer.json()) as { scenario: unknown }).scenario);
}

async function through(
  bytes: Uint8Array<ArrayBuffer>,
  stream: CompressionStream | DecompressionStream,
): Promise<Uint8Array> {
  const out = new Blob([bytes]).stream().pipeThrough(stream);
  return new Uint8Array(await new Response(out).arrayBuffer());
}
