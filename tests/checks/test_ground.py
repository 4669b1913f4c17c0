"""Rules on ground: the pour's distance, vias and heat, plane under lines, plane at a flange."""

from __future__ import annotations

import math

import pytest

from layoutgen.checks.drawn import board_of
from layoutgen.checks.rules.ground_vias import barrel_thermal_resistance
from layoutgen.geometry import Ring
from tests.checks.boards import Sheet, box, near, only, polygon


@pytest.mark.parametrize(("gap", "faults"), [(1.0, 0), (0.998, 1)])
def test_pour_beside_a_line(gap: float, faults: int) -> None:
    """Catches pour passed nearer than set, or found at the distance."""
    sheet = Sheet()
    sheet.line("la", [(4, 5), (14, 5)], 1.0, gap=1.0)
    sheet.copper(box(6, 5.5 + gap, 12, 10))
    found = sheet.found("ground.gap")
    assert len(found) == faults
    if found:
        assert set(found[0].items) == {"la", "pour"}
        assert found[0].measured == pytest.approx(gap)
        assert near(found[0], 9, 5.5 + gap / 2, 3.01)


def test_each_line_has_its_own_distance() -> None:
    """Catches one distance used for all lines."""
    sheet = Sheet()
    sheet.line("la", [(4, 5), (14, 5)], 1.0, gap=0.3)
    sheet.line("lv", [(4, 9), (14, 9)], 1.0, gap=1.5)
    sheet.copper(box(6, 5.8, 12, 7.5))
    assert set(only(sheet.found("ground.gap")).items) == {"lv", "pour"}


def test_pour_inside_part_outlines_is_left_out() -> None:
    """Catches the pour that a ground pad merges into found within the part's outline."""
    sheet = Sheet()
    sheet.line("la", [(4, 5), (14, 5)], 1.0, gap=1.0)
    sheet.copper(box(8, 5.7, 10, 9))
    assert len(sheet.found("ground.gap")) == 1
    sheet.part("C1", {"1": ("c", 9, 5, 1, 1), "2": ("gnd", 9, 6.5, 1, 1)}, outline=box(7.9, 4, 10.1, 6.5))
    assert sheet.found("ground.gap") == []


def test_last_gap_before_ground_is_left_out() -> None:
    """Catches the pour that a shorted stub ends in found, or the stub's whole length left out with it."""
    sheet = Sheet()
    sheet.line("lg", [(10, 15), (10, 5)], 1.0, gap=1.0)
    sheet.copper(polygon((4, 2), (16, 2), (16, 5), (4, 5)))
    assert sheet.found("ground.gap") == []
    sheet.copper(box(11.2, 8, 14, 12))
    assert only(sheet.found("ground.gap")).measured == pytest.approx(0.7)


def test_lands_and_ground_strips_are_no_pour() -> None:
    """Catches vias of a ground pad, or the copper that joins them to it, taken for pour."""
    sheet = Sheet()
    sheet.line("la", [(4, 5), (14, 5)], 1.0, gap=1.0)
    sheet.copper(box(15, 15, 18, 18))
    sheet.copper(box(8, 6, 9, 7), role="ground", element="R1")
    sheet.via(8.5, 6.5, "part:R1")
    assert sheet.found("ground.gap") == []


@pytest.mark.parametrize(("x", "faults"), [(12.31, []), (12.2, ["la"]), (20.0, [])])
def test_pour_follows_a_coplanar_line_up_to_its_end(x: float, faults: list[str]) -> None:
    """Catches pour beside a coplanar line found at its neighbour's end, or any pour there passed."""
    coplanar = {"kind": "grounded_coplanar", "gap": "0.3 mm", "width": "1 mm", "length": "16 mm"}
    sheet = Sheet(circuit={"lines": {"lw": {"nets": ["c", "d"], **coplanar}}})
    sheet.line("la", [(2, 5), (12, 5)], 1.0, gap=1.0)
    sheet.line("lw", [(12, 5), (28, 5)], 1.0, gap=0.3)
    sheet.copper(box(x, 5.8, 27, 10))
    assert [f.items[0] for f in sheet.found("ground.gap")] == faults
    assert [f.items for f in sheet.noted("ground.gap")] == [("la",)]


def test_no_pour_is_listed() -> None:
    """Catches a rule that could not look read as passed."""
    assert Sheet().unchecked()["ground.gap"] == "there is no pour"


# -- ground.vias


def slug(count: int, thermal: float) -> Sheet:
    """Return an exposed pad with so many vias under it."""
    sheet = Sheet({"vias": {"per_ground_pad": 2}})
    pads = {"1": ("w", 10, 10, 1, 1), "2": ("gnd", 14, 10, 4, 4)}
    sheet.part("R1", pads, ground={"2": "vias"}, thermal={"2": thermal})
    for k in range(count):
        sheet.via(12.5 + k, 10, "part:R1")
    return sheet


ONE_BARREL = 0.5e-3 / (385.0 * 3.141592653589793 * 20e-6 * 280e-6)


@pytest.mark.parametrize(("target", "faults"), [(ONE_BARREL / 4 * 1.0001, 0), (ONE_BARREL / 4 * 0.999, 1)])
def test_thermal_resistance(target: float, faults: int) -> None:
    """Catches too little copper under an exposed pad passed: four barrels in parallel."""
    found = slug(4, target).found("ground.vias")
    assert len(found) == faults
    assert all(f.measured == pytest.approx(ONE_BARREL / 4, rel=1e-9) for f in found)


def test_published_thermal_via() -> None:
    """Catches the formula: 0.3 mm, 25 um, 1.6 mm is quoted as 192 K/W on two public pages."""
    assert barrel_thermal_resistance(1.6e-3, 0.3e-3, 25e-6) == pytest.approx(192.0, abs=0.5)


def test_exposed_pad_without_vias() -> None:
    """Catches a pad without any via passed for want of a figure."""
    assert any("none are there" in f.text for f in slug(0, 10.0).found("ground.vias"))


def test_ground_pad_without_a_via() -> None:
    """Catches a ground pad without any via passed where the rule file asks for no number."""
    sheet = Sheet()
    sheet.part("R1", {"1": ("w", 10, 10, 1, 1), "2": ("gnd", 13, 10, 1, 1)})
    assert only(sheet.found("ground.vias")).items == ("R1",)


# -- ground.under_line


def over_plane(*holes: Ring) -> Sheet:
    """Return line la over a plane with clearances."""
    sheet = Sheet({"copper": {"min_edge_distance": "0.5 mm"}})
    sheet.plane(*holes)
    sheet.line("la", [(4, 5), (14, 5)], 1.0)
    return sheet


def test_plane_under_a_line() -> None:
    """Catches a whole plane found."""
    assert over_plane().found("ground.under_line") == []


def test_slot_across_a_line() -> None:
    """Catches a slot of ten micrometres under a line passed."""
    finding = only(over_plane(Ring(box(8, 3, 8.01, 7).points[::-1])).found("ground.under_line"))
    assert finding.items == ("la",)
    assert finding.layer == "copper_bottom"
    assert finding.measured == pytest.approx(0.01, rel=0.01)
    assert near(finding, 8.005, 5, 0.51)


def test_slot_beside_a_line() -> None:
    """Catches a slot that does not pass under the line found."""
    assert over_plane(Ring(box(8, 6, 9, 7).points[::-1])).found("ground.under_line") == []


@pytest.mark.parametrize(("lap", "faults"), [(0.0, 0), (0.001, 1)])
def test_slot_up_to_a_lines_edge(lap: float, faults: int) -> None:
    """Catches a slot found that only comes up to the line, or passed a micrometre under it."""
    found = over_plane(Ring(box(8, 5.5 - lap, 8.5, 7).points[::-1])).found("ground.under_line")
    assert len(found) == faults


def test_copper_of_another_net_is_no_ground() -> None:
    """Catches a bridge of another net in a slot taken for the plane; one of gnd closes the slot."""
    for net, faults in (("b", 1), (None, 1), ("gnd", 0)):
        sheet = over_plane(Ring(box(8, 3, 9, 7).points[::-1]))
        sheet.copper(box(8, 3, 9, 7), net, "strip", "jumper", layer="copper_bottom")
        assert len(sheet.found("ground.under_line")) == faults


def test_plane_may_end_at_the_edge() -> None:
    """Catches a line to the profile found where the plane has to keep its own distance."""
    sheet = Sheet({"copper": {"min_edge_distance": "0.5 mm"}})
    sheet.plane(inset=0.5)
    sheet.line("la", [(0, 5), (14, 5)], 1.0)
    assert sheet.found("ground.under_line") == []


def test_dc_lines_need_no_plane() -> None:
    """Catches a supply line judged like an RF line."""
    sheet = Sheet()
    sheet.plane(Ring(box(8, 3, 9, 7).points[::-1]))
    sheet.line("lv", [(4, 5), (14, 5)], 1.0, rf=False)
    assert sheet.found("ground.under_line") == []


# -- ground.flange


@pytest.mark.parametrize(("away", "faults"), [(0.3, 0), (0.302, 1)])
def test_plane_at_a_flange(away: float, faults: int) -> None:
    """Catches a plane passed that ends too far from the slot under a pad, or found at the limit."""
    sheet = Sheet({"copper": {"min_edge_distance": "0.3 mm"}})
    pads = {"gate": ("a", 8.8, 10.0, 2.0, 2.0), "source": ("gnd", 12.0, 10.0, 0.0, 0.0)}
    sheet.part("C1", pads, headings={"gate": 180.0}, cutout=box(10, 5, 14, 15), ground={"source": "flange"})
    sheet.plane(Ring(box(10 - away, 4.7, 14.3, 15.3).points[::-1]))
    found = sheet.found("ground.flange")
    assert len(found) == faults
    if found:
        assert found[0].items == ("C1",)
        assert found[0].measured == pytest.approx(away)
        assert near(found[0], 10, 10, 1.01)


@pytest.mark.parametrize("y", [9.04, 10.0, 10.53])
def test_a_slot_in_the_plane_at_a_flange(y: float) -> None:
    """Catches a slot that lies between samples: 0.15 mm wide, at any place under a pad 2 mm wide."""
    sheet = Sheet({"copper": {"min_edge_distance": "0.3 mm"}})
    pads = {"gate": ("a", 8.8, 10.0, 2.0, 2.0), "source": ("gnd", 12.0, 10.0, 0.0, 0.0)}
    sheet.part("C1", pads, headings={"gate": 180.0}, cutout=box(10, 5, 14, 15), ground={"source": "flange"})
    low, high = y - 0.075, y + 0.075
    hole = polygon(
        (9.7, 4.7), (9.7, low), (8, low), (8, high), (9.7, high), (9.7, 15.3), (14.3, 15.3), (14.3, 4.7)
    )
    sheet.plane(hole)
    finding = only(sheet.found("ground.flange"))
    assert finding.measured == pytest.approx(math.hypot(0.3, 0.075), abs=5e-4)
    assert near(finding, 10, y, 0.01)


def test_other_copper_at_a_flange_is_no_ground() -> None:
    """Catches bottom copper of another net taken for the plane that must come up to the slot."""
    sheet = Sheet({"copper": {"min_edge_distance": "0.3 mm"}})
    pads = {"gate": ("a", 8.8, 10.0, 2.0, 2.0), "source": ("gnd", 12.0, 10.0, 0.0, 0.0)}
    sheet.part("C1", pads, headings={"gate": 180.0}, cutout=box(10, 5, 14, 15), ground={"source": "flange"})
    sheet.plane(Ring(box(8, 4.7, 14.3, 15.3).points[::-1]))
    sheet.copper(box(8.5, 6, 9.7, 14), "b", "strip", "jumper", layer="copper_bottom")
    assert only(sheet.found("ground.flange")).measured == pytest.approx(2.0)


def test_no_plane_at_a_flange() -> None:
    """Catches a missing plane passed for want of a distance."""
    sheet = Sheet({"copper": {"min_edge_distance": "0.3 mm"}})
    pads = {"gate": ("a", 8.8, 10.0, 2.0, 2.0), "source": ("gnd", 12.0, 10.0, 0.0, 0.0)}
    sheet.part("C1", pads, headings={"gate": 180.0}, cutout=box(10, 5, 14, 15), ground={"source": "flange"})
    assert len(sheet.found("ground.flange")) == 1


# -- undercut: the artwork is drawn wider than the finished copper


def buried_end(pour: float, undercut: float = 0.03) -> Sheet:
    """Return line la, drawn as a stroke wider by the undercut, ended on the middle of a narrow open line.

    The finished pour below comes to a height [mm]; la asks for 1 mm from its end at 10 mm, lh for 0.5 mm.
    """
    sheet = Sheet(
        {"copper": {"undercut": f"{undercut} mm"}},
        {"lines": {"lh": {"nets": ["c"], "impedance": "70 ohm", "angle": "60 deg"}}},
    )
    sheet.line("la", [(15, 15), (15, 10)], 1.1, gap=1.0, draw=False)
    sheet.line("lh", [(15, 10), (22, 10)], 0.4, gap=0.5, draw=False)
    u = undercut
    sheet.copper(box(14.45 - u, 10 - u, 15.55 + u, 15 + u), "a", "line", "la")
    sheet.copper(box(14.8 - u, 9.8 - u, 22 + u, 10.2 + u), "c", "line", "lh")
    sheet.copper(box(4, 4, 22, pour + u))
    return sheet


@pytest.mark.parametrize(("pour", "faults"), [(9.0, 0), (9.002, 1)])
def test_end_buried_in_other_copper_is_where_it_was_finished(pour: float, faults: int) -> None:
    """Catches an end taken as longer by the undercut where other copper hides it: a false ``ground.gap``."""
    found = buried_end(pour).found("ground.gap")
    assert [f.items for f in found] == [("la", "pour")] * faults
    if found:
        assert found[0].measured == pytest.approx(0.998, abs=1e-5)


def test_pieces_drawn_side_by_side_stay_joined_after_etching() -> None:
    """Catches copper parted along the seam of two pieces that touch, or a seam taken for a narrow place."""
    sheet = Sheet({"copper": {"undercut": "30 um", "min_gap": "0.125 mm", "min_width": "0.125 mm"}})
    sheet.copper(box(4, 4, 10, 10))
    sheet.copper(box(10, 4, 16, 10))
    (merged,) = board_of(sheet.artwork()).top.merged
    assert merged.bounds == pytest.approx((4.03e6, 4.03e6, 15.97e6, 9.97e6))
    assert merged.area == pytest.approx(11.94e6 * 5.94e6, rel=1e-9)
    assert [f.rule for f in sheet.check().findings if f.rule.startswith("copper.")] == []


def test_slit_that_etching_never_opens_is_a_short() -> None:
    """Catches nets whose drawn copper runs together judged by what each would be alone."""
    sheet = Sheet({"copper": {"undercut": "30 um"}})
    sheet.line("la", [(5, 5), (9, 5)], 1.0, draw=False)
    sheet.line("lb", [(9.05, 5), (14, 5)], 1.0, draw=False)
    sheet.copper(box(4.97, 4.47, 9.03, 5.53), "a", "line", "la")
    sheet.copper(box(9.02, 4.47, 14.03, 5.53), "d", "line", "lb")
    assert len(sheet.found("connectivity.short")) == 1
