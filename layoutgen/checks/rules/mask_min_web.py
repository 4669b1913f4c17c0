"""Between two mask openings a web of mask holds.

What: the mask left between openings, and between facing edges of one opening, is at least
``mask.min_web`` wide.
Why: a thinner web comes off and takes part in the soldering.
How measured: exactly, opening to opening, on the joined openings of the top; openings that overlap or
touch are one. Facing edges of one outline less than 3.5 limits apart along it are a corner and are not
counted. 10 nm short of the limit passes.
Source: the limit is the board house's.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import numpy.typing as npt
import shapely

from layoutgen.checks.board import Board
from layoutgen.checks.drawn import joined
from layoutgen.checks.facing import edges_of, facing
from layoutgen.checks.outcome import Hit, Outcome, Rule, named, too_small
from layoutgen.checks.planar import CORNER_LIMITS, TOLERANCE_NM, middle, whole
from layoutgen.geometry import Point

__all__ = ["RULE"]

NAME = "mask.min_web"
_LAYER = "soldermask_top"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each web that is too thin."""
    limit = board.limits.nm(NAME)
    if limit is None or not board.openings:
        return
    openings = joined(board.openings)
    i, j = shapely.STRtree(openings).query(
        openings, predicate="dwithin", distance=max(limit - TOLERANCE_NM, 0.0)
    )
    for a, b in sorted(zip(i[i < j].tolist(), j[i < j].tolist(), strict=True)):
        distance = float(openings[a].distance(openings[b]))
        if distance < limit - TOLERANCE_NM:
            ends = shapely.get_coordinates(shapely.shortest_line(openings[a], openings[b]))
            yield _hit(board, ends, distance, limit, middle(openings[a], openings[b]))
    places = facing(edges_of(openings), limit - TOLERANCE_NM, CORNER_LIMITS * limit, across_copper=False)
    for p, q, distance in zip(places.first, places.second, places.distance.tolist(), strict=True):
        yield _hit(board, np.array([p, q]), distance, limit, whole(*((p + q) / 2.0).tolist()))


def _hit(board: Board, ends: npt.NDArray[np.float64], distance: float, limit: float, at: Point) -> Hit:
    """Return the hit of one web between two points (2, 2) [nm], named after the copper laid bare there."""
    items = named(*(board.top.nearest_item(x, y) for x, y in ends.tolist()))
    return too_small(NAME, f"mask web at {' and '.join(items)}", distance, limit, at, items, (), _LAYER)


RULE = Rule(names=(NAME,), find=find)
