"""Rules on holes and vias."""

from __future__ import annotations

import math
from typing import Any

import pytest

from layoutgen.geometry import Ring
from tests.checks.boards import Sheet, box, near, nm, only

Rules = dict[str, Any]


def holes(**limits: Any) -> Rules:
    """Return rules on holes."""
    return {"holes": limits}


@pytest.mark.parametrize(("diameter", "faults"), [(0.25, 0), (0.249, 1)])
def test_min_diameter(diameter: float, faults: int) -> None:
    """Catches a hole passed below the smallest diameter, or found at it; vias and holes alike."""
    sheet = Sheet(holes(min_diameter="0.25 mm"))
    sheet.via(10, 10, drill=diameter)
    sheet.hole(15, 10, diameter)
    found = sheet.found("holes.min_diameter")
    assert [f.items for f in found] == [("via:0",), ("hole:0",)][: 2 * faults]
    assert all(f.measured == pytest.approx(diameter) for f in found)


def test_drills_list() -> None:
    """Catches a hole with no drill passed, or one with a drill found."""
    sheet = Sheet()
    sheet.via(10, 10)
    sheet.via(13, 10, drill=0.35)
    sheet.hole(16, 10, 1.0)
    sheet.hole(20, 10, 1.9)
    found = {f.items[0]: f.limit for f in sheet.found("holes.drills")}
    assert found == {"via:1": pytest.approx(0.3), "hole:1": pytest.approx(2.0)}


@pytest.mark.parametrize(("ratio", "faults"), [(1.9, 0), (1.9 - 1e-4, 1)])
def test_aspect_ratio(ratio: float, faults: int) -> None:
    """Catches copper thickness left out: (0.5 + 2 x 0.035) / 0.3 = 1.9."""
    sheet = Sheet(holes(max_aspect_ratio=ratio))
    sheet.via(10, 10)
    found = sheet.found("holes.max_aspect_ratio")
    assert len(found) == faults
    assert all(f.measured == pytest.approx(1.9) for f in found)


@pytest.mark.parametrize(("land", "faults"), [(0.6, 0), (0.598, 1)])
def test_annular_ring(land: float, faults: int) -> None:
    """Catches a ring passed below the limit, or found at it because a circle was judged as chords."""
    sheet = Sheet(holes(min_annular_ring="0.15 mm"))
    sheet.via(10, 10, land=land)
    found = sheet.found("holes.min_annular_ring")
    assert len(found) == faults
    assert all(
        f.items == ("via:0",) and f.measured == pytest.approx(land / 2 - 0.15, abs=1e-5) for f in found
    )


def test_ring_of_a_land_pushed_aside() -> None:
    """Catches rings computed from sizes instead of from the copper drawn."""
    sheet = Sheet(holes(min_annular_ring="0.125 mm"))
    sheet.via(10, 10, draw=False)
    sheet.copper(Ring.circle(nm(10.05), nm(10), nm(0.3)), role="land")
    finding = only(sheet.found("holes.min_annular_ring"))
    assert finding.measured == pytest.approx(0.1, abs=1e-5)
    assert near(finding, 9.8, 10.0)


def test_ring_in_the_pour() -> None:
    """Catches a via in the pour found though its land lies inside it, or one at its edge passed."""
    sheet = Sheet(holes(min_annular_ring="0.125 mm"))
    sheet.copper(box(8, 8, 12, 12))
    sheet.via(10, 10, draw=False)
    sheet.via(8.2, 10, draw=False)
    assert only(sheet.found("holes.min_annular_ring")).items == ("via:1",)


def test_plated_hole_without_copper() -> None:
    """Catches a missing land passed for want of an outline to measure to."""
    sheet = Sheet(holes(min_annular_ring="0.125 mm"))
    sheet.copper(box(1, 1, 2, 2))
    sheet.hole(10, 10, 1.0, plated=True)
    assert only(sheet.found("holes.min_annular_ring")).measured == pytest.approx(-0.5)


def test_ring_on_the_bottom() -> None:
    """Catches the bottom left out: the plane's clearance leaves a hole without a ring."""
    sheet = Sheet(holes(min_annular_ring="0.125 mm"))
    sheet.via(10, 10)
    sheet.plane(Ring(box(9, 9, 11, 11).points[::-1]))
    assert only(sheet.found("holes.min_annular_ring")).layer == "copper_bottom"


@pytest.mark.parametrize(("web", "faults"), [(0.25, 0), (0.249, 1)])
def test_web(web: float, faults: int) -> None:
    """Catches a web passed below the limit, or found at it; wall to wall of unequal holes."""
    sheet = Sheet(holes(min_web="0.25 mm"))
    sheet.hole(10, 10, 2.0)
    sheet.via(10 + (1.15 + web) * 0.6, 10 + (1.15 + web) * 0.8)
    found = sheet.found("holes.min_web")
    assert len(found) == faults
    if found:
        assert set(found[0].items) == {"via:0", "hole:0"}
        assert found[0].measured == pytest.approx(web, abs=2e-6)
        assert near(found[0], 10 + (1.0 + web / 2) * 0.6, 10 + (1.0 + web / 2) * 0.8)


def test_doubled_via() -> None:
    """Catches two holes at one place, which have no wall between them."""
    sheet = Sheet({"holes": {"min_web": "0.25 mm"}, "vias": {"min_pitch": "0.8 mm"}})
    sheet.via(10, 10)
    sheet.via(10, 10)
    assert only(sheet.found("holes.min_web")).measured == pytest.approx(-0.3)
    assert only(sheet.found("vias.min_pitch")).measured == pytest.approx(0.0)


@pytest.mark.parametrize(("gap", "faults"), [(0.2, 0), (0.199, 1)])
@pytest.mark.parametrize("layer", ["copper_top", "copper_bottom"])
def test_copper_distance_of_a_via(gap: float, faults: int, layer: str) -> None:
    """Catches another net's copper passed too near a barrel, or found at the limit; on both layers."""
    sheet = Sheet(holes(min_copper_distance="0.2 mm"))
    sheet.via(10, 10)
    sheet.copper(box(10.15 + gap, 9, 12, 11), "a", "line", "la", layer=layer)
    found = sheet.found("holes.min_copper_distance")
    assert len(found) == faults
    if found:
        assert set(found[0].items) == {"via:0", "la"}
        assert found[0].measured == pytest.approx(gap)
        assert near(found[0], 10.15 + gap / 2, 10)


def test_own_copper_may_be_near() -> None:
    """Catches a via's own net found."""
    sheet = Sheet(holes(min_copper_distance="0.2 mm"))
    sheet.via(10, 10)
    sheet.copper(box(10.2, 9, 12, 11))
    assert sheet.found("holes.min_copper_distance") == []


@pytest.mark.parametrize(("gap", "faults"), [(0.2, 0), (0.199, 1)])
def test_copper_distance_of_an_unplated_hole(gap: float, faults: int) -> None:
    """Catches the round clearance of an unplated hole judged as chords, or ground copper taken as its own."""
    sheet = Sheet(holes(min_copper_distance="0.2 mm"))
    sheet.hole(10, 10, 2.0)
    clearance = Ring.circle(nm(10), nm(10), nm(1.0 + gap))
    sheet.plane(Ring(clearance.points, tuple(-b for b in clearance.bulges)))
    assert len(sheet.found("holes.min_copper_distance")) == faults


def test_copper_under_an_unplated_hole() -> None:
    """Catches copper all around the hole passed because the axis lies inside it."""
    sheet = Sheet(holes(min_copper_distance="0.2 mm"))
    sheet.hole(10, 10, 2.0)
    sheet.plane()
    assert only(sheet.found("holes.min_copper_distance")).measured == pytest.approx(0.0, abs=1e-5)


@pytest.mark.parametrize(("edge", "faults"), [(0.5, 0), (0.499, 1)])
def test_edge_distance(edge: float, faults: int) -> None:
    """Catches a hole passed too near the profile or a cut-out, or found at the limit."""
    sheet = Sheet(holes(min_edge_distance="0.5 mm"))
    sheet.part("C1", {"source": ("gnd", 12.0, 10.0, 0.0, 0.0)}, cutout=box(10, 5, 14, 15))
    sheet.via(0.15 + edge, 10)
    sheet.hole(12, 15 + 0.5 + edge, 1.0)
    found = sheet.found("holes.min_edge_distance")
    expected = [{"via:0", "board"}, {"hole:0", "C1"}] if faults else []
    assert [set(f.items) for f in found] == expected
    assert all(f.measured == pytest.approx(edge) for f in found)


def test_hole_across_the_edge() -> None:
    """Catches a hole outside the board, or inside a cut-out, measured as if it were on the board."""
    sheet = Sheet(holes(min_edge_distance="0.5 mm"))
    sheet.part("C1", {"source": ("gnd", 12.0, 10.0, 0.0, 0.0)}, cutout=box(10, 5, 14, 15))
    sheet.hole(-2.0, 10, 1.0)
    sheet.hole(12.0, 10, 1.0)
    assert [f.measured for f in sheet.found("holes.min_edge_distance")] == pytest.approx([-2.5, -2.5])


def test_via_sizes() -> None:
    """Catches a via of another drill or land passed."""
    sheet = Sheet()
    sheet.via(10, 10)
    sheet.via(13, 10, drill=0.4)
    sheet.via(16, 10, land=0.55)
    assert only(sheet.found("vias.drill")).items == ("via:1",)
    assert only(sheet.found("vias.diameter")).items == ("via:2",)


@pytest.mark.parametrize(("pitch", "faults"), [(0.8, 0), (0.799, 1)])
def test_via_pitch(pitch: float, faults: int) -> None:
    """Catches vias passed below the pitch, or found at it; other holes are not counted."""
    sheet = Sheet({"vias": {"min_pitch": "0.8 mm"}})
    sheet.via(10, 10)
    sheet.via(10 + pitch * math.cos(1.0), 10 + pitch * math.sin(1.0))
    sheet.hole(10, 10.6, 0.3)
    found = sheet.found("vias.min_pitch")
    assert len(found) == faults
    assert all(set(f.items) == {"via:0", "via:1"} for f in found)


def grounded(count: int, **rules: Any) -> Sheet:
    """Return R1 from net w to gnd with so many vias of its own under a ground strip."""
    sheet = Sheet({"vias": rules})
    sheet.part("R1", {"1": ("w", 10, 10, 1, 1.6), "2": ("gnd", 13, 10, 1, 1.6)})
    sheet.copper(box(13, 8, 15, 12), role="ground", element="R1")
    for k in range(count):
        sheet.via(14.5, 9 + k, "part:R1")
    return sheet


@pytest.mark.parametrize(("count", "faults"), [(2, 0), (1, 1), (0, 1)])
def test_vias_per_ground_pad(count: int, faults: int) -> None:
    """Catches a removed via passed, or a pad with enough found."""
    found = grounded(count, per_ground_pad=2).found("vias.per_ground_pad")
    assert [(f.items, f.measured) for f in found] == [(("R1",), count)] * faults


def test_a_via_elsewhere_is_not_the_pads_own() -> None:
    """Catches vias counted by their label alone: one was moved off, one is the pour's."""
    sheet = grounded(1, per_ground_pad=2)
    sheet.via(20, 9, "part:R1")
    sheet.via(14.5, 11, "pour")
    assert only(sheet.found("vias.per_ground_pad")).measured == 1


def test_pads_that_meet_a_carrier_need_no_vias() -> None:
    """Catches a flange pin found for want of vias."""
    sheet = Sheet({"vias": {"per_ground_pad": 2}})
    sheet.part("R1", {"1": ("w", 10, 10, 1, 1), "2": ("gnd", 13, 10, 2, 2)}, ground={"2": "flange"})
    assert sheet.found("vias.per_ground_pad") == []


@pytest.mark.parametrize(("limit", "faults"), [("0.14 A", 0), ("0.139 A", 2)])
def test_via_current(limit: str, faults: int) -> None:
    """Catches a share computed wrongly: 28 V over 100 ohm is 0.28 A, 0.14 A in each of two vias."""
    found = grounded(2, max_current=limit).found("vias.max_current")
    assert len(found) == faults
    assert all(f.measured == pytest.approx(0.14, rel=1e-3) for f in found)


def test_current_of_a_line_to_ground() -> None:
    """Catches lines that end on gnd left out."""
    sheet = Sheet({"vias": {"max_current": "1 A"}}, {"lines": {"lg": {"current": "3 A"}}})
    sheet.line("lg", [(10, 10), (15, 10)], 1.0)
    sheet.via(15, 9.7, "line:lg")
    sheet.via(15, 10.5, "line:lg")
    assert [f.measured for f in sheet.found("vias.max_current")] == pytest.approx([1.5, 1.5])
