"""What the command says of a result in one line or in the rows of a table."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from layoutgen.checks import Finding
    from layoutgen.writers import Result

__all__ = ["FINDING_HEADS", "counts", "finding_rows", "many", "summary"]

FINDING_HEADS = ("no", "severity", "rule", "items", "what")
"""Heads of the table of findings, for :func:`finding_rows`."""


def summary(result: Result) -> str:
    """Return one line: the board and how many findings there are."""
    placement, artwork, file = result.placement, result.artwork, result.circuit.file
    return (
        f"{placement.width / 1e6:g} x {placement.height / 1e6:g} mm, {many(len(file.lines), 'line')}, "
        f"{many(len(placement.parts), 'part')}, {many(len(artwork.vias), 'via')}; "
        f"{counts(result.findings)}; {len(result.checks.not_checked)} not checked"
    )


def counts(findings: Sequence[Finding]) -> str:
    """Return how many findings count, by severity."""
    found = [finding.severity for finding in findings if finding.waived is None]
    return ", ".join(many(found.count(kind), kind) for kind in ("error", "warning", "note"))


def many(count: int, noun: str) -> str:
    """Return a count with its noun, in the plural unless it is one."""
    return f"{count} {noun}" if count == 1 else f"{count} {noun}s"


def finding_rows(findings: Sequence[Finding], notes: bool) -> list[tuple[str, ...]]:
    """Return a row for each finding, numbered as in the report; notes only if asked for."""
    shown = [(n, f) for n, f in enumerate(findings, start=1) if notes or f.severity != "note"]
    return [
        (str(n), f.severity if f.waived is None else "waived", f.rule, ", ".join(f.items) or "-", f.text)
        for n, f in shown
    ]
