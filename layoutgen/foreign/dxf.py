"""DXF: every entity of the model space as outlines, lines and filled areas, blocks resolved.

Blocks are flattened in their own coordinates and placed by their matrix, so nested, scaled, mirrored and
unevenly scaled ones are exact. The direction of an outline is the one it was drawn in, also where a mirrored
block shows it the other way round.
"""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import Any

import numpy as np
import numpy.typing as npt

from layoutgen.errors import WrongInputError
from layoutgen.foreign.entities import primitives_of
from layoutgen.foreign.records import ForeignNote, Primitive, Raw, refused

__all__ = ["UNITS", "read_dxf"]

Floats = npt.NDArray[np.float64]

UNITS = {"mm": 1e6, "in": 25.4e6, "um": 1e3}
"""What may be said with ``--unit``, in nanometres."""

_INSUNITS = {
    1: ("in", 25.4e6),
    2: ("ft", 304.8e6),
    4: ("mm", 1e6),
    5: ("cm", 1e7),
    6: ("m", 1e9),
    8: ("microinch", 25.4),
    9: ("mil", 25_400.0),
    12: ("nm", 1.0),
    13: ("um", 1e3),
    14: ("dm", 1e8),
}
_CHORD_NM = 5.0
_DEEPEST = 64
_MOST = 2_000_000
_MOST_POINTS = 40_000_000
_FORM = "a complete DXF file"
_TAIL = 4096
_BINARY = b"AutoCAD Binary DXF"


def read_dxf(path: Path, unit: str | None) -> Raw:
    """Return everything drawn in a DXF file [nm].

    Args:
        path: The file.
        unit: ``mm``, ``in`` or ``um``; needed where the file states none, and goes before what it states.

    Raises:
        WrongInputError: The file is broken, cut off or too large, or states no unit and none is given.
    """
    document = _document(path)
    name, scale, notes = _unit(path, document, unit)
    try:
        reader = _Reader(document, _CHORD_NM / scale, str(path))
        drawn = reader.all(document.modelspace(), np.eye(3), None, 0)
        primitives = tuple(_scaled(primitive, scale) for primitive in drawn)
    except WrongInputError:
        raise
    except Exception as error:  # the library raises whatever a broken entity leads it to
        raise refused(str(path), f"an entity that cannot be read ({type(error).__name__})", _FORM) from None
    return Raw(primitives=primitives, unit=name, skipped=dict(sorted(reader.skipped.items())), notes=notes)


def _document(path: Path) -> Any:
    """Return the file as the library reads it."""
    from ezdxf.filemanagement import readfile

    _refuse_torn(path)
    try:
        return readfile(path)
    except Exception as error:  # likewise: struct errors, key errors, recursion, memory
        text = "".join(c for c in str(error) if c.isprintable())[:60]
        raise refused(str(path), f"a broken file ({text or type(error).__name__})", _FORM) from None


def _refuse_torn(path: Path) -> None:
    """Refuse a text file that does not end with EOF."""
    with path.open("rb") as file:
        head = file.read(len(_BINARY))
        size = file.seek(0, 2)
        file.seek(max(0, size - _TAIL))
        tail = file.read()
    if head != _BINARY and not tail.rstrip().endswith(b"EOF"):
        raise refused(str(path), "a file that is cut off, or another format", _FORM)


def _unit(path: Path, document: Any, unit: str | None) -> tuple[str, float, tuple[ForeignNote, ...]]:
    """Return the unit's name, its length [nm], and a note where the one given is not the file's."""
    code = int(document.header.get("$INSUNITS", 0))
    stated = _INSUNITS.get(code)
    if document.dxfversion <= "AC1009" and "$INSUNITS" not in document.header:
        stated = None
    if unit is None:
        if stated is None:
            what = (
                f"unit code {code}, which is none of a board's" if code else "a drawing that states no unit"
            )
            raise refused(str(path), what, "--unit mm, --unit in or --unit um")
        return *stated, ()
    if stated is not None and stated[0] != unit:
        text = f"the file says {stated[0]}, read in {unit} as asked"
        return unit, UNITS[unit], (ForeignNote("foreign.unit", "", None, text),)
    return unit, UNITS[unit], ()


def _scaled(primitive: Primitive, scale: float) -> Primitive:
    """Return a primitive in nanometres."""
    rings = tuple(ring * scale for ring in primitive.rings)
    return Primitive(primitive.layer, primitive.kind, rings, primitive.turn)


class _Reader:
    """Walks through a document's entities and blocks; counts what it cannot read."""

    def __init__(self, document: Any, tolerance: float, file: str) -> None:
        """Keep the document.

        Args:
            document: The library's document.
            tolerance: Largest distance of a chord from its curve, in the file's unit.
            file: The file's name for messages.
        """
        self.document, self.tolerance, self.file = document, tolerance, file
        self.skipped: Counter[tuple[str, str]] = Counter()
        self._blocks: dict[tuple[str, float], tuple[list[Primitive], list[Any]]] = {}
        self._count = self._points = 0

    def all(
        self, entities: Iterable[Any], matrix: Floats, layer: str | None, depth: int
    ) -> Iterator[Primitive]:
        """Yield what entities stand for, placed by a matrix (3, 3) that takes rows (x, y, 1).

        Args:
            entities: Of the model space, or of a block.
            matrix: Where they stand in the drawing.
            layer: Layer of the block's reference, which things on layer 0 take; None in the model space.
            depth: How many blocks lie about them.
        """
        own, inserts = self._sorted(entities, _stretch(matrix))
        yield from self._placed(own, matrix, layer)
        for insert in inserts:
            yield from self._insert(insert, matrix, layer, depth)

    def _sorted(self, entities: Iterable[Any], stretch: float) -> tuple[list[Primitive], list[Any]]:
        """Return the primitives of entities in their own coordinates, and the references among them."""
        found: list[Primitive] = []
        inserts: list[Any] = []
        for entity in entities:
            if entity.dxftype() == "INSERT":
                inserts.append(entity)
            else:
                found += primitives_of(entity, self.tolerance / stretch, self.skipped)
        return found, inserts

    def _placed(self, own: Iterable[Primitive], matrix: Floats, layer: str | None) -> Iterator[Primitive]:
        """Yield primitives where a matrix puts them."""
        for primitive in own:
            self._count += 1
            self._points += sum(map(len, primitive.rings))
            if self._count > _MOST or self._points > _MOST_POINTS:
                found = f"{self._count} shapes, {self._points} vertices and more with all blocks resolved"
                raise refused(self.file, found, f"at most {_MOST} and {_MOST_POINTS}")
            rings = tuple(ring @ matrix[:2, :2] + matrix[2, :2] for ring in primitive.rings)
            named = layer if layer is not None and primitive.layer == "0" else primitive.layer
            yield Primitive(named, primitive.kind, rings, primitive.turn)

    def _insert(self, insert: Any, matrix: Floats, layer: str | None, depth: int) -> Iterator[Primitive]:
        """Yield what a reference to a block, or an array of them, stands for."""
        if depth >= _DEEPEST:
            raise refused(self.file, f"blocks nested more than {_DEEPEST} deep", _FORM)
        block = insert.block()
        if block is None:
            raise refused(self.file, "a reference to a block that is not there", _FORM)
        if insert.mcount > _MOST:
            raise refused(self.file, f"an array of {insert.mcount} blocks", f"at most {_MOST}")
        named = layer if layer is not None and insert.dxf.layer == "0" else insert.dxf.layer
        for one in insert.multi_insert() if insert.mcount > 1 else (insert,):
            local = _flat(one.matrix44()) @ matrix
            key = (block.name, _stretch(local))
            if key not in self._blocks:
                self._blocks[key] = self._sorted(block, key[1])
            own, inserts = self._blocks[key]
            yield from self._placed(own, local, named)
            for inner in inserts:
                yield from self._insert(inner, local, named, depth + 1)


def _flat(matrix: Any) -> Floats:
    """Return the part of a spatial matrix that acts in the plane, for rows (x, y, 1)."""
    rows = np.array(list(matrix), dtype=float).reshape(4, 4)
    return rows[np.ix_((0, 1, 3), (0, 1, 3))]


def _stretch(matrix: Floats) -> float:
    """Return the power of two next above a matrix's stretch [-]: blocks of like size share their chords."""
    stretch = float(np.linalg.norm(matrix[:2, :2], 2))
    return float(2.0 ** math.ceil(math.log2(max(stretch, 1e-12)) - 1e-9))
