/**
 * Text that is safe inside HTML and SVG. The `markup` template escapes whatever is put into it, save other markup, so that no
 * name or title of a scenario can become an element or an attribute.
 */
export class Markup {
  constructor(readonly text: string) {}
}

type Insert = string | number | Markup | null | readonly Insert[];

const ENTITIES: Readonly<Record<string, string>> = {
  '&': '&amp;',
  '<': '&lt;',
  '>': '&gt;',
  '"': '&quot;',
  "'": '&#39;',
};

/**
 * Characters that do something other than show: C0 and C1 controls, DEL (terminal escapes begin with one), and marks that
 * turn the direction of writing.
 */
// biome-ignore lint/suspicious/noControlCharactersInRegex: they are what is looked for
const UNPRINTABLE = /[\u0000-\u001f\u007f-\u009f\u200e\u200f\u2028-\u202e\u2066-\u2069]/g;

/** A user's text with every character that would do something replaced by its code: "\u{1b}". */
export function printable(text: string): string {
  return text.replace(UNPRINTABLE, (c) => `\\u{${c.codePointAt(0)!.toString(16)}}`);
}

function inserted(value: Insert): string {
  if (value === null) return '';
  if (value instanceof Markup) return value.text;
  if (Array.isArray(value)) return value.map(inserted).join('');
  return String(value)
    .split('\n')
    .map((line) => printable(line).replace(/[&<>"']/g, (c) => ENTITIES[c]!))
    .join('\n');
}

/** Markup from a template; strings put in are made printable, line breaks kept, and escaped; markup is not; null is nothing. */
export function markup(pieces: TemplateStringsArray, ...values: readonly Insert[]): Markup {
  return new Markup(pieces.reduce((text, piece, i) => text + inserted(values[i - 1]!) + piece));
}
