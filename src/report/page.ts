import { Markup, markup } from './markup.ts';
import { paletteCss } from './palette.ts';
import { CHART_CSS } from './svg.ts';

const CSS = `${paletteCss()}
*{box-sizing:border-box}
body{margin:0;background:var(--background);color:var(--ink);font:15px/1.5 system-ui,sans-serif;font-variant-numeric:tabular-nums}
main{max-width:1180px;margin:0 auto;padding:32px 24px 64px}
h1{font-size:24px;line-height:1.3;font-weight:650;margin:4px 0 12px;text-wrap:balance}
h2{font-size:15px;font-weight:650;margin:40px 0 12px;padding-top:12px;border-top:1px solid var(--line)}
h3{font-size:15px;font-weight:600;margin:28px 0 4px}
p{margin:0 0 8px;max-width:75ch}
.muted,figcaption,th,dd{color:var(--muted)}
.outside{color:var(--outside);font-weight:600}
.charts{display:grid;grid-template-columns:repeat(auto-fit,minmax(min(100%,440px),1fr));gap:20px 28px;margin:12px 0}
figure{margin:0;max-width:680px}.charts:has(>:only-child){grid-template-columns:1fr}
details{margin:0 0 8px}summary{cursor:pointer;padding:4px 0;font-weight:600}details>*:not(summary){margin-left:16px}
.scroll{overflow-x:auto;margin-bottom:8px}
table{border-collapse:collapse}
th{font-weight:400;text-align:left;font-size:13px;vertical-align:bottom}
th,td{padding:4px 20px 4px 0;white-space:nowrap}
.number{text-align:right}
.wrap{white-space:normal;min-width:24ch}
tbody th{color:var(--ink);font-size:15px}
tr.total th,tr.total td{border-top:1px solid var(--line);font-weight:600}
.bars{display:block;width:260px;height:16px}
dl{display:grid;grid-template-columns:max-content 1fr;gap:4px 20px;margin:0;font-size:13px}
dt{font-weight:600}dd{margin:0;max-width:90ch}
pre{margin:0 0 12px;padding:12px;background:var(--trusted);border-radius:4px;font:13px/1.45 ui-monospace,monospace;white-space:pre-wrap;overflow-wrap:anywhere}
.caution{margin-top:40px;padding:12px 16px;border:1px solid var(--line);border-radius:4px;max-width:none}
${CHART_CSS}
@media (max-width:640px){dl{grid-template-columns:1fr}dd{margin-bottom:8px}}
@page{margin:14mm}
@media print{main{max-width:none;padding:0}body{font-size:12px}h1{font-size:20px}p{max-width:none}
h2,h3,thead{break-after:avoid}table,tr,figure,dt,dd,.caution,p{break-inside:avoid}h3+.charts{break-inside:avoid}
.charts{grid-template-columns:1fr 1fr;gap:10px 16px}.scroll{overflow:visible;break-after:avoid}
table{font-size:11px}th,tbody th{font-size:11px}th,td{padding:3px 10px 3px 0;white-space:normal;vertical-align:top}.number{white-space:nowrap}
dl{font-size:11px;gap:2px 12px}dd{max-width:none}pre{padding:0;background:none;font-size:9.5px}pre.listing{columns:2;column-gap:24px}}`;

/** Nothing is fetched and nothing runs: only the style in the file itself is used. */
const POLICY = "default-src 'none'; style-src 'unsafe-inline'; base-uri 'none'; form-action 'none'";

/**
 * A report as one file that needs nothing else. No script and no reference to any other place; light and dark by the
 * system's theme; prints.
 */
export function page(title: string, body: Markup): string {
  return markup`<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="${POLICY}">
<meta name="referrer" content="no-referrer">
<meta name="viewport" content="width=device-width,initial-scale=1">
<title>${title} · Fieldassay</title>
<style>${new Markup(CSS)}</style>
</head>
<body><main>
${body}
<p class="caution">These figures are for checking field solvers. They are no basis for decisions about compliance or safety: there, local codes and licensed practice decide.</p>
</main></body></html>
`.text;
}
