"""Vias keep their distance from each other.

What: from axis to axis of any two vias are at least ``vias.min_pitch``.
Why: a row of holes too close together is a row of perforations.
How measured: axis to axis, exact; two vias at one place measure 0. One nanometre short of the limit
passes.
Source: the limit is the board house's.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.board import Board
from layoutgen.checks.drills import near_drills
from layoutgen.checks.outcome import Outcome, Rule, named, too_small

__all__ = ["RULE"]

NAME = "vias.min_pitch"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each pair of vias that are too near to each other."""
    limit = board.limits.nm(NAME)
    if limit is None or not board.vias:
        return
    smallest = min(via.diameter for via in board.vias)
    for pair in near_drills(board, limit - smallest):
        a, b = pair.first, pair.second
        if a.is_via and b.is_via and pair.pitch < limit - 1.0:
            text, nets = f"pitch of {a.item} and {b.item}", named(a.net or "", b.net or "")
            yield too_small(
                NAME, text, pair.pitch, limit, pair.at, named(a.item, b.item), nets, "drill_plated"
            )


RULE = Rule(names=(NAME,), find=find)
