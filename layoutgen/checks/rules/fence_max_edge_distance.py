"""The fence stands close behind the pour's edge.

What: the axis of each fence via is at most ``fence.max_edge_distance`` from the pour's edge.
Why: the copper between edge and fence is a stub of its own; the wider, the lower its resonance.
How measured: from the axis to the nearest outline of the finished pour, exact; vias set for the pour at
large or for parts are not fence vias. That the vias near an edge that faces a line follow each other
closely is ``fence.max_pitch``. A micrometre above the limit passes (arcs of the pour may be drawn as
chords).
Source: the limit is the rule file's; common practice, no source.
"""

from __future__ import annotations

from collections.abc import Iterator

import shapely

from layoutgen.checks.board import Board, Drill
from layoutgen.checks.fences import pour_rim, unfenced
from layoutgen.checks.nodes import GROUND
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm, named
from layoutgen.checks.planar import Geometry, middle
from layoutgen.checks.records import NotChecked

__all__ = ["RULE"]

NAME = "fence.max_edge_distance"
_TOLERANCE_NM = 1_000.0


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each fence via too far behind the edge."""
    limit = board.limits.nm(NAME)
    if limit is None:
        return
    if (reason := unfenced(board)) is not None:
        yield NotChecked(NAME, reason)
        return
    rim = pour_rim(board)
    for via in board.vias:
        if via.purpose == "fence":
            yield from _behind(via, rim, limit)


def _behind(via: Drill, rim: Geometry, limit: float) -> Iterator[Hit]:
    """Yield the hit of one fence via, when it stands too far behind the edge."""
    axis = shapely.Point(via.x, via.y)
    if not shapely.dwithin(rim, axis, limit + _TOLERANCE_NM):
        distance = float(axis.distance(rim))
        yield Hit(
            rule=NAME,
            text=f"axis of {via.item} is {mm(distance)} behind the pour's edge, at most {mm(limit)}",
            items=named(via.item, "pour"),
            at=middle(axis, rim),
            measured=distance / 1e6,
            limit=limit / 1e6,
            unit="mm",
            nets=(GROUND,),
        )


RULE = Rule(names=(NAME,), find=find, needs_circuit=True)
