/**
 * What is given out: files made here and saved by the browser. Cells of a
 * table are written so that no spreadsheet takes them for a formula.
 */

/** @param {string} name */
export const fileName = (name) => name.toLowerCase().replace(/[^a-z0-9]+/g, '-').replace(/^-+|-+$/g, '').slice(0, 60) || 'courseband';

/**
 * @param {string} name
 * @param {BlobPart} content
 * @param {string} type
 */
export function save(name, content, type) {
  const address = URL.createObjectURL(new Blob([content], { type }));
  const link = document.createElement('a');
  link.href = address;
  link.download = name;
  link.click();
  window.setTimeout(() => URL.revokeObjectURL(address), 10000);
}

/**
 * A cell of a CSV file. What a spreadsheet would take for a formula gets an apostrophe; numbers stay numbers.
 * @param {string} cell
 */
export function csvCell(cell) {
  const plain = cell.replace(/^\u2212(?=\d)/, '-');
  const isNumber = /^-?\d+(\.\d+)?$/.test(plain);
  const safe = !isNumber && /^[=+\-@\t\r]/.test(plain) ? `'${plain}` : plain;
  return /[",\n\r]/.test(safe) ? `"${safe.replace(/"/g, '""')}"` : safe;
}

/**
 * @param {{heads: string[], rows: string[][]}} table
 * @param {string} [remark] A first line, such as that data are invented.
 */
export function csvOf({ heads, rows }, remark = '') {
  const lines = [heads, ...rows].map((row) => row.map(csvCell).join(','));
  return `\ufeff${(remark ? [csvCell(remark), ...lines] : lines).join('\r\n')}\r\n`;
}

/**
 * A drawing as a PNG.
 * @param {string} drawing SVG text.
 * @param {number} dpi
 * @returns {Promise<Blob|null>}
 */
export async function pngOf(drawing, dpi) {
  const address = URL.createObjectURL(new Blob([drawing], { type: 'image/svg+xml' }));
  try {
    const image = new Image();
    image.src = address;
    await image.decode();
    const canvas = document.createElement('canvas');
    const scale = dpi / 96;
    canvas.width = Math.round(image.naturalWidth * scale);
    canvas.height = Math.round(image.naturalHeight * scale);
    const context = canvas.getContext('2d');
    if (!context) return null;
    context.fillStyle = '#ffffff';
    context.fillRect(0, 0, canvas.width, canvas.height);
    context.drawImage(image, 0, 0, canvas.width, canvas.height);
    return await new Promise((resolve) => { canvas.toBlob(resolve, 'image/png'); });
  } catch {
    return null;
  } finally {
    URL.revokeObjectURL(address);
  }
}

const STYLE = `body{font:15px/1.55 Georgia,serif;max-width:46rem;margin:2rem auto;padding:0 1rem;color:#111;background:#fff}
h1{font-size:1.4rem}h2{font-size:1.1rem;margin-top:1.6rem}table{border-collapse:collapse;font-size:13px;margin:.5rem 0 1rem}
th,td{padding:.15rem .8rem .15rem 0;text-align:left}thead th{border-bottom:1px solid #999}caption{text-align:left;padding:.4rem 0}
svg,img{max-width:100%;height:auto}.mark{border:1px dashed #777;padding:.3rem .6rem}`;

/** @param {string} text */
const escaped = (text) => text.replace(/&/g, '&amp;').replace(/</g, '&lt;').replace(/>/g, '&gt;').replace(/"/g, '&quot;');

/**
 * The report as a text document takes it.
 * @param {any} report With the author's own paragraphs in place.
 * @param {string} drawing SVG text.
 * @param {{figure: string, items: string, references: string, author: string, mark: string, heads: string[]}} words
 */
export function givenOf(report, drawing, words) {
  const [, width, height] = /<svg[^>]* width="(\d+)" height="(\d+)"/.exec(drawing) ?? ['', '640', '480'];
  const mm = (/** @type {string|undefined} */ px) => (Number(px) * 25.4) / 96;
  return {
    title: report.title, mark: words.mark,
    sections: report.sections.map((/** @type {any} */ section) => [section.title, section.paragraphs]),
    figure: [words.figure, mm(width), mm(height)],
    tables: report.tables.filter((/** @type {any} */ one) => one.key !== 'subjects'),
    after: [[words.references, report.references]],
    items: [words.items, words.heads, report.items.map((/** @type {any} */ item) => [item.standard, item.asks, item.answer || words.author])],
  };
}

/**
 * The report as one file that needs nothing else.
 * @param {any} report With the author's own paragraphs in place.
 * @param {string} drawing SVG text.
 * @param {{figure: string, items: string, references: string, author: string, mark: string}} words
 */
export function htmlOf(report, drawing, words) {
  const paragraphs = (/** @type {string[]} */ list) => list.map((one) => `<p>${escaped(one)}</p>`).join('\n');
  const row = (/** @type {string[]} */ cells, /** @type {string} */ tag) => `<tr>${cells.map((cell) => `<${tag}>${escaped(cell)}</${tag}>`).join('')}</tr>`;
  const table = (/** @type {any} */ one) =>
    `<table><caption>${escaped(one.title)}</caption><thead>${row(one.heads, 'th')}</thead><tbody>${one.rows.map((/** @type {string[]} */ r) => row(r, 'td')).join('')}</tbody></table>`;
  const items = report.items.map((/** @type {any} */ item) => [item.standard, item.asks, item.answer || words.author]);
  return `<!doctype html>
<html lang="en"><head><meta charset="utf-8"><meta http-equiv="Content-Security-Policy" content="default-src 'none'; style-src 'unsafe-inline'; img-src data:">
<meta name="viewport" content="width=device-width"><title>${escaped(report.title)}</title><style>${STYLE}</style></head><body>
<h1>${escaped(report.title)}</h1>${words.mark ? `<p class="mark">${escaped(words.mark)}</p>` : ''}
${report.sections.map((/** @type {any} */ s) => `<h2>${escaped(s.title)}</h2>\n${paragraphs(s.paragraphs)}`).join('\n')}
<h2>${escaped(words.figure)}</h2>${drawing}
${report.tables.filter((/** @type {any} */ one) => one.key !== 'subjects').map(table).join('\n')}
<h2>${escaped(words.references)}</h2>${paragraphs(report.references)}
<h2>${escaped(words.items)}</h2>${table({ title: '', heads: ['', '', ''], rows: items })}
</body></html>
`;
}
