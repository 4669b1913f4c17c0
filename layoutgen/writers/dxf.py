"""DXF R2010 in millimetres: closed polylines with true arcs, circles for drills, texts.

No hatches, no blocks. Outlines run counter-clockwise, holes and the profile's cut-outs clockwise; copper is
where the outlines wind round more often counter-clockwise than clockwise (every shape keeps its own outlines,
also where shapes of one net overlap); what is round in copper is a polyline of two arcs, with a direction.
No vertex is repeated and no edge is below 1 um. The header, tables and objects are the library's; the
entities are written here as text, since the library takes more than linear time for many.
"""

from __future__ import annotations

import io
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

from layoutgen.artwork import LAYERS, Label, Shape
from layoutgen.geometry import Ring
from layoutgen.numbers import fixed, mm
from layoutgen.writers.long_edges import long_edges
from layoutgen.writers.outlines import turned
from layoutgen.writers.records import Job, Result
from layoutgen.writers.scene import Drawn, drawn_layers, labels_of

__all__ = ["write_dxf"]

_COLOURS = {
    "copper_top": 30,
    "copper_bottom": 34,
    "soldermask_top": 94,
    "soldermask_bottom": 96,
    "paste_top": 8,
    "legend_top": 7,
    "profile": 5,
    "drill_plated": 4,
    "drill_nonplated": 6,
    "reference": 9,
    "findings": 1,
}
"""Colour index of each layer on screen [-]."""

_MILLIMETRES, _METRIC = 4, 1
_ENTITIES = "  2\nENTITIES\n"
_NM = 1e6
"""Nanometres in a millimetre; quotients of whole ones have six exact decimals up to 4,000 km."""
_VERTEX = " 10\n%.6f\n 20\n%.6f\n"
_HALF = f"{_VERTEX} 42\n1.000000000000\n"
_CIRCLE = f"{_VERTEX} 30\n0.0\n 40\n%.6f\n"


def write_dxf(result: Result, job: Job) -> bytes:
    """Return the DXF file; it is the same for equal results (``job`` changes nothing)."""
    with _fixed_meta_data() as ezdxf:
        document = ezdxf.new("R2010", units=_MILLIMETRES)
        document.header["$MEASUREMENT"] = _METRIC
        for name in LAYERS:
            document.layers.add(name, color=_COLOURS[name])
        for name in sorted(document.entitydb.dxf_types_in_use()):
            document.classes.add_class(name)  # here, since the library takes them in the order of a set
        _set_extents(document, result)
        entities = _entities(result, document)
        stream = io.StringIO()
        document.write(stream)
    return _spliced(stream.getvalue(), entities).encode("utf-8")


@contextmanager
def _fixed_meta_data() -> Iterator[Any]:
    """Let the library write fixed times and identities, inside this block only."""
    import ezdxf
    from ezdxf._options import options

    before = options.write_fixed_meta_data_for_testing
    options.write_fixed_meta_data_for_testing = True
    try:
        yield ezdxf
    finally:
        options.write_fixed_meta_data_for_testing = before


def _set_extents(document: Any, result: Result) -> None:
    """Tell viewers where the board is."""
    width, height = float(mm(result.placement.width)), float(mm(result.placement.height))
    document.header["$EXTMIN"], document.header["$EXTMAX"] = (0.0, 0.0, 0.0), (width, height, 0.0)
    document.set_modelspace_vport(height=1.1 * max(width, height), center=(width / 2, height / 2))


def _entities(result: Result, document: Any) -> str:
    """Return all entities as text, and move the document's handle counter past theirs."""
    handles = document.entitydb.handles
    first = int(str(handles), 16)
    writer = _Writer(document.modelspace().layout_key, first)
    texts = [text for name, drawn in drawn_layers(result).items() for text in writer.layer(name, drawn)]
    texts += [writer.entity("TEXT", _text(label)) for label in labels_of(result)]
    handles.reset(f"{writer.handle:X}")
    return "".join(texts)


class _Writer:
    """Writes entities one after another, each with the next handle."""

    def __init__(self, owner: str, handle: int) -> None:
        self.head = f"  0\n%s\n  5\n%X\n330\n{owner}\n100\nAcDbEntity\n"
        self.handle = handle

    def layer(self, name: str, drawn: Drawn) -> Iterator[str]:
        """Yield outlines, then drills or what else is round."""
        for shape in drawn.shapes:
            yield from (self.entity("LWPOLYLINE", _polyline(name, ring)) for ring in _rings(shape))
        first, self.handle = self.handle, self.handle + len(drawn.circles)
        circles = enumerate(drawn.circles, start=first)
        if name.startswith("drill"):
            circle = f"{self.head}  8\n{name}\n100\nAcDbCircle\n{_CIRCLE}"
            yield from (circle % ("CIRCLE", k, x / _NM, y / _NM, r / _NM) for k, (x, y, r) in circles)
        else:
            disc = f"{self.head}  8\n{name}\n100\nAcDbPolyline\n 90\n2\n 70\n1\n{_HALF}{_HALF}"
            for k, (x, y, r) in circles:
                yield disc % ("LWPOLYLINE", k, (x - r) / _NM, y / _NM, (x + r) / _NM, y / _NM)

    def entity(self, kind: str, body: str) -> str:
        """Return an entity."""
        text = self.head % (kind, self.handle)
        self.handle += 1
        return text + body


def _rings(shape: Shape) -> list[Ring]:
    """Return outline and holes, turned the way the file promises."""
    if shape.role == "cutout":
        return [turned(shape.outline, -1)]
    return [turned(shape.outline, 1), *(turned(hole, -1) for hole in shape.holes)]


def _polyline(layer: str, ring: Ring) -> str:
    """Return the body of a closed polyline without repeated vertices or edges below a micrometre."""
    vertices = long_edges(ring)
    lines = [f"  8\n{layer}\n100\nAcDbPolyline\n 90\n{len(vertices)}\n 70\n1\n"]
    for (x, y), bulge in vertices:
        lines.append(_VERTEX % (x / _NM, y / _NM))
        if bulge:
            lines.append(f" 42\n{fixed(bulge, 12)}\n")
    return "".join(lines)


def _text(label: Label) -> str:
    """Return the body of a text, its middle on its anchor."""
    place = f" 10\n{mm(label.x)}\n 20\n{mm(label.y)}\n 30\n0.0\n 40\n{mm(label.height)}\n"
    middle = f" 72\n1\n 11\n{mm(label.x)}\n 21\n{mm(label.y)}\n 31\n0.0\n"
    turn = f" 50\n{fixed(label.rotation)}\n" if label.rotation else ""
    return (
        f"  8\n{label.layer}\n100\nAcDbText\n{place}  1\n{label.text}\n{turn}{middle}100\nAcDbText\n 73\n2\n"
    )


def _spliced(skeleton: str, entities: str) -> str:
    """Return the library's empty file with the entities put into their section."""
    head, mark, tail = skeleton.partition(_ENTITIES)
    return head + mark + entities + tail
