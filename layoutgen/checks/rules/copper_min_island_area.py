"""No small scrap of copper is left that belongs to nothing.

What: each piece of copper that holds no line, strip, pad or land has at least ``copper.min_island_area``.
Why: a small scrap may come off in the etch bath and land where it shorts something.
How measured: the area of the joined copper. Copper of the circuit itself, and copper that the barrel of a
plated hole holds, may be as small as it is. On drawings of unknown origin all other copper is judged. One
part in a million below the limit passes.
Source: the limit is the board house's.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
import shapely

from layoutgen.checks.board import Board, Layer
from layoutgen.checks.outcome import Hit, Outcome, Rule, named
from layoutgen.checks.planar import whole

__all__ = ["RULE"]

NAME = "copper.min_island_area"
_WANTED = frozenset(("line", "pair", "radial", "pad", "strip", "land", "ground"))


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each island."""
    limit = board.limits.number(NAME)
    if limit is not None:
        for layer in board.layers:
            yield from _islands(board, layer, limit * 1e18)


def _islands(board: Board, layer: Layer, limit: float) -> Iterator[Hit]:
    """Yield the islands of one layer; the limit is an area [nm^2]."""
    areas = shapely.area(layer.merged)
    small = np.flatnonzero(areas < limit * (1.0 - 1e-6))
    wanted = np.array([piece.role in _WANTED for piece in layer.pieces], dtype=bool)
    island, member = layer.tree.query(layer.merged[small], predicate="intersects")
    plated = board.drill_points[[k for k, drill in enumerate(board.drills) if drill.plated]]
    held, _ = shapely.STRtree(plated).query(layer.merged[small], predicate="intersects")
    used = np.isin(np.arange(len(small)), np.concatenate((island[wanted[member]], held)))
    for n in np.flatnonzero(~used).tolist():
        k, shape = small[n], layer.merged[small[n]]
        inside = [layer.pieces[m] for m in np.sort(member[island == n]).tolist()]
        items = named(*(piece.item for piece in inside))
        spot = shape.representative_point()
        yield Hit(
            rule=NAME,
            text=f"island of {areas[k] / 1e12:.4f} mm^2, at least {limit / 1e12:.4f} mm^2",
            items=items,
            at=whole(spot.x, spot.y),
            measured=float(areas[k]) / 1e12,
            limit=limit / 1e12,
            unit="mm^2",
            layer=layer.name,
            nets=named(*(piece.net or "" for piece in inside)),
        )


RULE = Rule(names=(NAME,), find=find)
