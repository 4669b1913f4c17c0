"""The printed legend: references beside their parts, names beside ports, title and revision.

A text keeps off mask openings, drills, the board's edge and other texts. Places around its object are tried
from near to far and from large to small letters; a text that finds none is left out and noted, not squeezed.
"""

from __future__ import annotations

import itertools
import math
import textwrap
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
import shapely
from numpy.typing import NDArray
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork.board import BOARD, board_area, cutouts_of
from layoutgen.artwork.conductors import Conductor
from layoutgen.artwork.limits import Limits
from layoutgen.artwork.records import Shape
from layoutgen.geometry import Point, lettering, lettering_size, pieces, printable, rings_of
from layoutgen.origin import Origin
from layoutgen.placement import PlacedPart, PlacedPort, Placement

__all__ = ["Legend", "draw_legend"]

_LEAST_UNITS = 6.0
"""Height of a capital over the pen [-] below which letters run together."""
_NAME_HEIGHTS = (1_000_000, 850_000, 720_000)
_TITLE_HEIGHTS = ((1_500_000, 1_250_000, 1_000_000), (850_000, 720_000))
_NEAR_NM = (0, 150_000, 300_000, 500_000, 750_000, 1_000_000)
_FAR_NM = (1_300_000, 1_600_000, 2_000_000, 2_400_000, 2_900_000, 3_500_000)
_PART_TRIES = ((True, _NEAR_NM), (False, _NEAR_NM), (True, _FAR_NM), (False, _FAR_NM))
_PORT_TRIES = ((True, _NEAR_NM), (True, _FAR_NM), (False, _NEAR_NM), (False, _FAR_NM))
_SLIDES = tuple(sign * k / 8.0 for k in range(10) for sign in ((1.0, -1.0) if k else (1.0,)))
_AT_ONCE = 64
_APART, _TITLE_APART = 0.5, 1.0
"""Distance of names, and of the title, from other texts over the height of their letters [-]."""
_TITLE_STEP_NM = 500_000
_TITLE_LINES = 4
_PORT_LENGTH_NM = 1_500_000
_EDGE_NM = 500_000
_FEW_VERTICES = 40
_RULE = "legend.min_distance"

Box = tuple[float, float, float, float]
Boxes = NDArray[np.float64]
Bools = NDArray[np.bool_]
Geometries = NDArray[np.object_]


@dataclass(frozen=True, slots=True, kw_only=True)
class Legend:
    """What was printed: outlines, the title's anchor [nm], what was left out."""

    shapes: tuple[Shape, ...]
    title_anchor: Point
    notes: tuple[tuple[str, str, str], ...]


@dataclass(frozen=True, slots=True)
class _Text:
    """One text to place: its wording, the box it belongs to (x0, y0, x1, y1) [nm], its origin."""

    text: str
    home: Box
    origin: Origin


@dataclass(frozen=True, slots=True)
class _Spot:
    """A text in its place: baseline start [nm], height [nm], upright or not, the box it fills [nm]."""

    x: float
    y: float
    height: int
    upright: bool
    box: Box


def draw_legend(
    placement: Placement,
    limits: Limits,
    openings: Sequence[Shape],
    conductors: Sequence[Conductor],
    drills: Sequence[tuple[int, int, int]],
) -> Legend:
    """Return the legend of a board.

    Args:
        placement: The placed board.
        limits: Pen and distances.
        openings: Openings of the top solder mask.
        conductors: Signal copper; texts are not printed across it, nor across its gap if there is a choice.
        drills: Holes and vias, each (x, y, diameter) [nm].
    """
    printer = _Printer(placement, limits, _Ground(placement, openings, conductors, drills, limits))
    for port in placement.ports.values():
        printer.print_near(_Text(port.name, _port_box(port), port.origin), _PORT_TRIES)
    for part in placement.parts.values():
        printer.print_near(_Text(part.name, _part_box(part), part.origin), _PART_TRIES)
    anchor = printer.print_title()
    return Legend(
        shapes=tuple(printer.shapes),
        title_anchor=anchor,
        notes=tuple(printer.notes),
    )


def _part_box(part: PlacedPart) -> Box:
    """Return the box around a part's outline and pads [nm]."""
    rings = (part.outline, *(pad.outline for pad in part.pads))
    x, y = zip(*(point for ring in rings for point in ring.chords()), strict=True)
    return min(x), min(y), max(x), max(y)


def _port_box(port: PlacedPort) -> Box:
    """Return the box around the end of a port's copper [nm]."""
    angle = math.radians(port.heading)
    ux, uy = math.cos(angle), math.sin(angle)
    half = port.width / 2.0
    corners = [
        (port.x + t * ux - s * uy, port.y + t * uy + s * ux)
        for t in (0.0, _PORT_LENGTH_NM)
        for s in (-half, half)
    ]
    x, y = zip(*corners, strict=True)
    return min(x), min(y), max(x), max(y)


class _Printer:
    """Finds room for one text after the other and remembers what is taken."""

    def __init__(self, placement: Placement, limits: Limits, ground: _Ground) -> None:
        self._placement, self._limits, self._ground = placement, limits, ground
        self._pen = limits.legend_line
        self._homes = [_part_box(part) for part in placement.parts.values()]
        self.shapes: list[Shape] = []
        self._taken: list[tuple[float, ...]] = []  # boxes of texts, and what each keeps clear about it [nm]
        self.notes: list[tuple[str, str, str]] = []

    def print_near(self, text: _Text, tries: Sequence[tuple[bool, Sequence[int]]]) -> None:
        """Print a text beside its object, or note that it was left out.

        Args:
            text: What to print, and beside what.
            tries: In what order to look: whether on tidy ground only, and the distances [nm].
        """
        wording = printable(text.text)
        heights = self._heights(_NAME_HEIGHTS)
        for (tidy, steps), upright, height in itertools.product(tries, (False, True), heights):
            boxes = self._boxes(wording, text.home, height, steps, upright)
            box = self._first_free(boxes, text.home, _APART * height, tidy)
            if box is not None:
                self._ink(wording, self._spot(wording, height, upright, box), text.origin)
                return
        self.notes.append((_RULE, text.origin.element, "its name is left off the legend: no room beside it"))

    def print_title(self) -> Point:
        """Print title and revision where there is room, the south-west corner first; return the anchor."""
        design = self._placement.sized.circuit.file.design
        revision = "" if design.revision is None else f"rev {design.revision}"
        title = printable(design.title)
        wordings = list(_wrapped(title, printable(revision)))
        for tidy, heights in itertools.product((True, False), _TITLE_HEIGHTS):
            for lines, height in itertools.product(wordings, self._heights(heights)):
                anchor = self._print_block(lines, height, tidy)
                if anchor is not None:
                    return anchor
        self.notes.append((_RULE, "board", "title and revision are left off the legend: no room"))
        return 0, 0

    def _heights(self, wanted: Sequence[int]) -> list[int]:
        """Return the heights that the pen can write, at least one."""
        least = math.ceil(_LEAST_UNITS * self._pen)
        return [height for height in wanted if height >= least] or [least]

    def _print_block(self, lines: Sequence[str], height: int, tidy: bool) -> Point | None:
        """Print lines below each other in the first free place; return the first line's start."""
        sizes = [lettering_size(line, height, self._pen) for line in lines]
        pitch = 1.7 * height
        width = max(size[0] for size in sizes)
        above, depth = sizes[0][2], sizes[-1][1] + pitch * (len(lines) - 1)
        corner = self._free_block((width, above + depth), _TITLE_APART * height, tidy)
        if corner is None:
            return None
        x, y = corner[0], corner[1] + depth
        for i, line in enumerate(lines):
            base = y - pitch * i
            box = (x, base - sizes[i][1], x + sizes[i][0], base + sizes[i][2])
            self._ink(line, _Spot(x, base, height, False, box), BOARD)
        return round(x), round(y)

    def _free_block(self, size: tuple[float, float], apart: float, tidy: bool) -> tuple[float, float] | None:
        """Return the south-west corner of the first free place, edges first, ``apart`` [nm] from texts."""
        width, height = size
        first = float(_EDGE_NM + self._limits.legend_distance)
        xs = np.arange(first, self._placement.width - width, _TITLE_STEP_NM)
        ys = np.arange(first, self._placement.height - height, _TITLE_STEP_NM)
        middle = (ys[-1] + ys[0]) / 2.0 if len(ys) else 0.0
        for y in ys[np.argsort(-np.abs(ys - middle), kind="stable")]:
            row = np.column_stack([xs, np.full(len(xs), y), xs + width, np.full(len(xs), y + height)])
            free = np.flatnonzero(self._open(row, apart, tidy))
            if len(free):
                return float(xs[free[0]]), float(y)
        return None

    def _boxes(
        self,
        wording: str,
        home: Box,
        height: int,
        steps: Sequence[int],
        upright: bool,
    ) -> Boxes:
        """Return the boxes (N, 4) of a text around a home, near ones first: above, below, beside."""
        width, depth, above = lettering_size(wording, height, self._pen)
        w, h = (depth + above, width) if upright else (width, depth + above)
        x0, y0, x1, y1 = home
        away = np.repeat(np.array(steps, dtype=float) + self._limits.legend_distance, len(_SLIDES))
        slides = np.tile(_SLIDES, len(steps))
        mx = (x0 + x1 - w) / 2.0 + slides * (x1 - x0 + w) / 2.0
        my = (y0 + y1 - h) / 2.0 + slides * (y1 - y0 + h) / 2.0
        x = np.stack((mx, mx, x1 + away, x0 - away - w), axis=1).ravel()
        y = np.stack((y1 + away, y0 - away - h, my, my), axis=1).ravel()
        return np.stack((x, y, x + w, y + h), axis=1)

    def _spot(self, wording: str, height: int, upright: bool, box: Box) -> _Spot:
        """Return a text in a box that was made for it."""
        _, depth, above = lettering_size(wording, height, self._pen)
        x, y = (box[0] + above, box[1]) if upright else (box[0], box[1] + depth)
        return _Spot(x, y, height, upright, box)

    def _first_free(self, boxes: Boxes, home: Box, apart: float, tidy: bool) -> Box | None:
        """Return the first box that is free and not nearer to another part than to its own."""
        own = _box_distances(boxes, np.array([home]))
        homes = np.array([other for other in self._homes if other != home]).reshape(-1, 4)
        others = _about(boxes, homes, float(own.max(initial=0.0)))
        near = boxes[(_box_distances(boxes, others) >= own).all(axis=1)]
        for k in range(0, len(near), _AT_ONCE):
            some = near[k : k + _AT_ONCE]
            free = np.flatnonzero(self._open(some, apart, tidy))
            if len(free):
                x0, y0, x1, y1 = some[free[0]].tolist()
                return x0, y0, x1, y1
        return None

    def _open(self, boxes: Boxes, apart: float, tidy: bool) -> Bools:
        """Return which boxes (N, 4) [nm] keep their distance to the edge, to obstacles and to other texts.

        To other texts it is at least ``apart`` [nm], and what these keep themselves.
        """
        if not len(boxes):
            return np.zeros(0, dtype=bool)
        away = self._limits.legend_distance + 2
        grown = boxes + np.array((-away, -away, away, away))
        taken = np.array(self._taken).reshape(-1, 5)
        keep = np.maximum(taken[:, 4], max(away, apart))
        free: Bools = np.asarray((_box_distances(boxes, taken[:, :4]) > keep).all(axis=1))
        free[free] = self._ground.open(boxes[free], grown[free], tidy)
        return free

    def _ink(self, wording: str, spot: _Spot, origin: Origin) -> None:
        """Print a text and take its box."""
        outlines = lettering(wording, spot.x, spot.y, spot.height, self._pen, spot.upright)
        for piece in pieces(outlines):
            outline, holes = rings_of(piece)
            self.shapes.append(
                Shape(layer="legend_top", outline=outline, holes=holes, role="legend", origin=origin)
            )
        self._taken.append((*spot.box, _APART * spot.height))


class _Ground:
    """What texts are printed on, with all that they must keep off and that they had better keep off."""

    def __init__(
        self,
        placement: Placement,
        openings: Sequence[Shape],
        conductors: Sequence[Conductor],
        drills: Sequence[tuple[int, int, int]],
        limits: Limits,
    ) -> None:
        self._inside = board_area(placement, _EDGE_NM)
        shapely.prepare(self._inside)
        must = [*_obstacles(placement, openings, drills, 0), *(piece.copper for piece in conductors)]
        ring = (limits.via_land - limits.via_drill) // 2
        had_better = [*_obstacles(placement, (), drills, ring), *(piece.keepout for piece in conductors)]
        self._must, self._had_better = shapely.STRtree(must), shapely.STRtree(had_better)

    def open(self, boxes: Boxes, grown: Boxes, tidy: bool) -> Bools:
        """Return which texts stand on free ground, given their boxes (N, 4) [nm] and the same grown.

        Args:
            boxes: Boxes of the texts.
            grown: The same, grown by the distance to keep.
            tidy: Also off the lands of vias and off the gaps beside lines.
        """
        areas = np.asarray(shapely.box(*boxes.T), dtype=object)
        fits: Bools = np.asarray(shapely.contains(self._inside, areas))
        _strike(fits, self._must, np.asarray(shapely.box(*grown.T), dtype=object))
        if tidy:
            _strike(fits, self._had_better, areas)
        return fits


def _strike(fits: Bools, tree: shapely.STRtree, areas: Geometries) -> None:
    """Take out of what fits the areas (N,) that meet something of a tree."""
    left = np.flatnonzero(fits)
    fits[left[tree.query(areas[left], predicate="intersects")[0]]] = False


def _wrapped(title: str, revision: str) -> Iterator[list[str]]:
    """Yield title and revision on one line, on two, then the title's words on more and more lines."""
    if revision:
        yield [f"{title}  {revision}"]
    for count in range(1, _TITLE_LINES + 1):
        widths = range(-(-len(title) // count), len(title) + 1)
        wrapped = (textwrap.wrap(title, width, break_long_words=False) for width in widths)
        lines = next((found for found in wrapped if len(found) <= count), [])
        if len(lines) == count:
            yield [*lines, revision] if revision else lines


def _obstacles(
    placement: Placement, openings: Sequence[Shape], drills: Sequence[tuple[int, int, int]], extra: int
) -> Iterator[BaseGeometry]:
    """Yield openings, cut-outs, and drills grown by an extra [nm]."""
    for shape in openings:
        whole = shapely.Polygon(shape.outline.chords(), [hole.chords() for hole in shape.holes])
        yield from _in_parts(whole)
    for _, ring in cutouts_of(placement):
        yield ring.polygon()
    if drills:
        x, y, diameter = np.array(drills, dtype=np.float64).T
        reach = np.ceil(diameter / 2.0) + extra
        yield from np.asarray(shapely.box(x - reach, y - reach, x + reach, y + reach), dtype=object).tolist()


def _in_parts(area: BaseGeometry) -> Iterator[BaseGeometry]:
    """Yield an area in parts of few vertices, so that a question about one place does not ask all of it."""
    if shapely.get_num_coordinates(area) <= _FEW_VERTICES:
        yield area
        return
    x0, y0, x1, y1 = area.bounds
    x, y = ((x0 + x1) / 2.0, y1) if x1 - x0 > y1 - y0 else (x1, (y0 + y1) / 2.0)
    for box in ((x0, y0, x, y), (x, y0, x1, y1) if x < x1 else (x0, y, x1, y1)):
        part = shapely.clip_by_rect(area, *box)
        if not part.is_empty and shapely.get_num_coordinates(part) < shapely.get_num_coordinates(area):
            yield from _in_parts(part)
        elif not part.is_empty:
            yield part


def _about(boxes: Boxes, others: Boxes, reach: float) -> Boxes:
    """Return those of others (M, 4) that lie within a reach [nm] of the box around boxes (N, 4)."""
    if not len(boxes) or not len(others):
        return others
    around = np.concatenate([boxes[:, :2].min(axis=0), boxes[:, 2:].max(axis=0)])
    near: Boxes = others[_box_distances(around[None, :], others)[0] <= reach]
    return near


def _box_distances(a: Boxes, b: Boxes) -> Boxes:
    """Return the distances (N, M) of boxes (N, 4) from boxes (M, 4) [nm]."""
    dx = np.maximum(a[:, None, 0] - b[:, 2], b[:, 0] - a[:, None, 2])
    dy = np.maximum(a[:, None, 1] - b[:, 3], b[:, 1] - a[:, None, 3])
    return np.asarray(np.hypot(np.maximum(dx, 0.0), np.maximum(dy, 0.0)))
