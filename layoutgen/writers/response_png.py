"""The plots of the response as one PNG: levels, phases, reflections on a Smith chart; drawn by matplotlib."""

from __future__ import annotations

import io
from collections.abc import Sequence
from typing import Any

import numpy as np
import numpy.typing as npt

from layoutgen.response import Response
from layoutgen.writers.charts import Trace, trace_groups
from layoutgen.writers.records import Result

__all__ = ["COLOURS", "figure_png", "write_response_png"]

COLOURS = ("#a2531f", "#1f6f8b", "#5b7f2b", "#7a4a91", "#b08900", "#52606d")
"""Colours of traces, in turn."""

_PAPER = "#fbf8f1"
_FLOOR_DB = -60.0
_ROW_INCHES = 3.2
_MOST_NAMES = 10  # of traces in a key

Complexes = npt.NDArray[np.complex128]
Band = tuple[float, float]


def write_response_png(result: Result, response: Response, dpi: int) -> bytes:
    """Return the PNG file: for reflection and transmission a row each, wanted dashed, as drawn solid.

    Args:
        result: Every stage's result.
        response: Its response.
        dpi: Dots per inch; the picture is fifteen inches wide [1/in].
    """
    from matplotlib.figure import Figure

    design, groups = result.circuit.file.design, trace_groups(response)
    figure = Figure(figsize=(15.0, _ROW_INCHES * len(groups) + 0.5), dpi=dpi, facecolor=_PAPER)
    figure.suptitle(f"{design.title}: wanted dashed, as drawn solid", fontsize=12)
    axes = figure.subplots(len(groups), 3, squeeze=False)
    for row, (name, traces) in zip(axes, groups, strict=True):
        _level(row[0], name, response, traces, design.band)
        _phase(row[1], name, response, traces, design.band)
        if name == "Reflection":
            _smith(row[2], response, traces)
        else:
            row[2].axis("off")
        row[0].legend(*_key(traces), fontsize=7, loc="best", framealpha=0.6)
    return figure_png(figure)


def figure_png(figure: Any) -> bytes:
    """Return a figure as a PNG file that is the same bytes for the same figure."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg

    figure.set_layout_engine("tight")
    stream = io.BytesIO()
    canvas: Any = FigureCanvasAgg(figure)
    canvas.print_png(stream, metadata={"Software": None})
    return stream.getvalue()


def _key(traces: Sequence[Trace]) -> tuple[list[Any], list[str]]:
    """Return the strokes and names of a key: the first traces, and how many more there are."""
    from matplotlib.lines import Line2D

    names = [trace.name for trace in traces[:_MOST_NAMES]]
    strokes = [Line2D([], [], color=_colour(k)) for k in range(len(names))]
    if len(traces) > _MOST_NAMES:
        names.append(f"and {len(traces) - _MOST_NAMES} more")
        strokes.append(Line2D([], [], color="none"))
    return strokes, names


def _colour(index: int) -> str:
    return COLOURS[index % len(COLOURS)]


def _level(axes: Any, name: str, response: Response, traces: Sequence[Trace], band: Band) -> None:
    _over_frequency(axes, f"{name}, level (dB)", band)
    f = response.frequencies / 1e9
    for k, trace in enumerate(traces):
        axes.plot(f, np.maximum(trace.wanted, _FLOOR_DB), "--", color=_colour(k), linewidth=1.0)
        axes.plot(f, np.maximum(trace.as_drawn, _FLOOR_DB), color=_colour(k), linewidth=1.4)


def _phase(axes: Any, name: str, response: Response, traces: Sequence[Trace], band: Band) -> None:
    _over_frequency(axes, f"{name}, phase (deg)", band)
    f = response.frequencies / 1e9
    for k, trace in enumerate(traces):
        for s, style in ((response.wanted, "--"), (response.as_drawn, "-")):
            degrees = np.degrees(np.angle(s[:, trace.row, trace.column]))
            degrees[1:][np.abs(np.diff(degrees)) > 180.0] = np.nan  # a jump lifts the pen
            axes.plot(f, degrees, style, color=_colour(k), linewidth=1.2)
    axes.set_ylim(-180.0, 180.0)
    axes.set_yticks(range(-180, 181, 60))


def _over_frequency(axes: Any, title: str, band: Band) -> None:
    axes.set_title(title, fontsize=10)
    axes.set_facecolor("white")
    axes.axvspan(band[0] / 1e9, band[1] / 1e9, color=COLOURS[0], alpha=0.16, linewidth=0.0)
    axes.grid(True, color="#ddd3bf", linewidth=0.6)
    axes.set_xlabel("frequency (GHz)", fontsize=8)
    axes.tick_params(labelsize=8)


def _smith(axes: Any, response: Response, traces: Sequence[Trace]) -> None:
    """Draw reflections on a Smith chart, each to its port's own impedance."""
    axes.set_title("Reflection on a Smith chart", fontsize=10)
    axes.set_aspect("equal")
    axes.axis("off")
    for curve in _smith_grid():
        axes.plot(curve.real, curve.imag, color="#ddd3bf", linewidth=0.6)
    for k, trace in enumerate(traces):
        for s, style in ((response.wanted, "--"), (response.as_drawn, "-")):
            gamma = s[:, trace.row, trace.column]
            axes.plot(gamma.real, gamma.imag, style, color=_colour(k), linewidth=1.2)
    axes.set_xlim(-1.05, 1.05)
    axes.set_ylim(-1.05, 1.05)


def _smith_grid() -> list[Complexes]:
    """Return circles of constant resistance and arcs of constant reactance, as reflections [-]."""
    sweep = np.tan(np.linspace(-0.4999, 0.4999, 241) * np.pi)
    curves = [r + 1j * sweep for r in (0.0, 0.2, 0.5, 1.0, 2.0, 5.0)]
    reactances = (-5.0, -2.0, -1.0, -0.5, -0.2, 0.0, 0.2, 0.5, 1.0, 2.0, 5.0)
    curves += [np.abs(sweep) + 1j * x for x in reactances]
    return [(z - 1.0) / (z + 1.0) for z in curves]
