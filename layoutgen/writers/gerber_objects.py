"""Shapes of one layer as Gerber objects: flashes of apertures, contours of regions, each with attributes.

Pads, lands, openings and paste that are circles or boxes on the grid are flashed with standard apertures,
other straight-edged pads with an outline macro of their own. All else is a contour; its holes are cut in, so
that nothing has to be taken away again.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import NamedTuple

from layoutgen.artwork import Shape
from layoutgen.geometry import Ring
from layoutgen.numbers import mm
from layoutgen.placement import PlacedPad
from layoutgen.writers.copper_nets import copper_net, copper_nets
from layoutgen.writers.cut_ins import one_outline
from layoutgen.writers.outlines import as_circle
from layoutgen.writers.records import Result

__all__ = ["Aperture", "Contour", "Drawn", "Flashes", "Marks", "objects_of", "pad_of"]

_FLASHED = ("pad", "land", "opening", "paste")
_COPPER_FUNCTIONS = {"pad": "SMDPad,CuDef", "land": "ViaPad"}
_CONDUCTOR, _MATERIAL, _HEATSINK = "Conductor", "Material", "HeatsinkPad"


@dataclass(frozen=True, slots=True)
class Marks:
    """What is said of an object: aperture function, conductor, pad as (part, pin), part; None for none."""

    function: str
    net: str | None = None
    pin: tuple[str, str] | None = None
    part: str | None = None


@dataclass(frozen=True, slots=True)
class Aperture:
    """A shape to flash: its template with sizes [mm] as text, or the vertices [nm] of an outline macro."""

    template: str
    function: str
    outline: tuple[tuple[int, int], ...] = ()


class Flashes(NamedTuple):
    """An aperture at one or more places: middle, and half of its width [nm]."""

    places: list[tuple[int, int, int]]
    aperture: Aperture
    marks: Marks


class Contour(NamedTuple):
    """A closed outline [nm] filled as a region."""

    ring: Ring
    marks: Marks


class Drawn(NamedTuple):
    """What a layer is drawn with: objects in their order, apertures in that of their first use."""

    objects: list[Flashes | Contour]
    apertures: list[Aperture]


def objects_of(result: Result, shapes: Sequence[Shape]) -> Drawn:
    """Return the shapes of one layer as objects, in the order of their first shapes; like flashes are one."""
    maker = _Maker(result)
    for shape in shapes:
        maker.add(shape)
    return Drawn(maker.objects, list(maker.apertures.values()))


def pad_of(result: Result, shape: Shape) -> PlacedPad | None:
    """Return the placed pad that a pad's copper was drawn for: the nearest one of its part."""
    part = result.placement.parts.get(shape.origin.element)
    if part is None:
        return None
    points = shape.outline.points
    xs, ys = [x for x, _ in points], [y for _, y in points]
    middle = ((min(xs) + max(xs)) / 2.0, (min(ys) + max(ys)) / 2.0)
    return min(part.pads, key=lambda pad: math.dist(middle, (pad.x, pad.y)), default=None)


class _Maker:
    """Makes objects out of shapes; equal marks and apertures are made once, since there may be many."""

    def __init__(self, result: Result) -> None:
        self.result = result
        self.conductors = copper_nets(result.circuit.file, tuple(result.circuit.nets))
        self.known: dict[tuple[str, str | None], Marks] = {}
        self.apertures: dict[tuple[object, str], Aperture] = {}
        self.places: dict[tuple[str, str | None, int], list[tuple[int, int, int]]] = {}
        self.objects: list[Flashes | Contour] = []

    def add(self, shape: Shape) -> None:
        """Add a shape as a flash where an aperture is exactly like it, else as a contour."""
        circle = None
        if shape.role in _FLASHED and not shape.holes:
            circle = as_circle(shape.outline)
            places = self.places.get((shape.role, shape.net, circle[2])) if circle else None
            if circle and places:
                places.append(circle)
                return
        marks = self.known.get((shape.role, shape.net)) or self.marks(shape)
        flashes = self.round(shape, circle, marks) if circle else self.straight(shape, marks)
        self.objects.append(flashes or Contour(one_outline(shape.outline, shape.holes), marks))

    def round(self, shape: Shape, circle: tuple[int, int, int], marks: Marks) -> Flashes:
        """Return a circle as a flash; where no part or pin tells them apart, others like it will join it."""
        radius = circle[2]
        aperture = Aperture(f"C,{mm(2 * radius)}", marks.function)
        aperture = self.apertures.setdefault((radius, marks.function), aperture)
        flashes = Flashes([circle], aperture, marks)
        if (shape.role, shape.net) in self.known:
            self.places[shape.role, shape.net, radius] = flashes.places
        return flashes

    def marks(self, shape: Shape) -> Marks:
        """Return what is said of a shape; pads and what lies on other layers belong to parts."""
        if shape.role == "pad" or not shape.layer.startswith("copper"):
            return self._part_marks(shape)
        function = _COPPER_FUNCTIONS.get(shape.role, _CONDUCTOR)
        marks = Marks(function, copper_net(self.conductors, shape.net))
        return self.known.setdefault((shape.role, shape.net), marks)

    def _part_marks(self, shape: Shape) -> Marks:
        element = shape.origin.element
        if not shape.layer.startswith("copper"):
            return Marks(_MATERIAL, part=element if element in self.result.placement.parts else None)
        net, pad = copper_net(self.conductors, shape.net), pad_of(self.result, shape)
        if pad is None:
            return Marks(_CONDUCTOR, net)
        function = _HEATSINK if pad.ground == "vias" else _COPPER_FUNCTIONS["pad"]
        return Marks(function, net, (element, pad.pin))

    def straight(self, shape: Shape, marks: Marks) -> Flashes | None:
        """Return a straight outline as a flash: a box on the grid, or a pad by its own macro; else None."""
        if shape.role not in _FLASHED or shape.holes or not shape.outline.is_straight:
            return None
        points = shape.outline.points
        xs, ys = [x for x, _ in points], [y for _, y in points]
        x0, x1, y0, y1 = min(xs), max(xs), min(ys), max(ys)
        x, y = (x0 + x1) // 2, (y0 + y1) // 2
        box = len(points) == 4 and set(points) == {(x0, y0), (x1, y0), (x1, y1), (x0, y1)}
        if box and (x1 - x0) % 2 == 0 and (y1 - y0) % 2 == 0:
            aperture = Aperture(f"R,{mm(x1 - x0)}X{mm(y1 - y0)}", marks.function)
        elif shape.role == "pad":
            aperture = Aperture("", marks.function, tuple((px - x, py - y) for px, py in points))
        else:
            return None
        key = (aperture.template or aperture.outline, marks.function)
        return Flashes([(x, y, (x1 - x0) // 2)], self.apertures.setdefault(key, aperture), marks)
