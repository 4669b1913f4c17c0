"""Kinds of value: each reads one TOML value and can say what it allows. Here numbers, texts, names and days.

A kind is attached to a record's field by ``Annotated``; pydantic calls :meth:`Kind.read` for the value and
:meth:`Kind.json` for the JSON Schema, and the wording of faults takes :attr:`Kind.allowed`.
"""

from __future__ import annotations

import datetime
import re
import unicodedata
from abc import ABC, abstractmethod
from dataclasses import dataclass
from typing import Any

from pydantic import GetCoreSchemaHandler, GetJsonSchemaHandler
from pydantic_core import CoreSchema, PydanticCustomError, core_schema

from layoutgen.reading.wording import describe

__all__ = ["Date", "Kind", "Name", "Number", "RelativePath", "Text", "WholeNumber", "is_number", "refused"]

NAME_PATTERN = r"[A-Za-z0-9_-]{1,64}"
MAX_TEXT = 200


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


def is_number(value: object) -> bool:
    """Tell whether a value is a TOML number."""
    return isinstance(value, int | float) and not isinstance(value, bool)


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


_ABSOLUTE = re.compile(r"[/\\]|[A-Za-z]:")


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
