"""Pieces that are the same in both artworks but for their place."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import shapely
from shapely.affinity import translate

from layoutgen.checks.planar import farthest
from layoutgen.compare.regions import Polygons, Region

__all__ = ["Move", "moves_of"]


@dataclass(frozen=True, slots=True, eq=False)
class Move:
    """A piece before and after, and the way between [nm]."""

    before: shapely.Polygon
    after: shapely.Polygon
    way: tuple[float, float]


def moves_of(
    old: Polygons, new: Polygons, removed: Sequence[Region], added: Sequence[Region], tolerance: float
) -> list[Move]:
    """Return the pieces that were moved as a whole: the nearest pairs of one outline, each piece once.

    Args:
        old: The first artwork's pieces.
        new: The second's.
        removed: Areas of the first off the second; only pieces that have one can have moved.
        added: Areas of the second off the first.
        tolerance: How far outlines may differ [nm].
    """
    before, after = _with_regions(old, removed), _with_regions(new, added)
    if not before or not after:
        return []
    old_boxes, new_boxes = (shapely.bounds(np.array(pieces, dtype=object)) for pieces in (before, after))
    pairs = []
    for i, box in enumerate(old_boxes):
        size = np.abs((new_boxes[:, 2:] - new_boxes[:, :2]) - (box[2:] - box[:2])).max(axis=1)
        ways = ((new_boxes - box)[:, :2] + (new_boxes - box)[:, 2:]) / 2.0
        pairs += [(float(np.hypot(*ways[j])), i, int(j)) for j in np.flatnonzero(size <= 2.0 * tolerance)]
    return _matched(before, after, sorted(pairs), tolerance)


def _with_regions(pieces: Polygons, found: Sequence[Region]) -> list[shapely.Polygon]:
    """Return the pieces that hold a region."""
    if not found or not len(pieces):
        return []
    tree = shapely.STRtree(pieces)
    shapes = np.array([region.shape for region in found], dtype=object)
    return [pieces[k] for k in np.unique(tree.query(shapes, predicate="intersects")[1]).tolist()]


def _matched(
    before: list[shapely.Polygon],
    after: list[shapely.Polygon],
    pairs: list[tuple[float, int, int]],
    tolerance: float,
) -> list[Move]:
    """Return the pairs that are one outline once the way between them is taken back, the nearest first."""
    moves: list[Move] = []
    taken_old: set[int] = set()
    taken_new: set[int] = set()
    for _, i, j in pairs:
        if i in taken_old or j in taken_new:
            continue
        way = _way(before[i], after[j])
        back = translate(after[j], -way[0], -way[1])
        if farthest(back.boundary, before[i].boundary) <= tolerance:
            moves.append(Move(before[i], after[j], way))
            taken_old.add(i)
            taken_new.add(j)
    return moves


def _way(before: shapely.Polygon, after: shapely.Polygon) -> tuple[float, float]:
    """Return the way between the middles of two boxes [nm]."""
    (x0, y0, x1, y1), (u0, v0, u1, v1) = before.bounds, after.bounds
    return (u0 + u1 - x0 - x1) / 2.0, (v0 + v1 - y0 - y1) / 2.0
