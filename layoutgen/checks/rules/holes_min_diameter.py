"""No hole is smaller than the smallest drill.

What: the diameter of each via and hole is at least ``holes.min_diameter``.
Why: smaller drills break, and their holes do not plate.
How measured: the diameter as drawn, finished. Exact.
Source: the limit is the board house's.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.board import Board
from layoutgen.checks.drills import drill_layer
from layoutgen.checks.outcome import Outcome, Rule, named, too_small

__all__ = ["RULE"]

NAME = "holes.min_diameter"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each hole that is too small."""
    limit = board.limits.nm(NAME)
    for drill in board.drills if limit is not None else ():
        if limit is not None and drill.diameter < limit - 0.5:
            nets = named(drill.net or "")
            text = f"{drill.item} has a diameter of"
            yield too_small(
                NAME, text, drill.diameter, limit, drill.at, (drill.item,), nets, drill_layer(drill)
            )


RULE = Rule(names=(NAME,), find=find)
