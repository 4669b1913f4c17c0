"""What a proof is made of."""

from __future__ import annotations

import importlib
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

__all__ = ["Check", "Evidence", "NotProved", "Proof", "optional_library"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Check:
    """One question asked of a file: which reader answered it, what was measured against which limit.

    ``unit`` is empty for counts. A file that cannot be read is a check with ``what`` "can be read" that
    failed, and ``detail`` says why.
    """

    file: str
    reader: str
    what: str
    measured: float
    limit: float
    unit: str = ""
    detail: str = ""

    @property
    def passed(self) -> bool:
        """True when what was measured is within the limit."""
        return self.measured <= self.limit


@dataclass(frozen=True, slots=True)
class NotProved:
    """Something about a file that was not shown, and why."""

    file: str
    reason: str


Evidence = Iterator[Check | NotProved]


@dataclass(frozen=True, slots=True, kw_only=True)
class Proof:
    """Everything that was asked of a set of files, and what could not be shown."""

    checks: tuple[Check, ...]
    not_proved: tuple[NotProved, ...]

    @property
    def failures(self) -> tuple[Check, ...]:
        """The checks that failed; none means that the files hold the model as far as was asked."""
        return tuple(check for check in self.checks if not check.passed)

    @property
    def passed(self) -> bool:
        """True when no check failed."""
        return not self.failures


def optional_library(name: str) -> Any | None:
    """Return a library that need not be installed, None where it is not."""
    try:
        return importlib.import_module(name)
    except ImportError:
        return None
