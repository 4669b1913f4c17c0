"""Areas of the model and of what was read, and how much they differ.

Everything is in nanometres. Circles are told apart from other outlines and drawn as the same polygon on both
sides, so that chords do not blur a comparison; other arcs are chords within 5 nm.
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt
import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork import Shape
from layoutgen.geometry import Ring
from layoutgen.writers.outlines import as_circle, bulge_radius
from layoutgen.writers.readback.records import Check

__all__ = [
    "FINE_NM",
    "Area",
    "arc_length",
    "area_check",
    "circle_check",
    "count_check",
    "discs",
    "model_area",
]

FINE_NM = 5.0
"""Largest distance of a chord from its arc [nm], where arcs are compared as arcs."""
FLOOR_MM2 = 1e-5
"""Difference in area [mm^2] that is always allowed: half a nanometre along 20 mm of edge."""
_SIDES = 64
_NM2_PER_MM2 = 1e12

Circle = tuple[float, float, float]
"""Middle and diameter [nm]."""


@dataclass(slots=True)
class Area:
    """Polygons and circles [nm] of one layer.

    They are laid over each other by even-odd, so that each one counts: a pad under a line or an outline
    inside a pour changes the region when it is lost, moved or bent, as it would not in a union.
    """

    polygons: list[BaseGeometry] = field(default_factory=list)
    circles: list[Circle] = field(default_factory=list)

    def pieces(self) -> npt.NDArray[np.object_]:
        """Return polygons and circles as polygons."""
        found = np.empty(len(self.polygons) + len(self.circles), dtype=object)
        found[:] = [*self.polygons, *discs(self.circles)]
        return found

    def region(self) -> BaseGeometry:
        """Return where an odd number of them lies."""
        pieces = self.pieces()
        while len(pieces) > 1:
            odd = pieces[len(pieces) & ~1 :]
            pairs = shapely.symmetric_difference(
                pieces[: len(pieces) & ~1 : 2], pieces[1 : len(pieces) & ~1 : 2]
            )
            pieces = np.concatenate([pairs, odd])
        return pieces[0] if len(pieces) else shapely.Polygon()


def discs(circles: Sequence[Circle]) -> list[BaseGeometry]:
    """Return circles as regular polygons, all of the same number of sides."""
    angle = np.arange(_SIDES) * (2.0 * np.pi / _SIDES)
    unit = np.column_stack([np.cos(angle), np.sin(angle)])
    return [shapely.Polygon(unit * (d / 2.0) + np.array([x, y])) for x, y, d in circles]


def model_area(shapes: Iterable[Shape], tolerance: float = FINE_NM, split_circles: bool = True) -> Area:
    """Return the area of a layer's shapes.

    Args:
        shapes: Shapes of one layer.
        tolerance: Largest distance of chords from arcs [nm].
        split_circles: Whether circles are kept as circles; else they are chords like all arcs.
    """
    area = Area()
    for shape in shapes:
        circle = as_circle(shape.outline) if split_circles and not shape.holes else None
        if circle:
            area.circles.append((float(circle[0]), float(circle[1]), 2.0 * circle[2]))
        else:
            area.polygons.append(_polygon(shape, tolerance))
    return area


def _polygon(shape: Shape, tolerance: float) -> BaseGeometry:
    holes = [_points(hole, tolerance) for hole in shape.holes]
    return shapely.Polygon(_points(shape.outline, tolerance), holes)


def _points(ring: Ring, tolerance: float) -> npt.NDArray[np.float64]:
    return np.array(ring.chords(tolerance), dtype=float)


def arc_length(shapes: Iterable[Shape], step: float = 0.0) -> float:
    """Return the length [mm] of all arcs that are no circles.

    Args:
        shapes: Shapes of one layer.
        step: Angle of the reader's chords [rad]; where they lie further from an arc than 5 nm, its length
            counts that many times more. 0 for a reader that keeps arcs.
    """
    return 1e-6 * math.fsum(
        length * max(1.0, radius * (1.0 - math.cos(step / 2.0)) / FINE_NM)
        for shape in shapes
        for ring in (shape.outline, *shape.holes)
        if as_circle(ring) is None or shape.holes
        for radius, length in _arcs(ring)
    )


def _arcs(ring: Ring) -> Iterator[tuple[float, float]]:
    """Yield radius and length [nm] of each arc of an outline."""
    after = (*ring.points[1:], ring.points[0])
    for start, end, bulge in zip(ring.points, after, ring.bulges or (0.0,) * len(after), strict=True):
        if bulge:
            radius = bulge_radius(start, end, bulge)
            yield radius, abs(4.0 * math.atan(bulge)) * radius


def area_check(
    file: str, reader: str, what: str, found: Area, wanted: Area, arcs: float = 0.0, more: float = 0.0
) -> Check:
    """Return the area of the symmetric difference.

    Args:
        file: The file that was read.
        reader: What read it.
        what: What is compared.
        found: The area read.
        wanted: The area of the model.
        arcs: Length of arcs [mm], with which the limit grows.
        more: What else the limit grows by [mm^2].
    """
    left, right = _without_common(found, wanted)
    difference = shapely.symmetric_difference(left.region(), right.region()).area / _NM2_PER_MM2
    limit = FLOOR_MM2 + FINE_NM * 1e-6 * arcs + more
    return Check(
        file=file,
        reader=reader,
        what=f"{what}: area of the symmetric difference",
        measured=difference,
        limit=limit,
        unit="mm^2",
    )


def _without_common(first: Area, second: Area) -> tuple[Area, Area]:
    """Return what is left of two areas without the polygons that both have, vertex by vertex [nm]."""
    pieces = first.pieces(), second.pieces()
    keys = [_keys(polygons) for polygons in pieces]
    common = Counter(keys[0]) & Counter(keys[1])
    rests = []
    for polygons, names in zip(pieces, keys, strict=True):
        spare, rest = Counter(common), Area()
        for polygon, name in zip(polygons, names, strict=True):
            if spare[name] > 0:
                spare[name] -= 1
            else:
                rest.polygons.append(polygon)
        rests.append(rest)
    return rests[0], rests[1]


def _keys(polygons: npt.NDArray[np.object_]) -> list[bytes]:
    """Return for each polygon what equal ones have in common: vertices in whole nanometres, in one order."""
    if not len(polygons):
        return []
    whole = shapely.normalize(shapely.transform(polygons, np.rint))
    return [bytes(key) for key in shapely.to_wkb(whole)]


def count_check(file: str, reader: str, what: str, found: int, wanted: int) -> Check:
    """Return by how much a count is off; none is allowed."""
    return Check(
        file=file,
        reader=reader,
        what=what,
        measured=abs(found - wanted),
        limit=0,
        detail=f"found {found}, wanted {wanted}",
    )


def circle_check(
    file: str, reader: str, what: str, found: Iterable[Circle], wanted: Iterable[Circle]
) -> Check:
    """Return how many circles are on one side only, compared in whole nanometres."""
    left, right = _counted(found), _counted(wanted)
    odd = sum(abs(left.get(key, 0) - right.get(key, 0)) for key in {*left, *right})
    detail = f"found {sum(left.values())}, wanted {sum(right.values())}"
    return Check(file=file, reader=reader, what=what, measured=odd, limit=0, detail=detail)


def _counted(circles: Iterable[Circle]) -> dict[tuple[int, int, int], int]:
    counts: dict[tuple[int, int, int], int] = {}
    for x, y, diameter in circles:
        key = (round(x), round(y), round(diameter))
        counts[key] = counts.get(key, 0) + 1
    return counts
