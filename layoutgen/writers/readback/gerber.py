"""Gerber read back by gerbonara: file attributes, unit, polarity, flashes, areas, nets of flashed pads."""

from __future__ import annotations

import hashlib
import math
import warnings
from collections import Counter
from collections.abc import Iterable
from pathlib import Path
from typing import Any

import numpy as np
import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.writers.gerber import GERBER_FUNCTIONS
from layoutgen.writers.gerber_objects import Flashes, objects_of
from layoutgen.writers.readback.areas import (
    FINE_NM,
    Area,
    arc_length,
    area_check,
    count_check,
    model_area,
)
from layoutgen.writers.readback.records import Check, Evidence, NotProved, optional_library
from layoutgen.writers.records import Result
from layoutgen.writers.scene import layers_of

__all__ = ["layer_of", "read_gerber"]

_READER = "gerbonara"
_NM = 1e6
_FINE_MM = FINE_NM / _NM
_JOIN_MM = 5e-7

Point = tuple[float, float]


def layer_of(file: str) -> str | None:
    """Return the layer that a Gerber file's name ends with, None for another name."""
    return next((layer for layer in GERBER_FUNCTIONS if file.endswith(f"_{layer}.gbr")), None)


def read_gerber(file: str, data: bytes, result: Result) -> Evidence:
    """Yield what gerbonara finds in a Gerber file."""
    layer, library = layer_of(file), optional_library("gerbonara")
    if layer is None:
        yield NotProved(file, "its name tells no layer of the model")
        return
    if library is None:
        yield NotProved(file, "no independent reader for Gerber is installed (gerbonara)")
        return
    with warnings.catch_warnings(record=True) as told:
        warnings.simplefilter("always")
        text = data.decode("utf-8")
        read = library.GerberFile.from_string(text, filename=Path(file))
    yield count_check(file, _READER, "warnings of the reader", len(told), 0)
    yield from _attributes(file, read, layer)
    yield count_check(file, "MD5 of the file itself", "digests that differ", int(not _digest_holds(data)), 0)
    shapes = layers_of(result)[layer]
    objects = list(read.objects)
    clear = sum(not item.polarity_dark for item in objects)
    yield count_check(file, _READER, "objects that take away", clear, 0)
    arcs = arc_length(shapes)
    if layer == "profile":
        found = Area([shapely.Polygon(loop) for loop in _loops(objects)])
        yield count_check(file, _READER, "outlines", len(found.polygons), len(shapes))
        yield area_check(file, _READER, layer, found, model_area(shapes, split_circles=False), arcs)
        return
    yield count_check(file, _READER, "objects", len(objects), len(shapes))
    yield area_check(file, _READER, layer, _area(objects), model_area(shapes), arcs)
    wanted = [item for item in objects_of(result, shapes).objects if isinstance(item, Flashes)]
    yield _flashes(file, objects, wanted)
    if layer.startswith("copper") and sum(len(item.places) for item in wanted) < len(shapes):
        yield NotProved(file, "nets and functions of regions: the reader does not keep them")


def _digest_holds(data: bytes) -> bool:
    """Tell whether the file's own digest, of all before it without line ends, is right."""
    body, mark, rest = data.partition(b"%TF.MD5,")
    digest = hashlib.md5(body.translate(None, b"\r\n"), usedforsecurity=False).hexdigest()
    return bool(mark) and rest.startswith(digest.encode("ascii"))


def _attributes(file: str, read: Any, layer: str) -> Evidence:
    """Yield whether function and polarity of the file are those of its layer."""
    attributes = read.file_attrs
    function = ",".join(attributes.get(".FileFunction", ()))
    wrong = function != GERBER_FUNCTIONS[layer]
    yield count_check(file, _READER, f"file function is {GERBER_FUNCTIONS[layer]}", int(wrong), 0)
    polarity = "Negative" if layer.startswith("soldermask") else "Positive"
    wrong = attributes.get(".FilePolarity") != (polarity,)
    yield count_check(file, _READER, f"file polarity is {polarity}", int(wrong), 0)


def _area(objects: Iterable[Any]) -> Area:
    """Return the area of flashes and regions [nm]."""
    area = Area()
    for item in objects:
        kind = type(item.aperture).__name__ if hasattr(item, "aperture") else "Region"
        if kind == "CircleAperture":
            x, y = _mm(item, item.x), _mm(item, item.y)
            area.circles.append((x, y, _mm(item.aperture, item.aperture.diameter)))
        else:
            area.polygons += [_polygon(piece) for piece in item.to_primitives("mm")]
    return area


def _mm(owner: Any, value: float) -> float:
    """Return a length of the reader [nm]."""
    return float(owner.unit.convert_to("mm", value)) * _NM


def _polygon(primitive: Any) -> BaseGeometry:
    """Return a primitive [nm] as an area; an outline that touches itself along cuts is opened again."""
    outline = primitive if hasattr(primitive, "arc_centers") else primitive.to_arc_poly()
    points: list[Point] = []
    for start, end, (clockwise, centre) in outline.segments:
        points += [start] if clockwise is None else _arc(start, end, centre, clockwise)
    polygon = shapely.Polygon(np.array(points) * _NM)
    return polygon if polygon.is_valid else shapely.make_valid(polygon)


def _arc(start: Point, end: Point, centre: Point, clockwise: bool) -> list[Point]:
    """Return an arc as points [mm], its end left out."""
    radius = math.dist(start, centre)
    first = math.atan2(start[1] - centre[1], start[0] - centre[0])
    sweep = (math.atan2(end[1] - centre[1], end[0] - centre[0]) - first) % (2.0 * math.pi)
    if clockwise:
        sweep -= 2.0 * math.pi
    count = max(1, math.ceil(abs(sweep) / (2.0 * math.acos(max(0.0, 1.0 - _FINE_MM / radius)))))
    angles = [first + sweep * k / count for k in range(1, count)]
    return [start, *((centre[0] + radius * math.cos(a), centre[1] + radius * math.sin(a)) for a in angles)]


def _loops(objects: Iterable[Any]) -> list[np.ndarray[Any, Any]]:
    """Return the closed outlines [nm] that draws follow; what does not join on to the last begins another."""
    loops: list[list[Point]] = []
    end: Point | None = None
    for item in (draw.converted("mm") for draw in objects):
        start, last = (item.x1, item.y1), (item.x2, item.y2)
        if end is None or math.dist(start, end) > _JOIN_MM:
            loops.append([])
        arc = hasattr(item, "clockwise")
        loops[-1] += _arc(start, last, item.center, item.clockwise) if arc else [start]
        end = last
    return [np.array(loop) * _NM for loop in loops]


def _flashes(file: str, objects: Iterable[Any], wanted: Iterable[Flashes]) -> Check:
    """Return how many flashes differ in place, net or pin."""
    found = Counter(
        (
            round(_mm(item, item.x)),
            round(_mm(item, item.y)),
            ",".join(item.attrs.get(".N", ())),
            ",".join(item.attrs.get(".P", ())),
        )
        for item in objects
        if type(item).__name__ == "Flash"
    )
    asked = Counter(
        (x, y, item.marks.net or "", ",".join(item.marks.pin or ()))
        for item in wanted
        for x, y, _ in item.places
    )
    odd = sum(((found - asked) + (asked - found)).values())
    return count_check(file, _READER, "flashes that differ in place, net or pin", odd, 0)
