"""Seeded random boards for property tests: anything may stand anywhere as long as it does not overlap."""

from __future__ import annotations

import random
from typing import Any

import shapely
from shapely.geometry.base import BaseGeometry

_HEADINGS = (0.0, 90.0, 180.0, 270.0)
_DIRECTION = {0.0: (1, 0), 90.0: (0, 1), 180.0: (-1, 0), 270.0: (0, -1)}


class RandomBoard:
    """Puts a through line on a board, then stubs, chips, holes and a radial stub where there is room."""

    def __init__(self, seed: int, builder: Any) -> None:
        """Draw a board from a seed; ``builder`` is the class that collects placed things."""
        self._random = random.Random(seed)
        r = self._random
        undercut = r.random() < 0.3
        self.undercut = 35_000 if undercut else 0
        self.board = builder(
            round(r.uniform(20, 45), 3),
            round(r.uniform(14, 32), 3),
            corner_radius=r.choice((0.0, 0.0, 1.0, 2.5)),
            rules={"copper": {"undercut": "35 um"}} if undercut else {},
            gap=round(r.uniform(0.2, 1.6), 6),
        )
        self._taken: list[BaseGeometry] = []
        self._through()
        for i in range(r.randint(0, 4)):
            self._stub(i)
        for i in range(r.randint(0, 3)):
            self._shunt(i)
        for i in range(r.randint(0, 4)):
            self._chip(i)
        for _ in range(r.randint(0, 3)):
            self._hole()

    def _free(self, shape: BaseGeometry, edge: float = 0.4) -> bool:
        """True when a shape stands on the board and off all others; it is then taken."""
        board = shapely.box(edge, edge, self.board.width - edge, self.board.height - edge)
        if not board.covers(shape) or any(shape.intersects(other) for other in self._taken):
            return False
        self._taken.append(shape)
        return True

    def _through(self) -> None:
        r, board = self._random, self.board
        self._y, self._width = round(r.uniform(0.3, 0.7) * board.height, 4), round(r.uniform(0.2, 2.5), 6)
        path = [(0.3, self._y), (board.width - 0.3, self._y)]
        board.line("main", path, self._width, ("a", "b"))
        board.port("in", "a", 0.3, self._y, 0.0, self._width)
        board.port("out", "b", board.width - 0.3, self._y, 180.0, self._width)
        self._taken.append(shapely.LineString(path).buffer(self._width / 2 + 0.2, cap_style="flat"))

    def _stub(self, i: int) -> None:
        """Add a stub off the through line: straight, bent at right angles, or bent by 45 degrees."""
        r, board = self._random, self.board
        x, width, side = (
            round(r.uniform(3, board.width - 3), 4),
            round(r.uniform(0.15, 1.8), 6),
            r.choice((1, -1)),
        )
        room = (board.height - self._y if side > 0 else self._y) - 1.0
        leg, aside = round(r.uniform(0.3, 1.0) * room, 4), round(r.uniform(2.5 * width + 0.5, 8.0), 4)
        path = [(x, self._y), (x, round(self._y + side * leg, 4))]
        kind, turn = r.random(), r.choice((1, -1))
        if kind < 0.35:
            path.append((round(x + turn * aside, 4), path[-1][1]))
        elif kind < 0.55:
            path.append((round(x + turn * aside, 4), round(path[-1][1] + side * aside, 4)))
        start = self._y + side * (self._width / 2 + 0.21)
        if (path[1][1] - start) * side < 2.0 * width:
            return
        free = shapely.LineString([(x, start), *path[1:]]).buffer(
            width / 2 + 0.2, cap_style="flat", join_style="mitre"
        )
        if self._free(free):
            board.line(f"l{i}", path, width, (f"n{i}",), gap=round(r.uniform(0.2, 1.6), 6))

    def _chip(self, i: int) -> None:
        """Add a chip anywhere, some with a ground pad, some with no vias at it."""
        r, board = self._random, self.board
        x, y, heading = (
            round(r.uniform(2, board.width - 2), 4),
            round(r.uniform(2, board.height - 2), 4),
            r.choice(_HEADINGS),
        )
        if self._free(_chip_area(x, y, heading)):
            nets = (f"m{i}", "gnd" if r.random() < 0.7 else f"k{i}")
            board.chip(f"C{i}", x, y, heading, nets, ground_vias=r.random() < 0.8)

    def _shunt(self, i: int) -> None:
        """Add a shunt chip whose first pad lies on the edge of the through line."""
        r = self._random
        side = r.choice((1, -1))
        x, y = (
            round(r.uniform(2, self.board.width - 2), 4),
            round(self._y + side * (self._width / 2 + 0.775 + 0.3), 4),
        )
        heading = 90.0 if side > 0 else 270.0
        start = self._y + side * (self._width / 2 + 0.201)
        area = shapely.difference(
            _chip_area(x, y, heading),
            shapely.box(0, start - side * 9 if side > 0 else start, 99, start if side > 0 else start + 9),
        )
        if self._free(area):
            self.board.chip(f"S{i}", x, y, heading, ("a", "gnd"))

    def _hole(self) -> None:
        """Add a hole off all copper that is placed; a plated one, which has a land on ground, well off it."""
        r, plated = self._random, self._random.random() < 0.3
        x, y = (round(r.uniform(2.5, size - 2.5), 4) for size in (self.board.width, self.board.height))
        diameter = r.choice((1.0, 2.7))
        if self._free(shapely.Point(x, y).buffer(diameter / 2 + (2.5 if plated else 0.3)), 0.5):
            self.board.hole(x, y, diameter, plated)


def _chip_area(x: float, y: float, heading: float) -> BaseGeometry:
    """Return what a chip with its ground vias takes."""
    dx, dy = _DIRECTION[heading]
    ahead, aside = 2.2, 0.95
    corners = [
        (x - 1.45 * dx - aside * dy, y - 1.45 * dy - aside * dx),
        (x + ahead * dx + aside * dy, y + ahead * dy + aside * dx),
    ]
    (x0, y0), (x1, y1) = corners
    return shapely.box(min(x0, x1), min(y0, y1), max(x0, x1), max(y0, y1))
