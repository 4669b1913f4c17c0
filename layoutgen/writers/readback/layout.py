"""GDSII and OASIS read back: units, polygons of every layer with all references placed, texts."""

from __future__ import annotations

import io
import tempfile
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import numpy as np
import shapely

from layoutgen.artwork import LAYERS
from layoutgen.geometry import CHORD_TOLERANCE_NM
from layoutgen.writers.readback.areas import Area, area_check, count_check, model_area
from layoutgen.writers.readback.records import Evidence, NotProved, optional_library
from layoutgen.writers.records import Result
from layoutgen.writers.scene import labels_of, layers_of

__all__ = ["read_gds", "read_oasis"]

_GDSTK = "gdstk, the writer's own library"
_METRE_PER_NM = 1e-9

Layout = tuple[dict[tuple[int, int], Area], dict[tuple[int, int], int]]
"""Areas and numbers of texts by layer and datatype."""


def read_gds(file: str, data: bytes, result: Result) -> Evidence:
    """Yield what python-gdsii finds in a GDSII file; gdstk, where that is not installed."""
    library = optional_library("gdsii.library")
    if library is None:
        yield NotProved(
            file, "no independent reader for GDSII is installed (python-gdsii); read by gdstk alone"
        )
        yield from _compared(file, _GDSTK, _by_gdstk(data, "gds"), result)
    else:
        yield from _compared(file, "python-gdsii", _by_gdsii(library, data), result)


def read_oasis(file: str, data: bytes, result: Result) -> Evidence:
    """Yield what gdstk finds in an OASIS file."""
    yield NotProved(file, "no independent reader for OASIS is known; read by the writer's own library")
    yield from _compared(file, _GDSTK, _by_gdstk(data, "oas"), result)


def _compared(file: str, reader: str, layout: Layout, result: Result) -> Evidence:
    areas, texts = layout
    for name, shapes in layers_of(result).items():
        wanted = model_area(shapes, CHORD_TOLERANCE_NM, split_circles=False)
        yield area_check(file, reader, name, areas.pop(LAYERS[name], Area()), wanted)
    yield count_check(file, reader, "layers that are not the model's", len(areas), 0)
    labels = labels_of(result)
    for name, numbers in LAYERS.items():
        wanted_texts = sum(label.layer == name for label in labels)
        if wanted_texts or texts.get(numbers):
            yield count_check(file, reader, f"{name}: texts", texts.get(numbers, 0), wanted_texts)


def _by_gdsii(module: Any, data: bytes) -> Layout:
    """Return the contents of a GDSII file as python-gdsii reads it.

    Raises:
        ValueError: A reference that is turned, mirrored or scaled, or a cell that is missing.
    """
    library = module.Library.load(io.BytesIO(data))
    scale = library.physical_unit / _METRE_PER_NM
    cells = {cell.name: cell for cell in library}
    referred = {
        element.struct_name for cell in library for element in cell if hasattr(element, "struct_name")
    }
    areas: dict[tuple[int, int], Area] = {}
    texts: dict[tuple[int, int], int] = {}
    for cell in library:
        if cell.name not in referred:
            _gather(cell, cells, (0.0, 0.0), scale, areas, texts)
    return areas, texts


def _gather(
    cell: Any,
    cells: dict[bytes, Any],
    at: tuple[float, float],
    scale: float,
    areas: dict[tuple[int, int], Area],
    texts: dict[tuple[int, int], int],
) -> None:
    """Add a cell's elements, and those of the cells it refers to, at a place [nm]."""
    for element in cell:
        kind = type(element).__name__
        if kind == "Boundary":
            points = np.array(element.xy[:-1], dtype=float) * scale + np.array(at)
            area = areas.setdefault((element.layer, element.data_type), Area())
            area.polygons.append(shapely.Polygon(points))
        elif kind == "Text":
            key = (element.layer, element.text_type)
            texts[key] = texts.get(key, 0) + 1
        elif kind == "SRef" and not (element.strans or element.angle or element.mag not in (None, 1.0)):
            ((x, y),) = element.xy
            place = (at[0] + x * scale, at[1] + y * scale)
            _gather(cells[element.struct_name], cells, place, scale, areas, texts)
        else:
            raise ValueError(f"an element that is not expected: {kind}")


def _by_gdstk(data: bytes, suffix: str) -> Layout:
    """Return the contents of a GDSII or OASIS file as gdstk reads it."""
    import gdstk

    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder, f"in.{suffix}")
        path.write_bytes(data)
        library: Any = gdstk.read_gds(path) if suffix == "gds" else gdstk.read_oas(path)
    scale = library.unit / _METRE_PER_NM
    areas: dict[tuple[int, int], Area] = {}
    texts: dict[tuple[int, int], int] = {}
    for cell in library.top_level():
        for polygon in cell.get_polygons():
            area = areas.setdefault((polygon.layer, polygon.datatype), Area())
            area.polygons.append(shapely.Polygon(polygon.points * scale))
        for key in _text_layers(cell):
            texts[key] = texts.get(key, 0) + 1
    return areas, texts


def _text_layers(cell: Any) -> Iterator[tuple[int, int]]:
    for label in cell.get_labels():
        yield label.layer, label.texttype
