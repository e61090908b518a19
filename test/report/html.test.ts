import { describe, expect, it } from 'vitest';
import { reportHtml } from '../../src/report/html.ts';
import { exampleReport } from './example.ts';

const page = reportHtml(exampleReport());

/** Elements of a page in document order, and what is left open or closed twice. */
function elementsOf(html: string): { names: Set<string>; attributes: Set<string>; unbalanced: string[] } {
  const names = new Set<string>();
  const attributes = new Set<string>();
  const unbalanced: string[] = [];
  const open: string[] = [];
  const withoutCss = html.replace(/<style>.*?<\/style>/s, '<style></style>');
  for (const [, slash, name, rest, empty] of withoutCss.matchAll(
    /<(\/?)([a-z][a-z0-9]*)\b((?:[^>"]|"[^"]*")*?)(\/?)>/gi,
  )) {
    names.add(name!.toLowerCase());
    for (const [, attribute] of rest!.matchAll(/([a-z-]+)="/gi)) attributes.add(attribute!.toLowerCase());
    if (empty || name === 'meta') continue;
    if (!slash) open.push(name!);
    else if (open.pop() !== name) unbalanced.push(name!);
  }
  return { names, attributes, unbalanced: [...unbalanced, ...open] };
}

describe('report.html', () => {
  it('has the verdict as its headline, and nothing before it but whose it is', () => {
    expect(page.match(/<h1>(.*?)<\/h1>/)![1]).toMatch(/^Within 5 %: from .* up to .*\.$/);
    expect(page.indexOf('<h1>')).toBeLessThan(page.indexOf('<h2>'));
    expect(page).not.toContain('Outside the tolerance');
    expect(reportHtml(exampleReport({ lag: 1.5 }))).toContain('<p class="outside">Outside the tolerance of 5 %.</p>');
  });

  it('is whole: every element closed, only what a report needs', () => {
    const { names, attributes, unbalanced } = elementsOf(page);
    expect(unbalanced).toEqual([]);
    for (const name of ['script', 'iframe', 'img', 'link', 'object', 'embed', 'form', 'a', 'base', 'use', 'image'])
      expect(names).not.toContain(name);
    for (const attribute of ['href', 'src', 'srcset', 'style', 'action']) expect(attributes).not.toContain(attribute);
    expect([...attributes].filter((a) => a.startsWith('on'))).toEqual([]);
  });

  it('refers to nothing outside itself, and forbids it', () => {
    expect(page.replaceAll('xmlns="http://www.w3.org/2000/svg"', '')).not.toMatch(/https?:|\/\/|url\(|@import/);
    expect(page).toContain('content="default-src &#39;none&#39;; style-src');
  });

  it('holds each section that a reviewer looks for', () => {
    for (const heading of [
      'Error budget of E, pooled over the observers',
      'How far, and how near',
      'Observers',
      'Over the box, outside the mask',
      'The run',
      'What the figures are',
      'To repeat it',
    ])
      expect(page).toContain(`<h2>${heading}</h2>`);
    expect(page).toContain('no basis for decisions about compliance or safety');
    expect(page).toContain('npx fieldassay compare scenario.json --out out');
    expect(page).toContain('&quot;cellSize&quot;: &quot;5 mm&quot;');
    expect(page).toContain('Fieldassay 0.1.0 · node 20.19.5');
    // Three observers inside with two traces, two sets of parts and two spectra each; two charts of distance.
    expect(page.match(/<svg class="chart"/g)).toHaveLength(3 * 6 + 2);
  });

  it('shows floors, not figures below them', () => {
    expect(page).toMatch(
      /quadrature<\/th>\s*<td class="number">&lt; −\d+ dB \(floor\)<\/td><td class="number">—<\/td>/,
    );
  });

  it('does without a free-space run', () => {
    const together = reportHtml(exampleReport({ free: false }));
    expect(together).toContain('<th scope="row">boundary and lattice</th>');
    expect(together).not.toContain('<th scope="row">lattice</th>');
    expect(together).toContain('not separated from the lattice');
  });

  it('shows hostile names and titles, and does not act on them', () => {
    const hostile = '</title></style><script>alert(1)</script>" onload="x\u001b[31m\u202e';
    const spoilt = reportHtml(exampleReport({ title: hostile, observer: hostile }));
    const { names, attributes, unbalanced } = elementsOf(spoilt);
    expect(names).not.toContain('script');
    expect(attributes).not.toContain('onload');
    expect(unbalanced).toEqual([]);
    expect(spoilt).toContain('&lt;script&gt;alert(1)&lt;/script&gt;&quot; onload=&quot;x\\u{1b}[31m\\u{202e}');
    for (const character of ['\u001b', '\u202e']) expect(spoilt).not.toContain(character);
  });

  it('is the same for the same result', () => {
    expect(reportHtml(exampleReport())).toBe(page);
  });
});
