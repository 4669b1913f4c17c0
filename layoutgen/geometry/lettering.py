"""Texts as copper-like outlines: a stroke alphabet of this project, drawn with a pen of even width.

A polygon font has strokes of its own choosing; here the pen is given, so that a text keeps the narrowest
line that can be printed at any height.
"""

from __future__ import annotations

import unicodedata

import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.geometry.booleans import joined

__all__ = ["lettering", "lettering_size", "printable"]

_CAP = 6
"""Height of a capital in units; small letters are 4, descenders 2."""
_BASELINE = 2
_GAP = 2
"""Units between two letters."""

# Polylines of each letter, two digits a vertex: x, then y from the descender's foot (the baseline is y = 2).
_STROKES = {
    "!": "08 04|02 02",
    '"': "08 06|28 26",
    "#": "12 18|32 38|04 44|06 46",
    "$": "47 07 05 45 43 03|29 21",
    "%": "02 48|07 08 18 17 07|33 32 42 43 33",
    "&": "42 07 08 28 27 04 03 12 22 44",
    "'": "08 06",
    "(": "28 06 04 22",
    ")": "08 26 24 02",
    "*": "23 27|04 46|06 44",
    "+": "23 27|05 45",
    ",": "13 12 01",
    "-": "05 35",
    ".": "02 02",
    "/": "02 48",
    "0": "02 08 48 42 02|13 37",
    "1": "07 18 12|02 22",
    "2": "07 18 38 47 46 02 42",
    "3": "08 48 25 35 44 43 32 12 03",
    "4": "38 04 44|36 32",
    "5": "48 08 05 35 44 43 32 02",
    "6": "38 28 06 03 12 32 43 44 35 05",
    "7": "08 48 12",
    "8": "15 06 07 18 38 47 46 35 15 04 03 12 32 43 44 35",
    "9": "12 22 44 47 38 18 07 06 15 45",
    ":": "05 05|03 03",
    ";": "15 15|13 12 01",
    "<": "38 05 32",
    "=": "06 36|04 34",
    ">": "08 35 02",
    "?": "07 18 38 47 46 25 24|22 22",
    "@": "52 12 03 07 18 58 67 64 53 44 46 26 24 44",
    "A": "02 06 28 46 42|04 44",
    "B": "02 08 38 47 46 35 05|35 44 43 32 02",
    "C": "47 38 18 07 03 12 32 43",
    "D": "02 08 28 46 44 22 02",
    "E": "48 08 02 42|05 35",
    "F": "48 08 02|05 35",
    "G": "47 38 18 07 03 12 32 43 45 25",
    "H": "02 08|42 48|05 45",
    "I": "08 28|18 12|02 22",
    "J": "48 43 32 12 03",
    "K": "02 08|48 15 05|15 42",
    "L": "08 02 42",
    "M": "02 08 25 48 42",
    "N": "02 08 42 48",
    "O": "18 07 03 12 32 43 47 38 18",
    "P": "02 08 38 47 46 35 05",
    "Q": "18 07 03 12 32 43 47 38 18|24 42",
    "R": "02 08 38 47 46 35 05|25 42",
    "S": "47 38 18 07 06 15 35 44 43 32 12 03",
    "T": "08 48|28 22",
    "U": "08 03 12 32 43 48",
    "V": "08 05 22 45 48",
    "W": "08 02 25 42 48",
    "X": "02 48|08 42",
    "Y": "08 25 48|25 22",
    "Z": "08 48 02 42",
    "[": "28 08 02 22",
    "\\": "08 42",
    "]": "08 28 22 02",
    "^": "06 28 46",
    "_": "01 41",
    "`": "08 16",
    "a": "06 26 35 32 12 03 14 34",
    "b": "08 02 22 33 35 26 06",
    "c": "35 26 16 05 03 12 22 33",
    "d": "38 32 12 03 05 16 36",
    "e": "04 34 35 26 16 05 03 12 32",
    "f": "38 28 17 12|06 26",
    "g": "33 22 12 03 05 16 36 31 20 00",
    "h": "08 02|06 26 35 32",
    "i": "06 16 12|02 22|18 18",
    "j": "06 16 11 00|18 18",
    "k": "08 02|36 04 32",
    "l": "08 18 12|02 22",
    "m": "02 06 16 25 22|25 36 45 42",
    "n": "02 06 26 35 32",
    "o": "16 05 03 12 22 33 35 26 16",
    "p": "00 06 26 35 33 22 02",
    "q": "30 36 16 05 03 12 32",
    "r": "02 06|05 16 26",
    "s": "36 16 05 14 24 33 22 02",
    "t": "18 13 22 32|06 36",
    "u": "06 03 12 32 36",
    "v": "06 04 22 44 46",
    "w": "06 03 12 23 32 43 46|23 25",
    "x": "02 36|06 32",
    "y": "06 03 12 32|36 31 20 00",
    "z": "06 36 02 32",
    "{": "28 17 16 05 14 13 22",
    "|": "08 02",
    "}": "08 17 16 25 14 13 02",
    "~": "05 16 25 36",
    "\u00b0": "07 18 27 16 07",
    "\u03a9": "02 12 14 05 07 18 38 47 45 34 32 42",
    "\u00b5": "00 06|03 12 22 33 36|33 42",
}
_BLANK_WIDTH = 2
_ROUNDING_NM = 1.0


def printable(text: str) -> str:
    """Return the text with letters that the alphabet lacks replaced: accents dropped, else by ``?``."""
    out: list[str] = []
    for letter in text:
        if letter in _STROKES or letter == " ":
            out.append(letter)
            continue
        plain = "".join(c for c in unicodedata.normalize("NFKD", letter) if c in _STROKES)
        out.append(plain or "?")
    return "".join(out)


def lettering_size(text: str, height: float, pen: float) -> tuple[float, float, float]:
    """Return width, depth below the baseline and height above it [nm] of a text, its pen included.

    Args:
        text: One line of printable letters.
        height: Height of a capital between the middles of its strokes [nm].
        pen: Width of the strokes [nm].
    """
    unit = height / _CAP
    advance = sum(_letter_width(letter) + _GAP for letter in text) - _GAP
    rows = [int(vertex[1]) for letter in text for vertex in _vertices(letter)] + [_BASELINE, _BASELINE + _CAP]
    depth, above = _BASELINE - min(rows), max(rows) - _BASELINE
    return max(advance, 0) * unit + pen, depth * unit + pen / 2.0, above * unit + pen / 2.0


def lettering(
    text: str, x: float, y: float, height: float, pen: float, upright: bool = False
) -> BaseGeometry:
    """Return a text's strokes as polygons [nm] on the grid.

    Args:
        text: One line of printable letters (see :func:`printable`).
        x: West end of the text, pen included; the foot of the text's line when upright [nm].
        y: Baseline, the middle of the lowest strokes; the west end of the text when upright [nm].
        height: Height of a capital between the middles of its strokes [nm].
        pen: Width of the strokes [nm].
        upright: Turned by 90 degrees, so that the text reads from below.
    """
    unit, along = height / _CAP, pen / 2.0
    lines: list[shapely.LineString] = []
    for letter in text:
        for stroke in _STROKES.get(letter, "").split("|") if letter != " " else ():
            points = [(along + int(v[0]) * unit, (int(v[1]) - _BASELINE) * unit) for v in stroke.split()]
            lines.append(shapely.LineString([_turned(x, y, px, py, upright) for px, py in points]))
        along += (_letter_width(letter) + _GAP) * unit
    return joined(shapely.buffer(lines, pen / 2.0 + _ROUNDING_NM, quad_segs=3))


def _letter_width(letter: str) -> int:
    """Return a letter's width in units."""
    return max((int(vertex[0]) for vertex in _vertices(letter)), default=_BLANK_WIDTH)


def _vertices(letter: str) -> list[str]:
    """Return the vertices of all strokes of a letter, none for a blank."""
    return _STROKES.get(letter, "").replace("|", " ").split()


def _turned(x: float, y: float, px: float, py: float, upright: bool) -> tuple[float, float]:
    """Return a point of the text's frame on the board [nm]."""
    return (x - py, y + px) if upright else (x + px, y + py)
