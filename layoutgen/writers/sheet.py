"""Sheets of paper in true millimetres, as PDF: lines, areas and text, placed from the lower left corner.

x runs right, y up. Fixed meta data and fonts that come with the package's libraries, so that equal content
gives equal bytes whatever is installed or configured.
"""

from __future__ import annotations

import functools
import io
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal

import numpy as np
import numpy.typing as npt

if TYPE_CHECKING:
    from reportlab.lib.colors import Color
    from reportlab.pdfgen.canvas import Canvas
    from reportlab.pdfgen.pathobject import PDFPathObject

__all__ = [
    "A4",
    "INK",
    "PAPER_SIZES",
    "Book",
    "Sheet",
    "paper_for",
    "printable",
    "text_width",
]

A4 = (297.0, 210.0)
"""Width and height of the usual sheet, on its side [mm]."""
PAPER_SIZES = (A4, (420.0, 297.0), (594.0, 420.0), (841.0, 594.0), (1189.0, 841.0))
"""A4 to A0 on their sides [mm]."""
MARGIN = 10.0
"""Distance of the frame from the edge [mm]."""
INK = "#2b261e"
SOFT = "#6b6252"

_POINTS_PER_MM = 72.0 / 25.4
_FONT_FILES = {False: ("layoutgen-plain", "DejaVuSans.ttf"), True: ("layoutgen-bold", "DejaVuSans-Bold.ttf")}
_STRIP = 14.0
_HALF_CAPITAL = 0.365
"""Half the height of a capital in a font of size one [-]: how far below a middle the base line runs."""

Polyline = Sequence[tuple[float, float]]
Align = Literal["left", "center", "right"]
Outline = Sequence[tuple[float, float]] | npt.NDArray[np.float64]
Mark = Callable[["Canvas"], None]


def paper_for(width: float, height: float) -> tuple[float, float]:
    """Return the smallest A size on its side [mm] with that much room, or just enough beyond A0."""
    for size in PAPER_SIZES:
        if size[0] >= width and size[1] >= height:
            return size
    return max(width, A4[0]), max(height, A4[1])


class Book:
    """Sheets of one document, each with a frame and a strip that says what it is."""

    def __init__(self, kind: str, title: str, details: Sequence[str] = ()) -> None:
        """Begin a document: its kind, the board's title, details for the strip such as the revision."""
        self.kind, self.title, self.details = kind, title, tuple(details)
        self.sheets: list[Sheet] = []

    def sheet(self, name: str, size: tuple[float, float] = A4) -> Sheet:
        """Return a new sheet [mm]."""
        sheet = Sheet(name, *size)
        self.sheets.append(sheet)
        return sheet

    def pdf(self) -> bytes:
        """Return the document as PDF."""
        from reportlab.pdfgen.canvas import Canvas

        stream = io.BytesIO()
        font: Any = _font(False)
        canvas = Canvas(stream, pageCompression=1, invariant=1, initialFontName=font)
        canvas.setTitle(f"{self.title}: {self.kind}")
        canvas.setCreator("layoutgen")
        canvas.setAuthor("")
        for number, sheet in enumerate(self.sheets, start=1):
            self._frame(sheet, number)
            sheet.put_on(canvas)
        canvas.save()
        return stream.getvalue()

    def _frame(self, sheet: Sheet, number: int) -> None:
        """Draw a sheet's frame and its strip."""
        left, right, low = MARGIN, sheet.width - MARGIN, MARGIN
        sheet.box(left, low, right, sheet.height - MARGIN, pen=INK, weight=0.35)
        sheet.line([(left, low + _STRIP), (right, low + _STRIP)], weight=0.35)
        sheet.text(left + 3, low + 8.2, self.title, 4.0, bold=True, room=0.45 * sheet.width)
        sheet.text(left + 3, low + 2.8, ", ".join(self.details), 2.8, room=0.45 * sheet.width)
        sheet.text(
            right - 3, low + 8.2, f"{self.kind}: {sheet.name}", 4.0, align="right", room=0.42 * sheet.width
        )
        about = f"drawn by layoutgen from the circuit file; sheet {number} of {len(self.sheets)}"
        sheet.text(right - 3, low + 2.8, about, 2.8, align="right")


class Sheet:
    """One sheet; all lengths in millimetres."""

    def __init__(self, name: str, width: float, height: float) -> None:
        """Begin an empty sheet."""
        self.name, self.width, self.height = name, width, height
        self._marks: list[Mark] = []

    @property
    def room(self) -> tuple[float, float, float, float]:
        """Left, lower, right and upper limit inside frame and strip [mm]."""
        inset = MARGIN + 4.0
        return inset, MARGIN + _STRIP + 4.0, self.width - inset, self.height - inset

    def put_on(self, canvas: Canvas) -> None:
        """Draw the sheet as the next page of a PDF."""
        canvas.setPageSize((self.width * _POINTS_PER_MM, self.height * _POINTS_PER_MM))
        canvas.scale(_POINTS_PER_MM, _POINTS_PER_MM)
        for mark in self._marks:
            canvas.saveState()
            mark(canvas)
            canvas.restoreState()
        canvas.showPage()

    def line(self, points: Polyline, weight: float = 0.18, pen: str = INK, dash: float = 0.0) -> None:
        """Draw a line through points."""
        self.strokes([points], weight, pen, dash)

    def area(
        self,
        outlines: Sequence[Outline],
        fill: str | None = None,
        pen: str | None = None,
        weight: float = 0.18,
    ) -> None:
        """Draw closed outlines as one area: outer ones counter-clockwise, holes clockwise."""
        rings = [np.asarray(outline, dtype=float) for outline in outlines]
        if not rings:
            return

        def mark(canvas: Canvas) -> None:
            path = canvas.beginPath()
            for ring in rings:
                _through(path, ring)
                path.close()
            _paint(canvas, path, fill, pen, weight)

        self._marks.append(mark)

    def strokes(
        self, lines: Sequence[Polyline], weight: float = 0.18, pen: str = INK, dash: float = 0.0
    ) -> None:
        """Draw many lines at once."""
        if not lines:
            return
        chains = [np.asarray(line, dtype=float) for line in lines]

        def mark(canvas: Canvas) -> None:
            path = canvas.beginPath()
            for chain in chains:
                _through(path, chain)
            if dash:
                canvas.setDash([dash, 0.6 * dash])
            _paint(canvas, path, None, pen, weight)

        self._marks.append(mark)

    def box(
        self,
        x0: float,
        y0: float,
        x1: float,
        y1: float,
        fill: str | None = None,
        pen: str | None = None,
        weight: float = 0.18,
    ) -> None:
        """Draw a box between two corners."""
        self.area([[(x0, y0), (x1, y0), (x1, y1), (x0, y1)]], fill, pen, weight)

    def circle(
        self,
        x: float,
        y: float,
        radius: float,
        fill: str | None = None,
        pen: str | None = None,
        weight: float = 0.18,
    ) -> None:
        """Draw a circle."""
        self.circles([(x, y, radius)], fill, pen, weight)

    def circles(
        self,
        circles: Sequence[tuple[float, float, float]],
        fill: str | None = None,
        pen: str | None = None,
        weight: float = 0.18,
    ) -> None:
        """Draw circles, each x, y, radius, in one style."""

        def mark(canvas: Canvas) -> None:
            path = canvas.beginPath()
            for circle in circles:
                path.circle(*circle)
            _paint(canvas, path, fill, pen, weight)

        self._marks.append(mark)

    def text(
        self,
        x: float,
        y: float,
        text: str,
        size: float = 3.0,
        align: Align = "left",
        bold: bool = False,
        turn: float = 0.0,
        pen: str = INK,
        room: float | None = None,
        middle: bool = False,
    ) -> None:
        """Write text on a base line (or about a middle) in a font of a size; smaller where room is short."""
        shown = printable(text)
        if room is not None and shown:
            size = min(size, size * room / max(text_width(shown, size, bold), 1e-6))
        back = {"left": 0.0, "center": 0.5, "right": 1.0}[align] * text_width(shown, size, bold)
        low = _HALF_CAPITAL * size if middle else 0.0

        def mark(canvas: Canvas) -> None:
            canvas.translate(x, y)
            canvas.rotate(turn)
            canvas.setFillColor(_colour(pen))
            canvas.setFont(_font(bold), size)
            canvas.drawString(-back, -low, shown)

        self._marks.append(mark)


def _through(path: PDFPathObject, points: npt.NDArray[np.float64]) -> None:
    """Add a chain of points to a path."""
    (x, y), *others = points.tolist()
    path.moveTo(x, y)
    for x, y in others:
        path.lineTo(x, y)


def _paint(canvas: Canvas, path: PDFPathObject, fill: str | None, pen: str | None, weight: float) -> None:
    """Fill a path, stroke it, or both."""
    if fill is not None:
        canvas.setFillColor(_colour(fill))
    if pen is not None:
        canvas.setStrokeColor(_colour(pen))
        canvas.setLineWidth(weight)
    canvas.drawPath(path, stroke=int(pen is not None), fill=int(fill is not None), fillMode=1)


@functools.lru_cache(maxsize=4096)
def text_width(text: str, size: float, bold: bool = False) -> float:
    """Return how wide a line of text is in a font of a size [mm], kerning left out."""
    from reportlab.pdfbase.pdfmetrics import stringWidth

    return float(stringWidth(printable(text), _font(bold), size))


@functools.cache
def _colour(text: str) -> Color:
    """Return a colour written as ``#rrggbb``."""
    from reportlab.lib.colors import HexColor

    return HexColor(text)


@functools.cache
def _font(bold: bool) -> str:
    """Return the name under which a font is known to the PDF library, which learns of it on first use.

    The files are those that the plotting library brings along: free to embed, and the same everywhere.
    """
    from matplotlib import get_data_path
    from reportlab import rl_config
    from reportlab.pdfbase import pdfmetrics
    from reportlab.pdfbase.ttfonts import TTFont

    rl_config.useA85 = 0
    name, file = _FONT_FILES[bold]
    pdfmetrics.registerFont(TTFont(name, Path(get_data_path(), "fonts", "ttf", file)))
    return name


@functools.cache
def _characters() -> frozenset[int]:
    """Return the characters that the font has."""
    from reportlab.pdfbase import pdfmetrics

    font: Any = pdfmetrics.getFont(_font(False))
    return frozenset(font.face.charToGlyph)


def printable(text: str) -> str:
    """Return text with a question mark for each character that the font does not have."""
    if text.isascii() and text.isprintable():
        return text
    known = _characters()
    return "".join(c if ord(c) in known else "?" for c in text)
