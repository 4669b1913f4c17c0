"""A tolerance analysis as files: numbers as JSON and CSV, ranges and worst contributors as a PNG."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np

from layoutgen.numbers import fixed, json_text
from layoutgen.response import Tolerance
from layoutgen.writers.plain import comma_separated
from layoutgen.writers.records import DEFAULT_DPI
from layoutgen.writers.response_png import COLOURS, figure_png

__all__ = ["tolerance_files"]

_FLOOR_DB = -60.0
_MOST_BARS = 12
_MOST_TRACES = 12
_PAPER = "#fbf8f1"


def tolerance_files(found: Tolerance, title: str, dpi: int = DEFAULT_DPI) -> dict[str, bytes]:
    """Return the files of a tolerance analysis by name.

    Args:
        found: The analysis.
        title: The design's title.
        dpi: Dots per inch of the picture [1/in].
    """
    return {
        "tolerance.json": _json(found),
        "tolerance.csv": _csv(found),
        "tolerance.png": _png(found, title, dpi),
    }


def _json(found: Tolerance) -> bytes:
    """Return yield, limits, contributors and corners, all of them."""
    report = {
        "format": 1,
        "samples": found.samples,
        "seed": found.seed,
        "yield": fixed(found.yield_share),
        "limits": [
            {
                "limit": y.limit,
                "share": fixed(y.share),
                "nominal": fixed(y.nominal),
                "median": fixed(y.median),
                "worst": fixed(y.worst),
            }
            for y in found.limits
        ],
        "contributors": [
            {"name": c.name, "limit": fixed(c.limit, 9), "change": fixed(c.change), "worse_at": c.sign}
            for c in found.contributors
        ],
        "corners": [
            {"signs": dict(c.signs), "change": fixed(c.change), "passes": c.passes} for c in found.corners
        ],
    }
    return (json_text(report) + "\n").encode("utf-8")


def _csv(found: Tolerance) -> bytes:
    """Return the range of every S-parameter's magnitude over the band, one row for each frequency."""
    traces = list(_traces(found, len(found.ports) ** 2))
    heads = ["frequency_hz"]
    heads += [f"{name} {kind} (dB)" for name, *_ in traces for kind in ("least", "nominal", "most")]
    columns = [_decibels(values[:, r, c]) for _, r, c in traces for values in _ranges(found)]
    rows = zip(found.frequencies.tolist(), *(column.tolist() for column in columns), strict=True)
    return comma_separated(heads, ([fixed(f, 3), *(fixed(v, 4) for v in row)] for f, *row in rows))


def _ranges(found: Tolerance) -> tuple[Any, Any, Any]:
    return found.least, found.nominal, found.most


def _traces(found: Tolerance, most: int) -> Iterator[tuple[str, int, int]]:
    """Yield names, rows and columns: reflections, then transmissions, those that rise above -60 dB."""
    count = len(found.ports)
    places = [(k, k) for k in range(count)]
    places += [(row, column) for column in range(count) for row in range(column + 1, count)]
    shown = [p for p in places if np.max(found.most[:, *p]) > 10.0 ** (_FLOOR_DB / 20.0)]
    for row, column in shown[:most]:
        name = found.ports[row] if row == column else f"{found.ports[column]} to {found.ports[row]}"
        yield name, row, column


def _decibels(magnitude: Any) -> Any:
    return 20.0 * np.log10(np.maximum(magnitude, 10.0 ** (_FLOOR_DB / 20.0)))


def _png(found: Tolerance, title: str, dpi: int) -> bytes:
    """Return the ranges of the samples over the band beside the worst contributors."""
    from matplotlib.figure import Figure

    figure = Figure(figsize=(14.0, 5.0), dpi=dpi, facecolor=_PAPER)
    kept = f"{fixed(100.0 * found.yield_share, 1)} % of {found.samples} samples keep all limits"
    figure.suptitle(f"{title}: {kept}", fontsize=12)
    levels, bars = figure.subplots(1, 2, gridspec_kw={"width_ratios": [3, 2]})
    _draw_ranges(levels, found)
    _draw_contributors(bars, found)
    return figure_png(figure)


def _draw_ranges(axes: Any, found: Tolerance) -> None:
    f = found.frequencies / 1e9
    for k, (name, row, column) in enumerate(_traces(found, _MOST_TRACES)):
        least, nominal, most = (_decibels(values[:, row, column]) for values in _ranges(found))
        colour = COLOURS[k % len(COLOURS)]
        axes.fill_between(f, least, most, color=colour, alpha=0.2, linewidth=0.0)
        axes.plot(f, nominal, color=colour, linewidth=1.4, label=name)
    axes.set_title("Level (dB) over the band: as drawn, and the range of the samples", fontsize=10)
    axes.set_xlabel("frequency (GHz)", fontsize=8)
    axes.grid(True, color="#ddd3bf", linewidth=0.6)
    axes.legend(fontsize=7, loc="best", framealpha=0.6)


def _draw_contributors(axes: Any, found: Tolerance) -> None:
    worst = found.contributors[:_MOST_BARS][::-1]
    axes.barh([c.name for c in worst], [c.change for c in worst], color=COLOURS[0])
    axes.set_title("Largest change of S by one quantity at its limit", fontsize=10)
    axes.grid(True, axis="x", color="#ddd3bf", linewidth=0.6)
