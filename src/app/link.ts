import { EXAMPLES, type ExampleName } from '../scenario/examples.ts';
import { textOf } from '../scenario/text.ts';

/**
 * The address bar holds the scenario: `#example=NAME` for a built-in one as it is, else `#scenario=` and the text,
 * deflated and in URL-safe base64, so that a link reproduces what its sender saw. `#results` is the scenario of the
 * result folder that is served with the page. After it, behind `&`, `at=` names a place of the page other than Compare,
 * and that place's own fields follow.
 */
export async function linkOf(text: string): Promise<string> {
  const name = (Object.keys(EXAMPLES) as ExampleName[]).find((key) => textOf(EXAMPLES[key]) === text);
  if (name) return `#example=${name}`;
  return `#scenario=${await packedText(text)}`;
}

/** A text, deflated and in URL-safe base64. */
export async function packedText(text: string): Promise<string> {
  const bytes = await through(new TextEncoder().encode(text), new CompressionStream('deflate-raw'));
  const binary = Array.from(bytes, (byte) => String.fromCharCode(byte)).join('');
  return btoa(binary).replace(/\+/g, '-').replace(/\//g, '_').replace(/=+$/, '');
}

/** A link may hold a text so long, bytes: some hundred times a large scenario. What a short link unpacks to is not bounded by it. */
const LONGEST = 8e6;

/** The text that `packedText` packed. @throws Error where it is damaged, RangeError where it is beyond all scenarios */
export async function unpackedText(packed: string): Promise<string> {
  const binary = atob(packed.replace(/-/g, '+').replace(/_/g, '/'));
  const bytes = Uint8Array.from(binary, (character) => character.charCodeAt(0));
  return new TextDecoder('utf-8', { fatal: true }).decode(await through(bytes, new DecompressionStream('deflate-raw')));
}

/** The fields of an address: `#key=value&key&…`. A value whose escapes are damaged stands as it is, for its reader to refuse. */
export function fieldsOf(hash: string): ReadonlyMap<string, string> {
  const fields = hash
    .replace(/^#/, '')
    .split('&')
    .filter((field) => field !== '');
  return new Map(
    fields.map((field) => {
      const at = field.indexOf('=');
      return at < 0 ? [field, ''] : [field.slice(0, at), unescaped(field.slice(at + 1))];
    }),
  );
}

function unescaped(value: string): string {
  try {
    return decodeURIComponent(value);
  } catch {
    return value;
  }
}

/** A scenario's address with further fields. */
export function withFields(link: string, fields: ReadonlyMap<string, string>): string {
  return [link, ...[...fields].map(([key, value]) => `${key}=${encodeURIComponent(value)}`)].join('&');
}

/**
 * The scenario that an address holds; null where it holds none.
 * @throws Error where what it holds is damaged or names no example
 */
export async function scenarioOfLink(hash: string): Promise<string | null> {
  const fields = fieldsOf(hash);
  if (fields.has('results')) return await scenarioOfResults();
  const example = fields.get('example');
  if (example !== undefined) {
    if (!Object.hasOwn(EXAMPLES, example))
      throw new Error(`The link names the example “${example}”; there are ${Object.keys(EXAMPLES).join(', ')}.`);
    return textOf(EXAMPLES[example as ExampleName]);
  }
  const packed = fields.get('scenario');
  if (packed === undefined) return null;
  try {
    return await unpackedText(packed);
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
): Promise<Uint8Array<ArrayBuffer>> {
  const pieces: Uint8Array<ArrayBuffer>[] = [];
  let length = 0;
  const reader = new Blob([bytes]).stream().pipeThrough(stream).getReader();
  for (let read = await reader.read(); !read.done; read = await reader.read()) {
    pieces.push(read.value);
    length += read.value.length;
    if (length > LONGEST) {
      await reader.cancel();
      throw new RangeError(`the text is longer than ${LONGEST / 1e6} MB`);
    }
  }
  return new Uint8Array(await new Blob(pieces).arrayBuffer());
}
