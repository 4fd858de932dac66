/**
 * Drawing on the page's own thread, because the drawing library measures text
 * through the document; and the files made of what is drawn and tabled. The only place on this thread that calls the module.
 */

/** @typedef {import('./types.js').Layout} Layout */

/**
 * @typedef {Object} DrawingView
 * @property {number} width CSS pixels.
 * @property {number} ratio Device pixels per CSS pixel.
 * @property {number} head_room Free room at the top.
 * @property {'light'|'dark'|'print'} theme
 * @property {boolean} letters Letters instead of names at the curves' ends.
 * @property {number[]} open_pairs
 * @property {import('./types.js').LaidOver['lines']} [over] Lines of another model.
 * @property {string} noun What several subjects are called.
 */

/** @param {WebAssembly.Module} module */
export function startDrawing(module) {
  wasm_bindgen.initSync({ module });
}

/**
 * The same strips as the text of an SVG file.
 * @param {{findings: string, traces: string}} drawing
 * @param {DrawingView & {font: number}} view
 * @returns {string}
 */
export function stripsSvg(drawing, view) {
  return wasm_bindgen.strips_svg(drawing.findings, drawing.traces, JSON.stringify(view));
}

/**
 * The same strips as the bytes of a PDF file, lines and text.
 * @param {{findings: string, traces: string}} drawing
 * @param {Record<string, any>} view
 * @param {string} title
 * @returns {Uint8Array}
 */
export function stripsPdf(drawing, view, title) {
  return wasm_bindgen.strips_pdf(drawing.findings, drawing.traces, JSON.stringify(view), title);
}

/**
 * A report as the bytes of a text document, with its figure as a PNG.
 * @param {Record<string, any>} report
 * @param {Uint8Array} picture
 * @returns {Uint8Array}
 */
export function reportDocx(report, picture) {
  return wasm_bindgen.report_docx(JSON.stringify(report), picture);
}

/**
 * Tables as the bytes of a workbook; `about` are lines for its first sheet.
 * @param {any[]} tables
 * @param {string[]} about
 * @returns {Uint8Array}
 */
export function tablesXlsx(tables, about) {
  return wasm_bindgen.tables_xlsx(JSON.stringify(tables), JSON.stringify(about));
}

/**
 * Draws all strips and says where they are. The canvas gets the size it needs.
 * @param {HTMLCanvasElement} canvas
 * @param {{findings: string, traces: string}} drawing
 * @param {DrawingView} view
 * @returns {Layout}
 */
export function drawStrips(canvas, drawing, view) {
  return wasm_bindgen.draw_strips(canvas, drawing.findings, drawing.traces, JSON.stringify(view));
}
