"""The fence stands close behind the pour's edge.

What: the axis of each fence via is at most ``fence.max_edge_distance`` from a pour edge that faces a line.
Why: the copper between edge and fence is a stub of its own; the wider, the lower its resonance.
How measured: from the axis to the nearest stretch of pour edge that faces a line (see ``fence.max_pitch``),
exact; vias set for the pour at large or for parts are not fence vias. A micrometre above the limit passes (edges of
the pour may be arcs, drawn as chords within a micrometre).
Source: the limit is the rule file's; common practice, no source.
"""

from __future__ import annotations

from collections.abc import Iterator

import shapely

from layoutgen.checks.board import Board, Drill, middle
from layoutgen.checks.fences import Stretch, fenced, stretches
from layoutgen.checks.nodes import GROUND
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm, named
from layoutgen.checks.records import NotChecked

__all__ = ["RULE"]

NAME = "fence.max_edge_distance"
_TOLERANCE_NM = 1_000.0


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each fence via too far behind the edge."""
    limit = board.limits.nm(NAME)
    if limit is None:
        return
    if not fenced(board):
        yield NotChecked(NAME, "the circuit asks for no fence")
        return
    edges = stretches(board)
    for via in board.vias:
        if via.purpose == "fence":
            yield from _behind(via, edges, limit)


def _behind(via: Drill, edges: list[Stretch], limit: float) -> Iterator[Hit]:
    """Yield the hit of one fence via, when it stands too far behind the edge."""
    axis = shapely.Point(via.x, via.y)
    if not edges:
        text = f"{via.item} is a fence via, but no pour edge faces a line"
        yield Hit(rule=NAME, text=text, items=named(via.item, "pour"), at=via.at, nets=(GROUND,))
        return
    nearest = min(edges, key=lambda stretch: axis.distance(stretch.way))
    distance = float(axis.distance(nearest.way))
    if distance > limit + _TOLERANCE_NM:
        yield Hit(
            rule=NAME,
            text=f"axis of {via.item} is {mm(distance)} behind the pour's edge, at most {mm(limit)}",
            items=named(via.item, "pour"),
            at=middle(axis, nearest.way),
            measured=distance / 1e6,
            limit=limit / 1e6,
            unit="mm",
            nets=(GROUND,),
        )


RULE = Rule(names=(NAME,), find=find, needs_circuit=True)
