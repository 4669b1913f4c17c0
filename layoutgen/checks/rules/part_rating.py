"""No part is loaded beyond its rating by the bias.

What: direct voltage across each two-pad part, direct current through it and power in it are at most what
its ``rating`` gives, each where given.
Why: a capacitor beyond its voltage fails short, a resistor beyond its power drifts and burns.
How measured: from the DC solution; power is current squared times resistance for resistors, times
``series_resistance`` for inductors, voltage times current for other kinds. One part in a million above
passes. Parts with pins and RF loads are not looked at.
Source: the ratings are the circuit file's.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.artwork import Artwork
from layoutgen.checks.board import Board
from layoutgen.checks.outcome import Hit, Outcome, Rule, named
from layoutgen.checks.records import NotChecked
from layoutgen.reading import Part

__all__ = ["RULE"]

NAME = "part.rating"
_UNITS = {"voltage": "V", "current": "A", "power": "W"}


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each rating that is exceeded."""
    if board.artwork is None:
        return
    for name, part in board.artwork.placement.sized.circuit.file.parts.items():
        if part.rating is None:
            continue
        if part.nets is None:
            yield NotChecked(f"{NAME} ({name})", "ratings of parts with pins are not looked at")
            continue
        yield from _part(board.artwork, name, part, part.nets)


def _part(artwork: Artwork, name: str, part: Part, nets: tuple[str, str]) -> Iterator[Hit]:
    """Yield the hits of one two-pad part."""
    dc = artwork.placement.sized.circuit.dc
    volts = abs(dc.voltages.get(nets[0], 0.0) - dc.voltages.get(nets[1], 0.0))
    current = abs(dc.currents.get(name, 0.0))
    loads = {"voltage": volts, "current": current, "power": _power(part, volts, current)}
    placed = artwork.placement.parts.get(name)
    for what, load in loads.items():
        limit = getattr(part.rating, what)
        if limit is not None and load > limit * (1.0 + 1e-6):
            unit = _UNITS[what]
            yield Hit(
                rule=NAME,
                text=f"{what} of {name} is {load:.4g} {unit}, at most {limit:g} {unit}",
                items=(name,),
                at=None if placed is None else (placed.x, placed.y),
                measured=load,
                limit=limit,
                unit=unit,
                nets=named(*nets),
            )


def _power(part: Part, volts: float, current: float) -> float:
    """Return the power [W] that the bias leaves in a part."""
    if part.kind == "resistor":
        return current**2 * (part.value or 0.0)
    return current**2 * part.series_resistance if part.kind == "inductor" else volts * current


RULE = Rule(names=(NAME,), find=find, keyless=True, needs_circuit=True)
