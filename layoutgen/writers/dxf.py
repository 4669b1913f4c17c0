"""DXF R2010 in millimetres: closed polylines with true arcs, circles for drills, texts.

No hatches, no blocks. Outlines run counter-clockwise, holes and the profile's cut-outs clockwise; copper is
where the outlines wind round more often counter-clockwise than clockwise (every shape keeps its own outlines,
also where shapes of one net overlap). The header, tables and objects are the library's; the entities are
written here as text, since the library takes more than linear time for many.
"""

from __future__ import annotations

import io
from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

from layoutgen.artwork import LAYERS, Label, Shape
from layoutgen.geometry import Ring
from layoutgen.numbers import fixed, mm
from layoutgen.writers.outlines import distinct_vertices, turned
from layoutgen.writers.records import Job, Result
from layoutgen.writers.scene import labels_of, layers_of

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
    owner = document.modelspace().layout_key
    bodies = list(_bodies(result))
    handles.reset(f"{first + len(bodies):X}")
    return "".join(
        f"  0\n{kind}\n  5\n{first + i:X}\n330\n{owner}\n100\nAcDbEntity\n{body}"
        for i, (kind, body) in enumerate(bodies)
    )


def _bodies(result: Result) -> Iterator[tuple[str, str]]:
    """Yield type and body of every entity, layer by layer."""
    for name, shapes in layers_of(result).items():
        for shape in shapes:
            if shape.role == "drill":
                yield "CIRCLE", _circle(name, shape.outline)
            else:
                yield from (("LWPOLYLINE", _polyline(name, ring)) for ring in _rings(shape))
    for label in labels_of(result):
        yield "TEXT", _text(label)


def _rings(shape: Shape) -> list[Ring]:
    """Return outline and holes, turned the way the file promises."""
    if shape.role == "cutout":
        return [turned(shape.outline, -1)]
    return [turned(shape.outline, 1), *(turned(hole, -1) for hole in shape.holes)]


def _polyline(layer: str, ring: Ring) -> str:
    """Return the body of a closed polyline; a vertex that repeats the one before it is left out."""
    vertices = distinct_vertices(ring)
    lines = [f"  8\n{layer}\n100\nAcDbPolyline\n 90\n{len(vertices)}\n 70\n1\n"]
    for (x, y), bulge in vertices:
        lines.append(f" 10\n{mm(x)}\n 20\n{mm(y)}\n")
        if bulge:
            lines.append(f" 42\n{fixed(bulge, 12)}\n")
    return "".join(lines)


def _circle(layer: str, ring: Ring) -> str:
    """Return the body of a drill's circle from its two half-circle arcs."""
    (x0, y0), (x1, _) = ring.points
    middle, radius = (x0 + x1) // 2, (x1 - x0) // 2
    return f"  8\n{layer}\n100\nAcDbCircle\n 10\n{mm(middle)}\n 20\n{mm(y0)}\n 30\n0.0\n 40\n{mm(radius)}\n"


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
