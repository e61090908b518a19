/** The cells of a CSV text by RFC 4180, by a reader that is not the writer. */
export function cellsOf(text: string): string[][] {
  const rows: string[][] = [[]];
  let at = 0;
  while (at < text.length) {
    let cell = '';
    if (text[at] === '"') {
      for (at++; ; at++) {
        if (at >= text.length) throw new Error('a quoted cell has no end');
        if (text[at] !== '"') cell += text[at];
        else if (text[at + 1] === '"') {
          cell += '"';
          at++;
        } else break;
      }
      at++;
    } else for (; at < text.length && text[at] !== ',' && text[at] !== '\n'; at++) cell += text[at];
    rows.at(-1)!.push(cell);
    if (text[at] === '\n' && at + 1 < text.length) rows.push([]);
    else if (at < text.length && text[at] !== ',' && text[at] !== '\n')
      throw new Error(`${text[at]} after a quoted cell`);
    at++;
  }
  return rows;
}

/** What a spreadsheet takes for a formula: by its first character, numbers apart (OWASP, "CSV Injection", from memory). */
export const isFormula = (cell: string): boolean =>
  /^[=+\-@\t\r\n＝＋－＠]/.test(cell) && !Number.isFinite(Number(cell));
