"""Pieces of HTML: escaped text, tables with headings, sections with an anchor."""

from __future__ import annotations

import html
import re
from collections.abc import Iterable, Sequence

__all__ = ["Cell", "cell", "escape", "items", "section", "table", "zoom_link"]

Cell = str
"""A table cell's HTML, escaped already."""

_LONG = 40
"""Characters from which on a column's text may break [-]."""

_LINK = re.compile(r"</?a\b[^>]*>")

_NUMBERS = re.compile(r"([−-]?\d|–, )[\d.,−– ]*(\s?[A-Za-zΩ/%^]+\d?)?(<br>.*|\s<small>.*)?")
"""A cell of numbers: digits with a unit at most, then perhaps a line or a word about them."""


def escape(text: object) -> str:
    """Return any value's text, safe inside HTML and inside attributes."""
    return html.escape(str(text), quote=True)


def cell(value: object) -> Cell:
    """Return a value as a cell; None is a dash."""
    return "–" if value is None or value == "" else escape(value)


def zoom_link(key: str, text: object) -> Cell:
    """Return a text that leads to the board and, where scripts run, shows the item with that key there."""
    return f'<a href="#board" data-zoom="{escape(key)}">{escape(text)}</a>'


def table(caption: str, heads: Sequence[str], rows: Iterable[Sequence[Cell]], ids: Sequence[str] = ()) -> str:
    """Return a table inside a box that scrolls by itself; numbers stand to the right.

    Args:
        caption: What the table shows, read out first by a screen reader.
        heads: Text of the heading of each column.
        rows: Cells, HTML already.
        ids: Anchor of each row, if any.
    """
    cells = list(rows)
    kinds = [_kind([row[k] for row in cells]) for k in range(len(heads))]
    top = "".join(
        f'<th scope="col"{kind}>{escape(head)}</th>' for head, kind in zip(heads, kinds, strict=True)
    )
    body = "".join(_row(row, kinds, ids[k] if ids else "") for k, row in enumerate(cells))
    return (
        f'<div class="scroll" tabindex="0" role="region" aria-label="{escape(caption)}"><table>'
        f"<caption>{escape(caption)}</caption><thead><tr>{top}</tr></thead><tbody>{body}</tbody></table></div>"
    )


def _kind(column: Sequence[Cell]) -> str:
    """Return the class attribute of a column: numbers stand to the right, long text may break."""
    filled = [_LINK.sub("", content) for content in column if content not in ("", "–")]
    if any(len(content) > _LONG for content in filled):
        return ' class="t"'
    return ' class="n"' if filled and all(map(_NUMBERS.fullmatch, filled)) else ""


def _row(row: Sequence[Cell], kinds: Sequence[str], anchor: str) -> str:
    name = f' id="{escape(anchor)}"' if anchor else ""
    cells = "".join(f"<td{kind}>{content}</td>" for content, kind in zip(row[1:], kinds[1:], strict=True))
    return f'<tr{name}><th scope="row"{kinds[0]}>{row[0]}</th>{cells}</tr>'


def section(anchor: str, heading: str, *content: str) -> str:
    """Return a section with a heading."""
    return f'<section id="{anchor}"><h2>{escape(heading)}</h2>{"".join(content)}</section>'


def items(texts: Iterable[str]) -> str:
    """Return a list of HTML fragments as bullets."""
    return "<ul>" + "".join(f"<li>{text}</li>" for text in texts) + "</ul>"
