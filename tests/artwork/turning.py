"""A circuit file turned or mirrored by its hints alone, from the way it was drawn.

``turned`` writes every port's edge, and the headings of parts and lines; with ``pinned`` also the board's
size and every place, turn and length. The arithmetic is its own: nothing is shared with the code that draws.
"""

from __future__ import annotations

import copy
import itertools
import math
from dataclasses import dataclass
from typing import Any

from layoutgen.placement import Bend, PlacedLine, Placement
from layoutgen.units import parse_heading, parse_quantity, to_nm

EDGES = ("east", "north", "west", "south")
Data = dict[str, Any]


@dataclass(frozen=True)
class Move:
    """Mirrored north to south or not, then turned counter-clockwise by quarters."""

    quarters: int = 0
    mirrored: bool = False

    def heading(self, heading: float) -> float:
        """Return a heading [deg] after the movement."""
        return ((-heading if self.mirrored else heading) + 90.0 * self.quarters) % 360.0

    def edge(self, edge: str) -> str:
        """Return what an edge becomes."""
        return EDGES[round(self.heading(90.0 * EDGES.index(edge)) / 90.0) % 4]

    def size(self, width: int, height: int) -> tuple[int, int]:
        """Return what a board's size [nm] becomes."""
        return (height, width) if self.quarters % 2 else (width, height)

    def point(self, x: int, y: int, width: int, height: int) -> tuple[int, int]:
        """Return where a point of a board of a size [nm] comes to lie."""
        y = height - y if self.mirrored else y
        for _ in range(self.quarters):
            x, y = height - y, x
            width, height = height, width
        return x, y


def turned(data: Data, drawn: Placement, move: Move, *, pinned: bool = False) -> Data:
    """Return the data of a circuit file with hints that turn or mirror its drawing.

    Args:
        data: The circuit file.
        drawn: How it is drawn without these hints.
        move: How it is to be turned.
        pinned: Whether to write the board's size, all places, turns and lengths as well.
    """
    data = copy.deepcopy(data)
    if "size" in data["board"] or pinned:
        data["board"]["size"] = [_mm(size) for size in move.size(drawn.width, drawn.height)]
    if move.mirrored:
        _mirror_footprints(data)
    _turn_ports(data, drawn, move, pinned)
    layout = data.setdefault("layout", {})
    layout.setdefault("spine", list(drawn.sized.circuit.spine))
    hints = layout.setdefault("hints", {})
    for name, part in drawn.parts.items():
        hints.setdefault(name, {})["heading"] = _direction(move.heading(part.heading))
        if pinned:
            at = move.point(part.x, part.y, drawn.width, drawn.height)
            hints[name]["at"] = [_mm(value) for value in at]
    for name, heading in _leaving(drawn):
        hints.setdefault(name, {})["leave"] = _direction(move.heading(heading))
    if pinned:
        for name, line in drawn.lines.items():
            if not _reaches_edge(drawn, line):
                free = data["lines"][name].get("length") == "free"
                hints[name]["route"] = _route(line, move, free=free)
    return data


def _mirror_footprints(data: Data) -> None:
    """Rewrite every footprint as its own mirror image, north to south: parts turn, they are not mirrored."""
    for footprint in data.get("footprints", {}).values():
        things = [*footprint.get("pads", {}).values(), *footprint.get("holes", ())]
        things += [footprint["cutout"]] if "cutout" in footprint else []
        for thing in things:
            if "at" in thing:
                y = to_nm(parse_quantity(thing["at"][1], "length").real)
                thing["at"] = [thing["at"][0], _mm(-y)]
            if "heading" in thing:
                thing["heading"] = _direction(-parse_heading(thing["heading"]) % 360.0)


def _turn_ports(data: Data, drawn: Placement, move: Move, pinned: bool) -> None:
    """Write the ports' edges, and their places or else their order along each edge."""
    along: dict[str, tuple[str, int]] = {}
    for name, port in drawn.ports.items():
        edge = move.edge(port.edge)
        x, y = move.point(port.x, port.y, drawn.width, drawn.height)
        along[name] = (edge, y if edge in ("east", "west") else x)
        data["ports"][name]["edge"] = edge
        if pinned:
            data["ports"][name]["at"] = _mm(along[name][1])
    queues = {edge: sorted(n for n in along if along[n][0] == edge) for edge in EDGES}
    for queue in queues.values():
        queue.sort(key=lambda name: along[name][1])
    order = [queues[along[name][0]].pop(0) for name in data["ports"]]
    data["ports"] = {name: data["ports"][name] for name in order}


def _leaving(drawn: Placement) -> list[tuple[str, float]]:
    """Return the heading [deg] at its first net of each line, pair and radial stub."""
    paths = [(name, line.path) for name, line in drawn.lines.items()]
    paths += [(name, pair.paths[0]) for name, pair in drawn.pairs.items()]
    headings = [
        (name, math.degrees(math.atan2(path[1][1] - path[0][1], path[1][0] - path[0][0])) % 360.0)
        for name, path in paths
    ]
    return headings + [(name, stub.heading) for name, stub in drawn.radials.items()]


def _reaches_edge(drawn: Placement, line: PlacedLine) -> bool:
    """True for a line to a port that is not where the drawing begins: port and parts say where it lies."""
    first = drawn.sized.circuit.spine[0]
    return any(port.net in line.nets for name, port in drawn.ports.items() if name != first)


def _route(line: PlacedLine, move: Move, *, free: bool) -> list[str]:
    """Return a line's route; the last length is left to its angle where that is given."""
    legs = [_mm(round(math.dist(a, b))) for a, b in itertools.pairwise(line.path)]
    legs[-1] = legs[-1] if free else "*"
    turns = [_turn(bend, move) for bend in line.bends]
    return [item for pair in itertools.zip_longest(legs, turns) for item in pair if item is not None]


def _turn(bend: Bend, move: Move) -> str:
    """Return a bend as a route tells it."""
    turn = -bend.turn if move.mirrored else bend.turn
    return ("left" if turn > 0.0 else "right") + ("" if abs(turn) == 90.0 else f" {abs(turn):g} deg")


def _mm(nm: int) -> str:
    return f"{nm / 1e6:.6f} mm"


def _direction(heading: float) -> str:
    return EDGES[round(heading / 90.0) % 4] if heading % 90.0 == 0.0 else f"{heading:.6f} deg"
