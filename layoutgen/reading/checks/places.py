"""Checks of positions against the board: holes, ports, hinted parts and their pads."""

from __future__ import annotations

import math

from layoutgen.reading.circuit_records import Footprint, Hint
from layoutgen.reading.draft import Draft
from layoutgen.reading.wording import Path, quote
from layoutgen.units import quantity_text

__all__ = ["check_places"]

_EPSILON = 1e-12
"""Rounding of sums of floats, far below the grid [m]."""

Point = tuple[float, float]
_GROWING: Point = (math.inf, math.inf)
"""Size of a board that grows to what it holds [m]."""


def check_places(draft: Draft) -> None:
    """Check that everything with a place lies on the board; one that may grow only has its corner."""
    board = draft.board
    if board is None:
        return
    size = board.size or _GROWING
    for number, hole in enumerate(board.holes):
        if not _inside(hole.at, hole.diameter / 2.0, size):
            _outside(draft, ("board", "holes", number, "at"), "a hole", size)
    _check_ports(draft, size)
    for name, hint in draft.layout.hints.items() if draft.layout else ():
        if hint.at is not None:
            _check_hint(draft, name, hint, size)


def _inside(point: Point, reach: float, size: Point) -> bool:
    """Tell whether a disc lies on the board [m]."""
    return all(
        reach - _EPSILON <= place <= length - reach + _EPSILON
        for place, length in zip(point, size, strict=True)
    )


def _outside(draft: Draft, path: Path, what: str, size: Point) -> None:
    """Add a fault of a thing that is not wholly on the board."""
    if size == _GROWING:
        allowed = "x and y from 0 mm: the origin is the board's south-west corner"
    else:
        width, height = (quantity_text(length, "length") for length in size)
        allowed = f"within {width} by {height} ({draft.faults.line_of(('board', 'size'))})"
    draft.faults.add(path, f"{what} not wholly on the board", allowed)


def _check_ports(draft: Draft, size: Point) -> None:
    """Check that a port's place lies on its edge."""
    for name, port in draft.ports.items():
        if port.at is None or port.edge is None:
            continue
        length = size[1] if port.edge in ("west", "east") else size[0]
        if not 0.0 <= port.at <= length:
            raw = draft.data["ports"][name]["at"]
            upper = "" if math.isinf(length) else f" to {quantity_text(length, 'length')}"
            allowed = f"from 0 mm{upper} along the {port.edge} edge"
            draft.faults.add_value(("ports", name, "at"), raw, allowed)


def _check_hint(draft: Draft, name: str, hint: Hint, size: Point) -> None:
    """Check a hinted place, and the pads and holes of a footprint whose heading is hinted too."""
    path = ("layout", "hints", name, "at")
    if hint.at is None or draft.faults.about(path):
        return
    part = draft.parts.get(name)
    if not _inside(hint.at, 0.0, size):
        _outside(draft, path, "a place", size)
    elif part is not None and part.footprint in draft.footprints and hint.heading is not None:
        culprit = _first_outside(draft.footprints[part.footprint], hint.at, hint.heading, size)
        if culprit:
            _outside(draft, path, culprit, size)


def _first_outside(footprint: Footprint, at: Point, heading: float, size: Point) -> str | None:
    """Return the first pad or hole of a placed footprint that is not wholly on the board."""
    for pin, pad in footprint.pads.items():
        if pad.at is not None and pad.size is not None:
            corners = [
                (pad.at[0] + x * pad.size[0] / 2.0, pad.at[1] + y * pad.size[1] / 2.0)
                for x in (-1, 1)
                for y in (-1, 1)
            ]
            if not all(_inside(_placed(corner, at, heading), 0.0, size) for corner in corners):
                return f"the pad {quote(pin)}"
    for number, hole in enumerate(footprint.holes):
        if not _inside(_placed(hole.at, at, heading), hole.diameter / 2.0, size):
            return f"hole {number} of the footprint"
    return None


def _placed(point: Point, at: Point, heading: float) -> Point:
    """Return a footprint's point on the board [m]; quarter turns are exact."""
    cosine, sine = _direction(heading)
    return at[0] + cosine * point[0] - sine * point[1], at[1] + sine * point[0] + cosine * point[1]


def _direction(heading: float) -> Point:
    """Return cosine and sine of a heading [deg]."""
    quarters = {0.0: (1.0, 0.0), 90.0: (0.0, 1.0), 180.0: (-1.0, 0.0), 270.0: (0.0, -1.0)}
    radians = math.radians(heading)
    return quarters.get(heading, (math.cos(radians), math.sin(radians)))
