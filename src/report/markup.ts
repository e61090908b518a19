import { printable } from '../scenario/text.ts';

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
