"""The DXF file, read back by two readers that are not its writer."""

from __future__ import annotations

import io
import math
from collections import Counter
from collections.abc import Callable
from pathlib import Path
from typing import Any

import ezdxf
import pytest
import shapely
from ezdxf import recover

from layoutgen.artwork import LAYERS
from layoutgen.writers import Job, Result
from layoutgen.writers.dxf import write_dxf
from layoutgen.writers.outlines import doubled_area, turned
from layoutgen.writers.scene import labels_of, layers_of

JOB = Job(stem="board")


@pytest.fixture(scope="module")
def data(handmade: Result) -> bytes:
    return write_dxf(handmade, JOB)


@pytest.fixture(scope="module")
def document(data: bytes) -> Any:
    return ezdxf.read(io.StringIO(data.decode()))


def test_audit_finds_nothing_to_mend(data: bytes) -> None:
    """Entities spliced in with wrong handles, owners or subclasses are errors or silent fixes."""
    document, auditor = recover.read(io.BytesIO(data))
    assert auditor.errors == []
    assert auditor.fixes == []
    again = document.audit()
    assert (again.errors, again.fixes) == ([], [])
    assert len(document.modelspace()) > 10


def test_header_says_millimetres(document: Any) -> None:
    """The library's own default says metres: a board a thousand times too large."""
    assert document.header["$INSUNITS"] == 4
    assert document.header["$MEASUREMENT"] == 1
    assert document.dxfversion == "AC1024"


def test_layers_have_the_very_names(document: Any) -> None:
    """A misspelt layer, or one that entities use but no table lists, is lost on import."""
    own = {layer.dxf.name for layer in document.layers} - {"0", "Defpoints"}
    assert own == set(LAYERS)
    assert {entity.dxf.layer for entity in document.modelspace()} <= own


def test_only_polylines_circles_and_texts(document: Any) -> None:
    """Hatches and blocks are what receivers stumble over."""
    assert {entity.dxftype() for entity in document.modelspace()} == {"LWPOLYLINE", "CIRCLE", "TEXT"}
    blocks = [block.name for block in document.blocks]
    assert [name for name in blocks if not name.startswith("*")] == []


def test_handles_are_unique_and_below_the_seed(document: Any) -> None:
    """A repeated handle, or a seed at or below one in use, corrupts the file on the next save elsewhere."""
    handles = [int(entity.dxf.handle, 16) for entity in document.modelspace()]
    assert len(set(handles)) == len(handles)
    assert max(handles) < int(document.header["$HANDSEED"], 16)


def test_polylines_are_closed_without_repeats(document: Any) -> None:
    """Open loops and doubled vertices are the designer's usual repair."""
    for line in document.modelspace().query("LWPOLYLINE"):
        points = [(x, y) for x, y, *_ in line.get_points()]
        assert line.closed
        assert all(a != b for a, b in zip(points, [*points[1:], points[0]], strict=True))


def signed_area(line: Any) -> float:
    """Area [mm^2] of a polyline, arcs included, by the bulges alone."""
    points = line.get_points("xyb")
    total = 0.0
    for (x0, y0, bulge), (x1, y1, _) in zip(points, [*points[1:], points[0]], strict=True):
        total += (x0 * y1 - x1 * y0) / 2.0
        if bulge:
            angle = 4.0 * math.atan(bulge)
            radius = math.dist((x0, y0), (x1, y1)) / 2.0 / math.sin(angle / 2.0)
            total += radius**2 / 2.0 * (angle - math.sin(angle))
    return total


@pytest.mark.parametrize(
    "layer", [name for name in LAYERS if name not in ("drill_plated", "drill_nonplated")]
)
def test_outlines_turn_left_and_holes_turn_right(handmade: Result, document: Any, layer: str) -> None:
    """A hole that turns left fills itself; a bulge of the wrong sign changes an area."""
    found = Counter(
        round(signed_area(p), 5) for p in document.modelspace().query("LWPOLYLINE") if p.dxf.layer == layer
    )
    expected: Counter[float] = Counter()
    for shape in layers_of(handmade)[layer]:
        if shape.role == "drill":
            continue
        sense = -1 if shape.role == "cutout" else 1
        expected[round(sense * abs(doubled_area(shape.outline)) / 2e12, 5)] += 1
        expected.update(round(-abs(doubled_area(hole)) / 2e12, 5) for hole in shape.holes)
    assert found == expected


def test_drills_are_circles(handmade: Result, document: Any) -> None:
    """A drill as a polyline, or with its diameter as radius, is drilled wrong or not at all."""
    found = {
        (c.dxf.layer, round(c.dxf.center.x, 6), round(c.dxf.center.y, 6), round(c.dxf.radius, 6))
        for c in document.modelspace().query("CIRCLE")
    }
    vias = {("drill_plated", via.x / 1e6, via.y / 1e6, via.drill / 2e6) for via in handmade.artwork.vias}
    assert found == vias | {("drill_nonplated", 3.0, 9.0, 1.35)}


def test_texts_stand_with_their_middle_on_the_anchor(handmade: Result, document: Any) -> None:
    """The mark of the origin is a text: off its anchor, the origin is off."""
    found = set()
    for text in document.modelspace().query("TEXT"):
        assert text.get_placement()[0].name == "MIDDLE_CENTER"
        middle = text.get_placement()[1]
        found.add((text.dxf.text, text.dxf.layer, round(middle.x, 6), round(middle.y, 6), text.dxf.rotation))
    assert found == {(t.text, t.layer, t.x / 1e6, t.y / 1e6, t.rotation) for t in labels_of(handmade)}


def test_two_results_alike_give_the_same_bytes(remake: Callable[[], Result], data: bytes) -> None:
    """The library writes times and identities unless told not to; it must be told here and left as it was."""
    assert write_dxf(remake(), JOB) == data
    assert ezdxf.options.write_fixed_meta_data_for_testing is False


def test_gdal_reads_every_entity(handmade: Result, data: bytes, tmp_path: Path) -> None:
    """A reader of another origin: what it skips or leaves open, other programs will too."""
    pyogrio = pytest.importorskip("pyogrio")
    path = tmp_path / "board.dxf"
    path.write_bytes(data)
    _, _, geometries, fields = pyogrio.raw.read(path, columns=["Layer", "SubClasses"])
    counts = Counter(fields[0].tolist())
    document = ezdxf.read(io.StringIO(data.decode()))
    assert counts == Counter(entity.dxf.layer for entity in document.modelspace())
    shapes = [shapely.from_wkb(wkb) for wkb in geometries]
    lines = [s for s, layer in zip(shapes, fields[0], strict=True) if layer == "copper_bottom"]
    assert all(line.is_ring or line.geom_type == "Polygon" for line in lines)
    areas = sorted(shapely.Polygon(shapely.get_coordinates(line)[:, :2]).area for line in lines)
    plane = handmade.artwork.on("copper_bottom")[0]
    assert areas[-1] == pytest.approx(doubled_area(plane.outline) / 2e12, rel=1e-4)


def test_turning_an_outline_mirrors_its_arcs() -> None:
    """Bulges left on their old edges, or with their old sign, dent what bulged."""
    from layoutgen.geometry import Ring

    ring = Ring(((0, 0), (1_000_000, 0), (1_000_000, 500_000), (0, 900_000)), (0.2, -0.1, 0.0, 0.4))
    back = turned(ring, -1)
    assert doubled_area(back) == pytest.approx(-doubled_area(ring))
    assert back.polygon(1.0).symmetric_difference(ring.polygon(1.0)).area < 1e-4 * ring.polygon(1.0).area
    assert set(turned(back, 1).points) == set(ring.points)
    assert doubled_area(turned(back, 1)) == pytest.approx(doubled_area(ring))
