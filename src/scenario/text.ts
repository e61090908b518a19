/** A scenario as the text of its file: short lists in one line, so that points read as points. */
export function textOf(json: unknown): string {
  return `${JSON.stringify(json, null, 2).replace(
    /\[\n\s+((?:"[^"\n]*"|-?[\d.eE+-]+)(?:,\n\s+(?:"[^"\n]*"|-?[\d.eE+-]+))*)\n\s+\]/g,
    (_, items: string) => `[${items.replace(/,\n\s+/g, ', ')}]`,
  )}\n`;
}
