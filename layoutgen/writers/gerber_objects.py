"""Shapes of one layer as Gerber objects: flashes of apertures, contours of regions, each with attributes.

Pads, lands, openings and paste that are circles or boxes on the grid are flashed with standard apertures,
other straight-edged pads with an outline macro of their own. All else is a contour; its holes are cut in, so
that nothing has to be taken away again.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from layoutgen.artwork import Shape
from layoutgen.geometry import Ring
from layoutgen.numbers import mm
from layoutgen.placement import PlacedPad
from layoutgen.writers.copper_nets import copper_net, copper_nets
from layoutgen.writers.cut_ins import one_outline
from layoutgen.writers.outlines import as_circle
from layoutgen.writers.records import Result

__all__ = ["Aperture", "Contour", "Flash", "Marks", "objects_of", "pad_of"]

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


@dataclass(frozen=True, slots=True)
class Flash:
    """An aperture at a point [nm]."""

    x: int
    y: int
    aperture: Aperture
    marks: Marks


@dataclass(frozen=True, slots=True)
class Contour:
    """A closed outline [nm] filled as a region."""

    ring: Ring
    marks: Marks


def objects_of(result: Result, shapes: Sequence[Shape]) -> list[Flash | Contour]:
    """Return the shapes of one layer as objects, in drawing order."""
    conductors = copper_nets(result.circuit.file, tuple(result.circuit.nets))
    return [_object(shape, _marks(result, shape, conductors)) for shape in shapes]


def pad_of(result: Result, shape: Shape) -> PlacedPad | None:
    """Return the placed pad that a pad's copper was drawn for: the nearest one of its part."""
    part = result.placement.parts.get(shape.origin.element)
    if part is None:
        return None
    points = shape.outline.points
    xs, ys = [x for x, _ in points], [y for _, y in points]
    middle = ((min(xs) + max(xs)) / 2.0, (min(ys) + max(ys)) / 2.0)
    return min(part.pads, key=lambda pad: math.dist(middle, (pad.x, pad.y)), default=None)


def _marks(result: Result, shape: Shape, conductors: Mapping[str, str]) -> Marks:
    if not shape.layer.startswith("copper"):
        element = shape.origin.element
        return Marks(_MATERIAL, part=element if element in result.placement.parts else None)
    net = copper_net(conductors, shape.net)
    pad = pad_of(result, shape) if shape.role == "pad" else None
    if pad is None:
        return Marks(_COPPER_FUNCTIONS.get(shape.role, _CONDUCTOR), net)
    function = _HEATSINK if pad.ground == "vias" else _COPPER_FUNCTIONS["pad"]
    return Marks(function, net, (shape.origin.element, pad.pin))


def _object(shape: Shape, marks: Marks) -> Flash | Contour:
    if shape.role in _FLASHED and not shape.holes:
        flash = _flash(shape.outline, marks, shape.role == "pad")
        if flash is not None:
            return flash
    return Contour(one_outline(shape.outline, shape.holes), marks)


def _flash(ring: Ring, marks: Marks, macro: bool) -> Flash | None:
    """Return an outline as a flash; None when no aperture is exactly like it, or none but a macro."""
    circle = as_circle(ring)
    if circle:
        x, y, radius = circle
        return Flash(x, y, Aperture(f"C,{mm(2 * radius)}", marks.function), marks)
    if not ring.is_straight:
        return None
    xs, ys = [x for x, _ in ring.points], [y for _, y in ring.points]
    x0, x1, y0, y1 = min(xs), max(xs), min(ys), max(ys)
    box = set(ring.points) == {(x0, y0), (x1, y0), (x1, y1), (x0, y1)} and len(ring.points) == 4
    if box and (x1 - x0) % 2 == 0 and (y1 - y0) % 2 == 0:
        aperture = Aperture(f"R,{mm(x1 - x0)}X{mm(y1 - y0)}", marks.function)
    elif macro:
        x, y = (x0 + x1) // 2, (y0 + y1) // 2
        outline = tuple((px - x, py - y) for px, py in ring.points)
        aperture = Aperture("", marks.function, outline)
    else:
        return None
    return Flash((x0 + x1) // 2, (y0 + y1) // 2, aperture, marks)
