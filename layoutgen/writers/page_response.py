"""The response on the report page: charts over the sweep, a table at the band's edges and the middle."""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.response import Response
from layoutgen.writers.charts import chart, match_traces, transmission_traces
from layoutgen.writers.html import escape, table
from layoutgen.writers.records import Result
from layoutgen.writers.response_files import trace_values

__all__ = ["response_section"]


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
    band = result.circuit.file.design.band
    match, through = match_traces(response), transmission_traces(response)
    yield "<h3>Reflection at each port</h3>" + chart("Reflection", response.frequencies, match, band)
    if through:
        yield "<h3>Transmission between ports</h3>" + chart(
            "Transmission", response.frequencies, through, band
        )
    yield _numbers(response)


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
