"""GDSII: polygons by layer, round copper and drills as references, texts on ``reference``.

One user unit is 1 um, one database unit 1 nm. Arcs are chords with their vertices on the arc, within 1 um.
GDSII knows no holes: copper with holes is cut straight through them into plain pieces. On ``profile`` the
outline and each cut-out are polygons of their own (even-odd).
"""

from __future__ import annotations

import datetime
import math
import re
import tempfile
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

import numpy as np
import shapely

from layoutgen.artwork import LAYERS, Shape
from layoutgen.errors import WrongInputError
from layoutgen.geometry import Point, Ring
from layoutgen.origin import Fault, Location
from layoutgen.writers.pieces import MAX_VERTICES, clean_pieces
from layoutgen.writers.records import Job, Result
from layoutgen.writers.scene import Drawn, drawn_layers, labels_of

__all__ = ["write_gds"]

_UNIT, _PRECISION = 1e-6, 1e-9
_NM_PER_UNIT = 1000.0
_LARGEST = 2**31 - 1
_NO_TIME = datetime.datetime(2000, 1, 1)
_NAME_LENGTH = 32


def write_gds(result: Result, job: Job) -> bytes:
    """Return the GDSII file.

    Raises:
        WrongInputError: A coordinate beyond the format's 32 bits (boards over 2.147 m).
    """
    import gdstk

    layers = drawn_layers(result)
    _refuse_large(layers, result)
    library = gdstk.Library("layoutgen", unit=_UNIT, precision=_PRECISION)
    top = library.new_cell(_cell_name(job.stem))
    for name, drawn in layers.items():
        polygons = [points for shape in drawn.shapes for points in _outlines(shape)]
        top.add(*(gdstk.Polygon(_in_units(points), *LAYERS[name]) for points in polygons))
        _add_circles(library, top, name, drawn.circles)
    for label in labels_of(result):
        layer, kind = LAYERS[label.layer]
        at = (label.x / _NM_PER_UNIT, label.y / _NM_PER_UNIT)
        size, turn = label.height / _NM_PER_UNIT, math.radians(label.rotation)
        top.add(gdstk.Label(_ascii(label.text), at, "o", turn, size, layer=layer, texttype=kind))
    return _bytes_of(library)


def _bytes_of(library: Any) -> bytes:
    """Return the library as a file's bytes, with a fixed time; it can only be written by a path."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder, "out.gds")
        library.write_gds(str(path), max_points=MAX_VERTICES + 1, timestamp=_NO_TIME)
        return path.read_bytes()


def _outlines(shape: Shape) -> list[tuple[Point, ...]]:
    """Return a shape as outlines without holes and of a legal number of vertices."""
    outer = shape.outline.chords()
    if not shape.holes and len(outer) <= MAX_VERTICES:
        return [outer]
    return clean_pieces(shapely.Polygon(outer, [hole.chords() for hole in shape.holes]))


def _in_units(points: Any) -> Any:
    """Return vertices [nm] in the file's user units."""
    return np.array(points) / _NM_PER_UNIT


def _add_circles(library: Any, top: Any, name: str, circles: Sequence[tuple[int, int, int]]) -> None:
    """Add one cell for each radius on a layer, and a reference to it for each circle."""
    import gdstk

    rounds = np.array(circles, dtype=np.int64).reshape(-1, 3)
    for radius in np.unique(rounds[:, 2]).tolist():
        cell = library.new_cell(f"round_{2 * radius}_{name}"[:_NAME_LENGTH])
        cell.add(gdstk.Polygon(_in_units(Ring.circle(0, 0, radius).chords()), *LAYERS[name]))
        places = _in_units(rounds[rounds[:, 2] == radius, :2])
        reference = gdstk.Reference(cell, tuple(places[0]))
        if len(places) > 1:  # in the file, each is a reference of its own
            reference.repetition = gdstk.Repetition(offsets=places[1:] - places[0])
        top.add(reference)


def _refuse_large(layers: Mapping[str, Drawn], result: Result) -> None:
    """Refuse coordinates that the format would silently wrap round."""
    reach = max(
        *(_reach(drawn.circles) for drawn in layers.values()),
        *(_reach(shape.outline.points) for drawn in layers.values() for shape in drawn.shapes),
        _reach([(label.x, label.y) for label in labels_of(result)]),
    )
    if reach > _LARGEST:
        found = f"a coordinate of {reach / 1e9:.3f} m"
        raise WrongInputError([Fault(Location("artwork", 0), "", found, "up to 2.147 m (32 bits of 1 nm)")])


def _reach(places: Sequence[tuple[int, ...]]) -> int:
    """Return the largest coordinate [nm], whatever its sign."""
    return int(np.abs(np.array(places, dtype=np.int64)).max(initial=0))


def _cell_name(stem: str) -> str:
    """Return a legal GDSII name: letters, digits, ``_?$``, at most 32 of them."""
    return re.sub(r"[^A-Za-z0-9_?$]", "_", stem)[:_NAME_LENGTH] or "artwork"


def _ascii(text: str) -> str:
    return text.encode("ascii", "replace").decode()
