// Painting the board on a canvas: copper as copper on a paper-like ground, marks for findings in our own symbols.

/** Widths of pens in nanometres; on the screen never below a hair nor above a firm line. */
const PENS = { board: 120e3, cutout: 80e3, maskb: 60e3, opening: 50e3, paste: 50e3, via: 40e3, hole: 60e3, body: 80e3, pad: 40e3 };
const CHUNK = 400;

/** Return the colours of the theme in force, by name. */
function themeColours(styles) {
  const look = getComputedStyle(document.documentElement);
  const names = [...styles, ...Object.keys(PENS).map((name) => `${name}-pen`)];
  names.push("paper", "chosen", "halo", "ruler", "ink", "name-line", "error", "warning", "note", "waived");
  return Object.fromEntries(names.map((name) => [name, look.getPropertyValue(`--b-${name}`).trim()]));
}

/** Paint all layers that are on; `view` turns nanometres into pixels. */
function paintBoard(ctx, board, view, colours) {
  for (const layer of board.layers) {
    if (layer.on) paintLayer(ctx, board, layer, view, colours);
  }
  for (const text of board.texts) paintText(ctx, text, view, colours);
}

function paintLayer(ctx, board, layer, view, colours) {
  const seen = view.seen();
  let at = layer.from;
  while (at < layer.to) {
    const style = board.shapes[at].style;
    const name = board.styles[style];
    const paint = { fill: colours[name], pen: colours[`${name}-pen`], width: penWidth(name, view) };
    let open = 0;
    for (; at < layer.to && board.shapes[at].style === style; at++) {
      const shape = board.shapes[at];
      if (shape.x1 < seen.x0 || shape.x0 > seen.x1 || shape.y1 < seen.y0 || shape.y0 > seen.y1) continue;
      const size = Math.max(shape.x1 - shape.x0, shape.y1 - shape.y0) * view.scale;
      if (size < 2) {
        paintSpeck(ctx, shape, size, view, paint);
        continue;
      }
      if (!open) ctx.beginPath();
      trace(ctx, shape, view);
      open = (open + 1) % CHUNK;
      if (!open) finish(ctx, paint);
    }
    if (open) finish(ctx, paint);
  }
}

function penWidth(name, view) {
  return PENS[name] ? Math.max(0.4, Math.min(1.8, PENS[name] * view.scale)) : 0;
}

/** Paint a shape that is too small for its outline to be seen. */
function paintSpeck(ctx, shape, size, view, paint) {
  ctx.fillStyle = paint.pen ? paint.pen : paint.fill || paint.pen;
  const across = Math.max(size, 0.6);
  ctx.fillRect(view.x((shape.x0 + shape.x1) / 2) - across / 2, view.y((shape.y0 + shape.y1) / 2) - across / 2, across, across);
}

/** Add a shape's outlines to the current path. */
function trace(ctx, shape, view) {
  if (!shape.rings) {
    const x = view.x(shape.x);
    const y = view.y(shape.y);
    const r = shape.r * view.scale;
    ctx.moveTo(x + r, y);
    ctx.arc(x, y, r, 0, 2 * Math.PI);
    return;
  }
  for (const ring of shape.rings) {
    ctx.moveTo(view.x(ring[0]), view.y(ring[1]));
    for (let i = 2; i < ring.length; i += 2) ctx.lineTo(view.x(ring[i]), view.y(ring[i + 1]));
    ctx.closePath();
  }
}

function finish(ctx, paint) {
  if (paint.fill && paint.fill !== "none") {
    ctx.fillStyle = paint.fill;
    ctx.fill();
  }
  if (paint.width && paint.pen) {
    ctx.strokeStyle = paint.pen;
    ctx.lineWidth = paint.width;
    ctx.stroke();
  }
}

function paintText(ctx, [text, x, y, height, turn, anchor, style], view, colours) {
  const size = Math.max((height * view.scale) / 0.72, style === "port" ? 11 : 0);
  if (size < 7) return;
  ctx.save();
  ctx.translate(view.x(x), view.y(y));
  ctx.rotate((-turn * Math.PI) / 180);
  ctx.font = `${Math.min(size, 40)}px ${FONT}`;
  ctx.textAlign = anchor === "middle" ? "center" : anchor;
  ctx.textBaseline = "middle";
  ctx.fillStyle = colours[{ line: "name-line", port: "port" }[style] || "ink"];
  ctx.fillText(text, 0, 0);
  ctx.restore();
}

const FONT = '"Source Sans 3","Segoe UI",Helvetica,Arial,"DejaVu Sans",sans-serif';

/** Paint a finding: a diamond for error and warning, hollow when waived, a ring for a note. */
function paintMark(ctx, [number, kind, nmX, nmY], view, colours, chosen) {
  const x = view.x(nmX);
  const y = view.y(nmY);
  const half = MARK[kind] * (view.width < 500 ? 0.8 : 1) + (chosen ? 3 : 0);
  ctx.beginPath();
  if (kind === "note") {
    ctx.arc(x, y, half * 0.8, 0, 2 * Math.PI);
  } else {
    ctx.moveTo(x - half, y);
    ctx.lineTo(x, y - half);
    ctx.lineTo(x + half, y);
    ctx.lineTo(x, y + half);
    ctx.closePath();
  }
  const hollow = kind === "note" || kind === "waived";
  ctx.fillStyle = hollow ? colours.paper : colours[kind];
  ctx.fill();
  ctx.lineWidth = chosen ? 3 : 1.5;
  ctx.strokeStyle = chosen ? colours.chosen : hollow ? colours[kind] : colours.halo;
  ctx.stroke();
  ctx.fillStyle = hollow ? colours[kind] : colours.halo;
  ctx.font = `bold ${kind === "note" ? 9 : 11}px ${FONT}`;
  ctx.textAlign = "center";
  ctx.textBaseline = "middle";
  ctx.fillText(String(number), x, y + 0.5);
}

const MARK = { error: 13, warning: 13, waived: 11, note: 10 };

/** Draw around shapes, so that the eye finds them in either theme. */
function paintOutline(ctx, shapes, view, colours, width) {
  for (const [colour, pen] of [[colours.halo, width + 2], [colours.chosen, width]]) {
    ctx.beginPath();
    for (const shape of shapes) trace(ctx, shape, view);
    ctx.strokeStyle = colour;
    ctx.lineWidth = pen;
    ctx.lineJoin = "round";
    ctx.stroke();
  }
}

/** Draw the measured distance with its ends and figure. */
function paintMeasure(ctx, a, b, view, colours) {
  const [ax, ay, bx, by] = [view.x(a.x), view.y(a.y), view.x(b.x), view.y(b.y)];
  for (const [colour, pen] of [[colours.halo, 4], [colours.ruler, 1.6]]) {
    ctx.strokeStyle = colour;
    ctx.lineWidth = pen;
    ctx.beginPath();
    ctx.moveTo(ax, ay);
    ctx.lineTo(bx, by);
    ctx.stroke();
    for (const [x, y] of [[ax, ay], [bx, by]]) {
      ctx.beginPath();
      ctx.arc(x, y, 4, 0, 2 * Math.PI);
      ctx.stroke();
    }
  }
  plate(ctx, `${millimetres(Math.hypot(b.x - a.x, b.y - a.y))} mm`, (ax + bx) / 2, (ay + by) / 2 - 14, colours);
}

function plate(ctx, text, x, y, colours) {
  ctx.font = `bold 13px ${FONT}`;
  ctx.textAlign = "center";
  ctx.textBaseline = "middle";
  const width = ctx.measureText(text).width + 12;
  ctx.fillStyle = colours.halo;
  ctx.fillRect(x - width / 2, y - 10, width, 20);
  ctx.fillStyle = colours.ruler;
  ctx.fillText(text, x, y);
}

/** Draw a bar of a round length in the lower left corner. */
function paintScale(ctx, view, colours) {
  const most = Math.max((view.width / 4) / view.scale, 1);
  const power = 10 ** Math.floor(Math.log10(most));
  const length = [5, 2, 1].map((m) => m * power).find((l) => l <= most);
  const y = view.height - 14;
  ctx.fillStyle = colours.paper;
  ctx.globalAlpha = 0.85;
  ctx.fillRect(6, y - 10, length * view.scale + 76, 20);
  ctx.globalAlpha = 1;
  ctx.fillStyle = colours.ink;
  ctx.fillRect(12, y, length * view.scale, 2);
  ctx.fillRect(12, y - 5, 2, 7);
  ctx.fillRect(10 + length * view.scale, y - 5, 2, 7);
  ctx.font = `12px ${FONT}`;
  ctx.textAlign = "start";
  ctx.textBaseline = "middle";
  ctx.fillText(length >= 1e5 ? `${length / 1e6} mm` : `${length / 1e3} \u00b5m`, 18 + length * view.scale, y - 1);
}

/** Draw the cross that stands for the pointer while the keyboard is used. */
function paintCross(ctx, view, colours) {
  const [x, y] = [view.width / 2, view.height / 2];
  for (const [colour, pen] of [[colours.halo, 4], [colours.chosen, 1.6]]) {
    ctx.strokeStyle = colour;
    ctx.lineWidth = pen;
    ctx.beginPath();
    for (const [dx, dy] of [[1, 0], [-1, 0], [0, 1], [0, -1]]) {
      ctx.moveTo(x + 4 * dx, y + 4 * dy);
      ctx.lineTo(x + 14 * dx, y + 14 * dy);
    }
    ctx.stroke();
  }
}
