"""Kinds of value with a unit: quantities, part values, headings, lengths that may be free."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from typing import Any, Literal

from pydantic import GetCoreSchemaHandler, ValidationInfo
from pydantic_core import CoreSchema, PydanticCustomError, core_schema

from layoutgen.reading.kinds import Kind, is_number, refused
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

__all__ = ["FreeLength", "Heading", "PartValue", "Quantity"]

_NUMBER_PATTERN = r"([0-9]+(\.[0-9]*)?|\.[0-9]+)([eE][+-]?[0-9]+)?"
_SIGN_PATTERNS = {"positive": "[+]?", "not negative": "[+]?", "not positive": "[+-]?", "any": "[+-]?"}
_REACTANCE_PATTERN = rf"( ?[+-] ?{_NUMBER_PATTERN}j)?"

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
        return f'{info.phrase}{part}{bound}{upper} with its unit ({units}), such as "{self.example}"'

    @property
    def example(self) -> str:
        """Return an example of the allowed sign."""
        example = DIMENSIONS[self.dimension].example
        return example.lstrip("-") if self.sign in ("positive", "not negative") else example

    def read(self, value: object) -> float | complex:
        """Return the SI value."""
        if not isinstance(value, str):
            raise self.refuse(value, "without a unit" if is_number(value) else "")
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
        number = _SIGN_PATTERNS[self.sign] + _NUMBER_PATTERN
        number += _REACTANCE_PATTERN if self.dimension == "impedance" else ""
        units = "|".join(re.escape(unit) for unit in all_units(self.dimension))
        info = DIMENSIONS[self.dimension]
        return {
            "type": "string",
            "pattern": f"^{number} ?({units})$",
            "examples": [self.example],
            "x-dimension": self.dimension,
            "x-held-in": info.si,
        }


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
class Heading(Kind):
    """A compass word or an angle counter-clockwise from east; held in degrees [deg], 0 <= x < 360."""

    @property
    def allowed(self) -> str:
        """Return words and example."""
        return '"east", "north", "west", "south" or an angle counter-clockwise from east, such as "30 deg"'

    def read(self, value: object) -> float:
        """Return the heading [deg]."""
        if not isinstance(value, str):
            raise self.refuse(value, "without a unit" if is_number(value) else "")
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
