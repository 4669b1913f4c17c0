"""A bank's first capacitor stands at the feed's end.

What: from the end of a bank's feed to the live pad of the first capacitor are at most
``bank.max_distance``.
Why: strip between feed and capacitor lengthens the quarter wave that the feed was made to be.
How measured: from the feed's end, taken across its whole width (a feeding part's pad, a port), to the
outline of the nearest capacitor's pad of the bank. 10 nm above the limit pass.
Source: the limit is the rule file's; common practice, no source.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.banks import banks
from layoutgen.checks.board import Board
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm, named
from layoutgen.checks.planar import TOLERANCE_NM, middle

__all__ = ["RULE"]

NAME = "bank.max_distance"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each bank whose first capacitor is too far away."""
    limit = board.limits.nm(NAME)
    if limit is None or board.artwork is None:
        return
    for bank in banks(board.artwork):
        capacitors = [member for member in bank.members if not member.rank[0]]
        if not capacitors:
            continue
        first = min(capacitors, key=lambda member: (bank.end.distance(member.pad), member.part))
        distance = float(bank.end.distance(first.pad))
        if distance > limit + TOLERANCE_NM:
            yield Hit(
                rule=NAME,
                text=f"pad of {first.part} {mm(distance)} from the end of {bank.feed}, at most {mm(limit)}",
                items=named(bank.feed, first.part),
                at=middle(bank.end, first.pad),
                measured=distance / 1e6,
                limit=limit / 1e6,
                unit="mm",
                nets=(bank.net,),
            )


RULE = Rule(names=(NAME,), find=find, needs_circuit=True)
