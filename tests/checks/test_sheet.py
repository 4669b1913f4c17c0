"""The solved sheets against closed forms, and what they find that widths alone do not."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
import shapely

from layoutgen.artwork import Artwork
from layoutgen.checks import Finding, current_map
from layoutgen.checks.sheet import cuts, mesh_of, sheet_resistance, solve
from layoutgen.checks.sheet.solve import loads_on
from tests.checks.boards import Sheet, box, near, only, polygon

MM = 1e6
OHM_PER_SQUARE = 1.0 / (58e6 * 35e-6)


def line(*points: tuple[float, float]) -> shapely.LineString:
    """Return an electrode through points [mm]."""
    return shapely.LineString([(x * MM, y * MM) for x, y in points])


def area(*points: tuple[float, float]) -> shapely.Polygon:
    """Return a sheet [mm]."""
    return shapely.Polygon([(x * MM, y * MM) for x, y in points])


@pytest.mark.parametrize("length", [0.5, 3.0, 40.0])
def test_uniform_strip(length: float) -> None:
    """Catches a wrong scale: a strip has as many squares as it is times as long as wide, within 0.1 %."""
    strip = area((0, 0), (length, 0), (length, 0.7), (0, 0.7))
    squares = sheet_resistance(strip, line((0, 0), (0, 0.7)), line((length, 0), (length, 0.7)))
    assert squares == pytest.approx(length / 0.7, rel=1e-3)


def corner(fineness: float) -> float:
    """Return the squares of a right-angle corner between arms three squares long."""
    sheet = area((0, 0), (4, 0), (4, 4), (3, 4), (3, 1), (0, 1))
    ends = line((0, 0), (0, 1)), line((3, 4), (4, 4))
    return sheet_resistance(sheet, *ends, fineness=fineness) - 6.0


CORNER = 1.0 - 2.0 * math.log(2.0) / math.pi
"""Squares of a right-angle corner by conformal mapping: 0.5587."""


def test_right_angle_corner() -> None:
    """Catches triangles too coarse at an inner corner, with the mesh the rules use, or that stay off it."""
    assert corner(1.0) == pytest.approx(CORNER, rel=0.005)
    assert corner(2.0) == pytest.approx(CORNER, rel=0.001)
    assert abs(corner(3.0) - CORNER) < abs(corner(1.0) - CORNER)


@pytest.mark.parametrize(("half", "near_", "far"), [(0.3, 2.0, 8.0), (0.6, 0.5, 5.0)])
def test_taper(half: float, near_: float, far: float) -> None:
    """Catches a taper judged by one of its ends: a sector has ln(r2 / r1) / angle squares, within 0.05 %."""
    turns = np.linspace(-half, half, 161)
    inner = [(near_ * math.cos(t), near_ * math.sin(t)) for t in turns]
    outer = [(far * math.cos(t), far * math.sin(t)) for t in turns]
    squares = sheet_resistance(area(*inner, *outer[::-1]), line(*inner), line(*outer), reach=400.0)
    assert squares == pytest.approx(math.log(far / near_) / (2.0 * half), rel=5e-4)


@pytest.mark.parametrize("apart", [1.5, 3.0])
def test_disc_to_disc(apart: float) -> None:
    """Catches spreading left out: two discs on a wide sheet, acosh(d / 2r) / pi squares, within 0.2 %."""
    discs = [shapely.Point(x * MM, 0.0).buffer(0.3 * MM, quad_segs=32) for x in (-apart / 2.0, apart / 2.0)]
    sheet = shapely.Point(0.0, 0.0).buffer(60.0 * MM, quad_segs=64).difference(shapely.union_all(discs))
    squares = sheet_resistance(sheet, discs[0].boundary, discs[1].boundary, reach=400.0)
    assert squares == pytest.approx(math.acosh(apart / 0.6) / math.pi, rel=2e-3)


@pytest.mark.parametrize("seed", range(12))
def test_meshes_cover_their_outlines(seed: int) -> None:
    """Catches triangles over empty board, copper left out, or a chain of edges that leaves the outline."""
    rng = np.random.default_rng(seed)
    turns = np.sort(rng.uniform(0.0, 2.0 * math.pi, 14))
    radii = rng.uniform(0.5, 3.0, 14)
    blob = area(*zip(radii * np.cos(turns), radii * np.sin(turns), strict=True)).buffer(0.0)
    blob = max(shapely.get_parts(blob), key=lambda part: part.area)
    hole = blob.representative_point().buffer(0.02 * MM, quad_segs=4)
    sheet = blob.difference(hole)
    mesh = mesh_of(sheet)
    assert mesh is not None
    assert (mesh.areas > 0.0).all()
    assert float(mesh.areas.sum()) == pytest.approx(sheet.area, rel=1e-6)
    middles = shapely.points(mesh.centres)
    assert shapely.distance(sheet, middles).max() < 500.0


def test_current_is_kept_at_every_cut() -> None:
    """Catches current lost between terminals, or cuts that join branches that are not one."""
    tee = area((0, 0), (9, 0), (9, 1), (5, 1), (5, 6), (4, 6), (4, 1), (0, 1))
    mesh = mesh_of(tee)
    assert mesh is not None
    ends = (area((0, 0), (0.5, 0), (0.5, 1), (0, 1)), area((8.5, 0), (9, 0), (9, 1), (8.5, 1)))
    top = area((4, 5.5), (5, 5.5), (5, 6), (4, 6))
    loads = loads_on(mesh, ends[0], 3.0) + loads_on(mesh, ends[1], -2.0) + loads_on(mesh, top, -1.0)
    for cut in cuts(solve(mesh, loads), 0.0):
        x, y = cut.x / MM, cut.y / MM
        if 1.0 < x < 3.0 and y < 1.0:
            assert cut.current == pytest.approx(3.0, rel=1e-9)
        elif 6.0 < x < 8.0:
            assert cut.current == pytest.approx(2.0, rel=1e-9)
        elif 2.0 < y < 5.0:
            assert cut.current == pytest.approx(1.0, rel=1e-9)


# -- on boards: R1 draws 0.28 A through lv from port pv


def feed(rules: dict[str, object], **changes: object) -> Sheet:
    """Return line lv, 0.5 mm wide, from its port to the pads of R1."""
    sheet = Sheet(rules)
    sheet.line("lv", [(2, 5), (20, 5)], 0.5, draw=not changes.pop("own_copper", False))
    sheet.port("pv", 2, 5, 0.0, 0.5)
    sheet.part("R1", {"1": ("w", 20.5, 5, 1, 1), "2": ("gnd", 24, 5, 1, 1)})
    return sheet


def artwork_of(sheet: Sheet) -> Artwork:
    return sheet.artwork()


def test_voltage_drop_of_a_feed() -> None:
    """Catches a drop by the schematic's length, or by another sheet resistance: 18 mm of 0.5 mm."""
    (sheet,) = current_map(artwork_of(feed({}))).solved
    squares = (20.0 - 2.0) / 0.5
    assert sheet.drop == pytest.approx(0.28 * OHM_PER_SQUARE * squares, rel=0.03)
    assert sheet.power == pytest.approx(0.28 * sheet.drop, rel=0.03)
    assert sheet.largest == pytest.approx(0.28, rel=1e-3)


HALVED = polygon(
    (2, 4.75), (20.2, 4.75), (20.2, 5.25), (11.2, 5.25), (11.2, 5.0), (11, 5.0), (11, 5.25), (2, 5.25)
)


def test_neck_of_half_the_width() -> None:
    """Catches a neck that widths alone pass: half of a 0.5 mm feed for 0.2 mm carries twice the density."""
    limit = {"current": {"max_density": "25 A/mm^2"}, "copper": {"min_width": "0.125 mm"}}
    assert feed(limit).found("current.max_density") == []
    sheet = feed(limit, own_copper=True)
    sheet.copper(HALVED, "v", "line", "lv")
    assert sheet.found("copper.min_width") == []
    finding = only(sheet.found("current.max_density"))
    assert near(finding, 11.1, 4.875, 0.15)
    assert finding.measured == pytest.approx(0.28 / (0.25 * 0.035), rel=0.03)
    (solved,) = current_map(artwork_of(sheet)).solved
    densest = max(cuts(solved.flow, 0.0), key=lambda cut: cut.density)
    assert densest.length / MM == pytest.approx(0.25, rel=0.02)
    assert densest.current == pytest.approx(0.28, rel=0.02)


def on_a_plate(limit: dict[str, object], side: float) -> list[Finding]:
    """Return what is found where the feed's whole current leaves through a small pad amid wide copper."""
    sheet = Sheet({"current": limit})
    sheet.line("lv", [(2, 10), (14, 10)], 6.0)
    sheet.port("pv", 2, 10, 0.0, 6.0)
    sheet.part("R1", {"1": ("w", 11, 10, side, side), "2": ("gnd", 24, 10, 1, 1)})
    return [f for f in sheet.check().findings if f.rule.startswith("current.")]


def test_crowding_about_a_small_pad() -> None:
    """Catches current that crowds about a pad in copper as wide as one likes: no edge is near it."""
    assert on_a_plate({"max_density": "25 A/mm^2"}, 0.6) == []
    finding = only(on_a_plate({"max_density": "25 A/mm^2"}, 0.06))
    assert finding.items == ("R1",)
    assert near(finding, 11, 10, 0.06)
    assert 25.0 < (finding.measured or 0.0) < 0.28 / (0.06 * 0.035)
    assert only(on_a_plate({"temperature_rise": "0.5 K"}, 0.06)).rule == "current.temperature_rise"


def test_a_net_in_pieces_is_listed() -> None:
    """Catches a cut feed whose flow cannot be solved read as passed."""
    sheet = feed({"current": {"max_density": "25 A/mm^2"}}, own_copper=True)
    sheet.copper(polygon((2, 4.75), (8, 4.75), (8, 5.25), (2, 5.25)), "v", "line", "lv")
    assert "in pieces" in sheet.unchecked()["current crowding"]


# -- an end of a pair's strip on gnd: R1 draws 0.28 A from port pv, and it returns through the strip


def returning(nets: list[str], length: float, rules: dict[str, object]) -> Sheet:
    """Return R1 from the supply to a strip 0.5 mm wide that ends on two vias beside its own end on gnd.

    Strips head east from (5, 5) and (5, 5.8); the net of the strip is w, the other strip's nets are a and c.
    """
    pair = {"nets": nets, "width": "0.5 mm", "gap": "0.3 mm", "angle": "30 deg"}
    parts = {"R1": {"nets": ["v", "w"]}, "C2": None, "C3": None}
    sheet = Sheet(rules, {"lines": {"lv": None, "la": None}, "coupled": {"cp": pair}, "parts": parts})
    sheet.pair("cp", 5.0, 5.0 + length, 5.0, 0.5, 0.3)
    y, out = (5.8, 1.0) if nets.index("w") > 1 else (5.0, -1.0)
    live, end = (5.0, 5.0 + length) if nets.index("w") % 2 == 0 else (5.0 + length, 5.0)
    sheet.port("pv", live - 0.25, 12, 0.0, 0.5)
    sheet.part("R1", {"1": ("v", live, 12, 0.5, 0.5), "2": ("w", live, y, 0.5, 0.5)})
    for away in (0.6, 1.4):
        sheet.via(end, y + out * away, "line:cp")
    low, high = sorted((y - 0.25 * out, y + 1.7 * out))
    sheet.copper(box(end - 0.3, low, end + 0.3, high), role="ground", element="cp")
    return sheet


ENDS = {
    "first strip, far end": ["w", "gnd", "a", "c"],
    "first strip, near end": ["gnd", "w", "a", "c"],
    "second strip, far end": ["a", "c", "w", "gnd"],
    "second strip, near end": ["a", "c", "gnd", "w"],
}


@pytest.mark.parametrize("nets", ENDS.values(), ids=ENDS)
def test_a_strip_that_ends_on_gnd_is_solved(nets: list[str]) -> None:
    """Catches a strip's current that finds no way into gnd, turned about or in the wrong strip.

    5 mm more of it are 10 squares more, whatever the ends are: R I times 10, within 0.5 %.
    """
    solved = []
    for length in (8.0, 13.0):
        maps = current_map(returning(nets, length, {}).artwork())
        assert maps.skipped == ()
        (sheet,) = [one for one in maps.solved if one.net == "w"]
        assert sorted(t.item for t in sheet.terminals) == ["R1", "cp", "cp"]
        assert sum(t.current for t in sheet.terminals) == pytest.approx(0.0, abs=1e-12)
        solved.append(sheet)
    current = solved[0].largest
    assert current == pytest.approx(0.28, rel=1e-2)
    assert solved[1].drop - solved[0].drop == pytest.approx(current * OHM_PER_SQUARE * 10.0, rel=5e-3)
    assert solved[1].power - solved[0].power == pytest.approx(current**2 * OHM_PER_SQUARE * 10.0, rel=5e-3)


@pytest.mark.parametrize("nets", ENDS.values(), ids=ENDS)
@pytest.mark.parametrize(("limit", "faults"), [(0.1401, 0), (0.139, 2)])
def test_vias_at_the_end_of_a_strip(nets: list[str], limit: float, faults: int) -> None:
    """Catches the vias of a strip's end on gnd left out, or given all of its current: half of 0.28 A each."""
    sheet = returning(nets, 8.0, {"vias": {"max_current": f"{limit} A"}})
    found = sheet.found("vias.max_current")
    assert [f.measured for f in found] == pytest.approx([0.14] * faults, rel=1e-2)
    assert {item for f in found for item in f.items} == ({"via:0", "via:1", "cp"} if faults else set())


def test_barrels_at_the_end_of_a_strip() -> None:
    """Catches barrels of a strip's end on gnd that no rule on current looks at: 0.14 A in pi t (d - t)."""
    density = 0.14 / (math.pi * 0.02 * (0.3 - 0.02))
    for limit, faults in ((density * 1.01, 0), (density * 0.97, 2)):
        sheet = returning(ENDS["first strip, far end"], 8.0, {"current": {"max_density": f"{limit} A/mm^2"}})
        assert len([f for f in sheet.found("current.max_density") if "via" in f.items[0]]) == faults


def test_each_strip_has_the_vias_that_it_ends_at() -> None:
    """Catches the current of one strip led through the vias of the other one beside it."""
    nets = ["w", "gnd", "w2", "gnd"]
    pair = {"nets": nets, "width": "0.5 mm", "gap": "0.3 mm", "angle": "30 deg"}
    parts = {
        "R1": {"nets": ["v", "w"]},
        "R2": {"kind": "resistor", "nets": ["v", "w2"], "value": "50 ohm", "case": "1206"},
        "C2": None,
        "C3": None,
    }
    circuit = {"lines": {"lv": None}, "coupled": {"cp": pair}, "parts": parts}
    sheet = Sheet({"vias": {"max_current": "0.1 A"}}, circuit)
    sheet.pair("cp", 5.0, 13.0, 5.0, 0.5, 0.3)
    for y in (4.4, 6.4, 3.6):
        sheet.via(13.0, y, "line:cp")
    found = {f.items[0]: f.measured for f in sheet.found("vias.max_current")}
    assert found == pytest.approx({"via:0": 0.14, "via:1": 0.56, "via:2": 0.14}, rel=2e-2)


def test_a_neck_before_a_strips_vias() -> None:
    """Catches the copper between a strip's end on gnd and its vias left out of the solved sheet."""
    limit = {"current": {"max_density": "30 A/mm^2"}}
    assert returning(ENDS["first strip, far end"], 8.0, limit).found("current.max_density") == []
    sheet = returning(ENDS["first strip, far end"], 8.0, limit)
    thin = box(12.95, 3.3, 13.05, 5.25)
    sheet.shapes[-1] = replace(sheet.shapes[-1], outline=thin)
    found = [f for f in sheet.found("current.max_density") if "cp" in f.items and "via:0" not in f.items]
    assert found
    assert found[0].measured == pytest.approx(0.28 / (0.1 * 0.035), rel=0.05)
    assert near(found[0], 13.0, 4.72, 0.1)
