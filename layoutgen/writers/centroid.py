"""Centroid file for placing machines: one row for each part, its middle and its rotation.

Convention, stated in the headings too: seen from the top, origin at the board's south-west corner, x east,
y north, rotation counter-clockwise. At zero a two-pad part has its first pad (the one on the first net) to
the west, as level A of IPC-7351B has it (from memory), and a part with a footprint stands as the circuit
file draws it. x and y are the middle between the pads of a chip, and the origin of a footprint.
"""

from __future__ import annotations

from layoutgen.numbers import mm
from layoutgen.writers.part_texts import (
    mounting_text,
    package_text,
    references,
    rotation_text,
    value_text,
)
from layoutgen.writers.plain import comma_separated
from layoutgen.writers.records import Job, Result

__all__ = ["CENTROID_HEADS", "ROTATION_CONVENTION", "centroid_rows", "write_centroid"]

ROTATION_CONVENTION = (
    "Rotation is counter-clockwise in degrees, seen from the top. At 0 a two-pad part has its first pad to "
    "the west, and a part with a footprint stands as drawn in the circuit file. x runs east and y north from "
    "the board's south-west corner, to the middle between the pads of a chip or to the origin of a footprint."
)
"""What the numbers mean, for the notes beside the file."""

CENTROID_HEADS = (
    "Reference", "Value", "Package", "x (mm)", "y (mm)",
    "Rotation (deg counter-clockwise; 0: first pad west, or footprint as drawn)", "Side", "Mounting",
)  # fmt: skip
"""Headings of :func:`centroid_rows`."""


def write_centroid(result: Result, job: Job) -> bytes:
    """Return the file; it is the same for equal results (``job`` changes nothing)."""
    return comma_separated(CENTROID_HEADS, centroid_rows(result))


def centroid_rows(result: Result) -> list[tuple[str, ...]]:
    """Return one row for each part, in the order of reading."""
    rows: list[tuple[str, ...]] = []
    for name in references(result):
        part, placed = result.circuit.file.parts[name], result.placement.parts[name]
        place = (mm(placed.x), mm(placed.y), rotation_text(placed))
        rows.append((name, value_text(part), package_text(part), *place, "top", mounting_text(placed)))
    return rows
