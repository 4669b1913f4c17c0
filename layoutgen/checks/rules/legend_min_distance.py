"""The legend keeps off pads and mask openings.

What: from the legend to each mask opening and to each pad are at least ``legend.min_distance``.
Why: ink on a pad keeps solder away.
How measured: exactly, polygon to polygon; legend on an opening measures 0. 10 nm short of the limit
passes.
Source: the limit is the board house's.
"""

from __future__ import annotations

from collections.abc import Iterator

import shapely

from layoutgen.checks.board import Area, Board
from layoutgen.checks.outcome import Outcome, Rule, named, too_small
from layoutgen.checks.planar import TOLERANCE_NM, middle

__all__ = ["RULE"]

NAME = "legend.min_distance"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each stroke of the legend too near to an opening or pad."""
    limit = board.limits.nm(NAME)
    pads = [Area(piece.polygon, piece.item) for piece in board.top.pieces if piece.role == "pad"]
    targets = [*board.openings, *pads]
    if limit is None or not board.legend or not targets:
        return
    tree = shapely.STRtree([target.polygon for target in targets])
    strokes = [stroke.polygon for stroke in board.legend]
    i, j = tree.query(strokes, predicate="dwithin", distance=max(limit - TOLERANCE_NM, 0.0))
    for a, b in sorted(zip(i.tolist(), j.tolist(), strict=True)):
        stroke, target = board.legend[a], targets[b]
        distance = float(stroke.polygon.distance(target.polygon))
        if distance < limit - TOLERANCE_NM:
            at = middle(stroke.polygon, target.polygon)
            bare = board.top.nearest_item(*at) if target.item == "board" else target.item
            text, items = f"legend of {stroke.item} to {bare}", named(stroke.item, bare)
            yield too_small(NAME, text, distance, limit, at, items, (), "legend_top")


RULE = Rule(names=(NAME,), find=find)
