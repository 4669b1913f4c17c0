"""Lines that are not meant to couple keep apart.

What: the copper of any two lines, and the legs of one folded line, are at least
``spacing.min_line_heights`` substrate heights apart.
Why: at three heights two 50-ohm lines couple by about -29 dB over a quarter wave, at one by -18 dB.
How measured: edge to edge of the straight legs at their drawn width. Not counted: within 3 h of path from
a node that both lines share, beginning where other lines and pads at that node end (half the widest
line); nets joined by a part or by a line of up to 3 h count as one node, and so do the two ends of a coupled
pair beside each other (gap up to 3 h), one that is open or on gnd too, since what goes on from either cannot
but begin beside the other; legs that share a bend, and legs within 3 h of the bends between them; the strips
of a coupled pair; a radial stub against lines it meets.
Mitred corners are left to the legs beside them. 10 nm short of the limit passes.
Source: field-solved tables made for this project (coupling); three heights is common practice, no source.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.board import Board
from layoutgen.checks.neighbours import Neighbours, neighbours
from layoutgen.checks.outcome import Hit, Outcome, Rule, named
from layoutgen.checks.planar import middle

__all__ = ["RULE"]

NAME = "spacing.min_line_heights"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each pair of lines, or of legs, too near to each other."""
    limit = board.limits.number(NAME)
    if limit is None or board.artwork is None or board.height is None:
        return
    for pair in neighbours(board.artwork, limit * board.height, board.height):
        yield _hit(pair, pair.distance / board.height, limit)


def _hit(pair: Neighbours, heights: float, limit: float) -> Hit:
    """Return the hit of one pair of legs."""
    a, b = pair.first, pair.second
    what = f"legs of {a.line}" if a.line == b.line else f"{a.line} and {b.line}"
    return Hit(
        rule=NAME,
        text=f"{what} are {heights:.2f} substrate heights apart, at least {limit:g}",
        items=named(a.line, b.line),
        at=middle(pair.one, pair.other),
        measured=heights,
        limit=limit,
        unit="h",
        nets=named(*(net for net in (*a.nets, *b.nets) if net != "open")),
    )


RULE = Rule(names=(NAME,), find=find, needs_circuit=True)
