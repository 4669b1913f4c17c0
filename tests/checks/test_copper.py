"""Rules on copper: width, gap, edge distance, corner angle, island area."""

from __future__ import annotations

import math

import numpy as np
import pytest

from layoutgen.geometry import Ring
from tests.checks.boards import Sheet, box, near, nm, only, polygon

WIDTH = {"copper": {"min_width": "0.2 mm"}}
GAP = {"copper": {"min_gap": "0.2 mm"}}
EDGE = {"copper": {"min_edge_distance": "0.3 mm"}}
ANGLE = {"copper": {"min_corner_angle": "85 deg"}}
ISLAND = {"copper": {"min_island_area": "0.5 mm^2"}}


def rotated(points: list[tuple[float, float]], degrees: float, x: float, y: float) -> Ring:
    """Return an outline turned about the origin and moved, on whole nanometres."""
    c, s = math.cos(math.radians(degrees)), math.sin(math.radians(degrees))
    return polygon(*((x + c * u - s * v, y + s * u + c * v) for u, v in points))


# -- copper.min_width


@pytest.mark.parametrize(("width", "faults"), [(0.201, 0), (0.2, 0), (0.199, 1)])
def test_width_of_a_line(width: float, faults: int) -> None:
    """Catches a line passed below the limit, or found at the limit exactly."""
    sheet = Sheet(WIDTH)
    sheet.line("la", [(5.0, 5.0), (12.0, 5.0)], width)
    found = sheet.found("copper.min_width")
    assert len(found) == faults
    if found:
        assert found[0].items == ("la",)
        assert found[0].measured == pytest.approx(width, abs=1e-6)
        assert found[0].limit == pytest.approx(0.2)
        assert near(found[0], 8.5, 5.0, 0.01)


@pytest.mark.parametrize("degrees", [0.0, 17.0, 45.0, 90.0, 133.7])
@pytest.mark.parametrize(("width", "faults"), [(0.2, 0), (0.199, 1)])
def test_width_at_any_angle(degrees: float, width: float, faults: int) -> None:
    """Catches a tolerance too tight for outlines rounded to nanometres, or too loose for one micrometre."""
    sheet = Sheet(WIDTH)
    bar = [(-3.0, -width / 2.0), (3.0, -width / 2.0), (3.0, width / 2.0), (-3.0, width / 2.0)]
    sheet.copper(rotated(bar, degrees, 10.0, 10.0))
    assert len(sheet.found("copper.min_width")) == faults


def test_neck_in_the_middle_of_a_wide_line() -> None:
    """Catches a width taken from the centre-line instead of from the copper: a notch leaves a neck."""
    sheet = Sheet(WIDTH)
    outline = polygon((4, 4), (12, 4), (12, 5), (8.2, 5), (8.2, 4.15), (8.0, 4.15), (8.0, 5), (4, 5))
    sheet.copper(outline, "a", "line", "la")
    finding = only(sheet.found("copper.min_width"))
    assert finding.measured == pytest.approx(0.15)
    assert near(finding, 8.1, 4.075)


def test_neck_between_two_reflex_corners() -> None:
    """Catches a search that looks only straight across edges: the neck runs from corner to corner."""
    sheet = Sheet(WIDTH)
    sheet.copper(box(4.0, 4.0, 6.1, 6.1), "a", "line", "la")
    sheet.copper(box(6.0, 6.0, 8.0, 8.0), "a", "line", "la")
    finding = only(sheet.found("copper.min_width"))
    assert finding.measured == pytest.approx(0.1 * math.sqrt(2.0), abs=1e-5)
    assert near(finding, 6.05, 6.05)


@pytest.mark.parametrize(("lap", "measured"), [(0.0, 0.0), (0.00001, 0.0), (0.15, None), (0.1, 0.1414)])
def test_two_pieces_that_meet_at_their_corners(lap: float, measured: float | None) -> None:
    """Catches copper joined by a mere point passed: no edges face each other there. 0.2 mm and more pass."""
    sheet = Sheet(WIDTH)
    sheet.copper(box(4.0, 4.0, 6.0 + lap, 6.0 + lap), "a", "line", "la")
    sheet.copper(box(6.0, 6.0, 8.0, 8.0), "a", "line", "la")
    found = sheet.found("copper.min_width")
    assert [f.measured for f in found] == pytest.approx([] if measured is None else [measured], abs=1e-4)
    assert all(near(f, 6.0 + lap / 2.0, 6.0 + lap / 2.0) for f in found)


def test_corner_on_an_edge() -> None:
    """Catches a pinch overlooked where a corner meets the middle of an edge."""
    sheet = Sheet(WIDTH)
    sheet.copper(box(4.0, 4.0, 8.0, 6.0), "a", "line", "la")
    sheet.copper(polygon((6.0, 6.0), (7.0, 7.0), (6.0, 8.0), (5.0, 7.0)), "a", "line", "la")
    finding = only(sheet.found("copper.min_width"))
    assert finding.measured == 0.0
    assert near(finding, 6.0, 6.0)


@pytest.mark.parametrize("tip", [8.0, 8.1])
def test_voids_that_meet_at_a_point(tip: float) -> None:
    """Catches the copper between two voids left out that touch, or nearly touch, at their tips."""
    sheet = Sheet(WIDTH)
    one = polygon((7.0, 7.0), (6.0, 6.0), (7.0, 5.5), (8.0, 6.5))
    other = polygon((tip, 6.5), (10.0, 6.0), (10.0, 7.0))
    sheet.copper(box(5.0, 5.0, 12.0, 8.0), holes=(one, other))
    finding = only(sheet.found("copper.min_width"))
    assert finding.measured == pytest.approx(tip - 8.0, abs=1e-6)
    assert near(finding, (8.0 + tip) / 2.0, 6.5)


def test_two_nets_that_meet_in_a_point_are_a_short() -> None:
    """Catches a short told a second time as narrow copper."""
    sheet = Sheet(WIDTH)
    sheet.copper(box(4.0, 4.0, 6.0, 6.0), "a", "line", "la")
    sheet.copper(box(6.0, 6.0, 8.0, 8.0), "b", "line", "lb")
    assert sheet.found("copper.min_width") == []
    assert len(sheet.found("connectivity.short")) == 1


def test_taper_is_judged_at_its_narrow_end() -> None:
    """Catches tapers left out: the narrowest place of a slow taper lies at its thin end."""
    sheet = Sheet(WIDTH)
    taper = polygon((4, 4), (8, 4.4), (12, 4.4), (12, 4.59), (8, 4.59), (4, 5.5))
    sheet.copper(taper, "a", "line", "la")
    finding = only(sheet.found("copper.min_width"))
    assert finding.measured == pytest.approx(0.19, abs=1e-5)


@pytest.mark.parametrize(("angle", "faults"), [(32.0, 1), (35.0, 0), (60.0, 0), (90.0, 0)])
def test_only_sharp_wedges_are_narrow(angle: float, faults: int) -> None:
    """Catches a corner taken for narrow copper, and a wedge below 33 degrees taken for a corner."""
    half = math.radians(angle / 2.0)
    sheet = Sheet(WIDTH)
    tip = [
        (0.0, 0.0),
        (4.0 * math.cos(half), -4.0 * math.sin(half)),
        (4.0 * math.cos(half), 4.0 * math.sin(half)),
    ]
    sheet.copper(rotated(tip, 11.0, 10.0, 10.0))
    found = sheet.found("copper.min_width")
    assert len(found) == faults
    if found:  # where both sides are 1.75 limits from the tip
        assert found[0].measured == pytest.approx(0.7 * math.sin(half), abs=1e-4)


def test_overlapping_pieces_of_one_line_are_no_neck() -> None:
    """Catches widths measured piece by piece: two thin strips side by side make one wide line."""
    sheet = Sheet(WIDTH)
    sheet.copper(box(4.0, 4.0, 10.0, 4.15), "a", "line", "la")
    sheet.copper(box(4.0, 4.1, 10.0, 4.5), "a", "line", "la")
    assert sheet.found("copper.min_width") == []


def test_width_between_outline_and_hole() -> None:
    """Catches copper between an outer outline and a hole in it left out."""
    sheet = Sheet(WIDTH)
    sheet.copper(box(4, 4, 10, 10), holes=(Ring(box(4.15, 5, 9, 9).points[::-1]),))
    finding = only(sheet.found("copper.min_width"))
    assert finding.measured == pytest.approx(0.15)
    assert near(finding, 4.075, 7.0)


def test_width_on_the_bottom() -> None:
    """Catches the bottom layer left out."""
    sheet = Sheet(WIDTH)
    sheet.copper(box(4, 4, 10, 4.1), layer="copper_bottom", role="plane")
    assert only(sheet.found("copper.min_width")).layer == "copper_bottom"


@pytest.mark.parametrize(("undercut", "faults"), [("0 um", 0), ("10 um", 0), ("11 um", 1)])
def test_width_is_that_of_finished_copper(undercut: str, faults: int) -> None:
    """Catches artwork judged instead of what etching leaves: 0.22 mm drawn, 10 um lost on each edge."""
    sheet = Sheet({"copper": {"min_width": "0.2 mm", "undercut": undercut}})
    sheet.copper(box(4, 4, 10, 4.22), "a", "line", "la")
    sheet.copper(box(9.9, 3, 12, 6), "a", "pad", "C1")
    assert len(sheet.found("copper.min_width")) == faults


# -- copper.min_gap


@pytest.mark.parametrize(("gap", "faults"), [(0.201, 0), (0.2, 0), (0.199, 1)])
def test_gap_between_nets(gap: float, faults: int) -> None:
    """Catches a gap between nets passed below the limit or found at it."""
    sheet = Sheet(GAP)
    sheet.copper(box(4, 4, 8, 6), "a", "line", "la")
    sheet.copper(box(8 + gap, 5, 10, 7), "b", "line", "lb")
    found = sheet.found("copper.min_gap")
    assert len(found) == faults
    if found:
        assert set(found[0].items) == {"la", "lb"}
        assert set(found[0].nets) == {"a", "b"}
        assert found[0].measured == pytest.approx(gap, abs=1e-6)
        assert near(found[0], 8 + gap / 2, 5.5, 0.51)


@pytest.mark.parametrize(("reach", "faults"), [(0.2, 0), (0.199, 1)])
def test_gap_from_corner_to_corner(reach: float, faults: int) -> None:
    """Catches gaps between nets measured between facing edges only."""
    sheet = Sheet(GAP)
    d = reach / math.sqrt(2.0)
    sheet.copper(box(4, 4, 6, 6), "a", "line", "la")
    sheet.copper(box(6 + d, 6 + d, 8, 8), "b", "line", "lb")
    assert len(sheet.found("copper.min_gap")) == faults


@pytest.mark.parametrize(("gap", "faults"), [(0.2, 0), (0.199, 1)])
def test_gap_to_a_round_land(gap: float, faults: int) -> None:
    """Catches circles judged as coarse chords: those are up to a micrometre inside."""
    sheet = Sheet(GAP)
    c = math.cos(math.radians(11.0))
    s = math.sin(math.radians(11.0))
    sheet.via(10, 10)
    sheet.via(10 + (0.6 + gap) * c, 10 + (0.6 + gap) * s, net="a")
    assert len(sheet.found("copper.min_gap")) == faults


def test_nets_joined_by_a_line_are_one() -> None:
    """Catches copper of nets a and c, which line la joins, taken for two nets where it meets."""
    sheet = Sheet(GAP)
    sheet.copper(box(4, 4, 8, 6), "a", "pad", "x")
    sheet.copper(box(7, 4, 10, 6), "c", "pad", "y")
    assert sheet.found("copper.min_gap") == []
    assert sheet.found("connectivity.short") == []


@pytest.mark.parametrize(("slit", "faults"), [(0.2, 0), (0.199, 1)])
def test_slit_within_one_net(slit: float, faults: int) -> None:
    """Catches slits in one net's copper left out, or found at the limit."""
    sheet = Sheet(GAP)
    u = polygon((4, 4), (8, 4), (8, 8), (6 + slit, 8), (6 + slit, 5), (6, 5), (6, 8), (4, 8))
    sheet.copper(u)
    found = sheet.found("copper.min_gap")
    assert len(found) == faults
    if found:
        assert found[0].items == ("pour",)
        assert near(found[0], 6 + slit / 2, 6.5, 1.6)


def test_slit_shorter_than_a_corner_is_none() -> None:
    """Catches a shallow dent taken for a slit: its sides lie less than 3.5 limits apart."""
    sheet = Sheet(GAP)
    dent = polygon((4, 4), (8, 4), (8, 8), (6.1, 8), (6.1, 7.75), (6, 7.75), (6, 8), (4, 8))
    sheet.copper(dent)
    assert sheet.found("copper.min_gap") == []


def test_slit_between_two_pieces_of_one_net() -> None:
    """Catches slits between separate outlines of one net passed over as corners."""
    sheet = Sheet(GAP)
    sheet.copper(box(4, 4, 8, 8))
    sheet.copper(box(8.15, 4, 12, 8))
    finding = only(sheet.found("copper.min_gap"))
    assert finding.measured == pytest.approx(0.15)
    assert near(finding, 8.075, 6.0)


def test_gap_is_that_of_finished_copper() -> None:
    """Catches a gap judged before etching: 0.19 mm drawn is 0.21 mm when done."""
    sheet = Sheet({"copper": {"min_gap": "0.2 mm", "undercut": "10 um"}})
    sheet.copper(box(4, 4, 8, 6), "a", "line", "la")
    sheet.copper(box(8.19, 4, 10, 6), "b", "line", "lb")
    assert sheet.found("copper.min_gap") == []


def test_worst_of_several_places_stands_for_all() -> None:
    """Catches one finding a place instead of one a pair of items, and the wrong place kept."""
    sheet = Sheet(GAP)
    sheet.copper(box(4, 4, 8, 6), "a", "line", "la")
    sheet.copper(box(8.15, 4, 9, 4.5), "b", "line", "lb")
    sheet.copper(box(8.10, 5.5, 9, 6), "b", "line", "lb")
    finding = only(sheet.found("copper.min_gap"))
    assert finding.measured == pytest.approx(0.10)
    assert "worst of 2 places" in finding.text


def test_copper_that_meets_is_no_gap() -> None:
    """Catches a short reported as a gap of zero beside connectivity.short."""
    sheet = Sheet(GAP)
    sheet.copper(box(4, 4, 8, 6), "a", "line", "la")
    sheet.copper(box(7.9, 4, 10, 6), "b", "line", "lb")
    assert sheet.found("copper.min_gap") == []
    assert len(sheet.found("connectivity.short")) == 1


# -- copper.min_edge_distance


@pytest.mark.parametrize(("inset", "faults"), [(0.301, 0), (0.3, 0), (0.299, 1)])
def test_edge_distance(inset: float, faults: int) -> None:
    """Catches copper passed too near the profile, or found at the limit."""
    sheet = Sheet(EDGE)
    sheet.copper(box(inset, 5, 8, 6), "a", "line", "la")
    found = sheet.found("copper.min_edge_distance")
    assert len(found) == faults
    if found:
        assert set(found[0].items) == {"la", "board"}
        assert found[0].measured == pytest.approx(inset)
        assert near(found[0], inset / 2, 5.5, 0.51)


def test_copper_across_and_outside_the_profile() -> None:
    """Catches copper outside the board taken for copper far from its edge."""
    sheet = Sheet(EDGE)
    sheet.copper(box(-1, 5, 8, 6), "a", "line", "la")
    sheet.copper(box(-9, 5, -5, 6), "b", "line", "lb")
    measured = {f.items[0]: f.measured for f in sheet.found("copper.min_edge_distance")}
    assert measured["la"] == pytest.approx(0.0)
    assert measured["lb"] == pytest.approx(-5.0)


@pytest.mark.parametrize(("inset", "faults"), [(0.3, 0), (0.299, 1)])
def test_edge_distance_of_the_plane(inset: float, faults: int) -> None:
    """Catches the bottom left out."""
    sheet = Sheet(EDGE)
    sheet.plane(inset=inset)
    found = sheet.found("copper.min_edge_distance")
    assert [f.layer for f in found] == ["copper_bottom"] * faults


def test_port_to_the_edge_is_exempt_within_its_width_only() -> None:
    """Catches a to_edge port found, its note left out, or other copper along the edge exempted with it."""
    sheet = Sheet(EDGE)
    sheet.port("pa", 0, 10, 0.0, 1.1, to_edge=True)
    sheet.line("la", [(0, 10), (10, 10)], 1.1)
    assert sheet.found("copper.min_edge_distance") == []
    assert only(sheet.noted("copper.min_edge_distance")).items == ("pa",)
    sheet.copper(box(0.1, 10, 2, 14), "a", "line", "la")
    assert only(sheet.found("copper.min_edge_distance")).measured == pytest.approx(0.1)


def test_pads_at_their_own_cutout_are_exempt() -> None:
    """Catches the pad found, the note left out, or a wider line over the pad exempted too."""
    sheet = Sheet(EDGE)
    pads = {"gate": ("a", 8.9, 10.0, 2.0, 2.0), "source": ("gnd", 12.0, 10.0, 0.0, 0.0)}
    sheet.part("C1", pads, cutout=box(10, 5, 14, 15))
    assert sheet.found("copper.min_edge_distance") == []
    assert only(sheet.noted("copper.min_edge_distance")).items == ("C1",)
    sheet.copper(box(8, 8.5, 9.8, 11.5), "a", "line", "la")
    finding = only(sheet.found("copper.min_edge_distance"))
    assert set(finding.items) == {"la", "C1"}
    assert finding.measured == pytest.approx(0.2)


def test_line_cut_back_beside_its_pad_passes() -> None:
    """Catches a line that keeps the distance beside the exempt pad found for touching that pad."""
    sheet = Sheet(EDGE)
    pads = {"gate": ("a", 8.9, 10.0, 2.0, 2.0), "source": ("gnd", 12.0, 10.0, 0.0, 0.0)}
    sheet.part("C1", pads, cutout=box(10, 5, 14, 15))
    sheet.copper(box(8, 8.5, 9.7, 11.5), "a", "line", "la")
    assert sheet.found("copper.min_edge_distance") == []


def test_foreign_pad_at_a_cutout_is_found() -> None:
    """Catches an exemption that covers every pad instead of the cut-out's own."""
    sheet = Sheet(EDGE)
    sheet.part("C1", {"source": ("gnd", 12.0, 10.0, 0.0, 0.0)}, cutout=box(10, 5, 14, 15))
    sheet.part("C2", {"1": ("w", 9.4, 10.0, 1.0, 1.0), "2": ("gnd", 7.0, 10.0, 1.0, 1.0)})
    assert only(sheet.found("copper.min_edge_distance")).measured == pytest.approx(0.1)


# -- copper.min_corner_angle


@pytest.mark.parametrize(("opening", "faults"), [(90.0, 0), (85.0, 0), (84.5, 1), (40.0, 1)])
@pytest.mark.parametrize("degrees", [0.0, 33.0])
def test_notch(opening: float, faults: int, degrees: float) -> None:
    """Catches a notch passed below the angle, or found at it."""
    half = math.radians(opening / 2.0)
    mouth = 2.0 * math.tan(half)
    outline = [(-5, -3), (5, -3), (5, 2), (mouth, 2), (0, 0), (-mouth, 2), (-5, 2)]
    sheet = Sheet(ANGLE)
    sheet.copper(rotated(outline, degrees, 10.0, 8.0))
    found = sheet.found("copper.min_corner_angle")
    assert len(found) == faults
    if found:
        assert found[0].measured == pytest.approx(opening, abs=0.01)
        assert near(found[0], 10.0, 8.0)


@pytest.mark.parametrize(("flat", "faults"), [(0.0005, 1), (0.005, 1), (0.006, 0)])
@pytest.mark.parametrize("start", range(7))
def test_notch_with_its_tip_cut_off(flat: float, faults: int, start: int) -> None:
    """Catches a sharp notch hidden by a tip cut off a little, wherever the outline begins."""
    half = math.radians(25.0)
    mouth = flat / 2.0 + 2.0 * math.tan(half)
    outline = [(-5, -3), (5, -3), (5, 2), (mouth, 2), (flat / 2, 0), (-flat / 2, 0), (-mouth, 2), (-5, 2)]
    sheet = Sheet(ANGLE)
    sheet.copper(rotated([*outline[start:], *outline[:start]], 20.0, 10.0, 8.0))
    found = sheet.found("copper.min_corner_angle")
    assert len(found) == faults
    assert all(f.measured == pytest.approx(50.0, abs=0.1) and near(f, 10.0, 8.0, 0.003) for f in found)


@pytest.mark.parametrize(("opening", "faults"), [(85.0, 0), (84.5, 1)])
def test_notch_with_a_rounded_tip(opening: float, faults: int) -> None:
    """Catches turns of a small rounding judged one by one, or added up wrongly: exact at the limit."""
    half = math.radians(opening / 2.0)
    turns = np.linspace(-math.pi + half, -half, 9)
    radius = 0.9 * 0.005 / (math.pi - 2.0 * half)
    tip = [(-radius * math.cos(t), radius * math.sin(t)) for t in turns]
    flank = (tip[0][0] + 2.0 * math.sin(half), tip[0][1] + 2.0 * math.cos(half))
    outline = [(-5, -3), (5, -3), (5, flank[1]), flank, *tip, (-flank[0], flank[1]), (-5, flank[1])]
    sheet = Sheet(ANGLE)
    sheet.copper(rotated(outline, 0.0, 10.0, 8.0))
    found = sheet.found("copper.min_corner_angle")
    assert len(found) == faults
    assert all(f.measured == pytest.approx(opening, abs=0.1) for f in found)


def test_chamfers_and_jogs_are_no_notches() -> None:
    """Catches two obtuse turns of a chamfer, or turns either way, added up to a sharp corner."""
    sheet = Sheet(ANGLE)
    sheet.copper(polygon((4, 4), (12, 4), (12, 6), (8.004, 6), (8, 6.004), (8, 8), (4, 8)))
    sheet.copper(
        polygon((14, 4), (22, 4), (22, 6), (18, 6), (18, 6.002), (17.998, 6.002), (17.998, 8), (14, 8))
    )
    assert sheet.found("copper.min_corner_angle") == []


def test_sharp_point_of_copper_is_no_notch() -> None:
    """Catches copper that sticks out taken for an inside corner."""
    sheet = Sheet(ANGLE)
    sheet.copper(polygon((4, 4), (12, 6), (4, 8)))
    assert sheet.found("copper.min_corner_angle") == []


def test_notch_where_two_pieces_meet() -> None:
    """Catches corners judged piece by piece: a branch at 45 degrees makes an acute notch with its line."""
    sheet = Sheet(ANGLE)
    sheet.copper(box(4, 4, 14, 5), "a", "line", "la")
    sheet.copper(polygon((7, 4.5), (8, 4.5), (11, 7.5), (10, 7.5)), "a", "line", "la")
    finding = only(sheet.found("copper.min_corner_angle"))
    assert finding.measured == pytest.approx(45.0, abs=0.1)
    assert near(finding, 8.5, 5.0)


def test_notches_of_a_radial_stub_are_noted() -> None:
    """Catches the two notches of a radial stub found as errors, or passed without a note."""
    circuit = {"lines": {"rs": {"nets": ["a"], "shape": "radial", "sector": "60 deg", "radius": "4 mm"}}}
    sheet = Sheet(ANGLE, circuit)
    sheet.line("la", [(4, 5), (14, 5)], 1.0)
    sheet.radial("rs", (9, 5), 90.0, 60.0, 4.0)
    assert sheet.found("copper.min_corner_angle") == []
    assert set(only(sheet.noted("copper.min_corner_angle")).items) == {"la", "rs"}


def test_a_step_of_a_few_nanometres_is_no_notch() -> None:
    """Catches rounding between overlapping pieces reported as sharp notches."""
    sheet = Sheet(ANGLE)
    for k in range(6):
        x = 4 + 1.0 * k
        sheet.copper(polygon((x, 4), (x + 1.2, 4), (x + 1.2, 5 + 2e-6 * (k % 3)), (x, 5 + 1e-6 * (k % 2))))
    assert sheet.found("copper.min_corner_angle") == []


# -- copper.min_island_area


@pytest.mark.parametrize(("side", "faults"), [(0.5, 0), (0.499, 1)])
def test_island(side: float, faults: int) -> None:
    """Catches a scrap of pour passed below the area, or found at it."""
    sheet = Sheet(ISLAND)
    sheet.copper(box(4, 4, 5, 4 + side))
    found = sheet.found("copper.min_island_area")
    assert len(found) == faults
    if found:
        assert found[0].measured == pytest.approx(side)
        assert near(found[0], 4.5, 4.25, 0.3)


def test_copper_of_the_circuit_is_no_island() -> None:
    """Catches the pads of a small part taken for scraps."""
    sheet = Sheet(ISLAND)
    sheet.part("C1", {"1": ("c", 5, 5, 0.4, 0.5), "2": ("d", 6, 5, 0.4, 0.5)})
    assert sheet.found("copper.min_island_area") == []


@pytest.mark.parametrize(("plated", "faults"), [(True, 0), (False, 1)])
def test_copper_held_by_a_barrel_is_no_island(plated: bool, faults: int) -> None:
    """Catches lands of a foreign drawing's vias found as scraps, or a scrap passed for any hole in it."""
    sheet = Sheet(ISLAND)
    sheet.copper(box(10, 8, 10.6, 8.6))
    sheet.hole(10.3, 8.3, 0.3, plated=plated)
    assert len(sheet.found("copper.min_island_area")) == faults


def test_two_scraps_that_touch_are_one_island() -> None:
    """Catches areas taken piece by piece."""
    sheet = Sheet(ISLAND)
    sheet.copper(box(4, 4, 4.5, 4.6))
    sheet.copper(box(4.4, 4, 5, 4.6))
    assert sheet.found("copper.min_island_area") == []


def test_everything_is_on_whole_nanometres() -> None:
    """Catches places that are no integers: writers need whole nanometres."""
    sheet = Sheet({"copper": {"min_gap": "0.2 mm", "min_width": "0.2 mm"}})
    sheet.copper(box(4, 4, 8, 4.1), "a", "line", "la")
    sheet.copper(box(8.0333333, 4, 10, 6), "b", "line", "lb")
    for finding in sheet.check().findings:
        if finding.at is not None:
            assert all(isinstance(value, int) for value in finding.at)
    assert nm(0.1) == 100_000
