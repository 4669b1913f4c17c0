"""The preview picture of a board, from which SVG and PNG are both drawn.

The look: copper as copper on a paper-like ground, the pour paler than the lines, pads as solder-tinned, ink
for the legend, and a diamond of our own for each finding.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

from layoutgen.artwork import Artwork, Shape
from layoutgen.checks import Finding
from layoutgen.geometry import Ring
from layoutgen.numbers import fixed
from layoutgen.placement import PlacedLine
from layoutgen.writers.outlines import turned
from layoutgen.writers.picture_frame import Frame, diamond
from layoutgen.writers.picture_records import STYLES, Area, Picture, Style, Text
from layoutgen.writers.scene import marked_findings

__all__ = ["STYLES", "Area", "Picture", "Style", "Text", "picture_of"]

_NM = 1_000_000

_ROLE_STYLES = {
    "pour": "pour",
    "ground": "ground",
    "land": "ground",
    "line": "line",
    "pair": "line",
    "radial": "line",
    "strip": "line",
    "pad": "pad",
}
"""Style of each role on the top copper; what is not named here is drawn as a line."""

_ORDER = ("pour", "ground", "line", "pad")


def picture_of(artwork: Artwork, findings: Sequence[Finding] = ()) -> Picture:
    """Return the picture of an artwork, with marks for the findings given."""
    board = (
        *_board(artwork),
        *_copper(artwork),
        *_openings(artwork),
        *_drills(artwork),
        *_bodies(artwork),
        *_legend(artwork),
    )
    frame = Frame(
        artwork, [*(area.style for area in board), *(f.severity for _, f in marked_findings(findings))]
    )
    marks, numbers = _marks(findings, frame.unit), _mark_numbers(findings, frame.unit)
    names = (*_line_names(artwork), *_missing_references(artwork, frame.unit))
    return Picture(
        title=artwork.placement.sized.circuit.file.design.title,
        box=frame.box,
        areas=(Area((Ring.box(*frame.box),), "paper"), *board, *frame.areas(), *marks),
        texts=(*names, *frame.texts(), *numbers),
    )


def _rings(shape: Shape) -> tuple[Ring, ...]:
    return (turned(shape.outline, 1), *(turned(hole, -1) for hole in shape.holes))


def _board(artwork: Artwork) -> Iterator[Area]:
    """Yield the board, and each cut-out as a hole in it."""
    for shape in artwork.on("profile"):
        if shape.role == "cutout":
            yield Area(_rings(shape), "hole", f"cut-out of {shape.origin.element}")
        else:
            yield Area(_rings(shape), "board")


def _copper(artwork: Artwork) -> Iterator[Area]:
    """Yield the top copper: the pour first, then ground pieces, lines, pads."""
    by_style: dict[str, list[Area]] = {style: [] for style in _ORDER}
    for shape in artwork.on("copper_top"):
        style = _ROLE_STYLES.get(shape.role, "line")
        by_style[style].append(Area(_rings(shape), style, _tip(artwork, shape)))
    for style in _ORDER:
        yield from by_style[style]


def _tip(artwork: Artwork, shape: Shape) -> str:
    """Return what is said when the pointer rests on a shape."""
    name = shape.origin.element
    line = artwork.placement.lines.get(name)
    if shape.role != "line" or line is None:
        return f"{name} {shape.role}, net {shape.net}" if shape.net else f"{name} {shape.role}"
    sized = artwork.placement.sized.lines[name]
    return (
        f"{name}: {fixed(line.width / _NM, 3)} mm wide, {fixed(line.centre_line / _NM, 3)} mm long, "
        f"{fixed(sized.impedance, 2)} ohm, {fixed(math.degrees(line.angle), 2)} deg"
    )


def _openings(artwork: Artwork) -> Iterator[Area]:
    return (Area(_rings(shape), "opening") for shape in artwork.on("soldermask_top"))


def _drills(artwork: Artwork) -> Iterator[Area]:
    for via in artwork.vias:
        yield Area((Ring.circle(via.x, via.y, via.drill // 2),), "via")
    for hole in artwork.holes:
        kind = "plated" if hole.plated else "unplated"
        tip = f"{kind} hole {fixed(hole.diameter / _NM, 2)} mm"
        yield Area((Ring.circle(hole.x, hole.y, hole.diameter // 2),), "hole", tip)


def _bodies(artwork: Artwork) -> Iterator[Area]:
    return (Area((part.outline,), "body", part.name) for part in artwork.placement.parts.values())


def _legend(artwork: Artwork) -> Iterator[Area]:
    return (Area(_rings(shape), "ink") for shape in artwork.on("legend_top"))


def _marks(findings: Sequence[Finding], unit: int) -> Iterator[Area]:
    for number, finding in marked_findings(findings):
        if finding.at is not None:
            yield Area(
                (diamond(*finding.at, round(0.75 * unit)),), finding.severity, f"{number}: {finding.text}"
            )


def _mark_numbers(findings: Sequence[Finding], unit: int) -> Iterator[Text]:
    for number, finding in marked_findings(findings):
        if finding.at is not None:
            x, y = finding.at
            yield Text(str(number), x, y - round(0.25 * unit), round(0.5 * unit), "paper", "middle")


def _line_names(artwork: Artwork) -> Iterator[Text]:
    """Yield each line's name along its longest leg, where the copper has the room for it."""
    for line in artwork.placement.lines.values():
        text = _name_on_copper(line)
        if text is not None:
            yield text


def _name_on_copper(line: PlacedLine) -> Text | None:
    (x0, y0), (x1, y1) = max(zip(line.path, line.path[1:], strict=False), key=lambda leg: math.dist(*leg))
    height = min(round(0.5 * line.width), 900_000)
    if height < 350_000 or math.dist((x0, y0), (x1, y1)) < 0.8 * height * len(line.name):
        return None
    turn = math.degrees(math.atan2(y1 - y0, x1 - x0))
    turn = turn - 180.0 if turn > 90.0 else turn + 180.0 if turn <= -90.0 else turn
    down = math.radians(turn - 90.0)
    x, y = (x0 + x1) / 2 + height / 2 * math.cos(down), (y0 + y1) / 2 + height / 2 * math.sin(down)
    return Text(line.name, round(x), round(y), height, "paper", "middle", turn)


def _missing_references(artwork: Artwork, unit: int) -> Iterator[Text]:
    """Yield the references that the legend had no room for."""
    printed = {shape.origin.element for shape in artwork.on("legend_top")}
    for part in artwork.placement.parts.values():
        if part.name not in printed:
            size = round(0.6 * unit)
            yield Text(part.name, part.x, part.y - size // 2, size, "ink", "middle")
