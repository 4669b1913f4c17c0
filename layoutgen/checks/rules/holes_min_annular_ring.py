"""Around each plated hole there is a ring of copper.

What: from the wall of each plated hole to the outline of the copper around it are at least
``holes.min_annular_ring``, on both layers.
Why: drills wander; where the ring is broken the barrel may part from its copper.
How measured: from the hole's axis to the nearest outline of the joined finished copper, less the radius,
so that a land pushed aside is found; negative where copper does not even cover the hole. A layer without
any copper is left out. 10 nm short of the limit passes.
Source: the limit is the board house's.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import shapely

from layoutgen.checks.board import Board, Layer
from layoutgen.checks.drills import wall_middle
from layoutgen.checks.outcome import Hit, Outcome, Rule, named, too_small
from layoutgen.checks.planar import TOLERANCE_NM, within

__all__ = ["RULE"]

NAME = "holes.min_annular_ring"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each plated hole with too narrow a ring."""
    limit = board.limits.nm(NAME)
    plated = [k for k, drill in enumerate(board.drills) if drill.plated]
    if limit is not None and plated:
        for layer in board.layers:
            if layer.pieces:
                yield from _rings(board, layer, plated, limit)


def _rings(board: Board, layer: Layer, plated: list[int], limit: float) -> Iterator[Hit]:
    """Yield the narrow rings of one layer."""
    points, radii = board.drill_points[plated], board.drill_radii[plated]
    rims = shapely.boundary(layer.merged)
    shapely.prepare(rims)
    spot, around = shapely.STRtree(layer.merged).query(points, predicate="intersects")
    covered = np.full(len(plated), -1)
    covered[spot] = around
    reach = np.maximum(radii + limit - TOLERANCE_NM, 0.0)
    tight = np.ones(len(plated), dtype=bool)
    inside = covered >= 0
    tight[inside] = within(rims[covered[inside]], points[inside], reach[inside])
    for k in np.flatnonzero(tight).tolist():
        drill = board.drills[plated[k]]
        ring, at = -drill.diameter / 2.0, drill.at
        if covered[k] >= 0:
            ring, at = wall_middle(drill, points[k], rims[covered[k]])
        if ring < limit - TOLERANCE_NM:
            text = f"copper around {drill.item} on {layer.name} is wide only"
            yield too_small(NAME, text, ring, limit, at, (drill.item,), named(drill.net or ""), layer.name)


RULE = Rule(names=(NAME,), find=find)
