"""Checks within ``[design]``, ``[board]`` and ``[tolerance]``."""

from __future__ import annotations

from layoutgen.reading.circuit_records import Design
from layoutgen.reading.draft import Draft, given

__all__ = ["check_tables"]


def check_tables(draft: Draft) -> None:
    """Check frequencies, outline and tolerances."""
    if draft.design is not None:
        _check_frequencies(draft, draft.design)
    _check_outline(draft)
    _check_tolerance(draft)


def _check_frequencies(draft: Draft, design: Design) -> None:
    """Check that band and sweep rise, the design frequency lies in the band and the band in the sweep."""
    raw, faults = draft.data["design"], draft.faults
    low, high = design.band
    if low >= high:
        faults.add_value(("design", "band"), raw["band"], "the lower edge first", "not rising")
    elif not low <= design.frequency <= high:
        line = faults.line_of(("design", "band"))
        faults.add_value(("design", "frequency"), raw["frequency"], f"a frequency within band ({line})")
    if design.sweep is None:
        return
    first, last = design.sweep
    if first >= last:
        faults.add_value(("design", "sweep"), raw["sweep"], "the lower end first", "not rising")
    elif low < high and not (first <= low and high <= last):
        line = faults.line_of(("design", "band"))
        faults.add_value(("design", "sweep"), raw["sweep"], f"a range that covers band ({line})")


def _check_outline(draft: Draft) -> None:
    """Check that corners and margin fit a board whose size is given."""
    board = draft.board
    if board is None or board.size is None:
        return
    half = min(board.size) / 2.0
    for key, value in (("corner_radius", board.corner_radius), ("margin", board.margin or 0.0)):
        if value > half or (key == "margin" and value == half):
            raw = draft.data["board"][key]
            draft.faults.add_value(("board", key), raw, "at most half of the board's shorter side")


def _check_tolerance(draft: Draft) -> None:
    """Check that the limits leave a substrate."""
    tolerance, substrate = draft.tolerance, draft.substrate
    if tolerance is None or substrate is None:
        return
    if tolerance.height >= substrate.height:
        _too_wide(draft, "height", "less than substrate.height")
    if substrate.relative_permittivity - tolerance.relative_permittivity < 1.0:
        _too_wide(draft, "relative_permittivity", "at most substrate.relative_permittivity - 1")


def _too_wide(draft: Draft, key: str, allowed: str) -> None:
    """Add a fault of a tolerance."""
    place = draft.faults.line_of(("substrate", key))
    draft.faults.add_value(("tolerance", key), given(draft.data, "tolerance", key), f"{allowed} ({place})")
