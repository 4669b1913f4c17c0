"""The board as data for the page's canvas: whole nanometres, one flat list of numbers for each layer.

A layer's ``shapes`` is, one after the other: item, style, number of outlines, and for each outline its number
of vertices, the first vertex and the steps to the next ones. Its ``circles`` is: item, style, step of the
middle from the last circle's, radius. Items and styles are numbered in the lists beside the layers.
"""

from __future__ import annotations

import json
import math
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, field

from layoutgen.artwork import Shape
from layoutgen.checks import Finding
from layoutgen.geometry import Point, Ring
from layoutgen.placement import PlacedLine, PlacedPort, Placement
from layoutgen.writers.outlines import as_circle, turned
from layoutgen.writers.page_items import Catalogue, Item, element_keys
from layoutgen.writers.records import Result

__all__ = ["board_data", "finding_target", "inline_json"]

STYLES = (
    "board", "cutout", "bottom", "maskb", "pour", "ground", "line", "pad", "opening", "paste", "via", "hole",
    "body", "ink", "port",
)  # fmt: skip
"""Styles by number; page_style.py has a colour for each."""

_ROLE_STYLES = {
    "pour": "pour",
    "ground": "ground",
    "land": "ground",
    "pad": "pad",
    "cutout": "cutout",
    "profile": "board",
}
_COPPER_ORDER = ("pour", "ground", "line", "pad")


@dataclass(slots=True)
class _Layer:
    """One layer of the page: name and text of its switch, whether it shows at first, rank for pointing."""

    name: str
    text: str
    shown: bool = True
    rank: int = 0
    shapes: list[int] = field(default_factory=list)
    circles: list[int] = field(default_factory=list)
    last: Point = (0, 0)

    def add(self, item: int, style: str, rings: Sequence[Ring]) -> None:
        """Add a shape of outlines [nm], the holes running the other way."""
        circle = as_circle(rings[0]) if len(rings) == 1 else None
        if circle:
            self.add_circle(item, style, *circle)
            return
        self.shapes += (item, STYLES.index(style), len(rings))
        for ring in rings:
            self.shapes += _steps(ring.chords())

    def add_circle(self, item: int, style: str, x: int, y: int, radius: int) -> None:
        """Add a disc [nm]."""
        self.circles += (item, STYLES.index(style), x - self.last[0], y - self.last[1], radius)
        self.last = (x, y)


def _steps(points: Sequence[Point]) -> Iterator[int]:
    """Yield the number of vertices, the first one, and the steps to the others."""
    yield len(points)
    x, y = 0, 0
    for px, py in points:
        yield px - x
        yield py - y
        x, y = px, py


def board_data(result: Result) -> dict[str, object]:
    """Return what the canvas needs: size, layers, items, texts and marks; numbers are whole nanometres."""
    catalogue = Catalogue(result)
    layers = [
        *_under(result, catalogue),
        _copper_top(result, catalogue),
        _plain(result, catalogue, "soldermask_top", "Mask openings", "opening"),
        _plain(result, catalogue, "paste_top", "Paste", "paste", shown=False),
        *_drills(result, catalogue),
        _bodies(result, catalogue),
        _plain(result, catalogue, "legend_top", "Legend", "ink"),
        _ports(result, catalogue),
    ]
    marks = [
        [number, finding.severity if finding.waived is None else "waived", *finding.at]
        for number, finding in enumerate(result.findings, start=1)
        if finding.at is not None
    ]
    return {
        "size": [result.placement.width, result.placement.height],
        "styles": list(STYLES),
        "layers": [_layer_data(layer) for layer in layers if layer.shapes or layer.circles],
        "items": [_item_data(item) for item in catalogue.items],
        "texts": list(_texts(result)),
        "marks": marks,
        "targets": _targets(result),
    }


def inline_json(data: object) -> str:
    """Return JSON that may stand inside a script element of a page."""
    text = json.dumps(data, separators=(",", ":"), ensure_ascii=False, allow_nan=False)
    return text.replace("<", "\\u003c").replace("\u2028", "\\u2028").replace("\u2029", "\\u2029")


def finding_target(result: Result, finding: Finding) -> list[str]:
    """Return the keys of a finding's items that have a place on the board."""
    keys = element_keys(result)
    return [keys[name] for name in finding.items if name in keys]


def _targets(result: Result) -> dict[str, list[str]]:
    """Return, for findings without a place, the items to show instead."""
    return {
        f"finding:{number}": target
        for number, finding in enumerate(result.findings, start=1)
        if finding.at is None and (target := finding_target(result, finding))
    }


def _layer_data(layer: _Layer) -> dict[str, object]:
    return {
        "name": layer.name,
        "text": layer.text,
        "shown": layer.shown,
        "rank": layer.rank,
        "shapes": layer.shapes,
        "circles": layer.circles,
    }


def _item_data(item: Item) -> dict[str, object]:
    return {"key": item.key, "title": item.title, "facts": item.facts, "parent": item.parent}


def _rings(shape: Shape) -> list[Ring]:
    return [turned(shape.outline, 1), *(turned(hole, -1) for hole in shape.holes)]


def _filled(layer: _Layer, shapes: Iterable[Shape], style: Callable[[Shape], str], into: Catalogue) -> _Layer:
    """Return the layer with shapes added, each in the style that ``style`` gives it."""
    for shape in shapes:
        layer.add(into.of_shape(shape), style(shape), _rings(shape))
    return layer


def _under(result: Result, into: Catalogue) -> Iterator[_Layer]:
    """Yield the board itself, then the copper and mask below."""
    profile = sorted(result.artwork.on("profile"), key=lambda shape: shape.role == "cutout")
    board = _Layer("profile", "Board", rank=1)
    yield _filled(board, profile, lambda shape: _ROLE_STYLES.get(shape.role, "board"), into)
    bottom = _Layer("copper_bottom", "Copper below", shown=False, rank=2)
    yield _filled(bottom, result.artwork.on("copper_bottom"), lambda _: "bottom", into)
    yield _plain(result, into, "soldermask_bottom", "Mask openings below", "maskb", shown=False)


def _copper_style(shape: Shape) -> str:
    return _ROLE_STYLES.get(shape.role, "line")


def _copper_top(result: Result, into: Catalogue) -> _Layer:
    """Return the top copper: the pour first, then ground pieces, lines, pads."""
    shapes = sorted(
        result.artwork.on("copper_top"), key=lambda shape: _COPPER_ORDER.index(_copper_style(shape))
    )
    return _filled(_Layer("copper_top", "Copper", rank=4), shapes, _copper_style, into)


def _plain(
    result: Result, into: Catalogue, name: str, text: str, style: str, *, shown: bool = True
) -> _Layer:
    """Return a layer of one style that cannot be pointed at."""
    return _filled(_Layer(name, text, shown), result.artwork.on(name), lambda _: style, into)


def _drills(result: Result, into: Catalogue) -> Iterator[_Layer]:
    """Yield plated and unplated holes as discs."""
    plated = _Layer("drill_plated", "Plated holes", rank=5)
    unplated = _Layer("drill_nonplated", "Unplated holes", rank=5)
    for via in result.artwork.vias:
        plated.add_circle(into.of_via(via), "via", via.x, via.y, via.drill // 2)
    for hole in result.artwork.holes:
        layer = plated if hole.plated else unplated
        layer.add_circle(into.of_hole(hole), "hole", hole.x, hole.y, hole.diameter // 2)
    yield plated
    yield unplated


def _bodies(result: Result, into: Catalogue) -> _Layer:
    layer = _Layer("bodies", "Part bodies", rank=3)
    for part in result.placement.parts.values():
        layer.add(into.number(f"part:{part.name}"), "body", [turned(part.outline, 1)])
    return layer


def _unit(placement: Placement) -> int:
    """Return the length [nm] that ports' arrows are measured in."""
    return max(placement.width, placement.height, 20_000_000) // 45


def _ports(result: Result, into: Catalogue) -> _Layer:
    """Return the ports: an arrow outside the board that points into it."""
    layer = _Layer("ports", "Ports", rank=6)
    unit = _unit(result.placement)
    for port in result.placement.ports.values():
        (x, y), c, s = _at_edge(port, result.placement), *_direction(port)
        corners = ((-0.35, 0.0), (-1.25, 0.45), (-1.25, -0.45))
        points = tuple(
            (round(x + (a * c - b * s) * unit), round(y + (a * s + b * c) * unit)) for a, b in corners
        )
        layer.add(into.number(f"port:{port.name}"), "port", [Ring(points)])
    return layer


def _direction(port: PlacedPort) -> tuple[float, float]:
    return math.cos(math.radians(port.heading)), math.sin(math.radians(port.heading))


def _at_edge(port: PlacedPort, placement: Placement) -> Point:
    """Return the place on the profile that a port's copper points to."""
    edges = {"west": (0, port.y), "east": (placement.width, port.y), "south": (port.x, 0)}
    return edges.get(port.edge, (port.x, placement.height))


def _texts(result: Result) -> Iterator[list[object]]:
    """Yield names to write: text, middle [nm], capital height [nm], turn [deg], anchor, style."""
    placement = result.placement
    unit = _unit(placement)
    yield from (_line_text(line) for line in placement.lines.values())
    printed = {shape.origin.element for shape in result.artwork.on("legend_top")}
    for part in placement.parts.values():
        if part.name not in printed:
            yield [part.name, part.x, part.y, unit * 6 // 10, 0, "middle", "name"]
    for port in placement.ports.values():
        (x, y), c, s = _at_edge(port, placement), *_direction(port)
        anchor = "end" if c > 0.5 else "start" if c < -0.5 else "middle"
        reach = 1.6 * unit if abs(c) > 0.5 else 2.0 * unit
        yield [port.name, round(x - c * reach), round(y - s * reach), unit * 8 // 10, 0, anchor, "port"]


def _line_text(line: PlacedLine) -> list[object]:
    """Return a line's name along its longest leg, readable from below or from the right."""
    (x0, y0), (x1, y1) = max(zip(line.path, line.path[1:], strict=False), key=lambda leg: math.dist(*leg))
    turn = round(math.degrees(math.atan2(y1 - y0, x1 - x0)))
    turn = turn - 180 if turn > 90 else turn + 180 if turn <= -90 else turn
    room = round(math.dist((x0, y0), (x1, y1)) / (0.9 * len(line.name)))
    height = min(line.width * 5 // 10, 900_000, room)
    return [line.name, (x0 + x1) // 2, (y0 + y1) // 2, height, turn, "middle", "line"]
