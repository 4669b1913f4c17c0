"""Holes keep away from the board's profile and from cut-outs.

What: from the wall of each via and hole to the outline and to each cut-out are at least
``holes.min_edge_distance``.
Why: a hole near the edge breaks out when the board is routed.
How measured: axis to outline less the radius, exact; negative for a hole across the edge. 10 nm short of
the limit passes.
Source: the limit is the board house's.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import shapely

from layoutgen.checks.board import Board
from layoutgen.checks.drills import drill_layer, wall_middle
from layoutgen.checks.outcome import Hit, Outcome, Rule, named, too_small
from layoutgen.checks.planar import TOLERANCE_NM
from layoutgen.checks.records import NotChecked

__all__ = ["RULE"]

NAME = "holes.min_edge_distance"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each hole that is too near to an edge."""
    limit = board.limits.nm(NAME)
    if limit is None or not board.drills:
        return
    if board.outline is None:
        yield NotChecked(NAME, "the drawing has no profile")
    else:
        yield from _at_edge(board, board.outline, "board", limit, inside=True)
    for cutout in board.cutouts:
        yield from _at_edge(board, cutout.polygon, cutout.item, limit, inside=False)


def _at_edge(board: Board, area: shapely.Polygon, item: str, limit: float, *, inside: bool) -> Iterator[Hit]:
    """Yield the holes too near to the outline (``inside``) or to a cut-out."""
    rim = area.boundary
    shapely.prepare(area)
    side = np.where(shapely.intersects(area, board.drill_points) == inside, 1.0, -1.0)
    reach = side * shapely.distance(rim, board.drill_points) - board.drill_radii
    where = "the profile" if item == "board" else f"the cut-out of {item}"
    for k in np.flatnonzero(reach < limit - TOLERANCE_NM).tolist():
        drill = board.drills[k]
        _, at = wall_middle(drill, board.drill_points[k], rim)
        text = f"wall of {drill.item} to {where}"
        items, nets = named(drill.item, item), named(drill.net or "")
        yield too_small(NAME, text, float(reach[k]), limit, at, items, nets, drill_layer(drill))


RULE = Rule(names=(NAME,), find=find)
