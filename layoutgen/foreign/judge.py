"""The checks on foreign artwork: the rules that copper alone can answer, and all that was left out."""

from __future__ import annotations

import datetime
import math
from collections.abc import Iterator, Sequence
from dataclasses import replace

from layoutgen.checks import CheckResult, Finding, NotChecked, check_board
from layoutgen.checks.board import Board
from layoutgen.foreign.board import board_of_foreign
from layoutgen.foreign.chorded import Chords
from layoutgen.foreign.records import ForeignArtwork
from layoutgen.reading import RuleFile

__all__ = ["check_foreign"]

_UNKNOWN = (
    NotChecked(
        "connectivity against a netlist",
        "the drawing names no nets: what hangs together is taken as meant so, and what is apart too",
    ),
    NotChecked("substrate", "height and copper thickness are not in the drawing"),
    NotChecked(
        "exemptions",
        "pads at their own cut-out and notches of radial stubs look like any copper: waive what is meant",
    ),
)


def check_foreign(
    artwork: ForeignArtwork, rules: RuleFile, today: datetime.date | None = None
) -> CheckResult:
    """Return what a rule file forbids in a drawing of other origin, and what was not looked at.

    What was closed, guessed or mended in reading comes as findings of severity note, named ``foreign.*``.

    Args:
        artwork: The drawing, from :func:`~layoutgen.foreign.read_artwork`.
        rules: The rule file, from :func:`~layoutgen.reading.read_rules`.
        today: Day on which waivers are judged; None takes no waiver as expired.
    """
    board = board_of_foreign(artwork, rules)
    result = check_board(board, today)
    return replace(
        result,
        findings=(*_weighed(result.findings, board, artwork.chord), *_notes(artwork)),
        not_checked=(*_UNKNOWN, *_unread(artwork), *result.not_checked),
    )


def _weighed(findings: Sequence[Finding], board: Board, chord: float) -> list[Finding]:
    """Return findings, those as notes that are no more than chords there may be off their curves [nm]."""
    slight = [_shortfall(finding) <= chord for finding in findings]
    if not any(slight):
        return list(findings)
    chords = Chords(board)
    return [
        _as_note(finding, chord) if small and _at_a_chord(finding, chords, chord) else finding
        for finding, small in zip(findings, slight, strict=True)
    ]


def _shortfall(finding: Finding) -> float:
    """Return by how much a length falls short of its limit [nm]; infinite where that says nothing."""
    if finding.unit != "mm" or finding.measured is None or finding.limit is None or finding.at is None:
        return math.inf
    short = (finding.limit - finding.measured) * 1e6
    return short if short > 0.0 else math.inf


def _at_a_chord(finding: Finding, chords: Chords, chord: float) -> bool:
    """Tell whether a chord of a curve bounds the place that was measured."""
    assert finding.at is not None
    assert finding.measured is not None
    return chords.near(finding.at, finding.measured * 0.5e6 + 2.0 * chord)


def _as_note(finding: Finding, chord: float) -> Finding:
    """Return a finding as a note about chords that may lie so far off their curves [nm]."""
    text = f"{finding.text}; no more than chords may lie off curves in this format ({chord / 1e3:g} um)"
    return replace(finding, severity="note", text=text)


def _unread(artwork: ForeignArtwork) -> Iterator[NotChecked]:
    """Yield a line for each kind of thing that was not read."""
    for what, count in artwork.unread.items():
        yield NotChecked("foreign artwork", f"{count} x {what}: not read")
    if artwork.chord:
        reason = (
            f"curves in this format are chords: at them shortfalls up to {artwork.chord / 1e3:g} um are notes"
        )
        yield NotChecked("lengths to a micrometre", reason)
    open_ends = sum(note.rule == "foreign.left_open" for note in artwork.notes)
    if open_ends:
        yield NotChecked(
            "foreign artwork", f"{open_ends} x lines without width that close no outline: not read"
        )
    for layer, polygons in artwork.layers.items():
        if not polygons:
            yield NotChecked("foreign artwork", f"nothing is drawn on {layer}")


def _notes(artwork: ForeignArtwork) -> Iterator[Finding]:
    """Yield the notes of the reading as findings."""
    for note in artwork.notes:
        yield Finding(
            rule=note.rule,
            severity="note",
            measured=None,
            limit=None,
            unit="",
            at=note.at,
            layer=note.layer,
            items=(),
            nets=(),
            text=note.text,
        )
