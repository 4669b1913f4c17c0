"""What the seeded faults share: limits of the rule file in use, areas cut out or added, places beside lines.

A fault works on the drawing's shapes, vias and holes alone; what the drawing came from is left as it was.
Areas of copper are those of the finished board: they are drawn by the rule file's undercut larger or smaller,
so that a fault is as large after etching as it says.
"""

from __future__ import annotations

import math
import random
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from itertools import pairwise
from typing import Any, NamedTuple

import shapely

from layoutgen.artwork import Artwork, Shape, Via
from layoutgen.geometry import Ring
from layoutgen.origin import Origin
from layoutgen.placement import PlacedPad

XY = tuple[float, float]
Geometry = shapely.geometry.base.BaseGeometry

UM = 1_000.0
"""A micrometre [nm]."""


@dataclass(frozen=True)
class Seeded:
    """A drawing with one fault: the rules any of which must find it, its place [nm], how near [nm]."""

    artwork: Artwork
    rules: tuple[str, ...]
    at: XY
    within: float = 150_000.0


Fault = Callable[[Artwork, random.Random], Seeded]


def tries() -> Iterator[int]:
    """Yield a number for each try to find a place.

    Raises:
        LookupError: after 200 of them: the board has no such place.
    """
    yield from range(200)
    raise LookupError("the board has no place for this fault")


def given(artwork: Artwork, key: str) -> Any:
    """Return a value of the rule file in SI units.

    Raises:
        LookupError: the rule file is silent, so there is nothing to break.
    """
    table, name = key.split(".")
    found = getattr(getattr(artwork.placement.sized.circuit.rules, table), name, None)
    if found is None:
        raise LookupError(f"no {key} in the rule file")
    return found


def limit(artwork: Artwork, key: str) -> float:
    """Return a length of the rule file [nm].

    Raises:
        LookupError: the rule file is silent, so there is nothing to break.
    """
    return float(given(artwork, key)) * 1e9


def undercut(artwork: Artwork, layer: str = "copper_top") -> float:
    """Return by how much a layer's shapes are drawn beyond what is finished [nm]."""
    return (artwork.placement.sized.circuit.rules.copper.undercut or 0.0) * 1e9 * layer.startswith("copper")


def drawn_as(area: Geometry, by: float) -> Geometry:
    """Return an area grown by a length [nm], its corners kept."""
    return area.buffer(by, join_style="mitre", mitre_limit=10.0) if by else area


def as_polygon(shape: Shape) -> shapely.Polygon:
    """Return a shape as a polygon [nm]."""
    return shapely.Polygon(shape.outline.chords(50), [hole.chords(50) for hole in shape.holes])


def as_shapes(shape: Shape, geometry: Geometry) -> list[Shape]:
    """Return a geometry as shapes like another one, on whole nanometres."""
    out = []
    for part in shapely.get_parts(geometry):
        if part.area < 1.0:
            continue
        rings = [
            Ring(tuple((round(x), round(y)) for x, y in ring.coords[:-1]))
            for ring in (shapely.geometry.polygon.orient(part).exterior, *part.interiors)
        ]
        out.append(replace(shape, outline=rings[0], holes=tuple(rings[1:])))
    return out


def with_cut(artwork: Artwork, area: Geometry, roles: tuple[str, ...], layer: str = "copper_top") -> Artwork:
    """Return the drawing with a finished area taken out of the shapes of some roles."""
    shapes: list[Shape] = []
    drawn = drawn_as(area, -undercut(artwork, layer))
    for shape in artwork.shapes:
        hit = shape.layer == layer and shape.role in roles and as_polygon(shape).intersects(drawn)
        shapes += as_shapes(shape, as_polygon(shape).difference(drawn)) if hit else [shape]
    return replace(artwork, shapes=tuple(shapes))


def with_shape(
    artwork: Artwork, layer: str, area: Geometry, net: str | None, role: str, name: str
) -> Artwork:
    """Return the drawing with one more shape, given as it is when finished."""
    blank = Shape(layer=layer, outline=Ring.box(0, 0, 1, 1), net=net, role=role, origin=Origin(name))
    drawn = drawn_as(area, undercut(artwork, layer))
    return replace(artwork, shapes=(*artwork.shapes, *as_shapes(blank, drawn)))


def beam(at: XY, along: XY, length: float, width: float) -> shapely.Polygon:
    """Return a rectangle from a point along a direction [nm]."""
    return Place("", 0.0, at, along).box(0.0, length, -width / 2.0, width / 2.0)


class Place(NamedTuple):
    """A place amid a long leg of a line: the line, its finished width [nm], a point, its direction."""

    name: str
    width: float
    middle: XY
    along: XY

    def at(self, ahead: float, left: float) -> XY:
        """Return the point so far along the line and to its left [nm]."""
        (x, y), (ux, uy) = self.middle, self.along
        return x + ahead * ux - left * uy, y + ahead * uy + left * ux

    def box(self, back: float, front: float, right: float, left: float) -> shapely.Polygon:
        """Return the rectangle between ways along the line and to its left [nm]."""
        return shapely.Polygon(
            [self.at(back, right), self.at(front, right), self.at(front, left), self.at(back, left)]
        )


def straight(artwork: Artwork, rng: random.Random, *, strips: bool = True) -> Place:
    """Return a place amid a leg that is long for the rule file in use, off all other copper.

    With ``strips`` the strips of coupled pairs count as lines, the other strip on their right; which side of
    a line is its left is left to chance.

    Raises:
        LookupError: there is none.
    """
    others = [(shape.origin.element, as_polygon(shape)) for shape in artwork.on("copper_top")]
    legs = [
        (line.name, line.width, a, b)
        for line in artwork.placement.lines.values()
        for a, b in pairwise(line.path)
        if "gnd" not in line.nets
    ]
    legs += [(name, width, b, a) for name, width, a, b in legs]
    legs += list(_strips(artwork)) if strips else []
    room = 16.0 * limit(artwork, "copper.min_gap")
    legs = [leg for leg in legs if math.dist(*leg[2:]) > 3.0 * leg[1] + room]
    if not legs:
        raise LookupError("no leg is long enough")
    for _ in tries():
        name, width, a, b = rng.choice(legs)
        share, length = rng.uniform(0.3, 0.7), math.dist(a, b)
        at = (a[0] + share * (b[0] - a[0]), a[1] + share * (b[1] - a[1]))
        around = shapely.Point(at).buffer(width / 2.0 + room / 20.0)
        if not any(element != name and copper.intersects(around) for element, copper in others):
            break
    return Place(name, width, at, ((b[0] - a[0]) / length, (b[1] - a[1]) / length))


def _strips(artwork: Artwork) -> Iterator[tuple[str, int, tuple[int, int], tuple[int, int]]]:
    """Yield the strips of coupled pairs, each with the other one on its right: name, width, ends [nm]."""
    for pair in artwork.placement.pairs.values():
        for path, other in (pair.paths, pair.paths[::-1]):
            a, b = path[0], path[-1]
            away = (other[0][0] - a[0], other[0][1] - a[1])
            left = (b[0] - a[0]) * away[1] - (b[1] - a[1]) * away[0] > 0
            yield (pair.name, pair.width, b, a) if left else (pair.name, pair.width, a, b)


def beside_pour(artwork: Artwork, rng: random.Random) -> tuple[Place, float]:
    """Return a place with the pour's finished edge on its left at the distance set, and that distance [nm].

    Raises:
        LookupError: there is none.
    """
    rim = pour_of(artwork).boundary
    for _ in tries():
        place = straight(artwork, rng)
        gap = gap_of(artwork, place.name)
        edge = shapely.Point(place.at(0.0, place.width / 2.0 + gap - undercut(artwork)))
        if rim.distance(edge) < UM:
            break
    return place, gap


def pour_of(artwork: Artwork) -> Geometry:
    """Return the pour as drawn [nm]."""
    return shapely.union_all([as_polygon(s) for s in artwork.shapes if s.role == "pour"])


def plane_of(artwork: Artwork) -> Geometry:
    """Return the ground plane as drawn [nm]."""
    return shapely.union_all([as_polygon(s) for s in artwork.shapes if s.role == "plane"])


def gap_of(artwork: Artwork, name: str) -> float:
    """Return the pour's distance from a line [nm]."""
    sized = artwork.placement.sized
    held = sized.lines[name] if name in sized.lines else sized.pairs[name]
    return held.pour_gap * 1e9


def net_of(artwork: Artwork, name: str) -> str:
    """Return the net that the copper of a line carries."""
    return next(s.net for s in artwork.shapes if s.origin.element == name and s.net is not None)


def pick_via(artwork: Artwork, rng: random.Random, purpose: str) -> int:
    """Return the index of a via whose purpose begins with a word.

    Raises:
        LookupError: there is none.
    """
    found = [n for n, via in enumerate(artwork.vias) if via.purpose.startswith(purpose)]
    if not found:
        raise LookupError(f"no via for {purpose}")
    return rng.choice(found)


def with_via(artwork: Artwork, n: int, via: Via) -> Artwork:
    """Return the drawing with one via changed; its land stays as drawn."""
    return replace(artwork, vias=(*artwork.vias[:n], via, *artwork.vias[n + 1 :]))


def without_vias(artwork: Artwork, gone: list[Via]) -> Artwork:
    """Return the drawing without some vias and their lands."""
    shapes = tuple(
        s for s in artwork.shapes if not (s.role == "land" and any(is_at(s, v.x, v.y) for v in gone))
    )
    return replace(artwork, shapes=shapes, vias=tuple(via for via in artwork.vias if via not in gone))


def is_at(shape: Shape, x: float, y: float) -> bool:
    """Tell whether a round shape stands at a point."""
    (ax, ay), (bx, by) = shape.outline.points[:2]
    return len(shape.outline.points) == 2 and ((ax + bx) / 2, (ay + by) / 2) == (x, y)


def pick_pad(artwork: Artwork, rng: random.Random) -> PlacedPad:
    """Return a pad with copper.

    Raises:
        LookupError: there is none.
    """
    parts = artwork.placement.parts.values()
    pads = [pad for part in parts for pad in part.pads if pad.outline.polygon().area]
    if not pads:
        raise LookupError("no pad")
    return rng.choice(pads)


def ground_pad(artwork: Artwork, owner: str) -> PlacedPad:
    """Return the ground pad of the part that vias with a purpose belong to; a part has one at most here."""
    part = artwork.placement.parts[owner.partition(":")[2]]
    (pad,) = (pad for pad in part.pads if pad.net == "gnd" and pad.ground != "flange")
    return pad
