// While `layoutgen watch` serves the page: load it again when it was drawn anew, show the file's faults meanwhile.

/** Listen to the server; `keep` is called before the page is loaded again. */
function watchServer(version, keep) {
  const banner = make("section", { class: "watch", role: "status", "aria-label": "Watching the circuit file" });
  document.body.prepend(banner);
  const say = (kind, ...parts) => {
    banner.dataset.state = kind;
    banner.replaceChildren(...parts);
  };
  const source = new EventSource("events");
  source.addEventListener("state", (event) => {
    const state = JSON.parse(event.data);
    if (state.version && state.version !== version) {
      keep();
      location.reload();
    } else if (state.busy) {
      say("busy", make("p", {}, "Drawing\u2026"));
    } else if (state.faults.length) {
      say("wrong", ...faultParts(state, version));
    } else {
      say("watching", make("p", {}, `Watching ${state.name}: this page follows it.`));
    }
  });
  source.addEventListener("error", () => {
    say("lost", make("p", {}, "No connection to layoutgen watch; this page no longer follows the file."));
  });
}

/** Return what to show of faults: a heading and one line each. */
function faultParts(state, version) {
  const below = version ? "Below is the last drawing that could be made." : "There is no drawing yet.";
  const list = make("ul", {});
  for (const fault of state.faults) list.append(make("li", {}, fault));
  const count = state.faults.length === 1 ? "1 fault" : `${state.faults.length} faults`;
  return [make("h2", {}, `${state.name}: ${count}`), list, make("p", {}, below)];
}
