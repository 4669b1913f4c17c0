"""Every hole has a drill that the board house stocks.

What: the diameter of each via and hole is one of ``holes.drills``.
Why: any other diameter has to be asked for, or is quietly replaced by a neighbour.
How measured: the diameter as drawn, finished, equal to half a nanometre.
Source: the list is the board house's.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.board import Board
from layoutgen.checks.drills import drill_layer
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm, named

__all__ = ["RULE"]

NAME = "holes.drills"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each hole whose diameter is not on the list."""
    stock = [float(size) * 1e9 for size in board.limits.get(NAME) or ()]
    for drill in board.drills if stock else ():
        nearest = min(stock, key=lambda size: (abs(size - drill.diameter), size))
        if abs(nearest - drill.diameter) > 0.5:
            yield Hit(
                rule=NAME,
                text=f"{drill.item} of {mm(drill.diameter)} has no drill; the nearest is {mm(nearest)}",
                items=(drill.item,),
                at=drill.at,
                measured=drill.diameter / 1e6,
                limit=nearest / 1e6,
                unit="mm",
                layer=drill_layer(drill),
                nets=named(drill.net or ""),
            )


RULE = Rule(names=(NAME,), find=find)
