"""Vias are drilled and landed as the rule file says.

What: the drill of each via equals ``vias.drill``, its land ``vias.diameter``.
Why: a via of another size is another tool in the drill rack, or has too small a land.
How measured: the sizes of the via itself, equal to a nanometre. Whether the copper drawn around it is as
wide is ``holes.min_annular_ring``.
Source: the sizes are the board house's.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.board import Board, Drill
from layoutgen.checks.drills import drill_layer
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm, named

__all__ = ["RULE"]

DIAMETER = "vias.diameter"
DRILL = "vias.drill"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each via of another size."""
    for name in (DIAMETER, DRILL):
        wanted = board.limits.nm(name)
        for via in board.vias if wanted is not None else ():
            size = via.diameter if name == DRILL else via.land
            if wanted is not None and size is not None and abs(size - wanted) > 1.0:
                yield _hit(name, via, size, wanted)


def _hit(name: str, via: Drill, size: float, wanted: float) -> Hit:
    """Return the hit of one via."""
    what = "a drill" if name == DRILL else "a land"
    return Hit(
        rule=name,
        text=f"{via.item} has {what} of {mm(size)}, not {mm(wanted)}",
        items=(via.item,),
        at=via.at,
        measured=size / 1e6,
        limit=wanted / 1e6,
        unit="mm",
        layer=drill_layer(via),
        nets=named(via.net or ""),
    )


RULE = Rule(names=(DIAMETER, DRILL), find=find)
