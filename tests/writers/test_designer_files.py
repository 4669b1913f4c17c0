"""The PCB designer's files beside the DXF R2010: R12, the table of shapes; the mask house's layers."""

from __future__ import annotations

import csv
import io
from collections import Counter
from collections.abc import Callable
from typing import Any

import pytest
import shapely
from ezdxf import recover

from layoutgen.artwork import LAYERS
from layoutgen.geometry import Ring
from layoutgen.writers import Job, Result
from layoutgen.writers.copper_nets import copper_net, copper_nets
from layoutgen.writers.dxf_r12 import KEEPOUT, reference_square, write_dxf_r12
from layoutgen.writers.layer_table import write_layer_table
from layoutgen.writers.outlines import as_circle, turned
from layoutgen.writers.scene import labels_of, layers_of
from layoutgen.writers.shape_table import ADJUST, KEEP, write_shape_table
from tests.writers.coupled_board import FIRST, SECOND, coupled_board

JOB = Job(stem="board")


@pytest.fixture(scope="module")
def data(handmade: Result) -> bytes:
    return write_dxf_r12(handmade, JOB)


@pytest.fixture(scope="module")
def entities(data: bytes) -> list[Any]:
    document, _ = recover.read(io.BytesIO(data))
    return list(document.modelspace())


def rows(data: bytes) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(data.decode())))


class TestR12:
    def test_audit_finds_nothing_to_mend(self, data: bytes) -> None:
        """A reader of old files is a strict one."""
        document, auditor = recover.read(io.BytesIO(data))
        assert auditor.errors == []
        assert auditor.fixes == []
        assert document.dxfversion == "AC1009"

    def test_has_only_what_r12_knows(self, data: bytes, entities: list[Any]) -> None:
        """Light polylines, bulges and subclass marks are of later versions, or not wanted here."""
        assert {e.dxftype() for e in entities} == {"POLYLINE", "CIRCLE", "TEXT", "LINE"}
        assert b"AcDb" not in data
        assert b"\n 42\n" not in data
        data.decode("ascii")

    def test_every_outline_is_there_with_chords_within_a_micrometre(
        self, handmade: Result, entities: list[Any]
    ) -> None:
        """Outer outlines counter-clockwise, holes clockwise, every vertex on the model's arc."""
        for name, shapes in layers_of(handmade).items():
            found = [e for e in entities if e.dxftype() == "POLYLINE" and e.dxf.layer == name]
            if name == "reference":
                continue
            wanted = []
            for shape in shapes:
                if shape.role != "drill" and not as_circle(shape.outline):
                    wanted.append(turned(shape.outline, -1 if shape.role == "cutout" else 1))
                    wanted += [turned(hole, -1) for hole in shape.holes]
            assert len(found) == len(wanted)
            assert all(e.is_closed for e in found)
            for entity, ring in zip(found, wanted, strict=True):
                drawn = shapely.Polygon([(v.dxf.location.x, v.dxf.location.y) for v in entity.vertices])
                model = shapely.Polygon([(x / 1e6, y / 1e6) for x, y in ring.chords(5)])
                assert drawn.hausdorff_distance(model) < 1e-3
                assert shapely.is_ccw(drawn.exterior) == shapely.is_ccw(model.exterior)

    def test_drills_and_lands_are_circles(self, handmade: Result, entities: list[Any]) -> None:
        """As polygons they have no middle that a drilling machine or a designer finds."""
        found = Counter(
            (e.dxf.layer, round(e.dxf.center.x * 1e6), round(e.dxf.center.y * 1e6), round(e.dxf.radius * 2e6))
            for e in entities
            if e.dxftype() == "CIRCLE"
        )
        wanted = Counter(("drill_plated", v.x, v.y, v.drill) for v in handmade.artwork.vias)
        wanted += Counter(("drill_nonplated", h.x, h.y, h.diameter) for h in handmade.artwork.holes)
        wanted["copper_top", 1_000_000, 1_000_000, 600_000] += 1
        assert found == wanted

    def test_reference_square_measures_ten_millimetres(self, entities: list[Any]) -> None:
        """R12 has no unit: this square is all that tells the scale."""
        (square,) = (e for e in entities if e.dxftype() == "POLYLINE" and e.dxf.layer == "reference")
        corners = [(v.dxf.location.x, v.dxf.location.y) for v in square.vertices]
        assert shapely.Polygon(corners).equals(shapely.box(-15, -15, -5, -5))
        assert reference_square() == Ring.box(-15_000_000, -15_000_000, -5_000_000, -5_000_000)
        assert "10.000 mm" in {e.dxf.text for e in entities if e.dxftype() == "TEXT"}

    def test_a_cross_marks_the_origin(self, entities: list[Any]) -> None:
        """Without it the files of two layers are aligned by eye."""
        lines = [e for e in entities if e.dxftype() == "LINE"]
        assert len(lines) == 2
        assert all(e.dxf.start + e.dxf.end == (0, 0, 0) for e in lines)

    def test_keep_outs_are_the_courtyards(self, handmade: Result, entities: list[Any]) -> None:
        """Parts of other circuits must not be placed over these."""
        found = [e for e in entities if e.dxf.layer == KEEPOUT]
        assert len(found) == len(handmade.placement.parts)

    def test_texts_are_there(self, handmade: Result, entities: list[Any]) -> None:
        """Ports and lines are known by their names."""
        found = Counter((e.dxf.layer, e.dxf.text) for e in entities if e.dxftype() == "TEXT")
        assert found == Counter((t.layer, t.text) for t in labels_of(handmade)) + Counter(
            [("reference", "10.000 mm")]
        )


class TestShapeTable:
    def test_lines_say_what_may_be_changed(self) -> None:
        """A width given in the circuit file is kept; one that follows from an impedance may be adjusted."""
        found = {row["Shape"]: row for row in rows(write_shape_table(coupled_board(), JOB))}
        assert found["left"]["May be changed"] == ADJUST
        assert found["right"]["May be changed"] == KEEP
        assert found["right"]["Width (mm)"] == "1.100000"
        assert found["pair:a"]["Net"] == "m"
        assert found["pair:a"]["Conductor"] == FIRST
        assert found["pair:b"]["Conductor"] == SECOND

    def test_supplies_may_be_wider(self, driver: Result) -> None:
        """A supply has no impedance to keep, and a current to carry."""
        found = {row["Shape"]: row for row in rows(write_shape_table(driver, JOB))}
        assert "not narrower" in found["drain_supply"]["May be changed"]
        assert found["drain_feed"]["May be changed"] == KEEP

    def test_all_copper_is_listed(self, driver: Result) -> None:
        """A piece that is not in the table is one that nobody dares to touch, or does."""
        table = rows(write_shape_table(driver, JOB))
        kinds = Counter(row["Kind"] for row in table)
        roles = Counter(shape.role for shape in driver.artwork.shapes if shape.layer.startswith("copper"))
        assert kinds["line"] == len(driver.placement.lines)
        assert kinds["pad"] == roles["pad"]
        grouped = {row["Shape"] for row in table if row["Kind"] in ("pour", "plane", "land", "ground")}
        assert f"land ({roles['land']} pieces)" in grouped
        assert f"pour ({roles['pour']} pieces)" in grouped
        assert "plane (1 piece)" in grouped


class TestLayerTable:
    def test_numbers_and_counts_are_the_files(self, driver: Result) -> None:
        """A wrong number makes a mask of the wrong layer."""
        table = rows(write_layer_table(driver, JOB))
        assert {r["Layer"]: (int(r["GDS layer"]), int(r["GDS datatype"])) for r in table} == dict(LAYERS)
        shapes = layers_of(driver)
        assert all(int(row["Shapes"]) == len(shapes[row["Layer"]]) for row in table)
        assert all(row["Tone"] and row["Meaning"] for row in table)


class TestConductors:
    def test_lines_join_their_nets(self, driver: Result) -> None:
        """The drain line of four sections is one conductor; a resistor or capacitor parts conductors."""
        nets = copper_nets(driver.circuit.file, tuple(driver.circuit.nets))
        assert {net for net, name in nets.items() if name == nets["d"]} == {
            "vd",
            "d",
            "f",
            "s",
            "d_out",
            "d_bank",
        }
        assert nets["c_in"] != nets["d_in"]
        assert nets["b_in"] != nets["g_r"]
        assert nets["gnd"] == "gnd"

    def test_a_line_to_ground_joins_its_net_to_ground(self) -> None:
        """A shorted stub is a short for direct current, and must be told so to a tester."""
        file = coupled_board().circuit.file
        line = file.lines["left"].model_copy(update={"nets": ("m", "gnd")})
        shorted = file.model_copy(update={"lines": {**file.lines, "left": line}})
        assert copper_nets(shorted, ("m", "k", SECOND, "gnd"))["m"] == "gnd"

    def test_each_strip_of_a_pair_joins_its_own_ends(self) -> None:
        """The first two nets are one strip, the last two the other; crossed, a short would be a coupler."""
        file = coupled_board().circuit.file
        pair = file.coupled["pair"].model_copy(update={"nets": ("p", "q", "r", "s")})
        both = file.model_copy(update={"coupled": {"pair": pair}})
        nets = copper_nets(both, ("p", "q", "r", "s", "m", "k", FIRST, SECOND))
        assert (nets["p"], nets["q"], nets["r"], nets["s"]) == ("p", "p", "r", "r")

    def test_a_net_that_is_none(self) -> None:
        """Shapes without a net, or with a name of their own, keep it."""
        assert copper_net({"a": "b"}, None) is None
        assert copper_net({"a": "b"}, "a") == "b"
        assert copper_net({"a": "b"}, "pour") == "pour"


def test_equal_results_give_equal_bytes(remake: Callable[[], Result], handmade: Result) -> None:
    """Handles, dates or set orders would change the files."""
    for write in (write_dxf_r12, write_shape_table, write_layer_table):
        assert write(remake(), JOB) == write(handmade, JOB)
