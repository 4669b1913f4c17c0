"""Between two holes enough board is left.

What: from wall to wall of any two holes, vias included, are at least ``holes.min_web``.
Why: a thin web breaks out, and plating bath creeps along cracked fibres.
How measured: axis to axis less both radii, exact; holes that overlap, or were drawn twice, measure
negative. One nanometre short of the limit passes.
Source: the limit is the board house's.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.board import Board
from layoutgen.checks.drills import drill_layer, near_drills
from layoutgen.checks.outcome import Outcome, Rule, named, too_small

__all__ = ["RULE"]

NAME = "holes.min_web"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each pair of holes that are too near to each other."""
    limit = board.limits.nm(NAME)
    if limit is None:
        return
    for pair in near_drills(board, limit - 1.0):
        a, b = pair.first, pair.second
        web = pair.pitch - (a.diameter + b.diameter) / 2.0
        text, nets = f"web between {a.item} and {b.item}", named(a.net or "", b.net or "")
        yield too_small(NAME, text, web, limit, pair.at, named(a.item, b.item), nets, drill_layer(a))


RULE = Rule(names=(NAME,), find=find)
