"""Where a thing came from: carried by every record of every stage, so that a finding can name it."""

from __future__ import annotations

from dataclasses import dataclass

__all__ = ["Fault", "Location", "Origin"]


@dataclass(frozen=True, slots=True)
class Location:
    """A line of an input file (1-based); line 0 stands for the file as a whole."""

    file: str
    line: int

    def __str__(self) -> str:
        """Return ``file:line``."""
        return f"{self.file}:{self.line}" if self.line else self.file


@dataclass(frozen=True, slots=True)
class Origin:
    """The element of the circuit that a record belongs to, and where the user wrote it."""

    element: str
    location: Location | None = None

    def __str__(self) -> str:
        """Return the element's name, with its place in the file when known."""
        return self.element if self.location is None else f"{self.element} ({self.location})"


@dataclass(frozen=True, slots=True)
class Fault:
    """One fault of an input: place, full key path, what was found, what is allowed."""

    location: Location
    key: str
    found: str
    allowed: str

    def __str__(self) -> str:
        """Return the one-line message: ``file:line: key: found ...; allowed ...``."""
        place = f"{self.location}: {self.key}" if self.key else str(self.location)
        return f"{place}: found {self.found}; allowed: {self.allowed}"
