"""What the writers are given: the results of every stage, and how one run is to be written."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from layoutgen.artwork import Artwork
from layoutgen.checks import CheckResult, Finding
from layoutgen.circuit import Circuit
from layoutgen.placement import Placement
from layoutgen.response import Response
from layoutgen.sizing import SizedCircuit

__all__ = ["DEFAULT_DPI", "Job", "Result"]

DEFAULT_DPI = 150
"""Dots per inch of the preview picture, whose longer side is ten inches [1/in]."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Result:
    """Every stage's result. Each stage's record holds the one before it, so three of them hold all.

    ``response`` is None for a circuit without RF ports and terminations; ``seconds`` [s] are by stage, in
    their order; ``notes`` are assumptions made between the stages: (rule, element, text).
    """

    artwork: Artwork
    checks: CheckResult
    response: Response | None = None
    seconds: Mapping[str, float] = field(default_factory=dict)
    notes: tuple[tuple[str, str, str], ...] = ()

    @property
    def placement(self) -> Placement:
        """Poses and centre-lines."""
        return self.artwork.placement

    @property
    def sized(self) -> SizedCircuit:
        """Widths and electrical lengths."""
        return self.placement.sized

    @property
    def circuit(self) -> Circuit:
        """Nets and bias point."""
        return self.sized.circuit

    @property
    def findings(self) -> tuple[Finding, ...]:
        """The findings of the checks, then the notes that the checks did not see; numbered by position."""
        late = (*self.notes, *(self.response.notes if self.response else ()))
        return self.checks.findings + tuple(_as_finding(note) for note in late)

    def count(self, severity: str) -> int:
        """Return how many findings of one severity nobody has waived."""
        return sum(f.severity == severity and f.waived is None for f in self.findings)


@dataclass(frozen=True, slots=True, kw_only=True)
class Job:
    """How one run is written: the files' stem, the picture's resolution [1/in], what to leave out.

    ``repeatable`` leaves out what differs from run to run; ``files`` are the files written so far, by name,
    for those that quote or list the others.
    """

    stem: str
    dpi: int = DEFAULT_DPI
    repeatable: bool = False
    files: Mapping[str, bytes] = field(default_factory=dict)


def _as_finding(note: tuple[str, str, str]) -> Finding:
    """Return an assumption as a finding of severity note."""
    rule, element, text = note
    return Finding(
        rule=rule,
        severity="note",
        measured=None,
        limit=None,
        unit="",
        at=None,
        layer="",
        items=(element,) if element else (),
        nets=(),
        text=text,
    )
