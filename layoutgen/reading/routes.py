"""The route of a hint: lengths and turns in alternation."""

from __future__ import annotations

import math
import re
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from pydantic_core import PydanticCustomError

from layoutgen.reading.kinds import Kind, refused
from layoutgen.reading.quantities import Quantity
from layoutgen.reading.wording import describe
from layoutgen.units import QuantityError, parse_heading, parse_quantity

__all__ = ["Route", "RouteKind"]


@dataclass(frozen=True, slots=True)
class Route:
    """The centre-line asked for by a hint: ``lengths[0]``, turn by ``turns[0]``, ``lengths[1]``, ...

    Args:
        lengths: From vertex to vertex of the unmitred centre-line [m]; None where free. One more than turns.
        turns: At the vertices between [deg]; left is positive, right negative.
    """

    lengths: tuple[float | None, ...]
    turns: tuple[float, ...]


_TURN = re.compile(r"(left|right)(?: (.+))?")


@dataclass(frozen=True)
class RouteKind(Kind):
    """A list of lengths and turns in alternation, read into a :class:`Route`."""

    @property
    def allowed(self) -> str:
        """Return the form with an example."""
        return (
            'lengths (or "*" for free) and turns ("left", "right", "left 45 deg") in alternation, a length '
            'first and last, such as ["4 mm", "left", "*"]'
        )

    def read(self, value: object) -> Route:
        """Return the route."""
        if isinstance(value, str) or not isinstance(value, Sequence):
            raise self.refuse(value)
        lengths = tuple(self._length(item) for item in value[::2])
        turns = tuple(self._turn(item) for item in value[1::2])
        if len(lengths) != len(turns) + 1:
            raise self.refuse(value, "not ending with a length" if value else "")
        return Route(lengths, turns)

    def _length(self, item: object) -> float | None:
        """Return a length [m], None for ``"*"``."""
        if item == "*":
            return None
        if isinstance(item, str) and _TURN.fullmatch(item):
            raise refused(f"the turn {describe(item)} where a length belongs", self.allowed)
        try:
            return Quantity("length").read(item).real
        except PydanticCustomError as error:
            raise refused(f"the length {(error.context or {})['found']}", self.allowed) from None

    def _turn(self, item: object) -> float:
        """Return a turn [deg], left positive."""
        match = _TURN.fullmatch(item) if isinstance(item, str) else None
        if match is None:
            raise refused(f"{describe(item)} where a turn belongs", self.allowed)
        side = 1.0 if match[1] == "left" else -1.0
        return side * (90.0 if match[2] is None else self._turn_angle(str(item), match[2]))

    def _turn_angle(self, item: str, text: str) -> float:
        """Return the size of a turn [deg], 0 < turn < 180."""
        try:
            degrees = parse_heading(text) if parse_quantity(text, "angle") > 0.0 else 0.0
        except QuantityError as error:
            raise refused(f"the turn {describe(item)}, {error.found}", self.allowed) from None
        if not 0.0 < degrees < 180.0 or parse_quantity(text, "angle") >= math.pi:
            raise refused(f"the turn {describe(item)}", f"{self.allowed}; turns > 0 deg and < 180 deg")
        return degrees

    def json(self) -> dict[str, Any]:
        """Return a list of strings."""
        item = {"type": "string", "description": 'length, "*", "left", "right" or "left 45 deg"'}
        return {"type": "array", "minItems": 1, "items": item}
