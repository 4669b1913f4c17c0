"""The response on the report page: plots, a table at the band's edges, what limits the match."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

from layoutgen.numbers import fixed
from layoutgen.response import CLOSE_ENOUGH, Correction, DeviceView, Doubt, Response, Stability
from layoutgen.units import quantity_text
from layoutgen.writers.charts import trace_groups
from layoutgen.writers.html import Cell, cell, escape, items, table, zoom_link
from layoutgen.writers.page_items import element_keys
from layoutgen.writers.page_plots import level_plot, phase_plot, plot_data, smith_plot
from layoutgen.writers.records import Result
from layoutgen.writers.response_files import trace_values
from layoutgen.writers.response_tables import ohms, ohms_size

__all__ = ["response_numbers", "response_section"]


def response_section(result: Result) -> Iterator[str]:
    """Yield what the schematic does and what the drawn board does, as pictures and numbers."""
    response = result.response
    if response is None:
        yield "<p>The circuit has no RF ports and no terminations, so there is no response.</p>"
        return
    yield (
        "<p>Dashed: the schematic with lossless lines. Solid: the board as drawn, with loss, junctions, "
        "bends, pads and vias. Levels are to the ports' own impedances; the shaded band is the design's.</p>"
    )
    yield '<div id="plots">' + "".join(_plots(result, response)) + "</div>"
    yield _numbers(response)
    if response.correction is not None:
        yield from _correction(response.correction)
    if response.device is not None:
        yield from _device(response.device)
    if response.doubts:
        yield _doubts(result, response.doubts)


def response_numbers(response: Response, frequency: float) -> dict[str, object]:
    """Return the numbers behind the plots, for the cursor, which begins at a frequency [Hz]."""
    return plot_data(response, trace_groups(response), frequency)


def _plots(result: Result, response: Response) -> Iterator[str]:
    band = result.circuit.file.design.band
    headings = {"Reflection": "Reflection at each port", "Transmission": "Transmission between ports"}
    for number, (name, traces) in enumerate(trace_groups(response)):
        yield f'<h3>{headings[name]}</h3><div class="plots" data-group="{number}">'
        yield level_plot(f"{name}, level", response, traces, band)
        yield phase_plot(f"{name}, phase", response, traces, band)
        if name == "Reflection":
            yield smith_plot("Reflection on a Smith chart", response, traces)
        yield "</div>"


def _numbers(response: Response) -> str:
    rows = (
        [escape(name), *(text.replace("-", "−") for text in numbers)]
        for name, *numbers in trace_values(response)
    )
    heads = (
        "Ports", "Frequency (GHz)", "Wanted (dB)", "As drawn (dB)", "Change (dB)",
        "Wanted (deg)", "As drawn (deg)", "Change (deg)",
    )  # fmt: skip
    return table("Wanted and as drawn, at the band's edges and the design frequency", heads, rows)


def _correction(correction: Correction) -> Iterator[str]:
    """Yield what adjusting the lengths has done, and what holds the rest."""
    before = f"{fixed(correction.before, 4)} with the lengths of the budgets alone"
    yield (
        "<h3>Lengths adjusted to the response</h3><p>Largest difference of an S-parameter between wanted and "
        f"as drawn in the band, without losses: {_unallowed(correction)}{before}, "
        f"{fixed(correction.after, 4)} as drawn. Losses change an S-parameter by "
        f"{fixed(correction.losses, 4)} at most.</p>"
    )
    if correction.reachable > CLOSE_ENOUGH:
        yield (
            f"<p>No lengths that were found bring it below {fixed(correction.reachable, 4)}; "
            f"{CLOSE_ENOUGH:g} would count as close.</p>"
        )
        yield items(
            f"{escape(holder.element)}: {escape(holder.cause)}; without it {fixed(holder.without, 4)}"
            for holder in correction.holders
        )


def _unallowed(correction: Correction) -> str:
    """Return the first figure of the sentence on the difference, with its comma."""
    if correction.unallowed is None:
        return ""
    return f"{fixed(correction.unallowed, 4)} were nothing allowed for at the lines' ends and bends, "


def _device(view: DeviceView) -> Iterator[str]:
    """Yield what transistor pins and bias feeds see, and where a transistor is least stable."""
    heads = [f"{quantity_text(f, 'frequency')}" for f in view.frequencies]
    if view.pins:
        rows = [
            [
                escape(pin.pin),
                cell(_ohms(pin.device) if pin.device is not None else None),
                kind,
                *map(_ohms, seen),
            ]
            for pin in view.pins
            for kind, seen in (("wanted", pin.wanted), ("as drawn", pin.as_drawn))
        ]
        yield "<h3>What the transistor sees</h3>"
        yield table("Impedance into the board (ohm)", ("Pin", "Device (ohm)", "", *heads), rows)
    if view.feeds:
        rows = [
            [escape(feed.net), escape(", ".join(feed.ports)), kind, *(_size(z) for z in seen)]
            for feed in view.feeds
            for kind, seen in (("wanted", feed.wanted), ("as drawn", feed.as_drawn))
        ]
        yield "<h3>How nearly open the bias feeds look</h3>"
        yield table("Magnitude of the impedance into the feed (ohm)", ("Net", "Ports", "", *heads), rows)
    for stability in view.stability:
        where = quantity_text(stability.at, "frequency")
        yield (
            f"<p>{escape(stability.part)}: least stable at {where}, K {fixed(stability.k, 3)}, "
            f"mu {fixed(stability.mu, 3)}{_unstable(stability)}.</p>"
        )


def _unstable(stability: Stability) -> str:
    """Return between which frequencies a transistor may oscillate, for the end of a sentence."""
    if stability.unstable is None:
        return "; stable with any passive load over the sweep"
    low, high = (quantity_text(f, "frequency") for f in stability.unstable)
    return f"; mu is at most 1 between {low} and {high}: some passive loads let it oscillate"


def _ohms(z: complex) -> Cell:
    return ohms(z).replace("-", "−")


def _size(z: complex) -> Cell:
    return ohms_size(z) if math.isfinite(abs(z)) else cell(None)


def _doubts(result: Result, doubts: Sequence[Doubt]) -> str:
    keys = element_keys(result)
    rows = (
        [
            ", ".join(zoom_link(keys[name], name) if name in keys else escape(name) for name in doubt.items)
            or "–",
            escape(doubt.reason),
        ]
        for doubt in doubts
    )
    return "<h3>Where the circuit model is doubtful</h3>" + table(
        "Places that a field solution would be worth its time for", ("Where", "Why"), rows
    )
