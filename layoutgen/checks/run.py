"""The public function of the stage: run every rule on the board, judge what they say."""

from __future__ import annotations

import datetime
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace

from layoutgen.artwork import Artwork
from layoutgen.checks.board import Board
from layoutgen.checks.coverage import UNCOVERED, absent, may_run
from layoutgen.checks.drawn import board_of
from layoutgen.checks.outcome import Hit
from layoutgen.checks.policy import judged
from layoutgen.checks.records import CheckResult, Finding, NotChecked
from layoutgen.checks.rules import RULES
from layoutgen.checks.sheet import Sheets, sheets_of
from layoutgen.checks.worst import worst_of_each
from layoutgen.origin import Location

__all__ = ["check", "check_board", "current_map"]

_ON_CURRENT = ("current.temperature_rise", "current.max_density")


def current_map(artwork: Artwork) -> Sheets:
    """Return the direct current in an artwork's copper: densities by triangle, voltage drops, heat by net."""
    return sheets_of(board_of(artwork))


def check(artwork: Artwork, today: datetime.date | None = None) -> CheckResult:
    """Return everything the rule file forbids in an artwork, and what was not looked at.

    Args:
        artwork: The drawing, with all that it came from.
        today: Day on which waivers are judged; None takes no waiver as expired, and says so.
    """
    result = check_board(board_of(artwork), today)
    said = {(finding.rule, finding.items) for finding in result.findings if finding.severity == "note"}
    notes = [note for note in _notes(artwork) if (note.rule, note.items) not in said]
    findings = (*result.findings, *notes)
    return replace(result, findings=_with_sources(findings, _sources(artwork)))


def check_board(board: Board, today: datetime.date | None = None) -> CheckResult:
    """Return the findings of all rules on a board, whatever drawing it came from; as :func:`check`."""
    hits: list[Hit] = []
    skipped: list[NotChecked] = []
    for rule in RULES:
        skipped.extend(absent(board, rule))
        found = list(rule.find(board)) if may_run(board, rule) else []
        skipped.extend(outcome for outcome in found if isinstance(outcome, NotChecked))
        hits.extend(worst_of_each(outcome for outcome in found if isinstance(outcome, Hit)))
    if today is None and any(waiver.until is not None for waiver in board.limits.rules.waive.values()):
        skipped.append(NotChecked("waive.expired", "no date was given"))
    judges_current = any(board.limits.get(name) is not None for name in _ON_CURRENT)
    return CheckResult(
        findings=tuple(judged(board.limits, hits, today)),
        not_checked=tuple(dict.fromkeys((*skipped, *UNCOVERED))),
        currents=board.sheets if judges_current else None,
    )


def _notes(artwork: Artwork) -> Iterator[Finding]:
    """Yield the assumptions of the earlier stages as findings of severity note, each once."""
    placement = artwork.placement
    circuit = placement.sized.circuit
    rows = [*artwork.notes, *placement.notes]
    rows += [("assumption.sizing", "", text) for text in placement.sized.notes]
    rows += [("assumption.dc", "", text) for text in circuit.dc.notes]
    for rule, element, text in dict.fromkeys(rows):
        yield Finding(
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


def _sources(artwork: Artwork) -> Mapping[str, Location]:
    """Return where each element was written in the circuit file."""
    placement = artwork.placement
    groups = (placement.lines, placement.pairs, placement.radials, placement.parts, placement.ports)
    origins = [record.origin for group in groups for record in group.values()]
    return {o.element: o.location for o in origins if o.location is not None and o.location.line}


def _with_sources(findings: Sequence[Finding], sources: Mapping[str, Location]) -> tuple[Finding, ...]:
    """Return the findings with the places in the circuit file of the elements they name."""
    return tuple(
        replace(finding, sources=tuple(sources[item] for item in finding.items if item in sources))
        for finding in findings
    )
