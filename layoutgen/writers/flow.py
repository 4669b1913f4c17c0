"""Text and tables that run down a sheet and on to the next ones."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence

from layoutgen.writers.sheet import INK, Sheet, text_width

__all__ = ["Flow", "wrapped"]

_SIZE, _LEAD = 2.6, 1.45
_GAP = 3.0
_RULE = "#b8ad97"
_STRIPE = "#f4efe4"


def wrapped(text: str, room: float, size: float = _SIZE, bold: bool = False) -> list[str]:
    """Return text as lines that fit into a width [mm]; a word that is too long for it stays whole."""
    lines: list[str] = []
    for word in text.split():
        longer = f"{lines[-1]} {word}" if lines else word
        if lines and text_width(longer, size, bold) <= room:
            lines[-1] = longer
        else:
            lines.append(word)
    return lines or [""]


class Flow:
    """A column of text and tables on one sheet after the other."""

    def __init__(
        self,
        new_sheet: Callable[[], Sheet],
        sheet: Sheet | None = None,
        room: tuple[float, float, float, float] | None = None,
    ) -> None:
        """Begin at the top of a part of a sheet (left, lower, right, upper [mm]), or of a new one."""
        self._new_sheet = new_sheet
        self.sheet = sheet if sheet is not None else new_sheet()
        self.left, self.low, self.right, self.y = room if room is not None else self.sheet.room

    def skip(self, height: float = _GAP) -> None:
        """Leave some room [mm]."""
        self.y -= height

    def need(self, height: float) -> None:
        """Go to a new sheet unless there is so much room [mm] left on this one."""
        if self.y - height < self.low:
            self.sheet = self._new_sheet()
            self.left, self.low, self.right, self.y = self.sheet.room

    def heading(self, text: str, size: float = 4.0, keep: float = 14.0) -> None:
        """Write a heading, on the same sheet as what follows it."""
        self.need(size * _LEAD + keep)
        self.y -= size * _LEAD
        self.sheet.text(self.left, self.y, text, size, bold=True)
        self.skip(1.6)

    def paragraph(
        self, text: str, size: float = _SIZE, lead: str = "", bold: bool = False, pen: str = INK
    ) -> None:
        """Write a paragraph; ``lead`` stands before it, the text beside it."""
        inset = text_width(lead, size) + 0.6 * size if lead else 0.0
        lines = wrapped(text, self.right - self.left - inset, size, bold)
        self.need(size * _LEAD * min(len(lines), 3))
        for number, line in enumerate(lines):
            self.need(size * _LEAD)
            self.y -= size * _LEAD
            if lead and number == 0:
                self.sheet.text(self.left, self.y, lead, size, bold=bold, pen=pen)
            self.sheet.text(self.left + inset, self.y, line, size, bold=bold, pen=pen)
        self.skip(0.35 * size)

    def table(
        self,
        heads: Sequence[str],
        rows: Iterable[Sequence[str]],
        size: float = _SIZE,
        numbers: Sequence[int] = (),
    ) -> None:
        """Write a table, its headings again on each sheet; columns ``numbers`` stand to the right."""
        cells = [tuple(row) for row in rows]
        widths = self._widths(heads, cells, size)
        table = _Table(widths, frozenset(numbers), size)
        top = table.lines(heads, bold=True)
        self._head(table, top)
        for count, row in enumerate(cells):
            lines = table.lines(row)
            if self.y - table.height(lines) < self.low:
                self.need(self.y)
                self._head(table, top)
            self._row(table, lines, shaded=count % 2 == 1)
        self.sheet.line([(self.left, self.y), (self.left + sum(widths), self.y)], pen=_RULE)
        self.skip()

    def _head(self, table: _Table, lines: list[list[str]]) -> None:
        self.need(table.height(lines) + 3.0 * table.size)
        self._row(table, lines, bold=True)
        self.sheet.line([(self.left, self.y), (self.left + sum(table.widths), self.y)], weight=0.3)

    def _row(self, table: _Table, lines: list[list[str]], bold: bool = False, shaded: bool = False) -> None:
        height = table.height(lines)
        if shaded:
            self.sheet.box(self.left, self.y - height, self.left + sum(table.widths), self.y, fill=_STRIPE)
        x = self.left
        for column, (cell, width) in enumerate(zip(lines, table.widths, strict=True)):
            right = column in table.numbers
            at = x + width - table.pad if right else x + table.pad
            for number, line in enumerate(cell):
                y = self.y - table.size * (0.3 + 0.85 + number * 1.3)
                self.sheet.text(at, y, line, table.size, "right" if right else "left", bold)
            x += width
        self.y -= height

    def _widths(self, heads: Sequence[str], rows: Sequence[Sequence[str]], size: float) -> list[float]:
        """Return widths of columns [mm]: what each needs, the widest ones narrowed until all fit."""
        pad = 2.0 * _Table.PAD * size
        need = [
            max(text_width(head, size, True), *(text_width(row[k], size) for row in rows), 0.0) + pad
            if rows
            else text_width(head, size, True) + pad
            for k, head in enumerate(heads)
        ]
        least = [
            max((text_width(word, size, True) for word in _words(head, rows, k)), default=0.0) + pad
            for k, head in enumerate(heads)
        ]
        return _fitted(need, least, self.right - self.left)


def _words(head: str, rows: Sequence[Sequence[str]], column: int) -> set[str]:
    """Return all words of a column."""
    return {word for cell in (head, *(row[column] for row in rows)) for word in cell.split()}


def _fitted(need: list[float], least: list[float], room: float) -> list[float]:
    """Return widths that add up to no more than the room where the least widths allow it."""
    widths = list(need)
    for _ in range(200):
        excess = sum(widths) - room
        wide = [k for k in range(len(widths)) if widths[k] > least[k]]
        if excess <= 1e-9 or not wide:
            break
        widest = max(wide, key=lambda k: widths[k])
        second = max((widths[k] for k in wide if k != widest), default=0.0)
        cut = min(excess, max(widths[widest] - second, 1.0))
        widths[widest] = max(least[widest], widths[widest] - cut)
    scale = min(1.0, room / sum(widths))
    return [width * scale for width in widths]


class _Table:
    """The measures of one table."""

    PAD = 0.55

    def __init__(self, widths: Sequence[float], numbers: frozenset[int], size: float) -> None:
        self.widths, self.numbers, self.size = list(widths), numbers, size
        self.pad = self.PAD * size

    def lines(self, row: Sequence[str], bold: bool = False) -> list[list[str]]:
        """Return each cell of a row as lines."""
        return [
            wrapped(cell, width - 2.0 * self.pad, self.size, bold)
            for cell, width in zip(row, self.widths, strict=True)
        ]

    def height(self, lines: list[list[str]]) -> float:
        """Return a row's height [mm]."""
        return self.size * (0.65 + 1.3 * max(len(cell) for cell in lines))
