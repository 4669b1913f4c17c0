"""Where outlines of a drawing are chords of curves, in formats that know no curves.

An edge counts as a chord where it turns into the next one, at either end, by an angle that is small but not
nothing: chords within a micrometre of circles of 0.05 mm and more turn by less than 30 degrees, and corners
that people draw turn by more.
"""

from __future__ import annotations

import math
from collections.abc import Iterable

import numpy as np
import numpy.typing as npt
import shapely

from layoutgen.checks.board import Board
from layoutgen.checks.planar import array_of
from layoutgen.geometry import Point

__all__ = ["Chords"]

_LEAST_TURN = math.radians(0.05)
_MOST_TURN = math.radians(30.0)


class Chords:
    """The edges of a board's outlines that are chords of curves."""

    def __init__(self, board: Board) -> None:
        """Find them on all layers."""
        areas = [*board.cutouts, *board.openings, *board.legend]
        polygons = [piece.polygon for layer in board.layers for piece in layer.pieces]
        polygons += [area.polygon for area in areas]
        polygons += [] if board.outline is None else [board.outline]
        self._tree = shapely.STRtree(_chords(polygons))

    def near(self, at: Point, reach: float) -> bool:
        """Tell whether there is a chord of a curve within a distance [nm] of a place."""
        return len(self._tree.query(shapely.Point(at), predicate="dwithin", distance=reach)) > 0


def _chords(polygons: Iterable[shapely.Polygon]) -> npt.NDArray[np.object_]:
    """Return the edges that are chords of curves as line strings."""
    rings = shapely.get_rings(array_of(list(polygons)))
    found = []
    for ring in rings:
        points = shapely.get_coordinates(ring)[:-1]
        edges = np.roll(points, -1, axis=0) - points
        before = np.roll(edges, 1, axis=0)
        cross = before[:, 0] * edges[:, 1] - before[:, 1] * edges[:, 0]
        turn = np.abs(np.arctan2(cross, (before * edges).sum(axis=1)))
        soft = (turn > _LEAST_TURN) & (turn < _MOST_TURN)
        of_curve = soft | np.roll(soft, -1)
        found.append(np.stack((points, np.roll(points, -1, axis=0)), axis=1)[of_curve])
    ends = np.concatenate(found) if found else np.zeros((0, 2, 2))
    return np.asarray(shapely.linestrings(ends), dtype=object) if len(ends) else array_of([])
