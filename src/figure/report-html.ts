import { escapeXml } from './svg.ts';
import { darkTheme, lightTheme, themeProperties } from './theme.ts';

/** A cell of a table in the report: text, or markup made by this folder. */
export type Cell = string | { readonly html: string };

/** A table with a caption; the first cell of each row is its heading. `numbers` are columns set right. */
export function htmlTable(
  caption: string,
  headings: readonly string[],
  rows: readonly (readonly Cell[])[],
  numbers: readonly number[] = [],
): string {
  const kind = (column: number): string => (numbers.includes(column) ? ' class="number"' : '');
  const head = headings.map((heading, k) => `<th scope="col"${kind(k)}>${escapeXml(heading)}</th>`).join('');
  const body = rows.map((row) => {
    const cells = row.map((cell, k) => {
      const tag = k === 0 ? 'th scope="row"' : `td${kind(k)}`;
      return `<${tag}>${typeof cell === 'string' ? escapeXml(cell) : cell.html}</${k === 0 ? 'th' : 'td'}>`;
    });
    return `<tr>${cells.join('')}</tr>`;
  });
  return `<table><caption>${escapeXml(caption)}</caption><thead><tr>${head}</tr></thead><tbody>\n${body.join('\n')}\n</tbody></table>`;
}

/** A list of sentences, or nothing. */
export function htmlList(items: readonly string[]): string {
  return items.length ? `<ul>${items.map((item) => `<li>${escapeXml(item)}</li>`).join('')}</ul>` : '';
}

/** A region that scrolls sideways where the page is narrow, reachable by keyboard. */
export function scrolling(label: string, html: string): string {
  return `<div class="scroll" role="region" aria-label="${escapeXml(label)}" tabindex="0">${html}</div>`;
}

/** A whole page; `body` is markup. Also well-formed XML. */
export function htmlPage(title: string, body: string): string {
  return `<!DOCTYPE html>
<html lang="en">
<head>
<meta charset="utf-8"/>
<meta name="viewport" content="width=device-width, initial-scale=1"/>
<title>${escapeXml(title)}</title>
<style>${STYLE}</style>
</head>
<body>
${body}
</body>
</html>
`;
}

const STYLE = `
:root{color-scheme:light dark;${themeProperties(lightTheme)}}
@media (prefers-color-scheme:dark){:root{${themeProperties(darkTheme)}}}
@media print{:root{color-scheme:light;${themeProperties(lightTheme)}} section{break-inside:avoid-page}}
body{margin:0 auto;padding:28px 32px 56px;max-width:1280px;background:var(--paper);color:var(--ink);font:13px/1.5 system-ui,-apple-system,"Segoe UI","DejaVu Sans",sans-serif}
h1{font-size:22px;line-height:1.25;margin:0 0 4px}
h2{font-size:15px;margin:36px 0 8px}
h3{font-size:13px;margin:18px 0 4px}
p,li{max-width:78ch}
p.question{font-size:15px;color:var(--soft);margin:0}
p.answer{font-size:15px;font-weight:600}
ul,ol{padding-left:20px}
table{border-collapse:collapse;margin:8px 0 4px;font-variant-numeric:tabular-nums}
caption{caption-side:bottom;text-align:left;color:var(--soft);padding-top:6px}
th,td{text-align:left;vertical-align:top;padding:4px 16px 4px 0;border-top:1px solid var(--rule)}
th{font-weight:600}
thead td{border-top:0}
thead th{border-top:0;color:var(--soft)}
tbody th{font-weight:500}
.number{text-align:right;white-space:nowrap}
.soft{color:var(--soft)}
.scroll{overflow-x:auto}
.scroll:focus-visible{outline:2px solid #0f857c}
.line-up th,.line-up td{padding:8px 8px 8px 0;min-width:212px}
.line-up tbody th{min-width:136px;width:136px}
.line-up thead th{color:var(--ink);vertical-align:bottom}
.line-up svg{display:block}
.line-up th svg{margin-top:6px}
td ul{margin:0;padding-left:14px}
`;
