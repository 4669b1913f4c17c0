// A cursor over the response plots: one frequency for all of them, with the figures it reads.

const SVG = "http://www.w3.org/2000/svg";

/** Lay a cursor over the plots in `root`, with a slider for keys and fingers. */
function livePlots(root, data) {
  const cursors = [];
  for (const block of root.querySelectorAll(".plots")) {
    const group = data.groups[Number(block.dataset.group)];
    for (const svg of block.querySelectorAll("svg")) {
      cursors.push(svg.classList.contains("smith") ? smithCursor(svg, group) : lineCursor(svg, data, (at) => slide(at)));
      liveKey(block, svg, group);
    }
  }
  const { slider, output, box } = plotBar(data);
  root.prepend(box);
  const slide = (at) => {
    slider.value = at;
    show();
  };
  const show = () => {
    const at = Number(slider.value);
    slider.setAttribute("aria-valuetext", `${gigahertz(data, at)} GHz`);
    for (const move of cursors) move(at);
    output.replaceChildren(readings(data, at));
  };
  slider.addEventListener("input", show);
  slide(data.first);
}

function gigahertz(data, at) {
  return (data.frequencies[at] / 1e9).toFixed(4);
}

/** Return the bar with the slider and the place for the figures. */
function plotBar(data) {
  const box = make("div", { class: "reading" });
  const label = make("label", {}, "Frequency ");
  const slider = make("input", { type: "range", min: "0", max: String(data.frequencies.length - 1), step: "1", id: "frequency" });
  const output = make("div", { class: "scroll", id: "readings" });
  label.append(slider);
  box.append(label, output);
  return { slider, output, box };
}

/** Return a table of what all traces read at one frequency. */
function readings(data, at) {
  const table = make("table", {});
  table.append(make("caption", {}, `At ${gigahertz(data, at)} GHz`));
  const head = make("tr", {});
  for (const text of ["", "Wanted (dB)", "As drawn (dB)", "Wanted (deg)", "As drawn (deg)"]) {
    head.append(make("th", { scope: "col", class: text ? "n" : "" }, text));
  }
  const body = make("tbody", {});
  for (const group of data.groups) {
    for (const trace of group.traces) {
      const row = make("tr", {});
      row.append(make("th", { scope: "row" }, `${group.name}, ${trace.name}`));
      const pairs = [trace.wanted, trace.drawn].map((values) => values.slice(2 * at, 2 * at + 2));
      for (const [re, im] of pairs) row.append(make("td", { class: "n" }, signed(decibels(re, im), 2)));
      for (const [re, im] of pairs) row.append(make("td", { class: "n" }, signed((Math.atan2(im, re) * 180) / Math.PI, 1)));
      body.append(row);
    }
  }
  const top = make("thead", {});
  top.append(head);
  table.append(top, body);
  return table;
}

function decibels(re, im) {
  return 20 * Math.log10(Math.max(Math.hypot(re, im) / 1e6, 1e-6));
}

function signed(value, places) {
  return value.toFixed(places).replace("-", "\u2212");
}

/** Return what moves a plot's cursor line to a frequency; moving the pointer over the plot moves it too. */
function lineCursor(svg, data, slide) {
  const { left, right, top, bottom } = svg.dataset;
  const [first, last] = [data.frequencies[0], data.frequencies.at(-1)];
  const line = document.createElementNS(SVG, "line");
  for (const [name, value] of Object.entries({ class: "cursor", y1: top, y2: bottom })) line.setAttribute(name, value);
  svg.append(line);
  svg.addEventListener("pointermove", (event) => {
    const box = svg.getBoundingClientRect();
    const x = ((event.clientX - box.left) / box.width) * svg.viewBox.baseVal.width;
    if (x < left - 8 || x > Number(right) + 8) return;
    const wanted = first + ((x - left) / (right - left)) * (last - first);
    slide(nearest(data.frequencies, wanted));
  });
  return (at) => {
    const x = Number(left) + ((data.frequencies[at] - first) / (last - first || 1)) * (right - left);
    line.setAttribute("x1", x);
    line.setAttribute("x2", x);
  };
}

function nearest(values, wanted) {
  let best = 0;
  values.forEach((value, k) => {
    if (Math.abs(value - wanted) < Math.abs(values[best] - wanted)) best = k;
  });
  return best;
}

/** Return what moves the dots of a Smith chart: hollow for wanted, full for as drawn. */
function smithCursor(svg, group) {
  const middle = Number(svg.dataset.middle);
  const radius = Number(svg.dataset.radius);
  const dots = group.traces.flatMap((trace, k) =>
    ["wanted", "drawn"].map((kind) => {
      const dot = document.createElementNS(SVG, "circle");
      dot.setAttribute("class", `dot ${kind} t${k % 6}`);
      dot.setAttribute("r", "4");
      dot.dataset.trace = k;
      svg.append(dot);
      return { dot, values: trace[kind] };
    }),
  );
  return (at) => {
    for (const { dot, values } of dots) {
      dot.setAttribute("cx", middle + (radius * values[2 * at]) / 1e6);
      dot.setAttribute("cy", middle - (radius * values[2 * at + 1]) / 1e6);
    }
  };
}

/** Let the entries of a plot's key switch its trace off and on in all plots of the block. */
function liveKey(block, svg, group) {
  for (const entry of svg.querySelectorAll("[data-key]")) {
    const k = entry.dataset.key;
    const name = group.traces[Number(k)].name;
    for (const [attribute, value] of Object.entries({ role: "button", tabindex: "0", "aria-pressed": "true", "aria-label": `show ${name}` })) {
      entry.setAttribute(attribute, value);
    }
    const toggle = () => {
      const on = entry.getAttribute("aria-pressed") !== "true";
      for (const other of block.querySelectorAll(`[data-key="${k}"]`)) other.setAttribute("aria-pressed", String(on));
      for (const curve of block.querySelectorAll(`[data-trace="${k}"]`)) curve.classList.toggle("off", !on);
    };
    entry.addEventListener("click", toggle);
    entry.addEventListener("keydown", (event) => {
      if (event.key !== "Enter" && event.key !== " ") return;
      event.preventDefault();
      toggle();
    });
  }
}
