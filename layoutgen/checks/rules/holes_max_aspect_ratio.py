"""No hole is too deep for its diameter.

What: board thickness over hole diameter, (height + 2 copper_thickness) / diameter, is at most
``holes.max_aspect_ratio``.
Why: the bath does not reach the middle of a deep narrow hole, and its plating comes out thin.
How measured: with the substrate's height and copper thickness of the circuit file; every hole. One part
in a million above the limit passes.
Source: the limit is the board house's.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.board import Board
from layoutgen.checks.drills import drill_layer
from layoutgen.checks.outcome import Hit, Outcome, Rule, named
from layoutgen.checks.records import NotChecked

__all__ = ["RULE"]

NAME = "holes.max_aspect_ratio"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each hole that is too deep."""
    limit = board.limits.number(NAME)
    if limit is None:
        return
    if board.height is None or board.thickness is None:
        yield NotChecked(NAME, "the thickness of the board is not known")
        return
    depth = board.height + 2.0 * board.thickness
    for drill in board.drills:
        ratio = depth / drill.diameter
        if ratio > limit * (1.0 + 1e-6):
            yield Hit(
                rule=NAME,
                text=f"{drill.item} is {ratio:.2f} times as deep as wide, at most {limit:g}",
                items=(drill.item,),
                at=drill.at,
                measured=ratio,
                limit=limit,
                unit="-",
                layer=drill_layer(drill),
                nets=named(drill.net or ""),
            )


RULE = Rule(names=(NAME,), find=find)
