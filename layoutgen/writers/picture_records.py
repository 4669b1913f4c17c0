"""What a picture is made of: filled outlines and texts with a style each, in nanometres, y up."""

from __future__ import annotations

from dataclasses import dataclass

from layoutgen.geometry import Ring

__all__ = ["STYLES", "Area", "Picture", "Style", "Text"]


@dataclass(frozen=True, slots=True)
class Style:
    """Colours as #rrggbb (None: none) and the pen's width [nm]."""

    fill: str | None
    pen: str | None = None
    width: int = 0


STYLES = {
    "paper": Style("#f7f2e6"),
    "board": Style("#e6dcc3", "#5c5140", 120_000),
    "pour": Style("#dcaa82"),
    "ground": Style("#d39b70", "#d39b70", 10_000),
    "line": Style("#ad5f2c", "#ad5f2c", 10_000),
    "pad": Style("#c9a24b", "#8a6a22", 50_000),
    "opening": Style(None, "#3f7f70", 60_000),
    "hole": Style("#f7f2e6", "#5c5140", 60_000),
    "via": Style("#f7f2e6", "#7d4a22", 40_000),
    "body": Style(None, "#4a4438", 90_000),
    "ink": Style("#2f2a22"),
    "port": Style("#2d5f8a"),
    "error": Style("#c1272d", "#ffffff", 60_000),
    "warning": Style("#e0a100", "#ffffff", 60_000),
    "bar": Style("#2f2a22"),
}
"""Styles by name."""


@dataclass(frozen=True, slots=True)
class Area:
    """Outlines of one style (outer counter-clockwise, holes clockwise), and what to say about them."""

    rings: tuple[Ring, ...]
    style: str
    tip: str = ""


@dataclass(frozen=True, slots=True)
class Text:
    """A text at a place [nm], its capital height [nm], anchor (start, middle, end) and turn [deg]."""

    text: str
    x: int
    y: int
    height: int
    style: str = "ink"
    anchor: str = "start"
    turn: float = 0.0


@dataclass(frozen=True, slots=True)
class Picture:
    """What is seen: the page's lower left and upper right corners [nm], areas and texts in drawing order."""

    title: str
    box: tuple[int, int, int, int]
    areas: tuple[Area, ...]
    texts: tuple[Text, ...]
