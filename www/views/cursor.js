/**
 * The cursor on its own canvas: a line through all strips and a flag with the
 * time on top, in the page's own colours.
 */

/** @typedef {import('../types.js').Layout} Layout */

/**
 * @param {HTMLCanvasElement} canvas
 * @param {Layout} layout
 * @param {number} time
 * @param {string} label
 */
export function drawCursor(canvas, layout, time, label) {
  const ratio = window.devicePixelRatio || 1;
  const width = Math.round(layout.width * ratio);
  const height = Math.round(layout.height * ratio);
  if (canvas.width !== width) canvas.width = width;
  if (canvas.height !== height) canvas.height = height;
  const context = canvas.getContext('2d');
  if (!context) return;
  const style = getComputedStyle(canvas);
  context.setTransform(ratio, 0, 0, ratio, 0, 0);
  context.clearRect(0, 0, layout.width, layout.height);
  const { left, right, start, end } = layout.x;
  const x = end > start ? left + ((time - start) / (end - start)) * (right - left) : left;
  const bottom = Math.max(...layout.strips.map((strip) => strip.bottom), 0);

  context.strokeStyle = style.color;
  context.lineWidth = 1;
  context.beginPath();
  const crisp = Math.round(x * ratio) / ratio;
  context.moveTo(crisp, 18);
  context.lineTo(crisp, bottom);
  context.stroke();
  flag(context, style, x, layout.width, label);
}

/**
 * @param {CanvasRenderingContext2D} context
 * @param {CSSStyleDeclaration} style
 * @param {number} x
 * @param {number} width
 * @param {string} label
 */
function flag(context, style, x, width, label) {
  context.font = `600 12px ${style.fontFamily}`;
  const half = context.measureText(label).width / 2 + 8;
  const middle = Math.min(width - half, Math.max(half, x));
  context.fillStyle = style.color;
  context.beginPath();
  context.roundRect(middle - half, 0, 2 * half, 19, 9.5);
  context.fill();
  context.fillStyle = style.getPropertyValue('--paper');
  context.textAlign = 'center';
  context.textBaseline = 'middle';
  context.fillText(label, middle, 10);
}
