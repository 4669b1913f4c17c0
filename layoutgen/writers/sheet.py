"""Sheets of paper in true millimetres, as PDF: lines, areas and text, placed from the lower left corner.

x runs right, y up. Fixed meta data and the library's own defaults, so that
equal content gives equal bytes whatever is installed or configured.
"""

from __future__ import annotations

import functools
import io
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from typing import Any, Literal

import numpy as np
import numpy.typing as npt

__all__ = [
    "A4",
    "INK",
    "PAPER_SIZES",
    "Book",
    "Sheet",
    "circle_outline",
    "document",
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

_MM_PER_INCH, _POINTS_PER_MM = 25.4, 72.0 / 25.4
_FONT = "DejaVu Sans"
_STRIP = 14.0
_EM = 100.0
"""Size in which characters are measured [points]."""

Polyline = Sequence[tuple[float, float]]
Align = Literal["left", "center", "right"]


def paper_for(width: float, height: float) -> tuple[float, float]:
    """Return the smallest A size on its side [mm] with that much room, or just enough beyond A0."""
    for size in PAPER_SIZES:
        if size[0] >= width and size[1] >= height:
            return size
    return max(width, A4[0]), max(height, A4[1])


@contextmanager
def document(kind: str, title: str, details: Sequence[str] = ()) -> Iterator[Book]:
    """Give an empty document; inside the block the plotting library has its own defaults, whatever is set.

    Args:
        kind: What the document is.
        title: The board's title.
        details: What else its sheets' strips say, such as the revision.
    """
    import matplotlib as mpl

    defaults: dict[Any, Any] = {k: value for k, value in mpl.rcParamsDefault.items() if k != "backend"}
    with mpl.rc_context({**defaults, "pdf.fonttype": 3}):
        yield Book(kind, title, details)


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
        from matplotlib.backends.backend_pdf import PdfPages

        stream = io.BytesIO()
        meta = {
            "Title": f"{self.title}: {self.kind}",
            "Creator": "layoutgen",
            "Producer": None,
            "CreationDate": None,
        }
        with PdfPages(stream, metadata=meta) as pages:
            for number, sheet in enumerate(self.sheets, start=1):
                self._frame(sheet, number)
                pages.savefig(sheet.figure)
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
        from matplotlib.figure import Figure
        from matplotlib.transforms import Affine2D

        self.name, self.width, self.height = name, width, height
        self.figure: Any = Figure(figsize=(width / _MM_PER_INCH, height / _MM_PER_INCH))
        self._place: Any = Affine2D().scale(1.0 / width, 1.0 / height) + self.figure.transFigure

    @property
    def room(self) -> tuple[float, float, float, float]:
        """Left, lower, right and upper limit inside frame and strip [mm]."""
        inset = MARGIN + 4.0
        return inset, MARGIN + _STRIP + 4.0, self.width - inset, self.height - inset

    def line(self, points: Polyline, weight: float = 0.18, pen: str = INK, dash: float = 0.0) -> None:
        """Draw a line through points."""
        from matplotlib.lines import Line2D

        style: Any = (0, (dash * _POINTS_PER_MM, 0.6 * dash * _POINTS_PER_MM)) if dash else "-"
        xs, ys = zip(*points, strict=True)
        artist = Line2D(
            xs,
            ys,
            linewidth=weight * _POINTS_PER_MM,
            color=pen,
            linestyle=style,
            transform=self._place,
            solid_capstyle="butt",
            solid_joinstyle="miter",
        )
        self.figure.add_artist(artist)

    def area(
        self,
        outlines: Sequence[Polyline | npt.NDArray[np.float64]],
        fill: str | None = None,
        pen: str | None = None,
        weight: float = 0.18,
        hatch: str | None = None,
    ) -> None:
        """Draw closed outlines as one area: outer ones counter-clockwise, holes clockwise."""
        from matplotlib.patches import PathPatch
        from matplotlib.path import Path

        rings = [np.asarray(outline, dtype=float) for outline in outlines]
        if not rings:
            return
        codes = [
            code for ring in rings for code in (Path.MOVETO, *[Path.LINETO] * (len(ring) - 1), Path.CLOSEPOLY)
        ]
        vertices = np.concatenate([part for ring in rings for part in (ring, ring[:1])])
        patch = PathPatch(
            Path(vertices, codes),
            facecolor=fill or "none",
            edgecolor=pen or "none",
            linewidth=weight * _POINTS_PER_MM if pen else 0.0,
            transform=self._place,
            hatch=hatch,
            joinstyle="miter",
        )
        self.figure.add_artist(patch)

    def strokes(self, lines: Sequence[Polyline], weight: float = 0.18, pen: str = INK) -> None:
        """Draw many lines at once."""
        from matplotlib.patches import PathPatch
        from matplotlib.path import Path

        if not lines:
            return
        codes = [code for line in lines for code in (Path.MOVETO, *[Path.LINETO] * (len(line) - 1))]
        path = Path(np.concatenate([np.asarray(line, dtype=float) for line in lines]), codes)
        width = weight * _POINTS_PER_MM
        patch = PathPatch(path, facecolor="none", edgecolor=pen, linewidth=width, transform=self._place)
        self.figure.add_artist(patch)

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
        self.area([circle_outline(x, y, radius)], fill, pen, weight)

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
        from matplotlib.text import Text

        shown = printable(text)
        if room is not None and shown:
            size = min(size, size * room / max(text_width(shown, size, bold), 1e-6))
        artist = Text(
            x,
            y,
            shown,
            color=pen,
            fontfamily=_FONT,
            fontsize=size * _POINTS_PER_MM,
            fontweight="bold" if bold else "normal",
            horizontalalignment=align,
            verticalalignment="center_baseline" if middle else "baseline",
            rotation=turn,
            rotation_mode="anchor",
            transform=self._place,
            parse_math=False,
        )
        self.figure.add_artist(artist)


def circle_outline(x: float, y: float, radius: float) -> npt.NDArray[np.float64]:
    """Return a circle's outline [mm], as many chords as keep within a fiftieth of a millimetre."""
    share = min(1.0, 0.02 / max(radius, 1e-6))
    count = max(8, int(np.ceil(np.pi / np.arccos(1.0 - share))))
    angle = np.arange(count) * (2.0 * np.pi / count)
    return np.column_stack([x + radius * np.cos(angle), y + radius * np.sin(angle)])


def text_width(text: str, size: float, bold: bool = False) -> float:
    """Return how wide a line of text is in a font of a size [mm], kerning left out."""
    return size * sum(_advance(c, bold) for c in printable(text))


@functools.lru_cache(maxsize=4096)
def _advance(character: str, bold: bool) -> float:
    """Return how far a character moves the pen in a font of size one [-]."""
    from matplotlib.font_manager import findfont, get_font

    font: Any = get_font(findfont(_font(bold)))
    font.set_size(_EM, 72)
    return float(font.load_char(ord(character)).linearHoriAdvance) / 65536.0 / _EM


@functools.lru_cache(maxsize=2)
def _font(bold: bool) -> Any:
    from matplotlib.font_manager import FontProperties

    return FontProperties(family=_FONT, weight="bold" if bold else "normal")


@functools.lru_cache(maxsize=1)
def _characters() -> frozenset[int]:
    """Return the characters that the font has."""
    from matplotlib.font_manager import findfont, get_font

    font: Any = get_font(findfont(_font(False)))
    return frozenset(font.get_charmap())


def printable(text: str) -> str:
    """Return text with a question mark for each character that the font does not have."""
    known = _characters()
    return "".join(c if ord(c) in known else "?" for c in text)
