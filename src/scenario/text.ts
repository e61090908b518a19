/** A scenario as the text of its file: short lists in one line, so that points read as points. */
export function textOf(json: unknown): string {
  return `${JSON.stringify(json, null, 2).replace(
    /\[\n\s+((?:"[^"\n]*"|-?[\d.eE+-]+)(?:,\n\s+(?:"[^"\n]*"|-?[\d.eE+-]+))*)\n\s+\]/g,
    (_, items: string) => `[${items.replace(/,\n\s+/g, ', ')}]`,
  )}\n`;
}

/**
 * Characters that do something other than show: controls (terminal escapes begin with one), format marks (which turn the
 * direction of writing, or have no width), separators of lines and paragraphs, and halves of surrogate pairs.
 */
const UNSEEN = /[\p{Cc}\p{Cf}\p{Cs}\p{Zl}\p{Zp}]/u;
const ALL_UNSEEN = new RegExp(UNSEEN, 'gu');

/** Some scripts are not written right without them. */
const JOINERS = /[\u200c\u200d]/g;

const codeOf = (character: string): string => character.codePointAt(0)!.toString(16);

/** Somebody's text in one line, every character that would not show replaced by its code: "\u{1b}". */
export function printable(text: string): string {
  return text.replace(ALL_UNSEEN, (c) => `\\u{${codeOf(c)}}`);
}

/** The first character of a text that does not show, as "U+001B"; undefined where there is none but joiners of letters. */
export function unseenIn(text: string): string | undefined {
  const found = UNSEEN.exec(text.replace(JOINERS, ''))?.[0];
  return found && `U+${codeOf(found).toUpperCase().padStart(4, '0')}`;
}

/** A JSON value as a text of which every character shows: those that would not stand as their escapes. */
export function jsonText(value: unknown): string {
  return `${JSON.stringify(value, null, 2).replace(ALL_UNSEEN, (c) =>
    c === '\n'
      ? c
      : Array.from({ length: c.length }, (_, n) => `\\u${c.charCodeAt(n).toString(16).padStart(4, '0')}`).join(''),
  )}\n`;
}
