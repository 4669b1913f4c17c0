"""What the checks hand on: findings as values, and what was not looked at."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from layoutgen.geometry import Point
from layoutgen.origin import Location

if TYPE_CHECKING:
    from layoutgen.checks.sheet import Sheets

__all__ = ["CheckResult", "Finding", "NotChecked"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """One fault or note: which rule, how bad, measured against the limit, where, between what.

    ``severity`` is error, warning or note; ``measured`` and ``limit`` are in ``unit`` (None where a figure
    makes no sense); ``at`` [nm] is the middle of the shortest connection; ``waived`` is the waiver's reason.
    ``limit_from`` is the line of the rule file that set the limit, ``sources`` are the lines of the circuit
    file where the items stand (those that are known).
    """

    rule: str
    severity: str
    measured: float | None
    limit: float | None
    unit: str
    at: Point | None
    layer: str
    items: tuple[str, ...]
    nets: tuple[str, ...]
    text: str
    waived: str | None = None
    limit_from: Location | None = None
    sources: tuple[Location, ...] = ()

    @property
    def counts(self) -> bool:
        """True when this is an error that nobody has waived."""
        return self.severity == "error" and self.waived is None


@dataclass(frozen=True, slots=True)
class NotChecked:
    """A rule that was not evaluated, and why."""

    rule: str
    reason: str


@dataclass(frozen=True, slots=True, kw_only=True)
class CheckResult:
    """All findings in a fixed order (rule, place), and all that was not checked.

    ``currents`` are the direct currents in the copper as the rules on current solved them, for maps; None
    where the rule file has no such rule. They take no part in comparing results.
    """

    findings: tuple[Finding, ...]
    not_checked: tuple[NotChecked, ...]
    currents: Sheets | None = field(default=None, compare=False, repr=False)
