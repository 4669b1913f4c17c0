"""The checks on foreign artwork: the rules that copper alone can answer, and all that was left out."""

from __future__ import annotations

import datetime
from collections.abc import Iterator
from dataclasses import replace

from layoutgen.checks import CheckResult, Finding, NotChecked, check_board
from layoutgen.foreign.board import board_of_foreign
from layoutgen.foreign.records import ForeignArtwork
from layoutgen.reading import RuleFile

__all__ = ["check_foreign"]

_UNKNOWN = (
    NotChecked(
        "connectivity against a netlist",
        "the drawing names no nets: what hangs together is taken as meant so, and what is apart too",
    ),
    NotChecked("substrate", "height and copper thickness are not in the drawing"),
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
    result = check_board(board_of_foreign(artwork, rules), today)
    skipped = (*_UNKNOWN, *_unread(artwork))
    return replace(
        result,
        findings=(*(_weighed(finding, artwork.chord) for finding in result.findings), *_notes(artwork)),
        not_checked=(*skipped, *result.not_checked),
    )


def _weighed(finding: Finding, chord: float) -> Finding:
    """Return a finding as a note where it is no more than what chords may be off their curves [nm]."""
    measured, limit = finding.measured, finding.limit
    if not chord or finding.unit != "mm" or measured is None or limit is None:
        return finding
    if not 0.0 < limit - measured <= chord / 1e6:
        return finding
    text = f"{finding.text}; no more than chords may lie off curves in this format ({chord / 1e3:g} um)"
    return replace(finding, severity="note", text=text)


def _unread(artwork: ForeignArtwork) -> Iterator[NotChecked]:
    """Yield a line for each kind of thing that was not read."""
    for what, count in artwork.unread.items():
        yield NotChecked("foreign artwork", f"{count} x {what}: not read")
    if artwork.chord:
        reason = f"curves in this format are chords: shortfalls up to {artwork.chord / 1e3:g} um are notes"
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
