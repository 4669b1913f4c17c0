"""The legend's strokes are wide enough to print.

What: the width of the legend's strokes between facing edges is at least ``legend.min_line``.
Why: thinner strokes break up or do not stick.
How measured: exactly, on the joined strokes; two places of one outline less than 3.5 limits apart along it
are a corner and are not counted. 10 nm short of the limit passes.
Source: the limit is the board house's.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import shapely

from layoutgen.checks.board import Board
from layoutgen.checks.drawn import joined
from layoutgen.checks.facing import edges_of, facing
from layoutgen.checks.outcome import Outcome, Rule, named, too_small
from layoutgen.checks.planar import CORNER_LIMITS, TOLERANCE_NM, whole

__all__ = ["RULE"]

NAME = "legend.min_line"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each stroke that is too thin."""
    limit = board.limits.nm(NAME)
    if limit is None or not board.legend:
        return
    places = facing(
        edges_of(joined(board.legend)), limit - TOLERANCE_NM, CORNER_LIMITS * limit, across_copper=True
    )
    tree = shapely.STRtree([stroke.polygon for stroke in board.legend])
    for p, q, distance in zip(places.first, places.second, places.distance.tolist(), strict=True):
        centre = (p + q) / 2.0
        near = np.sort(tree.query(shapely.Point(centre), predicate="dwithin", distance=TOLERANCE_NM))
        items = named(*(board.legend[k].item for k in near[:1].tolist()))
        text = f"legend stroke of {' and '.join(items)} is wide only"
        yield too_small(NAME, text, distance, limit, whole(*centre.tolist()), items, (), "legend_top")


RULE = Rule(names=(NAME,), find=find)
