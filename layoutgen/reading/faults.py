"""The faults of one file, collected: each with its line, full key path, what was found, what is allowed."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass, field

from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault, Location
from layoutgen.reading.source import SourceMap
from layoutgen.reading.wording import QUOTE, Path, describe, key_text

__all__ = ["SHOWN", "Faults", "raise_faults"]

SHOWN = 100
"""Most faults listed in one run; the rest are counted."""

_QUOTED = re.compile(r'"((?:[^"\\]|\\[xuU][0-9a-f]+|\\.)*)(\.\.\.)?"')
_UNIT = re.compile(r"\\x..|\\u....|\\U.{8}|\\.|.")


@dataclass
class Faults:
    """The faults of one file.

    Args:
        source: The file.
        known: The keys of the file's form; others are quotes of the file when a message prints them.
        foreign: Whether the file is not the circuit file itself: its quotes and unknown keys together stay
            within 40 characters a message.
        complete: False when a part of the file could not be looked at, so that nothing may be called missing.
    """

    source: SourceMap
    known: frozenset[str] = frozenset()
    foreign: bool = False
    complete: bool = True
    items: list[Fault] = field(default_factory=list)
    paths: set[Path] = field(default_factory=set)
    _above: set[Path] = field(default_factory=set)

    def add(self, path: Path, found: str, allowed: str) -> None:
        """Add a fault of a key; a key has one fault, the first found."""
        if path in self.paths:
            return
        location = self.source.location(path)
        key, found = self._within_quota(path, found)
        self.items.append(Fault(location, key, found, allowed))
        self.paths.add(path)
        self._above.update(path[:length] for length in range(len(path) + 1))

    def add_value(self, path: Path, value: object, allowed: str, why: str = "") -> None:
        """Add a fault of a key's value, with an optional reason after its quote."""
        self.add(path, describe(value) + (f", {why}" if why else ""), allowed)

    def about(self, path: Path) -> bool:
        """Tell whether a fault was found at a key or below it."""
        return path in self._above

    def line_of(self, path: Path) -> str:
        """Return ``line 12``, or ``the same data`` for circuits built in code."""
        line = self.source.location(path).line
        return f"line {line}" if line else "the same data"

    def _within_quota(self, path: Path, found: str) -> tuple[str, str]:
        """Return key text and found text; of a foreign file both together quote at most 40 characters."""
        if not self.foreign:
            return key_text(path), found
        free = [token for token in path if isinstance(token, str) and token not in self.known]
        quoted = bool(_QUOTED.search(found))
        room = QUOTE // 2 if quoted else QUOTE
        limit = room // max(1, len(free))
        used = sum(min(len(token), limit) for token in free)
        key = "".join(self._shown(path, limit))
        return key, _QUOTED.sub(lambda match: _shortened(match, QUOTE - used), found, count=1)

    def _shown(self, path: Path, limit: int) -> str:
        """Return the key text with unknown keys cut to a limit."""
        text = ""
        for number, token in enumerate(path):
            bounded = limit if isinstance(token, str) and token not in self.known else 64
            part = key_text((token,), bounded)
            text += f".{part}" if number and isinstance(token, str) else part
        return text


def _shortened(match: re.Match[str], limit: int) -> str:
    """Return a quote cut to a number of characters, an escape counting as one."""
    units = _UNIT.findall(match[1])
    cut = len(units) > limit
    return f'"{"".join(units[:limit])}{"..." if cut or match[2] else ""}"'


def raise_faults(collections: Iterable[Faults]) -> None:
    """Raise all faults, each file's in the order of its lines, 100 at most and a count of the rest.

    Raises:
        WrongInputError: there is at least one fault.
    """
    faults = [
        fault for faults in collections for fault in sorted(faults.items, key=lambda item: item.location.line)
    ]
    if len(faults) > SHOWN:
        rest = len(faults) - SHOWN
        count = Fault(Location(faults[SHOWN].location.file, 0), "", f"{rest} more faults, not listed", "none")
        faults = [*faults[:SHOWN], count]
    if faults:
        raise WrongInputError(faults)
