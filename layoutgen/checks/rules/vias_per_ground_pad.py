"""Each ground pad has vias of its own.

What: each pad on gnd has at least ``vias.per_ground_pad`` vias of its own; pads that meet a carrier have
none.
Why: a via shared by two parts couples them, and one via has twice the inductance of two.
How measured: vias set for the pad's part whose lands meet the pad or the ground copper that joins it to
them; of two ground pads of one part the nearer one counts a via. Lines that end on gnd are not pads.
Source: the number is the rule file's; two or more is common practice (IC makers' layout notes).
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.board import Board
from layoutgen.checks.grounding import ground_pads
from layoutgen.checks.nodes import GROUND
from layoutgen.checks.outcome import Hit, Outcome, Rule

__all__ = ["RULE"]

NAME = "vias.per_ground_pad"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each ground pad with too few vias."""
    limit = board.limits.number(NAME)
    for pad in ground_pads(board) if limit is not None else ():
        if limit is not None and len(pad.vias) < limit:
            where = f"pad {pad.pin} of {pad.part}" if pad.pin else f"the ground pad of {pad.part}"
            yield Hit(
                rule=NAME,
                text=f"{where} has {len(pad.vias)} vias of its own, at least {limit:g}",
                items=(pad.part,),
                at=pad.at,
                measured=float(len(pad.vias)),
                limit=limit,
                unit="-",
                nets=(GROUND,),
            )


RULE = Rule(names=(NAME,), find=find, needs_circuit=True)
