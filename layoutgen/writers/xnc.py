"""XNC drill files by the open specification: plated and non-plated holes, each in a file of its own.

Millimetres with six decimals and a point, so that every middle and diameter is exact. Diameters are finished
ones. Holes of one diameter and one function share a tool; tools are in order of function, then of diameter.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from functools import partial

from layoutgen.numbers import mm
from layoutgen.writers.gerber import software
from layoutgen.writers.records import Job, Result

__all__ = ["XNC_WRITERS", "has_hits", "hits_of", "write_xnc"]

Hits = dict[tuple[str, int], list[tuple[int, int]]]
"""Middles [nm] of the holes by their function and finished diameter [nm]."""

_VIA, _COMPONENT, _MECHANICAL = "ViaDrill", "ComponentDrill", "MechanicalDrill"


def write_xnc(result: Result, job: Job, plated: bool) -> bytes:
    """Return the drill file of the plated or of the other holes."""
    hits = hits_of(result, plated)
    return ("\n".join([*_header(hits, job, plated), *_body(hits), "M30"]) + "\n").encode("ascii")


XNC_WRITERS: dict[str, Callable[[Result, Job], bytes]] = {
    "{stem}_drill_plated.xnc": partial(write_xnc, plated=True),
    "{stem}_drill_nonplated.xnc": partial(write_xnc, plated=False),
}
"""File names and their writers."""


def hits_of(result: Result, plated: bool) -> Hits:
    """Return the holes by function and diameter, in the order of the result's lists."""
    hits: Hits = {}
    for via in result.artwork.vias if plated else ():
        hits.setdefault((_VIA, via.drill), []).append((via.x, via.y))
    for hole in result.artwork.holes:
        if hole.plated is plated:
            function = _COMPONENT if plated and hole.net else _MECHANICAL
            hits.setdefault((function, hole.diameter), []).append((hole.x, hole.y))
    return {key: hits[key] for key in sorted(hits, key=lambda key: (_order(key[0]), key[1]))}


def has_hits(result: Result, plated: bool) -> bool:
    """Tell whether there is any hole of that kind."""
    return bool(hits_of(result, plated))


def _order(function: str) -> int:
    return (_VIA, _COMPONENT, _MECHANICAL).index(function)


def _header(hits: Hits, job: Job, plated: bool) -> Iterator[str]:
    """Yield the header: attributes as comments, unit, tools."""
    kind = "Plated,1,2,PTH" if plated else "NonPlated,1,2,NPTH"
    yield "M48"
    yield f"; #@! TF.GenerationSoftware,{software()}"
    yield f"; #@! TF.FileFunction,{kind}"
    yield "; finished diameters; origin at the board's south-west corner, seen from the top"
    yield "METRIC"
    for number, (function, diameter) in enumerate(hits, start=1):
        yield f"; #@! TA.AperFunction,{function}"
        yield f"T{number:02d}C{mm(diameter)}"
    if hits:
        yield "; #@! TD"
    yield "%"


def _body(hits: Hits) -> Iterator[str]:
    """Yield the hits, tool by tool."""
    yield "G05"
    for number, places in enumerate(hits.values(), start=1):
        yield f"T{number:02d}"
        yield from (f"X{mm(x)}Y{mm(y)}" for x, y in places)
