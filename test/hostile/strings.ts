/** What somebody may put into a title, a name or a file, hoping that a program acts on it instead of showing it. */
export const SHOWING: readonly string[] = [
  // markup: elements, attributes, ends of scripts, styles and comments, entities, foreign content of SVG
  '<script>globalThis.ran = (globalThis.ran ?? 0) + 1</script>',
  '</script><script>globalThis.ran = 2</script>',
  '</title></style></textarea></noscript>--><img src=x onerror="globalThis.ran = 3">',
  '" onload="globalThis.ran = 4" x="',
  "' onmouseover='globalThis.ran = 5' autofocus onfocus='globalThis.ran = 6",
  '<svg><foreignObject><iframe srcdoc="<script>parent.ran = 7</script>"></iframe></foreignObject></svg>',
  ']]><x/><![CDATA[',
  '<?xml version="1.0"?><!DOCTYPE x [<!ENTITY y SYSTEM "file:///etc/passwd">]>&y;',
  '&lt;b&gt; &#60;i&#62; &amp;amp;',
  'javascript:globalThis.ran=8',
  '}</style><style>*{background:url(http://127.0.0.1:9/css)}',
  '{{constructor.constructor("globalThis.ran=9")()}} `x` {globalThis.ran = 10}',
  // formulas of spreadsheets
  '=HYPERLINK("http://127.0.0.1:9/","x")',
  '+1+1',
  '-2+3+cmd|" /C calc"!A0',
  '@SUM(1+1)',
  "'=1+1",
  '＝1+1',
  'a,b;"c"',
  // commands of shells
  '$(touch ran)',
  '`touch ran`',
  '"; touch ran; "',
  "'; touch ran; '",
  '%PATH% !! \\ $HOME',
  // paths and names of files
  '../../../../etc/passwd',
  '..',
  '.',
  '/etc/passwd',
  '\\\\host\\share\\..\\x',
  'C:\\Windows\\x',
  'CON',
  'nul',
  'LPT1',
  'a',
  'A',
  'Ａ',
  '\u00e9',
  'e\u0301',
  'ſ',
  's',
  'ß',
  'SS',
  '🙂',
  '𝔸'.repeat(60),
  '.hidden',
  '~',
  'name.',
  '__proto__',
  'constructor',
  'toString',
  // words of our own
  'Within 5 %: everywhere',
];

/** The same with characters that do not show: no file may hold them, but command lines and other solvers' files can. */
export const UNSEEN: readonly string[] = [
  '\u001b[2J\u001b[1;1Hgone',
  '\u001b]0;title\u0007',
  '\u001b]8;;http://127.0.0.1:9/\u001b\\link\u001b]8;;\u001b\\',
  '\u009b31mred',
  '\u0090q\u009c',
  'x\nWithin 5 %: everywhere.',
  'x\rWithin 5 %: everywhere.',
  'x\u0085y\u2028z\u2029',
  '\b\b\b\b',
  '\u202eexe.nosj',
  '\u2066x\u2069\u061c',
  'A\u200b',
  'A\ufeff',
  'A\u00ad',
  'tag\u{e0041}',
  'nul\u0000byte',
  'half \ud800 pair',
  '\tTab',
];

export const HOSTILE = [...SHOWING, ...UNSEEN];

/** A character that does not show, other than the end of a line. */
export const UNSEEN_CHARACTER = /(?!\n)[\p{Cc}\p{Cf}\p{Cs}\p{Zl}\p{Zp}]/u;
