"""No via carries more than it may.

What: the direct current through each via is at most ``vias.max_current``.
Why: a barrel's plating is thin and hidden; where it fails nobody sees it.
How measured: the current of a ground pad, or of a line or strip of a coupled pair that ends on gnd, from
the DC solution, shared equally by its own vias; of a pair's vias each belongs to the strip's end that it
stands nearest to. One part in a million above the limit passes. Crowding, and current that leaves
through other vias by way of the pour, are not looked at.
Source: the limit is the board house's; the equal share is common practice, no source.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.board import Board
from layoutgen.checks.grounding import via_currents
from layoutgen.checks.outcome import Hit, Outcome, Rule, named

__all__ = ["RULE"]

NAME = "vias.max_current"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each via that carries too much."""
    limit = board.limits.number(NAME)
    for via, current in via_currents(board) if limit is not None else ():
        if limit is not None and current > limit * (1.0 + 1e-6):
            owner = via.purpose.partition(":")[2]
            yield Hit(
                rule=NAME,
                text=f"{via.item} of {owner} carries {current:.3f} A, at most {limit:g} A",
                items=named(via.item, owner),
                at=via.at,
                measured=current,
                limit=limit,
                unit="A",
                layer="drill_plated",
                nets=named(via.net or ""),
            )


RULE = Rule(names=(NAME,), find=find, needs_circuit=True)
