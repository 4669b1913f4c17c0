"""SVG: the preview picture with true arcs, and a tip on every line, pad and finding."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from html import escape
from itertools import groupby

from layoutgen.artwork import Artwork
from layoutgen.checks import Finding
from layoutgen.geometry import Ring
from layoutgen.numbers import fixed, mm_short
from layoutgen.writers.outlines import bulge_radius, distinct_vertices
from layoutgen.writers.picture import STYLES, Area, Picture, Style, Text, picture_of
from layoutgen.writers.records import Job, Result

__all__ = ["artwork_svg", "write_svg"]

_CAPITAL = 0.72
"""Height of a capital letter in a font of size one [-], of the usual sans-serif fonts."""


def write_svg(result: Result, job: Job) -> bytes:
    """Return the SVG file of the result; it is the same for equal results (``job`` changes nothing)."""
    return artwork_svg(result.artwork, result.findings).encode("utf-8")


def artwork_svg(artwork: Artwork, findings: Sequence[Finding] = ()) -> str:
    """Return an artwork as SVG text, true to size in millimetres."""
    return "\n".join(_lines(picture_of(artwork, findings))) + "\n"


def _lines(picture: Picture) -> Iterator[str]:
    x0, y0, x1, y1 = picture.box
    width, height = mm_short(x1 - x0), mm_short(y1 - y0)
    yield (
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{width}mm" height="{height}mm" '
        f'viewBox="{mm_short(x0)} {mm_short(-y1)} {width} {height}" role="img" '
        f'aria-label="{escape(picture.title)}: board seen from the top">'
    )
    yield f"<title>{escape(picture.title)}</title>"
    for style, areas in groupby(picture.areas, key=lambda area: area.style):
        yield f"<g {_paint(STYLES[style])}>"
        yield from map(_path, areas)
        yield "</g>"
    yield '<g font-family="Helvetica, Arial, DejaVu Sans, sans-serif">'
    yield from map(_text, picture.texts)
    yield "</g>"
    yield "</svg>"


def _paint(style: Style) -> str:
    pen = f' stroke="{style.pen}" stroke-width="{mm_short(style.width)}"' if style.pen else ""
    return f'fill="{style.fill or "none"}"{pen}'


def _path(area: Area) -> str:
    data = "".join(map(_ring, area.rings))
    return f'<path d="{data}"><title>{escape(area.tip)}</title></path>' if area.tip else f'<path d="{data}"/>'


def _ring(ring: Ring) -> str:
    """Return a closed subpath; y grows downwards in SVG, so counter-clockwise is sweep 0."""
    vertices = distinct_vertices(ring)
    out = [f"M{_pair(vertices[0][0])}"]
    for (start, bulge), (end, _) in zip(vertices, vertices[1:] + vertices[:1], strict=True):
        if bulge:
            radius = mm_short(round(bulge_radius(start, end, bulge)))
            out.append(f"A{radius} {radius} 0 {int(abs(bulge) > 1)} {int(bulge < 0)} {_pair(end)}")
        elif end != vertices[0][0]:
            out.append(f"L{_pair(end)}")
    return "".join(out) + "z"


def _pair(point: tuple[int, int]) -> str:
    return f"{mm_short(point[0])} {mm_short(-point[1])}"


def _text(text: Text) -> str:
    size = mm_short(round(text.height / _CAPITAL))
    place = f'x="{mm_short(text.x)}" y="{mm_short(-text.y)}"'
    turn = text.turn and f' transform="rotate({fixed(-text.turn, 3)} {_pair((text.x, text.y))})"'
    anchor = "" if text.anchor == "start" else f' text-anchor="{text.anchor}"'
    fill = STYLES[text.style].fill
    return f'<text {place} font-size="{size}" fill="{fill}"{anchor}{turn or ""}>{escape(text.text)}</text>'
