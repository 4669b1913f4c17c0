"""Drawings of other origin: every way of drawing one outline reads to the same polygon."""

from __future__ import annotations

import itertools
from pathlib import Path

import numpy as np
import pytest
import shapely
from shapely.affinity import scale

from layoutgen.checks.planar import farthest
from layoutgen.errors import WrongInputError
from layoutgen.foreign import ForeignArtwork, read_artwork
from tests.foreign.drawings import NEW, OLD, SLOT, SLOT_BULGES, Pen, Way, document, save, slot_polygon

HALF_UM = 500.0


def copper(artwork: ForeignArtwork, layer: str = "copper_top") -> shapely.Polygon:
    """Return a layer's copper in millimetres, joined."""
    return scale(shapely.union_all(list(artwork.layers[layer])), 1e-6, 1e-6, origin=(0, 0))


def read(doc: object, tmp_path: Path, unit: str | None = None) -> ForeignArtwork:
    """Write a drawing and read it."""
    return read_artwork(save(doc, tmp_path / "board.dxf"), unit=unit)


COMBINATIONS = [
    *itertools.product(OLD, ("R12", "R2000", "R2018"), ("mm", "in", None)),
    *itertools.product(NEW, ("R2000", "R2018"), ("mm", "in", None)),
]


@pytest.mark.parametrize(
    ("way", "version", "unit"), COMBINATIONS, ids=lambda v: getattr(v, "__name__", str(v))
)
def test_one_outline_however_drawn(way: Way, version: str, unit: str | None, tmp_path: Path) -> None:
    """Catches an entity, format, block or unit that reads to a polygon 0.5 um off."""
    doc = document(version, unit)
    way(Pen(doc, unit))
    stated = unit is not None and version != "R12"
    artwork = read(doc, tmp_path, None if stated else (unit or "mm"))
    got, wanted = copper(artwork), slot_polygon()
    limit = 1.1e-2 if way.__name__ == "by_gap" else HALF_UM / 1e6
    assert farthest(got.boundary, wanted.boundary) < limit
    assert got.area == pytest.approx(wanted.area, abs=2e-2 if way.__name__ == "by_gap" else 2e-4)


@pytest.mark.parametrize("version", ["R12", "R2000", "R2018"])
def test_no_unit_asks_for_one(version: str, tmp_path: Path) -> None:
    """Catches a drawing without a unit read as if it had one."""
    doc = document(version, None)
    Pen(doc).polyline(SLOT)
    with pytest.raises(WrongInputError, match=r"states no unit; allowed: --unit mm") as caught:
        read(doc, tmp_path)
    assert caught.value.exit_status == 2
    assert len(caught.value.faults) == 1


def test_unit_goes_before_the_files(tmp_path: Path) -> None:
    """Catches a wrong unit in the file that nobody can mend, or mended without a word."""
    doc = document(unit="in")
    Pen(doc, "mm").polyline(SLOT)
    artwork = read(doc, tmp_path, "mm")
    assert copper(artwork).bounds == (2.0, 2.0, 8.0, 4.0)
    assert [note.rule for note in artwork.notes] == ["foreign.unit"]


def test_closed_gap_is_told(tmp_path: Path) -> None:
    """Catches a gap closed in silence, or told at another place."""
    doc = document()
    OLD[2](Pen(doc))
    note = next(note for note in read(doc, tmp_path).notes if note.rule == "foreign.gap_closed")
    assert note.text.startswith("an outline left open by 10.0 um")
    assert note.at == (2_005_000, 4_000_000)


def test_wide_gap_stays_open_and_is_told(tmp_path: Path) -> None:
    """Catches a line that closes nothing taken for copper, or dropped in silence."""
    doc = document()
    pen = Pen(doc)
    pen.polyline(SLOT)
    for a, b in (((10, 1), (12, 1)), ((12, 1), (12, 3)), ((12, 3), (10, 1.03))):
        pen.line(a, b)
    artwork = read(doc, tmp_path)
    assert copper(artwork).area == pytest.approx(12.0)
    assert [note.rule for note in artwork.notes] == ["foreign.left_open"]


def test_holes_by_direction_and_islands_in_them(tmp_path: Path) -> None:
    """Catches clockwise outlines inside copper taken for copper, and islands in them lost."""
    doc = document()
    pen = Pen(doc)
    pen.polyline([(0, 0), (20, 0), (20, 20), (0, 20)])
    pen.polyline([(5, 5), (5, 15), (15, 15), (15, 5)])
    pen.polyline([(8, 8), (12, 8), (12, 12), (8, 12)])
    pen.polyline([(1, 1), (3, 1), (3, 3), (1, 3)])  # copper on copper, as pads on lines are
    assert copper(read(doc, tmp_path)).area == pytest.approx(400 - 100 + 16)


def test_a_drawing_all_the_other_way_round(tmp_path: Path) -> None:
    """Catches a file whose outlines are clockwise and whose holes are not read as solid copper."""
    doc = document()
    pen = Pen(doc)
    pen.polyline([(0, 0), (0, 20), (20, 20), (20, 0)])
    pen.polyline([(5, 5), (15, 5), (15, 15), (5, 15)])
    pen.polyline([(30, 0), (32, 0), (32, 2), (30, 2)])
    assert copper(read(doc, tmp_path)).area == pytest.approx(300 + 4)


def test_outlines_of_single_lines_nest_by_turns(tmp_path: Path) -> None:
    """Catches outlines whose direction means nothing judged by it."""
    doc = document()
    pen = Pen(doc)
    for low, high in ((0, 20), (5, 15), (8, 12)):
        corners = [(low, low), (high, low), (high, high), (low, high)]
        for a, b in zip(corners, corners[1:] + corners[:1], strict=True):
            pen.line(a, b)
    assert copper(read(doc, tmp_path)).area == pytest.approx(400 - 100 + 16)


@pytest.mark.parametrize(("style", "area"), [(0, 400 - 100 + 16), (1, 400 - 100), (2, 400)])
def test_hatches_with_holes(style: int, area: float, tmp_path: Path) -> None:
    """Catches a hatch's holes filled, its islands lost, or its boundary polylines taken for copper."""
    doc = document()
    pen = Pen(doc)
    hatch = pen.space.add_hatch(dxfattribs={**pen.attribs, "hatch_style": style})
    for low, high in ((0, 20), (5, 15), (8, 12)):
        corners = [(low, low), (high, low), (high, high), (low, high)]
        hatch.paths.add_polyline_path(corners, is_closed=True)
        if style == 0:
            pen.polyline([(float(x), float(y)) for x, y in corners])
    assert copper(read(doc, tmp_path)).area == pytest.approx(area)


def test_curved_hatch_edges(tmp_path: Path) -> None:
    """Catches an ellipse or a spline in a hatch's boundary read wrongly: a half ellipse of 3 by 1."""
    doc = document()
    hatch = doc.modelspace().add_hatch(dxfattribs={"layer": "copper_top"})
    path = hatch.paths.add_edge_path()
    path.add_ellipse((5, 5), major_axis=(3, 0), ratio=1 / 3, start_angle=0, end_angle=180)
    path.add_spline(control_points=[(2, 5), (5, 5), (8, 5)], degree=2, knot_values=[0, 0, 0, 1, 1, 1])
    got = copper(read(doc, tmp_path))
    assert got.area == pytest.approx(np.pi * 3 / 2, abs=1e-4)
    assert got.bounds == pytest.approx((2, 5, 8, 6), abs=1e-5)


def test_arrays_of_blocks(tmp_path: Path) -> None:
    """Catches an array of blocks read as one of them, or its turn left out."""
    doc = document()
    block = doc.blocks.new("PAD")
    Pen(doc, layer="0", space=block).polyline([(0, 0), (1, 0), (1, 1), (0, 1)])
    doc.modelspace().add_blockref(
        "PAD",
        (10, 10),
        dxfattribs={
            "layer": "copper_top",
            "row_count": 2,
            "column_count": 3,
            "row_spacing": 2,
            "column_spacing": 3,
            "rotation": 90,
        },
    )
    got = copper(read(doc, tmp_path))
    assert got.area == pytest.approx(6.0)
    assert got.bounds == pytest.approx((7, 10, 10, 17))


def test_mirrored_block_with_a_hole_inside_other_copper(tmp_path: Path) -> None:
    """Catches the direction of outlines judged after a mirror has turned it round."""
    doc = document()
    pen = Pen(doc)
    pen.polyline([(-30, -30), (30, -30), (30, 30), (-30, 30)])
    block = doc.blocks.new("PAD")
    Pen(doc, layer="0", space=block).polyline([(1, 1), (3, 1), (3, 3), (1, 3)])
    doc.modelspace().add_blockref("PAD", (0, 0), dxfattribs={"layer": "copper_top", "xscale": -1})
    assert copper(read(doc, tmp_path)).area == pytest.approx(3600)


def test_seen_from_below(tmp_path: Path) -> None:
    """Catches entities drawn on the back of their plane read at the wrong side."""
    doc = document()
    attribs = {"layer": "copper_top", "extrusion": (0, 0, -1)}
    doc.modelspace().add_lwpolyline([(-1, 0), (-3, 0), (-3, 2), (-1, 2)], close=True, dxfattribs=attribs)
    doc.modelspace().add_circle((-10, 1), 1, dxfattribs=attribs)
    assert copper(read(doc, tmp_path)).bounds == pytest.approx((1, 0, 11, 2))


def test_profile_and_drills(tmp_path: Path) -> None:
    """Catches cut-outs taken for boards, drills that are not round judged as round ones."""
    doc = document()
    Pen(doc).polyline(SLOT)
    profile = Pen(doc, layer="PROFILE")
    profile.polyline([(0, 0), (20, 0), (20, 10), (0, 10)])
    profile.polyline([(12, 2), (16, 2), (16, 6), (12, 6)])
    Pen(doc, layer="drill_plated").circle(3, 3, 0.15)
    Pen(doc, layer="drill_nonplated").polyline(SLOT, SLOT_BULGES)
    artwork = read(doc, tmp_path)
    assert [p.area / 1e12 for p in artwork.profile] == [pytest.approx(200 - 16)]
    assert [(h.x, h.y, h.diameter, h.plated) for h in artwork.holes] == [
        (3_000_000, 3_000_000, 300_000.0, True)
    ]
    assert [note.rule for note in artwork.notes] == ["foreign.slot"]


def test_what_is_not_read_is_told(tmp_path: Path) -> None:
    """Catches texts on copper and layers of other names dropped in silence."""
    doc = document()
    pen = Pen(doc)
    pen.polyline(SLOT)
    doc.modelspace().add_text("REV A", dxfattribs={"layer": "copper_top"})
    Pen(doc, layer="Ebene 7").polyline(SLOT)
    doc.modelspace().add_text("port", dxfattribs={"layer": "reference"})
    unread = read(doc, tmp_path).unread
    assert dict(unread) == {
        "TEXT on copper_top": 1,
        "shapes on layer Ebene 7, which is none of ours": 1,
    }


def test_solid_and_tapered_line(tmp_path: Path) -> None:
    """Catches the crossed order of a solid's corners, and widths that change along a polyline."""
    doc = document()
    space = doc.modelspace()
    space.add_solid([(0, 0), (2, 0), (0, 2), (2, 2)], dxfattribs={"layer": "copper_top"})
    space.add_lwpolyline(
        [(5, 0, 1.0, 3.0), (9, 0, 0.0, 0.0)], format="xyse", dxfattribs={"layer": "copper_top"}
    )
    assert copper(read(doc, tmp_path)).area == pytest.approx(4 + 8)
