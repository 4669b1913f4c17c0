"""What a terminal shows: tables (plain text where it is none) and progress on work that takes a while."""

from __future__ import annotations

import sys
import threading
from collections.abc import Iterable, Sequence
from types import TracebackType
from typing import Any, TextIO

import click

__all__ = ["Progress", "plain_table", "print_table", "print_tables", "rich_table"]

Row = Sequence[str]


def plain_table(heads: Row, rows: Sequence[Row]) -> str:
    """Return a table as plain lines: columns two blanks apart, numbers to the right, no blanks at the end."""
    columns = list(zip(heads, *rows, strict=True))
    widths = [max(map(len, column)) for column in columns]
    right = [_is_numeric(column[1:]) for column in columns]
    lines = (
        "  ".join(
            text.rjust(width) if to_right else text.ljust(width)
            for text, width, to_right in zip(row, widths, right, strict=True)
        ).rstrip()
        for row in (heads, *rows)
    )
    return "\n".join(lines)


def rich_table(title: str, heads: Row, rows: Sequence[Row], stream: TextIO) -> None:
    """Print a table to a terminal, with a title and colours."""
    from rich.console import Console
    from rich.table import Table
    from rich.text import Text

    table = Table(title=title, title_justify="left", header_style="bold")
    for head, column in zip(heads, zip(*rows, strict=True), strict=True):
        table.add_column(head, justify="right" if _is_numeric(column) else "left", overflow="fold")
    for row in rows:
        table.add_row(*(Text(text, style=_STYLES.get(text, "")) for text in row))
    Console(file=stream).print(table)


def print_tables(tables: Iterable[tuple[str, Row, Sequence[Row]]]) -> None:
    """Print several tables to standard output, each below its title."""
    for title, heads, rows in tables:
        if rows and not sys.stdout.isatty():
            click.echo(f"{title}:")
        print_table(title, heads, rows)


def print_table(title: str, heads: Row, rows: Sequence[Row]) -> None:
    """Print a table: with lines and colours on a terminal, plain when piped; nothing when it has no rows."""
    if rows and sys.stdout.isatty():
        rich_table(title, heads, rows, sys.stdout)
    elif rows:
        click.echo(plain_table(heads, rows) + "\n")


_STYLES = {"error": "bold red", "warning": "yellow", "note": "dim"}


def _is_numeric(texts: Sequence[str]) -> bool:
    """Tell whether all texts of a column are numbers or missing ones."""
    return bool(texts) and all(text in _NO_NUMBER or text.lstrip("-")[:1].isdigit() for text in texts)


_NO_NUMBER = ("-", "none", "free")


class Progress:
    """A line on a terminal that names the stage at work, from the first second on; silent elsewhere."""

    DELAY = 1.0
    """Seconds before anything is shown [s]."""

    def __init__(self, stream: TextIO, enabled: bool) -> None:
        """Keep where to show it; nothing is shown before :attr:`DELAY`."""
        self._stream, self._enabled = stream, enabled
        self._stage, self._status, self._closed = "", None, False
        self._lock = threading.Lock()
        self._timer = threading.Timer(self.DELAY, self._show)
        self._timer.daemon = True

    def __call__(self, stage: str) -> None:
        """Name the stage that begins."""
        with self._lock:
            self._stage = stage
            if self._status is not None:
                self._status.update(f"{stage} ...")

    def __enter__(self) -> Progress:
        """Start the clock."""
        if self._enabled:
            self._timer.start()
        return self

    def __exit__(self, kind: type[BaseException] | None, error: object, trace: TracebackType | None) -> None:
        """Clear the line."""
        self._timer.cancel()
        with self._lock:
            self._closed = True
            if self._status is not None:
                self._status.stop()

    def _show(self) -> None:
        from rich.console import Console

        with self._lock:
            if not self._closed:
                status: Any = Console(file=self._stream).status(f"{self._stage} ...")
                status.start()
                self._status = status
