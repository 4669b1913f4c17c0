// The view of the board: where it looks, what pointer, touch and keys do to it, and when it is painted again.

const STEP = 40;
const SNAP = 10;

class BoardView {
  /** `tell` is called with what happened: hover, pick, place, look, key. */
  constructor(board, canvas, tell) {
    Object.assign(this, { board, canvas, tell, width: 0, height: 0, x0: 0, y0: 0, scale: 1e-5 });
    this.ctx = canvas.getContext("2d");
    this.still = document.createElement("canvas");
    this.stale = "all";
    this.cost = 0;
    this.hovered = null;
    this.chosen = [];
    this.chosenKey = "";
    this.measure = { on: false, a: null, b: null, free: null };
    this.pointers = new Map();
    this.colours = themeColours(board.styles);
    this.listen();
  }

  x(nm) {
    return (nm - this.x0) * this.scale + this.width / 2;
  }

  y(nm) {
    return this.height / 2 - (nm - this.y0) * this.scale;
  }

  /** Return the place on the board under a pixel. */
  at(px, py) {
    return { x: (px - this.width / 2) / this.scale + this.x0, y: (this.height / 2 - py) / this.scale + this.y0 };
  }

  seen() {
    const low = this.at(0, this.height);
    const high = this.at(this.width, 0);
    return { x0: low.x, y0: low.y, x1: high.x, y1: high.y };
  }

  /** Take the canvas's size on the page; the first time, show the whole board. */
  resize() {
    const box = this.canvas.getBoundingClientRect();
    if (!box.width || !box.height || (box.width === this.width && box.height === this.height)) return;
    const first = !this.width;
    this.width = box.width;
    this.height = box.height;
    this.ratio = window.devicePixelRatio || 1;
    for (const canvas of [this.canvas, this.still]) {
      canvas.width = Math.round(this.width * this.ratio);
      canvas.height = Math.round(this.height * this.ratio);
    }
    if (first) this.whole();
    this.repaint();
  }

  whole() {
    this.lookAt(this.whereWhole(), 0.04);
  }

  /** Return the box that shows all: the board and its ports with their names. */
  whereWhole() {
    const { x0, y0, x1, y1 } = this.board.extent;
    const names = this.board.texts.filter((text) => text[6] === "port");
    const reach = Math.max(0, ...names.filter((t) => t[5] !== "middle").map((t) => 0.8 * t[3] * t[0].length));
    return { x0: x0 - reach, y0: y0 - (names.length ? 1e6 : 0), x1: x1 + reach, y1: y1 + (names.length ? 1e6 : 0) };
  }

  /** Show a box with some room around it. */
  lookAt({ x0, y0, x1, y1 }, room, least = 0) {
    const [w, h] = [Math.max(x1 - x0, least, 1), Math.max(y1 - y0, least, 1)];
    this.x0 = (x0 + x1) / 2;
    this.y0 = (y0 + y1) / 2;
    this.scale = Math.min(this.width / w, this.height / h) / (1 + 2 * room);
    this.moved();
  }

  zoom(factor, px = this.width / 2, py = this.height / 2) {
    const before = this.at(px, py);
    this.scale = Math.max(1e-7, Math.min(5e-3, this.scale * factor));
    const after = this.at(px, py);
    this.x0 += before.x - after.x;
    this.y0 += before.y - after.y;
    this.moved();
  }

  pan(dx, dy) {
    this.x0 -= dx / this.scale;
    this.y0 += dy / this.scale;
    this.moved();
  }

  /** Keep the board in reach, paint, and say that the view changed. */
  moved() {
    const { x0, y0, x1, y1 } = this.board.extent;
    this.x0 = Math.max(x0, Math.min(x1, this.x0));
    this.y0 = Math.max(y0, Math.min(y1, this.y0));
    this.stale ||= "moved";
    this.refresh();
    this.tell("look");
  }

  /** Paint everything anew at the next frame. */
  repaint() {
    this.stale = "all";
    this.refresh();
  }

  /** Paint what lies over the board anew at the next frame. */
  refresh() {
    this.asked ||= requestAnimationFrame(() => {
      this.asked = 0;
      this.paint();
    });
  }

  themed() {
    this.colours = themeColours(this.board.styles);
    this.repaint();
  }

  paint() {
    if (!this.width) return;
    if (this.stale === "moved" && this.cost > 40) {
      // a board of very many shapes follows the finger as a picture, and is painted when it rests
      clearTimeout(this.later);
      this.later = setTimeout(() => this.repaint(), 120);
    } else if (this.stale) {
      this.paintStill();
    }
    const ctx = this.ctx;
    this.clear(ctx);
    const { scale, corner } = this.stillView;
    const grown = this.scale / scale / this.ratio;
    ctx.drawImage(this.still, this.x(corner.x), this.y(corner.y), this.still.width * grown, this.still.height * grown);
    this.paintOver(ctx);
  }

  /** Leave nothing but the ground, and measure in the page's pixels. */
  clear(ctx) {
    ctx.setTransform(1, 0, 0, 1, 0, 0);
    ctx.fillStyle = this.colours.paper;
    ctx.fillRect(0, 0, this.canvas.width, this.canvas.height);
    ctx.setTransform(this.ratio, 0, 0, this.ratio, 0, 0);
  }

  paintStill() {
    const start = performance.now();
    const ctx = this.still.getContext("2d", { alpha: false });
    this.clear(ctx);
    paintBoard(ctx, this.board, this, this.colours);
    this.stillView = { scale: this.scale, corner: this.at(0, 0) };
    this.stale = "";
    this.cost = performance.now() - start;
  }

  paintOver(ctx) {
    if (this.hovered) paintOutline(ctx, [this.hovered], this, this.colours, 1.2);
    if (this.chosen.length) paintOutline(ctx, this.chosen, this, this.colours, 2.4);
    if (this.board.marksOn) {
      for (const mark of this.board.marks) {
        paintMark(ctx, mark, this, this.colours, `finding:${mark[0]}` === this.chosenKey);
      }
    }
    const { a, b, free } = this.measure;
    if (a && (b || free)) paintMeasure(ctx, a, b || free, this, this.colours);
    paintScale(ctx, this, this.colours);
    if (this.canvas.matches(":focus-visible")) paintCross(ctx, this, this.colours);
  }

  /** Return the key of what is under a pixel: a finding's mark first, then the topmost shape's item. */
  keyAt(px, py) {
    const mark = this.board.marksOn
      ? this.board.marks.findLast((m) => Math.abs(this.x(m[2]) - px) + Math.abs(this.y(m[3]) - py) < MARK[m[1]] + 3)
      : null;
    if (mark) return { key: `finding:${mark[0]}`, shape: null };
    const { x, y } = this.at(px, py);
    const shape = shapeAt(this.board, x, y);
    return shape ? { key: this.board.items[shape.item].key, shape } : { key: "", shape: null };
  }

  hover(px, py) {
    if (this.measure.on) {
      this.measure.free = this.snap(px, py);
      this.tell("measure");
    }
    const { key, shape } = this.keyAt(px, py);
    this.hovered = shape;
    this.tell("hover", key);
    this.refresh();
  }

  leave() {
    this.hovered = null;
    this.tell("hover", "");
    this.refresh();
  }

  snap(px, py) {
    const { x, y } = this.at(px, py);
    const point = snapped(this.board, x, y, SNAP / this.scale);
    return { x: Math.round(point.x), y: Math.round(point.y), kind: point.kind };
  }

  /** A click or the Enter key: take a point when measuring, else choose what is there. */
  press(px, py) {
    if (!this.measure.on) {
      this.tell("pick", this.keyAt(px, py).key);
      return;
    }
    const point = this.snap(px, py);
    this.measure = this.measure.a && !this.measure.b
      ? { ...this.measure, b: point, free: null }
      : { on: true, a: point, b: null, free: null };
    this.tell("measure");
    this.refresh();
  }

  listen() {
    const canvas = this.canvas;
    canvas.addEventListener("wheel", (event) => this.onWheel(event), { passive: false });
    canvas.addEventListener("pointerdown", (event) => this.onDown(event));
    canvas.addEventListener("pointermove", (event) => this.onMove(event));
    canvas.addEventListener("pointerup", (event) => this.onUp(event));
    canvas.addEventListener("pointercancel", (event) => this.onUp(event, true));
    canvas.addEventListener("pointerleave", () => this.leave());
    canvas.addEventListener("keydown", (event) => this.onKey(event));
    for (const name of ["focus", "blur"]) canvas.addEventListener(name, () => this.refresh());
    new ResizeObserver(() => this.resize()).observe(canvas);
  }

  place(event) {
    const box = this.canvas.getBoundingClientRect();
    return [event.clientX - box.left, event.clientY - box.top];
  }

  onWheel(event) {
    event.preventDefault();
    const lines = event.deltaMode === 1 ? 24 : event.deltaMode === 2 ? 400 : 1;
    const speed = event.ctrlKey ? 0.01 : 0.0016;
    this.zoom(Math.exp(-Math.max(-400, Math.min(400, event.deltaY * lines)) * speed), ...this.place(event));
  }

  onDown(event) {
    this.canvas.setPointerCapture(event.pointerId);
    const at = this.place(event);
    this.pointers.set(event.pointerId, at);
    this.press0 = this.pointers.size === 1 ? at : null;
  }

  onMove(event) {
    const at = this.place(event);
    const last = this.pointers.get(event.pointerId);
    if (!last) {
      if (event.pointerType !== "touch") this.hover(...at);
      return;
    }
    if (this.press0 && Math.hypot(at[0] - this.press0[0], at[1] - this.press0[1]) < 4) return;
    this.press0 = null;
    const other = [...this.pointers].find(([id]) => id !== event.pointerId);
    this.pointers.set(event.pointerId, at);
    if (!other) {
      this.pan(at[0] - last[0], at[1] - last[1]);
      return;
    }
    const [ox, oy] = other[1];
    const spread = (p) => Math.max(10, Math.hypot(p[0] - ox, p[1] - oy));
    this.pan((at[0] - last[0]) / 2, (at[1] - last[1]) / 2);
    this.zoom(spread(at) / spread(last), (at[0] + ox) / 2, (at[1] + oy) / 2);
  }

  onUp(event, cancelled = false) {
    const at = this.place(event);
    this.pointers.delete(event.pointerId);
    if (this.press0 && !cancelled) this.press(...at);
    this.press0 = null;
    this.refresh();
  }

  onKey(event) {
    if (event.ctrlKey || event.metaKey || event.altKey) return;
    const step = event.shiftKey ? STEP / 10 : STEP;
    const acts = {
      ArrowLeft: () => this.pan(step, 0),
      ArrowRight: () => this.pan(-step, 0),
      ArrowUp: () => this.pan(0, step),
      ArrowDown: () => this.pan(0, -step),
      "+": () => this.zoom(1.25),
      "=": () => this.zoom(1.25),
      "-": () => this.zoom(0.8),
      0: () => this.whole(),
      Home: () => this.whole(),
      Enter: () => this.press(this.width / 2, this.height / 2),
      " ": () => this.press(this.width / 2, this.height / 2),
    };
    const act = acts[event.key];
    if (act) {
      event.preventDefault();
      act();
      if (event.key.startsWith("Arrow")) this.hover(this.width / 2, this.height / 2);
    }
    this.tell("key", event.key);
  }
}
