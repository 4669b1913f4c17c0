"""No copper floats: pour hangs on the plane, and nothing else is left over.

What: each piece of copper hangs together with a net of the circuit; each piece of pour with the ground
plane.
Why: floating copper is a resonator that nobody meant, and it takes up charge.
How measured: from finished polygons and plated holes alone; touching is joining. The plane is the largest
copper of gnd on the bottom, or on the top where the bottom has none.
Source: common practice, no source.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from layoutgen.checks.board import Board
from layoutgen.checks.connections import Connections
from layoutgen.checks.nodes import GROUND
from layoutgen.checks.outcome import Hit, Outcome, Rule, named

__all__ = ["RULE"]

NAME = "connectivity.floating"
_TIED = frozenset(("line", "pair", "radial", "pad", "strip", "ground", "land", "plane"))


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each cluster of floating copper."""
    joined = Connections(board)
    plane = _plane(joined)
    for label in np.unique(joined.cluster).tolist():
        members = np.flatnonzero(joined.cluster == label).tolist()
        copper = [k for k in members if joined.pieces[k].role != "barrel"]
        if not copper or label == plane or any(_is_tied(joined, k) for k in copper):
            continue
        items = named(*(joined.pieces[k].item for k in copper))
        yield Hit(
            rule=NAME,
            text=f"copper of {' and '.join(items)} hangs on nothing",
            items=items,
            at=joined.centre(copper),
            layer=joined.layer_of[copper[0]],
            nets=named(*(joined.pieces[k].net or "" for k in copper)),
        )


def _plane(joined: Connections) -> int:
    """Return the cluster of the ground plane, -1 where there is none."""
    ground = [k for k, piece in enumerate(joined.pieces) if piece.node == GROUND and piece.role != "barrel"]
    bottom = [k for k in ground if joined.layer_of[k] == "copper_bottom"]
    areas = {k: joined.pieces[k].polygon.area for k in bottom or ground}
    return int(joined.cluster[max(areas, key=lambda k: (areas[k], -k))]) if areas else -1


def _is_tied(joined: Connections, k: int) -> bool:
    """Tell whether a piece belongs to a net by what it is: then a break is an open, not floating copper."""
    piece = joined.pieces[k]
    return piece.node is not None and piece.role in _TIED


RULE = Rule(names=(NAME,), find=find, keyless=True, needs_circuit=True)
