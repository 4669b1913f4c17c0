"""Bill of materials: equal parts on one row, as comma-separated values.

The circuit file knows values, cases and ratings, no makers' part numbers; the assumed series resistance and
inductance are those the response was computed with, so that a buyer can see what a replacement must match.
"""

from __future__ import annotations

from layoutgen.numbers import fixed
from layoutgen.placement import PlacedPart
from layoutgen.reading import Part
from layoutgen.writers.part_texts import (
    mounting_text,
    package_text,
    rating_text,
    references,
    series_text,
    value_text,
)
from layoutgen.writers.plain import comma_separated
from layoutgen.writers.records import Job, Result

__all__ = ["BILL_HEADS", "bill_rows", "write_bill_of_materials"]

BILL_HEADS = (
    "Item", "Quantity", "References", "Kind", "Value", "Value tolerance (plus-minus)", "Package",
    "Needed rating", "Assumed series resistance and inductance", "Data file", "Mounting",
)  # fmt: skip
"""Headings of :func:`bill_rows`."""


def write_bill_of_materials(result: Result, job: Job) -> bytes:
    """Return the file; it is the same for equal results (``job`` changes nothing)."""
    return comma_separated(BILL_HEADS, bill_rows(result))


def bill_rows(result: Result) -> list[tuple[str, ...]]:
    """Return one row for each set of equal parts, in the order of their first references."""
    tolerance = result.circuit.file.tolerance
    limits = (
        f"{fixed(100.0 * tolerance.value, 3).rstrip('0').rstrip('.')} %"
        if tolerance and tolerance.value
        else ""
    )
    groups: dict[tuple[str, ...], list[str]] = {}
    for name in references(result):
        part = result.circuit.file.parts[name]
        groups.setdefault(_features(part, result.placement.parts[name], limits), []).append(name)
    return [
        (str(item), str(len(names)), " ".join(names), *features)
        for item, (features, names) in enumerate(groups.items(), start=1)
    ]


def _features(part: Part, placed: PlacedPart, limits: str) -> tuple[str, ...]:
    """Return what makes parts equal to a buyer; a tolerance is said of values only."""
    value = value_text(part)
    return (
        part.kind,
        value,
        limits if value else "",
        package_text(part),
        rating_text(part),
        series_text(part),
        part.data or "",
        mounting_text(placed),
    )
