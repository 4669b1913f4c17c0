"""The kinds of value that the two files hold: each reads one TOML value and can say what it allows.

A kind is attached to a record's field by ``Annotated``; pydantic calls :meth:`Kind.read` for the value and
:meth:`Kind.json` for the JSON Schema, and the wording of faults takes :attr:`Kind.allowed`.
"""

from __future__ import annotations

import datetime
import math
import re
import unicodedata
from abc import ABC, abstractmethod
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, Literal

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler, ValidationInfo
from pydantic_core import CoreSchema, PydanticCustomError, core_schema

from layoutgen.reading.wording import describe
from layoutgen.units import (
    DIMENSIONS,
    Dimension,
    QuantityError,
    all_units,
    parse_heading,
    parse_quantity,
    quantity_text,
    units_of,
)

__all__ = [
    "Date",
    "FreeLength",
    "Heading",
    "Kind",
    "Name",
    "Number",
    "PartValue",
    "Quantity",
    "RelativePath",
    "Route",
    "RouteKind",
    "Text",
    "WholeNumber",
    "refused",
]

NAME_PATTERN = r"[A-Za-z0-9_-]{1,64}"
MAX_TEXT = 200
_NUMBER_PATTERN = r"[+-]?([0-9]+(\.[0-9]*)?|\.[0-9]+)([eE][+-]?[0-9]+)?"
_COMPLEX_PATTERN = (
    rf"({_NUMBER_PATTERN}( ?[+-] ?([0-9]+(\.[0-9]*)?|\.[0-9]+)([eE][+-]?[0-9]+)?j)?|{_NUMBER_PATTERN}j)"
)

_LARGEST: dict[Dimension, float] = {
    "length": 2.0,  # GDSII counts nanometres in 32 bits: 2.147 m
    "area": 4.0,
    "frequency": 1e13,
    "time": 1e6,
    "resistance": 1e12,
    "impedance": 1e12,
    "capacitance": 1.0,
    "inductance": 1e3,
    "voltage": 1e6,
    "current": 1e5,
    "power": 1e6,
    "conductivity": 1e12,
    "current_density": 1e15,
    "angle": math.radians(36_000.0),
    "temperature": 1e4,
    "thermal_resistance": 1e6,
    "fraction": 10.0,
    "level": 1e3,
}
_SMALLEST: dict[Dimension, float] = {
    "length": 1e-9,  # one step of the artwork's grid
    "area": 1e-18,
    "frequency": 1.0,
    "time": 1e-18,
    "resistance": 1e-6,
    "impedance": 1e-6,
    "capacitance": 1e-21,
    "inductance": 1e-18,
    "conductivity": 1.0,
    "angle": 1e-6,
    "thermal_resistance": 1e-6,
}


def refused(found: str, allowed: str) -> PydanticCustomError:
    """Return the error of a value that is not allowed, carrying both phrases of a fault."""
    return PydanticCustomError(
        "refused", "found {found}; allowed: {allowed}", {"found": found, "allowed": allowed}
    )


class Kind(ABC):
    """A kind of value: how it is read, what it allows, its JSON Schema."""

    @property
    @abstractmethod
    def allowed(self) -> str:
        """What the kind allows, as a phrase that follows "allowed:"."""

    @abstractmethod
    def read(self, value: object) -> Any:
        """Return the value for the record; raise :func:`refused` when it is not allowed."""

    @abstractmethod
    def json(self) -> dict[str, Any]:
        """Return the JSON Schema of the value as written in the file."""

    def refuse(self, value: object, why: str = "") -> PydanticCustomError:
        """Return the error for a value, with the reason after its quote."""
        return refused(describe(value) + (f", {why}" if why else ""), self.allowed)

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        """Let pydantic read the value by :meth:`read`."""
        return core_schema.no_info_plain_validator_function(self.read)

    def __get_pydantic_json_schema__(
        self, schema: CoreSchema, handler: GetJsonSchemaHandler
    ) -> dict[str, Any]:
        """Let pydantic describe the value by :meth:`json`."""
        return self.json()


@dataclass(frozen=True)
class Quantity(Kind):
    """Text with a unit; the record holds SI (a complex value for impedances, bounded in its real part).

    Args:
        dimension: What is measured.
        sign: ``"positive"`` (the default), ``"not negative"``, ``"not positive"`` or ``"any"``.
        below: The value must be smaller than this, in SI; None for no limit beyond plausibility.
    """

    dimension: Dimension
    sign: Literal["positive", "not negative", "not positive", "any"] = "positive"
    below: float | None = None
    below_text: str = ""

    @property
    def allowed(self) -> str:
        """Return phrase, sign, example and units."""
        info = DIMENSIONS[self.dimension]
        part = " whose real part is" if self.dimension == "impedance" else ""
        bound = {"positive": " > 0", "not negative": " >= 0", "not positive": " <= 0", "any": ""}[self.sign]
        upper = f" and < {self.below_text}" if self.below is not None else ""
        units = ", ".join(units_of(self.dimension))
        example = info.example.lstrip("-") if self.sign in ("positive", "not negative") else info.example
        return f'{info.phrase}{part}{bound}{upper} with its unit ({units}), such as "{example}"'

    def read(self, value: object) -> float | complex:
        """Return the SI value."""
        if not isinstance(value, str):
            raise self.refuse(value, "without a unit" if _is_number(value) else "")
        try:
            quantity = parse_quantity(value, self.dimension)
        except QuantityError as error:
            raise self.refuse(value, error.found) from None
        self._check(value, quantity.real)
        if abs(quantity.imag) > _LARGEST[self.dimension]:
            raise self._implausible(value)
        return quantity

    def _check(self, text: str, value: float) -> None:
        """Raise when the sign or the size is not allowed."""
        wrong_sign = (
            (self.sign == "positive" and value <= 0.0)
            or (self.sign == "not negative" and value < 0.0)
            or (self.sign == "not positive" and value > 0.0)
        )
        if wrong_sign or (self.below is not None and value >= self.below):
            raise self.refuse(text)
        small = 0.0 < abs(value) < _SMALLEST.get(self.dimension, 0.0) and self.sign == "positive"
        if small or abs(value) > _LARGEST[self.dimension]:
            raise self._implausible(text)

    def _implausible(self, text: str) -> PydanticCustomError:
        """Return the error of a value that no board has and no file format holds."""
        smallest = _SMALLEST.get(self.dimension) if self.sign == "positive" else None
        lower = "up to " if smallest is None else f"{quantity_text(smallest, self.dimension)} to "
        largest = quantity_text(_LARGEST[self.dimension], self.dimension)
        return refused(f"{describe(text)}, beyond any board", lower + largest)

    def json(self) -> dict[str, Any]:
        """Return a string whose pattern holds the closed list of units."""
        number = _COMPLEX_PATTERN if self.dimension == "impedance" else _NUMBER_PATTERN
        units = "|".join(re.escape(unit) for unit in all_units(self.dimension))
        info = DIMENSIONS[self.dimension]
        return {
            "type": "string",
            "pattern": f"^{number} ?({units})$",
            "examples": [info.example],
            "x-dimension": self.dimension,
            "x-held-in": info.si,
        }


def _is_number(value: object) -> bool:
    """Tell whether a value is a TOML number."""
    return isinstance(value, int | float) and not isinstance(value, bool)


_VALUES: dict[str, Dimension] = {
    "resistor": "resistance",
    "capacitor": "capacitance",
    "inductor": "inductance",
}


@dataclass(frozen=True)
class PartValue(Kind):
    """The value of a resistor, capacitor or inductor; its unit follows the part's ``kind``."""

    @property
    def allowed(self) -> str:
        """Return one example of each kind."""
        return (
            'a resistance such as "50 ohm", a capacitance such as "8.2 pF" or an inductance such as "0.5 nH"'
        )

    def read(self, value: object) -> float:
        """Return the value of a part whose kind is faulty: not looked at, the kind's fault says enough."""
        return math.nan

    def read_for(self, value: object, info: ValidationInfo) -> float:
        """Return the SI value by the part's kind, read just before."""
        dimension = _VALUES.get(info.data.get("kind", ""))
        return self.read(value) if dimension is None else Quantity(dimension).read(value).real

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        """Let pydantic pass the part's kind along."""
        return core_schema.with_info_plain_validator_function(self.read_for)

    def json(self) -> dict[str, Any]:
        """Return a string in one of the three units."""
        return {"anyOf": [Quantity(dimension).json() for dimension in _VALUES.values()]}


@dataclass(frozen=True)
class Number(Kind):
    """A pure number, finite.

    Args:
        at_least: Smallest value, itself allowed unless ``open_end``.
        at_most: Largest value, itself allowed.
        open_end: Whether the smallest value itself is refused.
    """

    at_least: float
    at_most: float
    open_end: bool = False

    @property
    def allowed(self) -> str:
        """Return the range."""
        relation = ">" if self.open_end else ">="
        return f"a number {relation} {self.at_least:g} and <= {self.at_most:g}, without a unit"

    def read(self, value: object) -> float:
        """Return the number as a float."""
        if isinstance(value, bool) or not isinstance(value, int | float):
            raise self.refuse(value)
        low = value <= self.at_least if self.open_end else value < self.at_least
        if low or not value <= self.at_most:
            raise self.refuse(value)
        return float(value)

    def json(self) -> dict[str, Any]:
        """Return a number within the range."""
        low = "exclusiveMinimum" if self.open_end else "minimum"
        return {"type": "number", low: self.at_least, "maximum": self.at_most}


@dataclass(frozen=True)
class WholeNumber(Kind):
    """A whole number within a closed range."""

    at_least: int
    at_most: int

    @property
    def allowed(self) -> str:
        """Return the range."""
        return f"a whole number from {self.at_least} to {self.at_most}"

    def read(self, value: object) -> int:
        """Return the number."""
        if (
            isinstance(value, bool)
            or not isinstance(value, int)
            or not self.at_least <= value <= self.at_most
        ):
            raise self.refuse(value)
        return value

    def json(self) -> dict[str, Any]:
        """Return an integer within the range."""
        return {"type": "integer", "minimum": self.at_least, "maximum": self.at_most}


@dataclass(frozen=True)
class Text(Kind):
    """Free text: 1 to 200 characters, no control characters."""

    what: str = "text"

    @property
    def allowed(self) -> str:
        """Return the limits."""
        return f"{self.what} of 1 to {MAX_TEXT} characters, no control characters"

    def read(self, value: object) -> str:
        """Return the text."""
        if not isinstance(value, str):
            raise self.refuse(value)
        if len(value) > MAX_TEXT:
            raise self.refuse(value, f"{len(value)} characters long")
        if any(unicodedata.category(character) in ("Cc", "Cs") for character in value):
            raise self.refuse(value, "with a control character")
        if not value.strip():
            raise self.refuse(value)
        return value

    def json(self) -> dict[str, Any]:
        """Return a string within the limits."""
        return {
            "type": "string",
            "minLength": 1,
            "maxLength": MAX_TEXT,
            "pattern": r"^[^\x00-\x1f\x7f-\x9f]*$",
        }


_ABSOLUTE = re.compile(r"[/\\\\]|[A-Za-z]:")


@dataclass(frozen=True)
class RelativePath(Text):
    """A path relative to the circuit file.

    Args:
        what: What the path leads to.
        ending: Endings in words.
    """

    ending: str = ""

    @property
    def allowed(self) -> str:
        """Return the limits."""
        return f"{self.what}, relative to the circuit file{self.ending}"

    def read(self, value: object) -> str:
        """Return the path as written."""
        text = super().read(value)
        if _ABSOLUTE.match(text):
            raise self.refuse(value, "an absolute path")
        return text


@dataclass(frozen=True)
class Name(Kind):
    """A name: letters, digits, underscore, hyphen; case-sensitive.

    Args:
        what: What is named, as a phrase ("a net's name").
        refused_names: Reserved names that may not stand here.
    """

    what: str = "a name"
    refused_names: tuple[str, ...] = ()

    @property
    def allowed(self) -> str:
        """Return the pattern in words."""
        reserved = " or ".join(f'"{name}"' for name in self.refused_names)
        return f"{self.what} of 1 to 64 characters A-Z a-z 0-9 _ -" + (
            f", not {reserved}" if reserved else ""
        )

    def read(self, value: object) -> str:
        """Return the name."""
        if not isinstance(value, str) or not re.fullmatch(NAME_PATTERN, value):
            raise self.refuse(value)
        if value in self.refused_names:
            raise self.refuse(value, "a reserved net")
        return value

    def json(self) -> dict[str, Any]:
        """Return a string of the pattern."""
        schema: dict[str, Any] = {"type": "string", "pattern": f"^{NAME_PATTERN}$"}
        return schema | ({"not": {"enum": list(self.refused_names)}} if self.refused_names else {})


@dataclass(frozen=True)
class Heading(Kind):
    """A compass word or an angle counter-clockwise from east; held in degrees [deg], 0 <= x < 360."""

    @property
    def allowed(self) -> str:
        """Return words and example."""
        return '"east", "north", "west", "south" or an angle counter-clockwise from east, such as "30 deg"'

    def read(self, value: object) -> float:
        """Return the heading [deg]."""
        if not isinstance(value, str):
            raise self.refuse(value, "without a unit" if _is_number(value) else "")
        try:
            return parse_heading(value)
        except QuantityError as error:
            raise self.refuse(value, error.found) from None

    def json(self) -> dict[str, Any]:
        """Return the words or the pattern of an angle."""
        words = {"enum": ["east", "north", "west", "south"]}
        return {"anyOf": [words, Quantity("angle", "any").json()], "x-held-in": "deg"}


@dataclass(frozen=True)
class FreeLength(Kind):
    """A length > 0, or the word ``"free"``: the placer chooses."""

    @property
    def allowed(self) -> str:
        """Return the word and the allowed lengths."""
        return f'"free" or {Quantity("length").allowed}'

    def read(self, value: object) -> float | str:
        """Return the length [m] or the word."""
        if value == "free":
            return "free"
        try:
            return Quantity("length").read(value).real
        except PydanticCustomError as error:
            context = error.context or {}
            raise refused(context["found"], self.allowed) from None

    def json(self) -> dict[str, Any]:
        """Return the word or a length."""
        return {"anyOf": [{"const": "free"}, Quantity("length").json()]}


@dataclass(frozen=True)
class Date(Kind):
    """A calendar day as text ``"2027-06-30"``; TOML's own date is read too."""

    @property
    def allowed(self) -> str:
        """Return the form."""
        return 'a day such as "2027-06-30"'

    def read(self, value: object) -> datetime.date:
        """Return the day."""
        if isinstance(value, datetime.date) and not isinstance(value, datetime.datetime):
            return value
        if not isinstance(value, str) or not re.fullmatch(r"[0-9]{4}-[0-9]{2}-[0-9]{2}", value):
            raise self.refuse(value)
        try:
            return datetime.date.fromisoformat(value)
        except ValueError:
            raise self.refuse(value, "no day of the calendar") from None

    def json(self) -> dict[str, Any]:
        """Return a date string."""
        return {"type": "string", "format": "date", "pattern": "^[0-9]{4}-[0-9]{2}-[0-9]{2}$"}


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
