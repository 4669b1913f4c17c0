"""No copper joins nets that the circuit keeps apart.

What: copper and barrels of two nets do not meet, unless a line of the circuit joins the nets.
Why: it is another circuit.
How measured: from finished polygons and plated holes alone; touching is joining. Nets that lines join are
one. A line that ends on gnd is taken as cut at that end (the pour's distance, 3.5 least gaps and a width
before its via), so that the same line touching ground elsewhere is found. Copper without a net joins what
it touches. Shorts that the circuit asks for (lines that end on gnd) are listed as notes.
Source: the circuit file.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.board import Board
from layoutgen.checks.connections import Connections
from layoutgen.checks.nodes import GROUND, drawn_conductors
from layoutgen.checks.outcome import Hit, Outcome, Rule, named

__all__ = ["RULE"]

NAME = "connectivity.short"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each place where two nets meet, a note for each short that is meant."""
    for joint in Connections(board).joints():
        a, b = joint.first, joint.second
        yield Hit(
            rule=NAME,
            text=f"{a.item} (net {a.net}) and {b.item} (net {b.net}) meet",
            items=named(a.item, b.item),
            at=joint.at,
            layer=joint.layer,
            nets=named(a.net or "", b.net or ""),
        )
    if board.artwork is not None:
        for line, net in drawn_conductors(board.artwork).items():
            path = board.artwork.placement.lines[line].path
            at = path[0] if board.artwork.placement.lines[line].nets[0] == GROUND else path[-1]
            text = f"line {line} joins net {net} to gnd by design"
            yield Hit(rule=NAME, text=text, items=(line,), at=at, nets=(net, GROUND), note=True)


RULE = Rule(names=(NAME,), find=find, keyless=True, needs_circuit=True)
