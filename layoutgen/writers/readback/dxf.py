"""DXF read back twice: by ezdxf, whose polylines keep their arcs, and by GDAL, which knows nothing of us.

Outlines that run counter-clockwise and holes that run clockwise are compared apart, so that a lost hole, a
turned outline and an arc that bulges the wrong way all show.
"""

from __future__ import annotations

import importlib
import io
import math
import tempfile
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import numpy as np
import numpy.typing as npt
import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork import LAYERS, Shape
from layoutgen.geometry import CHORD_TOLERANCE_NM, Ring
from layoutgen.writers.dxf_r12 import KEEPOUT, reference_square
from layoutgen.writers.long_edges import SHORTEST_NM
from layoutgen.writers.outlines import as_circle, turned
from layoutgen.writers.readback.areas import (
    FINE_NM,
    Area,
    Circle,
    arc_length,
    area_check,
    circle_check,
    count_check,
)
from layoutgen.writers.readback.records import Check, Evidence, NotProved, optional_library
from layoutgen.writers.records import Result
from layoutgen.writers.scene import labels_of, layers_of

__all__ = ["read_dxf"]

_MILLIMETRES = 4
_GDAL = "GDAL"
_NM = 1e6
_GDAL_STEP_DEG = 0.2
"""Angle of the chords that GDAL is asked to make of arcs [deg]."""
_CIRCLE_POINTS = 1500
"""GDAL's chords of a circle are more, at that step; those of outlines in R12 are fewer up to 400 mm [-]."""
_SAME_NM = 0.5
_ROUND_POINTS = 100
"""Outlines of fewer points are no circles drawn as chords within 5 nm [-]."""

Loop = npt.NDArray[np.float64]


@dataclass(slots=True)
class _Drawn:
    """What one layer holds: closed outlines [nm], circles [nm], how many entities, open polylines, texts."""

    loops: list[Loop] = field(default_factory=list)
    circles: list[Circle] = field(default_factory=list)
    texts: int = 0
    unclosed: int = 0

    def turning(self, sense: int) -> Area:
        """Return the outlines that run counter-clockwise (1) or clockwise (-1)."""
        area = Area()
        for loop in self.loops:
            if _signed_area(loop) * sense > 0:
                circle = _round(loop)
                if circle is None:
                    area.polygons.append(shapely.Polygon(loop))
                else:
                    area.circles.append(circle)
        return area


def read_dxf(file: str, data: bytes, result: Result) -> Evidence:
    """Yield what ezdxf, and GDAL through pyogrio where installed, find in a DXF file."""
    from ezdxf.filemanagement import read

    document: Any = read(io.StringIO(data.decode("utf-8")))
    audit = document.audit()
    r12 = document.dxfversion == "AC1009"
    yield count_check(
        file, "ezdxf", "faults found and mended by the audit", len(audit.errors) + len(audit.fixes), 0
    )
    if not r12:
        unit = document.header.get("$INSUNITS", 0)
        yield count_check(file, "ezdxf", "unit is the millimetre", unit, _MILLIMETRES)
    drawn = _by_ezdxf(document)
    extra = {KEEPOUT, "reference"} if r12 else set()
    yield count_check(file, "ezdxf", "layers that are not the model's", len({*drawn} - {*LAYERS, *extra}), 0)
    yield from _compared(file, "ezdxf", drawn, result, r12)
    if r12:
        yield from _scale_marks(file, drawn, result)
    if optional_library("pyogrio") is None:
        yield NotProved(file, "GDAL is not installed (pyogrio)")
    else:
        yield from _compared(file, _GDAL, _by_gdal(data), result, r12)


def _compared(file: str, reader: str, drawn: dict[str, _Drawn], result: Result, chords: bool) -> Evidence:
    texts = Counter(label.layer for label in labels_of(result))
    texts["reference"] += chords
    for name, shapes in layers_of(result).items():
        found = drawn.get(name, _Drawn())
        if texts[name] or found.texts:
            yield count_check(file, reader, f"{name}: texts", found.texts, texts[name])
        if name == "reference":
            continue
        yield count_check(file, reader, f"{name}: polylines that are not closed", found.unclosed, 0)
        yield from _outlines(file, reader, name, found, shapes, chords)
        wanted = [circle for shape in shapes if (circle := _disc(shape, chords))]
        if wanted or found.circles:
            yield circle_check(file, reader, f"{name}: circles that differ", found.circles, wanted)


def _scale_marks(file: str, drawn: dict[str, _Drawn], result: Result) -> Evidence:
    """Yield whether the square of known size and the keep-outs are there."""
    square = Area([reference_square().polygon()])
    found = drawn.get("reference", _Drawn()).turning(1)
    yield area_check(file, "ezdxf", "reference square of 10.000 mm", found, square)
    wanted = Area([part.courtyard.polygon() for part in result.placement.parts.values()])
    yield area_check(file, "ezdxf", KEEPOUT, drawn.get(KEEPOUT, _Drawn()).turning(1), wanted)


def _outlines(
    file: str, reader: str, name: str, found: _Drawn, shapes: Sequence[Shape], chords: bool
) -> Evidence:
    """Yield the comparisons of outlines and of holes."""
    plain = [shape for shape in shapes if _disc(shape, chords) is None]
    outer = [turned(s.outline, 1) for s in plain if s.role != "cutout"]
    inner = [turned(hole, -1) for s in plain for hole in s.holes]
    inner += [turned(s.outline, -1) for s in plain if s.role == "cutout"]
    step = math.radians(_GDAL_STEP_DEG) if reader == _GDAL else 0.0
    arcs = 0.0 if chords else arc_length(plain, step)
    tolerance = CHORD_TOLERANCE_NM if chords else FINE_NM
    for sense, rings, what in ((1, outer, "outlines"), (-1, inner, "holes")):
        circles = [] if chords else [circle for ring in rings if (circle := as_circle(ring))]
        wanted = Area(
            [shapely.Polygon(ring.chords(tolerance)) for ring in rings if chords or not as_circle(ring)],
            [(float(x), float(y), 2.0 * radius) for x, y, radius in circles],
        )
        area = found.turning(sense)
        yield count_check(file, reader, f"{name}: number of {what}", len(area.pieces()), len(rings))
        yield area_check(file, reader, f"{name}, {what}", area, wanted, arcs, _merged_mm2(rings))
    if reader != _GDAL or chords:  # its chords of arcs begin with an end that is there already
        yield _short(file, reader, name, found)


def _merged_mm2(rings: Sequence[Ring]) -> float:
    """Return the area [mm^2] that may change sides where edges below a micrometre are merged."""
    total = 0.0
    for ring in rings:
        points = np.array(ring.points, dtype=float)
        length = np.hypot(*(np.roll(points, -1, axis=0) - points).T)
        before, after = np.roll(length, 1), np.roll(length, -1)
        short = length < SHORTEST_NM
        total += float((length * before * after / (before + after + 1.0))[short].sum())
    return total / _NM**2


def _short(file: str, reader: str, name: str, found: _Drawn) -> Check:
    """Return how many edges are below a micrometre, repeated vertices among them."""
    lengths = (np.hypot(*(np.roll(loop, -1, axis=0) - loop).T) for loop in found.loops)
    count = sum(int((length < SHORTEST_NM - _SAME_NM).sum()) for length in lengths)
    return count_check(file, reader, f"{name}: repeated vertices and edges below 1 um", count, 0)


def _disc(shape: Shape, r12: bool) -> Circle | None:
    """Return what is a circle in the file: drills, in R12 everything round but holes and cut-outs."""
    plain = shape.role == "drill" or (r12 and not shape.holes and shape.role != "cutout")
    circle = as_circle(shape.outline) if plain else None
    return None if circle is None else (float(circle[0]), float(circle[1]), 2.0 * circle[2])


def _round(loop: Loop) -> Circle | None:
    """Return an outline of many points on one circle as that circle, None for any other."""
    if len(loop) < _ROUND_POINTS:
        return None
    middle = (loop.min(axis=0) + loop.max(axis=0)) / 2.0
    reach = np.hypot(*(loop - middle).T)
    if float(np.ptp(reach)) > _SAME_NM:
        return None
    return float(middle[0]), float(middle[1]), 2.0 * float(reach.mean())


def _signed_area(loop: Loop) -> float:
    x, y = (loop - loop.mean(axis=0)).T
    return float(np.dot(x, np.roll(y, -1)) - np.dot(y, np.roll(x, -1)))


def _by_ezdxf(document: Any) -> dict[str, _Drawn]:
    """Return the contents of a document by layer."""
    layers: dict[str, _Drawn] = {}
    for entity in document.modelspace():
        drawn = layers.setdefault(entity.dxf.layer, _Drawn())
        kind = entity.dxftype()
        if kind in ("LWPOLYLINE", "POLYLINE"):
            drawn.unclosed += not (entity.closed if kind == "LWPOLYLINE" else entity.is_closed)
            drawn.loops.append(_loop(entity))
        elif kind == "CIRCLE":
            centre = entity.dxf.center
            drawn.circles.append((centre.x * _NM, centre.y * _NM, 2.0 * entity.dxf.radius * _NM))
        elif kind == "TEXT":
            drawn.texts += 1
    return layers


def _loop(polyline: Any) -> Loop:
    """Return a polyline's vertices [nm], arcs as chords of the circles that the library makes of bulges."""
    if polyline.dxftype() == "POLYLINE":
        corners = [(v.dxf.location.x, v.dxf.location.y, v.dxf.bulge) for v in polyline.vertices]
    else:
        corners = list(polyline.get_points("xyb"))
    points: list[tuple[float, float]] = []
    for (x, y, bulge), (x1, y1, _) in zip(corners, (*corners[1:], corners[0]), strict=True):
        points.append((x, y))
        if bulge:
            points += _inside_arc((x, y), (x1, y1), bulge)
    return np.array(points) * _NM


def _inside_arc(
    start: tuple[float, float], end: tuple[float, float], bulge: float
) -> list[tuple[float, float]]:
    """Return points [mm] inside an arc, from its start to its end."""
    from ezdxf.math import bulge_to_arc

    centre, first, last, radius = bulge_to_arc(start, end, bulge)
    sweep = (last - first) % (2.0 * math.pi)
    count = math.ceil(sweep / (2.0 * math.acos(max(0.0, 1.0 - FINE_NM / _NM / radius))))
    angles = [first + sweep * k / count for k in range(1, count)]
    points = [(centre.x + radius * math.cos(a), centre.y + radius * math.sin(a)) for a in angles]
    return points if bulge > 0 else points[::-1]


def _by_gdal(data: bytes) -> dict[str, _Drawn]:
    """Return the contents of a file by layer, arcs and circles as GDAL's chords."""
    pyogrio = importlib.import_module("pyogrio")
    before = pyogrio.get_gdal_config_option("OGR_ARC_STEPSIZE")
    pyogrio.set_gdal_config_options({"OGR_ARC_STEPSIZE": str(_GDAL_STEP_DEG)})
    try:
        with tempfile.TemporaryDirectory() as folder:
            path = Path(folder, "in.dxf")
            path.write_bytes(data)
            meta, _, geometry, columns = importlib.import_module("pyogrio.raw").read(path)
    finally:
        pyogrio.set_gdal_config_options({"OGR_ARC_STEPSIZE": before})
    fields = list(meta["fields"])
    names, kinds = (columns[fields.index(field)] for field in ("Layer", "SubClasses"))
    shapes = shapely.from_wkb(geometry)
    layers: dict[str, _Drawn] = {}
    for name, kind, shape in zip(names, kinds, shapes, strict=True):
        _add(layers.setdefault(name, _Drawn()), kind, shape)
    return layers


def _add(drawn: _Drawn, kind: str | None, shape: BaseGeometry) -> None:
    """Add one of GDAL's geometries to a layer; R12 has no kinds, but GDAL makes many chords of a circle."""
    if shape.geom_type == "Point":
        drawn.texts += 1
        return
    points = shapely.get_coordinates(shape) * _NM
    if "AcDbCircle" in kind if kind else len(points) > _CIRCLE_POINTS:
        (x0, y0), (x1, y1) = points.min(axis=0), points.max(axis=0)
        drawn.circles.append(((x0 + x1) / 2.0, (y0 + y1) / 2.0, x1 - x0))
    else:
        closed = bool((points[0] == points[-1]).all())
        drawn.unclosed += not closed
        drawn.loops.append(points[:-1] if closed else points)
