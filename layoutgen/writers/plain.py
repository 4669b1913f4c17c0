"""Plain text for people and for spreadsheets: tables in columns, lists, comma-separated values."""

from __future__ import annotations

import csv
import io
import re
import textwrap
from collections.abc import Iterable, Sequence

__all__ = ["columns", "comma_separated", "heading", "many", "natural", "paragraph"]

WIDTH = 100
"""Characters of a line [-]."""


def comma_separated(heads: Sequence[str], rows: Iterable[Sequence[object]]) -> bytes:
    """Return a table as comma-separated values: UTF-8, one line a row, the first one the headings."""
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow(heads)
    writer.writerows([_cell(value) for value in row] for row in rows)
    return stream.getvalue().encode("utf-8")


def _cell(value: object) -> str:
    """Return a cell; text that a spreadsheet would take for a formula gets a blank before it."""
    text = str(value)
    number = re.fullmatch(r"[+-]?[0-9.]+", text)
    return f" {text}" if text[:1] in ("=", "+", "-", "@") and not number else text


def columns(heads: Sequence[str], rows: Iterable[Sequence[str]]) -> str:
    """Return a table in columns of the width they need, headings underlined."""
    table = [tuple(heads), *(tuple(row) for row in rows)]
    widths = [max(len(row[k]) for row in table) for k in range(len(heads))]
    lines = ["  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)) for row in table]
    lines.insert(1, "  ".join("-" * width for width in widths))
    return "\n".join(line.rstrip() for line in lines) + "\n"


def heading(text: str, mark: str = "-") -> str:
    """Return an underlined heading."""
    return f"{text}\n{mark * len(text)}\n"


def paragraph(text: str, lead: str = "") -> str:
    """Return text in lines of the usual width; ``lead`` begins the first line, the others stand below it."""
    return textwrap.fill(text, WIDTH, initial_indent=lead, subsequent_indent=" " * len(lead)) + "\n"


def many(count: int, noun: str) -> str:
    """Return a count with its noun."""
    if count == 1:
        return f"1 {noun}"
    return f"{count} {noun[:-1]}ies" if noun.endswith("y") else f"{count} {noun}s"


def natural(name: str) -> tuple[tuple[int, int, str], ...]:
    """Return a key that sorts C2 before C10."""
    parts = re.findall(r"[0-9]+|[^0-9]+", name)
    return tuple((0, int(part), "") if part.isdecimal() else (1, 0, part) for part in parts)
