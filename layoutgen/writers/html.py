"""Pieces of HTML: escaped text, tables with headings, sections with an anchor."""

from __future__ import annotations

import html
from collections.abc import Iterable, Sequence

__all__ = ["Cell", "cell", "escape", "items", "section", "table"]

Cell = str
"""A table cell's HTML, escaped already; numbers are recognised by their first character."""


def escape(text: object) -> str:
    """Return any value's text, safe inside HTML and inside attributes."""
    return html.escape(str(text), quote=True)


def cell(value: object) -> Cell:
    """Return a value as a cell; None is a dash."""
    return "–" if value is None or value == "" else escape(value)


def table(caption: str, heads: Sequence[str], rows: Iterable[Sequence[Cell]], ids: Sequence[str] = ()) -> str:
    """Return a table inside a box that scrolls by itself; numbers stand to the right.

    Args:
        caption: What the table shows, read out first by a screen reader.
        heads: Text of the heading of each column.
        rows: Cells, HTML already.
        ids: Anchor of each row, if any.
    """
    top = "".join(f'<th scope="col">{escape(head)}</th>' for head in heads)
    body = "".join(_row(row, ids[k] if ids else "") for k, row in enumerate(rows))
    return (
        f'<div class="scroll" tabindex="0" role="region" aria-label="{escape(caption)}"><table>'
        f"<caption>{escape(caption)}</caption><thead><tr>{top}</tr></thead><tbody>{body}</tbody></table></div>"
    )


def _row(row: Sequence[Cell], anchor: str) -> str:
    first, *rest = row
    name = f' id="{escape(anchor)}"' if anchor else ""
    return f'<tr{name}><th scope="row">{first}</th>{"".join(map(_td, rest))}</tr>'


def _td(content: Cell) -> str:
    return f'<td class="n">{content}</td>' if _is_number(content) else f"<td>{content}</td>"


def _is_number(content: Cell) -> bool:
    return content.lstrip("−-+")[:1].isdigit()


def section(anchor: str, heading: str, *content: str) -> str:
    """Return a section with a heading."""
    return f'<section id="{anchor}"><h2>{escape(heading)}</h2>{"".join(content)}</section>'


def items(texts: Iterable[str]) -> str:
    """Return a list of HTML fragments as bullets."""
    return "<ul>" + "".join(f"<li>{text}</li>" for text in texts) + "</ul>"
