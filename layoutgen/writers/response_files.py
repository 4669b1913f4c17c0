"""The response on its own: a table for people, a CSV of every trace, plots as SVG and PNG, Touchstone."""

from __future__ import annotations

import cmath
import math
from collections.abc import Iterator

from layoutgen.numbers import fixed, json_text
from layoutgen.response import Response
from layoutgen.writers.charts import Trace, decibels, match_traces, trace_groups, transmission_traces
from layoutgen.writers.html import escape
from layoutgen.writers.page_plots import level_plot, phase_plot, plot_height, smith_height, smith_plot
from layoutgen.writers.records import Job, Result
from layoutgen.writers.response_json import response_entries
from layoutgen.writers.response_png import write_response_png
from layoutgen.writers.touchstone import write_as_drawn, write_wanted

__all__ = ["TRACE_HEADS", "response_files", "trace_values", "traces_of", "write_csv", "write_plot"]

TRACE_HEADS = (
    "ports", "frequency GHz", "wanted dB", "drawn dB", "change dB", "wanted deg", "drawn deg", "change deg",
)  # fmt: skip
"""Headings of :func:`trace_values`."""

_ROUNDING = 10.0 ** (-150.0 / 20.0)
_WIDTH = 760
_STYLE = (
    "svg{font:12px Helvetica,Arial,'DejaVu Sans',sans-serif}text{fill:#2b261e}.m{text-anchor:middle}"
    ".f{fill:none}.s{font-size:10px;fill:#6b6252}.e{text-anchor:end}.g{stroke:#ddd3bf}.band{fill:#a2531f;opacity:.16}.d,.w{fill:none;stroke-width:1.8}"
    ".w{stroke-dasharray:6 4;stroke-width:1.3}.ink{stroke:#6b6252}.t0{stroke:#a2531f}.t1{stroke:#1f6f8b}"
    ".t2{stroke:#5b7f2b}.t3{stroke:#7a4a91}.t4{stroke:#b08900}.t5{stroke:#52606d}"
)


def response_files(result: Result, job: Job) -> dict[str, bytes]:
    """Return the files of the response by name: Touchstone, CSV, plots, and what else is known as JSON.

    Raises:
        ValueError: The result has no response.
    """
    if result.response is None:
        raise ValueError("a result without RF ports has no response")
    ports = len(result.response.ports)
    return {
        f"wanted.s{ports}p": write_wanted(result, job),
        f"as_drawn.s{ports}p": write_as_drawn(result, job),
        "response.csv": write_csv(result.response),
        "response.svg": write_plot(result, result.response),
        "response.png": write_response_png(result, result.response, job.dpi),
        "response.json": (json_text(response_entries(result.response)) + "\n").encode("utf-8"),
    }


def traces_of(response: Response) -> list[Trace]:
    """Return all traces worth showing: reflections, then transmissions above -60 dB."""
    return [*match_traces(response), *transmission_traces(response)]


def trace_values(response: Response) -> list[tuple[str, ...]]:
    """Return rows of text, each trace at each spot: levels [dB], angles [deg], and their changes.

    Below -150 dB there is only what rounding leaves: such a level and its angle read "none".
    """
    return [_values(response, trace, k) for trace in traces_of(response) for k in range(len(response.spots))]


def _values(response: Response, trace: Trace, spot: int) -> tuple[str, ...]:
    both = (response.wanted_at_spots, response.as_drawn_at_spots)
    wanted, drawn = (complex(s[spot, trace.row, trace.column]) for s in both)
    levels = _with_change(_level(wanted), _level(drawn))
    *angles, turn = _with_change(_angle(wanted), _angle(drawn))
    turn = None if turn is None else (turn + 180.0) % 360.0 - 180.0
    return (
        trace.name,
        f"{response.spots[spot] / 1e9:.9g}",
        *("none" if value is None else fixed(value, 2) for value in levels),
        *("none" if value is None else fixed(value, 1) for value in (*angles, turn)),
    )


def _level(s: complex) -> float | None:
    """Return the level [dB] of an S-parameter [-]; none where it is only what rounding leaves."""
    return float(decibels(s)) if abs(s) > _ROUNDING else None


def _angle(s: complex) -> float | None:
    """Return the angle [deg] of an S-parameter [-]; none where it is only what rounding leaves."""
    return math.degrees(cmath.phase(s)) if abs(s) > _ROUNDING else None


def _with_change(first: float | None, second: float | None) -> tuple[float | None, ...]:
    """Return both values and what the second has more, where both are known."""
    return first, second, None if first is None or second is None else second - first


def write_csv(response: Response) -> bytes:
    """Return the levels [dB] of every trace over the sweep as comma-separated values."""
    traces = traces_of(response)
    heads = ["frequency_hz", *(f"{t.name} {kind} (dB)" for t in traces for kind in ("wanted", "as drawn"))]
    levels = [level.tolist() for t in traces for level in (t.wanted, t.as_drawn)]
    rows = zip(response.frequencies.tolist(), *levels, strict=True)
    lines = [",".join(heads), *(",".join([fixed(f, 3), *(fixed(v, 4) for v in row)]) for f, *row in rows)]
    return ("\n".join(lines) + "\n").encode("utf-8")


def write_plot(result: Result, response: Response) -> bytes:
    """Return one SVG with all plots below each other: level, phase, and reflections on a Smith chart."""
    design = result.circuit.file.design
    parts, y = [], 10
    for title, height, plot in _plots(response, design.band):
        parts.append(f'<text x="20" y="{y + 18}" font-size="15">{escape(title)}</text>')
        size = f'<svg x="10" y="{y + 26}" height="{height}" width="{_WIDTH}" preserveAspectRatio="xMinYMin" '
        parts.append(plot.replace("<svg ", size, 1))
        y += height + 40
    head = (
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{_WIDTH + 20}" height="{y}" role="img">'
        f"<title>{escape(design.title)}: response</title><style>{_STYLE}</style>"
        '<rect width="100%" height="100%" fill="#fbf8f1"/>'
    )
    return ("".join([head, *parts]) + "</svg>\n").encode("utf-8")


def _plots(response: Response, band: tuple[float, float]) -> Iterator[tuple[str, int, str]]:
    """Yield the plots with their titles and heights."""
    for name, traces in trace_groups(response):
        height = plot_height(len(traces))
        yield f"{name}, level", height, level_plot(name, response, traces, band)
        yield f"{name}, phase", height, phase_plot(name, response, traces, band)
        if name == "Reflection":
            height = smith_height(len(traces))
            yield "Reflection on a Smith chart", height, smith_plot(name, response, traces)
