"""The picture of a comparison: what both have in grey, removed in red, added in green, changes numbered."""

from __future__ import annotations

import io
from collections.abc import Sequence
from typing import Any

import numpy as np
import shapely

from layoutgen.compare.records import Change, Comparison
from layoutgen.foreign import ForeignArtwork

__all__ = ["overlay"]

_COPPER = ("copper_top", "copper_bottom")
_COMMON, _REMOVED, _ADDED, _RIM = "#c8c8c8", "#d1242f", "#1a7f37", "#57606a"
_INCHES = 10.0
_MOST_NUMBERS = 60


def overlay(comparison: Comparison, first: ForeignArtwork, second: ForeignArtwork, dpi: int = 150) -> bytes:
    """Return a PNG of both copper layers of two artworks on top of each other.

    Args:
        comparison: From :func:`~layoutgen.compare.compare`; its numbers are the rows of the changes.
        first: The first artwork.
        second: The second.
        dpi: Resolution [1/in]; a layer is ten inches wide.
    """
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    box = _box((first, second))
    height = _INCHES * min(2.0, max(0.2, (box[3] - box[1]) / (box[2] - box[0])))
    figure = Figure(figsize=(_INCHES, 2.0 * (height + 0.5)), dpi=dpi)
    FigureCanvasAgg(figure)
    for k, layer in enumerate(_COPPER):
        axes = figure.add_subplot(2, 1, k + 1)
        _panel(axes, layer, comparison, first, second)
        axes.set_xlim(box[0], box[2])
        axes.set_ylim(box[1], box[3])
    figure.tight_layout()
    stream = io.BytesIO()
    figure.savefig(stream, format="png", metadata={"Software": None})
    return stream.getvalue()


def _box(artworks: Sequence[ForeignArtwork]) -> tuple[float, float, float, float]:
    """Return the box about all that is drawn [mm], with a margin."""
    shapes = [p for artwork in artworks for name in (*_COPPER, "profile") for p in artwork.layers[name]]
    x0, y0, x1, y1 = (shapely.total_bounds(np.array(shapes, dtype=object)) / 1e6).tolist()
    margin = 0.02 * max(x1 - x0, y1 - y0)
    return x0 - margin, y0 - margin, x1 + margin, y1 + margin


def _panel(
    axes: Any, layer: str, comparison: Comparison, first: ForeignArtwork, second: ForeignArtwork
) -> None:
    """Draw one copper layer."""
    old, new = (shapely.union_all(list(artwork.layers[layer])) for artwork in (first, second))
    for shape, colour in (
        (old.intersection(new), _COMMON),
        (old.difference(new), _REMOVED),
        (new.difference(old), _ADDED),
    ):
        _fill(axes, shape, colour)
    for artwork in (first, second):
        for outline in artwork.profile:
            axes.plot(*(np.array(outline.exterior.coords).T / 1e6), color=_RIM, linewidth=0.8)
    _number(axes, comparison.changes, layer)
    axes.set_aspect("equal")
    axes.set_title(f"{layer}: grey both, red only {first.file}, green only {second.file}", fontsize=8)
    axes.tick_params(labelsize=7)


def _fill(axes: Any, shape: shapely.Geometry, colour: str) -> None:
    """Fill a shape [nm], its holes left open."""
    from matplotlib.patches import PathPatch
    from matplotlib.path import Path

    areas = [part for part in shapely.get_parts(shape) if part.geom_type == "Polygon"]
    if areas:
        rings = [Path(np.array(ring.coords) / 1e6, closed=True) for ring in shapely.get_rings(areas)]
        patch = PathPatch(Path.make_compound_path(*rings), facecolor=colour, edgecolor=colour, linewidth=0.3)
        axes.add_patch(patch)


def _number(axes: Any, changes: Sequence[Change], layer: str) -> None:
    """Write the changes' numbers at their places."""
    shown = [(n, change) for n, change in enumerate(changes, start=1) if change.layer == layer]
    for n, change in shown[:_MOST_NUMBERS]:
        x, y = change.at[0] / 1e6, change.at[1] / 1e6
        axes.plot([x], [y], marker="o", markersize=8, markerfacecolor="none", markeredgecolor=_RIM)
        axes.annotate(str(n), (x, y), textcoords="offset points", xytext=(6, 6), fontsize=7)
