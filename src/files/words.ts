/** Letters of a word at most: with what is put behind them a name fits any file system, whatever a letter takes there. */
const LONGEST = 40;

/** What Windows keeps for devices, whatever ending follows. */
const DEVICE = /^(con|prn|aux|nul|com\d|lpt\d)$/i;

/** What a file system that ignores case may take for the same. */
const folded = (word: string): string => word.toUpperCase().toLowerCase().normalize('NFC');

/**
 * A word for a file's name from a name that a person gave, unlike all others of its list: letters, digits and hyphens, so
 * that no name leads out of a folder.
 * @param empty stands for a name without letters and digits
 */
export function fileWords(names: readonly string[], empty = 'plane'): string[] {
  const taken = new Set<string>();
  return names.map((name) => {
    const plain = name.normalize('NFC').replace(/[^\p{L}\p{N}]+/gu, '-');
    const short = [...plain].slice(0, LONGEST).join('').replace(/^-|-$/g, '');
    const word = short === '' || DEVICE.test(short) ? `${short}${empty}` : short;
    let own = word;
    for (let n = 2; taken.has(folded(own)); n++) own = `${word}-${n}`;
    taken.add(folded(own));
    return own;
  });
}
