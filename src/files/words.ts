/**
 * A word for a file's name from a name that a person gave, unlike all others of its list: letters, digits and hyphens, so
 * that no name leads out of a folder.
 */
export function fileWords(names: readonly string[]): string[] {
  const taken = new Set<string>();
  return names.map((name) => {
    const plain = name
      .normalize('NFC')
      .replace(/[^\p{L}\p{N}]+/gu, '-')
      .replace(/^-|-$/g, '')
      .slice(0, 40);
    const word = plain === '' ? 'plane' : plain;
    let own = word;
    for (let n = 2; taken.has(own.toLowerCase()); n++) own = `${word}-${n}`;
    taken.add(own.toLowerCase());
    return own;
  });
}
