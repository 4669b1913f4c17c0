// The report page comes alive: board, tables that lead to it, plots, theme, print. Without scripts the page is still
// whole: it then shows the board as a picture.

/** Return a new element with attributes and text. */
function make(tag, attributes, text = "") {
  const element = document.createElement(tag);
  for (const [name, value] of Object.entries(attributes)) if (value !== "") element.setAttribute(name, value);
  if (text) element.textContent = text;
  return element;
}

function read(id) {
  const element = document.getElementById(id);
  return element ? JSON.parse(element.textContent) : null;
}

const byId = (id) => document.getElementById(id);

/** What outlives a reload: kept by the browser for this tab where it lets us. */
const memory = {
  name: `layoutgen ${location.pathname}`,
  load() {
    try {
      return JSON.parse(sessionStorage.getItem(this.name)) || {};
    } catch {
      return {};
    }
  },
  save(values) {
    try {
      sessionStorage.setItem(this.name, JSON.stringify({ ...this.load(), ...values }));
    } catch {
      // a browser that keeps nothing still shows everything
    }
  },
};

/** Make the theme's switch; the system's choice stands until it is pressed. */
function themeSwitch(changed) {
  const button = byId("theme");
  const dark = matchMedia("(prefers-color-scheme: dark)");
  const root = document.documentElement;
  const isDark = () => (root.dataset.theme ? root.dataset.theme === "dark" : dark.matches);
  const show = () => {
    button.setAttribute("aria-pressed", String(isDark()));
    changed();
  };
  const kept = memory.load().theme;
  if (kept === "dark" || kept === "light") root.dataset.theme = kept;
  button.addEventListener("click", () => {
    root.dataset.theme = isDark() ? "light" : "dark";
    memory.save({ theme: root.dataset.theme });
    show();
  });
  dark.addEventListener("change", show);
  show();
}

/** Put the picture that stands in for the canvas onto paper. */
function printSwitch() {
  const figure = byId("still");
  const fill = () => {
    const picture = figure?.querySelector("noscript");
    if (!picture) return;
    figure.insertAdjacentHTML("beforeend", picture.textContent);
    picture.remove();
  };
  addEventListener("beforeprint", fill);
  matchMedia("print").addEventListener("change", (event) => event.matches && fill());
}

/** The board's part of the page: view, panel, switches, what is chosen and what is measured. */
class Board {
  constructor(data) {
    this.board = readBoard(data);
    this.board.marksOn = true;
    this.panel = byId("panel");
    this.chosen = "";
    this.from = null;
    this.view = new BoardView(this.board, byId("canvas"), (what, value) => this.told(what, value));
    const { x0, y0, x1, y1 } = this.view.whereWhole();
    this.view.canvas.style.setProperty("--shape", ((x1 - x0) / (y1 - y0)).toFixed(3));
    this.layerSwitches();
    this.buttons();
    this.tables();
    this.view.resize();
    this.panelFor("");
    this.recall();
  }

  told(what, value) {
    if (what === "hover") this.hover(value);
    if (what === "pick") this.choose(value, false);
    if (what === "measure") this.showMeasure();
    if (what === "key") this.onKey(value);
  }

  hover(key) {
    if (key === this.hovered) return;
    this.hovered = key;
    this.panelFor(key || this.chosen);
    if (key && this.view.canvas.matches(":focus-visible")) this.say(this.summary(key));
  }

  /** Return an item's name and first facts in one sentence, for a screen reader. */
  summary(key) {
    const item = this.item(key);
    return [item.title, ...item.facts.slice(0, 4).map((fact) => fact.join(" "))].join(", ");
  }

  item(key) {
    return this.board.items[this.board.numbers.get(key)];
  }

  say(text) {
    byId("said").textContent = text;
  }

  /** Choose an item (or nothing), and show its place if asked to. */
  choose(key, look) {
    this.chosen = this.board.numbers.has(key) ? key : "";
    this.hovered = "";
    const number = this.board.numbers.get(this.chosen);
    this.view.chosen = number === undefined ? [] : shapesOf(this.board, number);
    this.view.chosenKey = this.chosen;
    const place = look && this.chosen ? placeOf(this.board, this.chosen) : null;
    if (place) this.view.lookAt(place, 0.3, 6e6);
    this.panelFor(this.chosen);
    this.markRows();
    if (this.chosen) this.say(`${this.summary(this.chosen)}${place || !look ? "" : ", without a place on the board"}`);
    this.view.refresh();
  }

  /** Fill the panel with an item's facts and those of what it is a piece of. */
  panelFor(key) {
    const parts = [];
    for (let at = key; at && this.board.numbers.has(at); at = this.item(at).parent) {
      parts.push(make("h3", {}, this.item(at).title), this.factList(this.item(at).facts));
    }
    if (!parts.length) {
      parts.push(make("p", { class: "soft" }, "Point at the board, or choose a row of a table, to see what it is."));
    }
    this.panel.replaceChildren(...parts);
  }

  factList(facts) {
    const list = make("dl", {});
    for (const [name, value] of facts) {
      list.append(make("dt", { class: value ? "" : "head" }, name));
      if (value) list.append(make("dd", {}, value));
    }
    return list;
  }

  markRows() {
    const own = new Set([this.chosen, this.chosen && this.item(this.chosen).parent]);
    for (const link of document.querySelectorAll("[data-zoom]")) {
      const is = Boolean(this.chosen) && own.has(link.dataset.zoom);
      link.closest("tr")?.classList.toggle("chosen", is);
      if (is) link.setAttribute("aria-current", "true");
      else link.removeAttribute("aria-current");
    }
  }

  /** Let links in tables, and the rows around them, lead to the board. */
  tables() {
    document.addEventListener("click", (event) => {
      const link = event.target.closest("a") || this.linkOfRow(event.target);
      if (!link || !link.dataset.zoom || !this.board.numbers.has(link.dataset.zoom)) return;
      event.preventDefault();
      this.from = link;
      this.choose(link.dataset.zoom, true);
      byId("viewer").scrollIntoView({ block: "nearest" });
      this.view.canvas.focus({ preventScroll: true });
    });
  }

  linkOfRow(target) {
    if (String(getSelection())) return null;
    return target.closest("tbody tr")?.querySelector("th [data-zoom]");
  }

  layerSwitches() {
    const box = byId("layers");
    const add = (name, text, on, set) => {
      const label = make("label", {});
      const input = make("input", { type: "checkbox", value: name });
      input.checked = on;
      input.addEventListener("change", () => {
        set(input.checked);
        this.view.repaint();
      });
      label.append(input, ` ${text}`);
      box.append(label);
    };
    const off = memory.load().layers || {};
    for (const layer of this.board.layers) {
      layer.on = off[layer.name] ?? layer.on;
      add(layer.name, layer.text, layer.on, (on) => (layer.on = on));
    }
    if (this.board.marks.length) {
      this.board.marksOn = off.findings ?? true;
      add("findings", "Findings", this.board.marksOn, (on) => (this.board.marksOn = on));
    }
  }

  buttons() {
    const view = this.view;
    byId("zoom-in").addEventListener("click", () => view.zoom(1.5));
    byId("zoom-out").addEventListener("click", () => view.zoom(1 / 1.5));
    byId("whole").addEventListener("click", () => view.whole());
    byId("measure").addEventListener("click", () => this.measuring(!view.measure.on));
  }

  measuring(on) {
    this.view.measure = { on, a: null, b: null, free: null };
    byId("measure").setAttribute("aria-pressed", String(on));
    this.view.canvas.classList.toggle("measuring", on);
    this.showMeasure();
    this.view.refresh();
  }

  showMeasure() {
    const { on, a, b, free } = this.view.measure;
    const end = b || free;
    let text = "";
    if (on && !a) text = "Choose the first point; corners, middles and edges attract it.";
    else if (on && !end) text = `From ${millimetres(a.x)}, ${millimetres(a.y)} mm (${a.kind}): choose the second point.`;
    else if (on) {
      text = `${millimetres(Math.hypot(end.x - a.x, end.y - a.y))} mm (${a.kind} to ${end.kind}), across ${millimetres(end.x - a.x)}, up ${millimetres(end.y - a.y)}`;
    }
    byId("measured").textContent = text;
  }

  onKey(key) {
    if (key === "m") this.measuring(!this.view.measure.on);
    if (key === "n" || key === "p") this.nextMark(key === "n" ? 1 : -1);
    if (key !== "Escape") return;
    if (this.view.measure.on) this.measuring(false);
    else if (this.chosen) this.choose("", false);
    else this.from?.focus();
  }

  nextMark(step) {
    const keys = this.board.marks.map((mark) => `finding:${mark[0]}`);
    if (!keys.length) return;
    const now = keys.indexOf(this.chosen);
    this.choose(keys[now < 0 && step < 0 ? keys.length - 1 : (now + step + keys.length) % keys.length], true);
  }

  /** Keep what the reader has set, so that a page drawn anew opens where the old one was. */
  keep() {
    const { x0, y0, scale, measure } = this.view;
    const layers = Object.fromEntries(this.board.layers.map((layer) => [layer.name, layer.on]));
    layers.findings = this.board.marksOn;
    const { a, b, on } = measure;
    memory.save({ view: { x0, y0, scale }, chosen: this.chosen, layers, measure: { a, b, on }, kept: true });
  }

  recall() {
    const { view, chosen, measure, kept } = memory.load();
    if (!kept) return;
    memory.save({ kept: false });
    if (measure?.on) {
      this.measuring(true);
      Object.assign(this.view.measure, measure);
      this.showMeasure();
    }
    if (chosen) this.choose(chosen, false);
    if (!view || !this.view.width) return;
    Object.assign(this.view, view);
    this.view.moved();
  }
}

/** Bring the page to life. */
function start() {
  document.documentElement.classList.add("live");
  const data = read("board-data");
  const board = data && byId("canvas") ? new Board(data) : null;
  themeSwitch(() => board?.view.themed());
  printSwitch();
  const plots = read("plot-data");
  if (plots) livePlots(byId("plots"), plots);
  const server = document.querySelector('meta[name="layoutgen-watch"]');
  if (server) watchServer(server.content, () => board?.keep());
  performance.mark("layoutgen-ready");
}

start();
