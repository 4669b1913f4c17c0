"""The rule file's values by the path of their key, lengths in nanometres."""

from __future__ import annotations

from typing import Any

from layoutgen.origin import Location
from layoutgen.reading import RuleFile

__all__ = ["Limits"]


class Limits:
    """A rule file as the rules ask for it: by key path, None where the file is silent."""

    def __init__(self, rules: RuleFile) -> None:
        """Keep the file."""
        self.rules = rules

    def get(self, key: str) -> Any:
        """Return the value of a key such as ``copper.min_gap`` in SI units, None when absent."""
        table, _, name = key.partition(".")
        record = getattr(self.rules, table, None)
        return None if record is None else getattr(record, name, None)

    def number(self, key: str) -> float | None:
        """Return a value as a number in SI units, None when absent."""
        value = self.get(key)
        return None if value is None else float(value)

    def nm(self, key: str) -> float | None:
        """Return a length [nm], None when absent."""
        value = self.get(key)
        return None if value is None else float(value) * 1e9

    def location(self, key: str) -> Location | None:
        """Return where the rule file sets a key; None when it does not, or was built in code."""
        if self.get(key) is None:
            return None
        location = self.rules.location(key)
        return location if location.line else None
