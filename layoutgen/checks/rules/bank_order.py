"""In a bank the feed meets the smallest capacitance first.

What: along the common strip, counted from the end of the feed, capacitances rise; parts of other kinds
come last.
Why: the smallest capacitor works at the highest frequency, and every millimetre before it adds
inductance.
How measured: middles of the live pads projected on the strip's centre-line, to a micrometre; parts at one
place (either side of the strip) may stand in any order.
Source: common practice, no source.
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise

import shapely

from layoutgen.checks.banks import banks
from layoutgen.checks.board import Board
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm, named
from layoutgen.checks.planar import middle

__all__ = ["RULE"]

NAME = "bank.order"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each pair of neighbours in the wrong order."""
    for bank in banks(board.artwork) if board.artwork is not None else ():
        for first, second in pairwise(bank.members):
            if first.rank > second.rank:
                text = (
                    f"{first.part} stands {mm(first.way)} from the end of {bank.feed}, before {second.part}"
                )
                yield Hit(
                    rule=NAME,
                    text=f"{text} of smaller capacitance at {mm(second.way)}",
                    items=named(first.part, second.part),
                    at=_between(first.pad, second.pad),
                    nets=(bank.net,),
                )


def _between(one: shapely.Polygon, other: shapely.Polygon) -> tuple[int, int]:
    """Return the middle between two pads [nm]."""
    return middle(one, other)


RULE = Rule(names=(NAME,), find=find, keyless=True, needs_circuit=True)
