"""Opens, shorts and floating copper, from polygons and holes alone."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from layoutgen.geometry import Ring
from layoutgen.placement import Bend
from tests.checks.boards import Sheet, box, near, nm, only, polygon
from tests.placed import placed_line

# -- opens


def joined(cut: float = 0.0) -> Sheet:
    """Return port, line la and pad of C1 in a row, the line cut through at x = 7 by a width [mm]."""
    sheet = Sheet()
    sheet.port("pa", 0.5, 10, 0.0, 1.0)
    sheet.line("la", [(0.5, 10), (12, 10)], 1.0, draw=False)
    sheet.copper(box(0.5, 9.5, 7, 10.5), "a", "line", "la")
    sheet.copper(box(7 + cut, 9.5, 12, 10.5), "a", "line", "la")
    sheet.part("C1", {"1": ("c", 11.5, 10, 0.9, 0.9)})
    return sheet


@pytest.mark.parametrize(("cut", "faults"), [(0.0, 0), (0.01, 1)])
def test_cut_of_ten_micrometres(cut: float, faults: int) -> None:
    """Catches a cut line passed because its halves carry one name, or touching halves found."""
    found = joined(cut).found("connectivity.open")
    assert len(found) == faults
    if found:
        assert found[0].items == ("la",)
        assert found[0].measured == pytest.approx(cut)
        assert near(found[0], 7.005, 10, 0.51)


def test_nets_of_a_line_left_out() -> None:
    """Catches a line that was not drawn at all: its two nets are not joined, and its legs lie bare."""
    sheet = Sheet()
    sheet.part("C1", {"1": ("c", 11.5, 10, 0.9, 0.9)})
    sheet.part("C2", {"1": ("a", 2.5, 10, 0.9, 0.9)})
    sheet.line("la", [(2.5, 10), (11.5, 10)], 1.0, draw=False)
    found = {f.items: f.text for f in sheet.found("connectivity.open")}
    assert {frozenset(items) for items in found} == {frozenset(("C1", "C2")), frozenset(("la",))}
    assert "no copper" in found[("la",)]


def test_missing_pad_and_port() -> None:
    """Catches pads and ports without copper at their places."""
    sheet = Sheet()
    sheet.part("C1", {"1": ("c", 11.5, 10, 0.9, 0.9)}, draw=False)
    sheet.port("pa", 0.5, 10, 0.0, 1.0)
    assert {f.items for f in sheet.found("connectivity.open")} == {("C1",), ("pa",)}


@pytest.mark.parametrize(("left_out", "faults"), [(0.0005, 0), (0.0015, 1), (0.3, 1)])
def test_pad_without_all_of_its_copper(left_out: float, faults: int) -> None:
    """Catches a pad judged by its middle alone; a micrometre may be missing."""
    sheet = Sheet()
    sheet.part("C1", {"1": ("c", 11.5, 10, 0.9, 0.9)}, draw=False)
    sheet.copper(box(11.05, 9.55, 11.95 - left_out, 10.45), "c", "pad", "C1")
    found = sheet.found("connectivity.open")
    assert [f.items for f in found] == [("C1",)] * faults
    assert all(near(f, 11.95, 10, 0.46) and f.unit == "mm^2" for f in found)


def test_pad_with_a_hole_drilled_through_it() -> None:
    """Catches copper missed where the circuit itself has an unplated hole drilled."""
    sheet = Sheet()
    sheet.part("C1", {"1": ("c", 11.5, 10, 3.0, 3.0)})
    sheet.hole(11.5, 10.0, 1.0)
    assert sheet.found("connectivity.open") == []


PAIR = {"nets": ["a", "c", "b", "open"], "width": "0.5 mm", "gap": "0.3 mm", "angle": "30 deg"}


@pytest.mark.parametrize(("strip", "place"), [(0, 5.0), (1, 5.8)])
def test_strip_of_a_pair_left_out(strip: int, place: float) -> None:
    """Catches a strip that was not drawn: with an open end no net tells that it is missing."""
    sheet = Sheet(circuit={"lines": {"la": None}, "coupled": {"cp": PAIR}})
    sheet.pair("cp", 5, 15, 5, 0.5, 0.3)
    assert sheet.found("connectivity.open") == []
    del sheet.shapes[1 + strip]
    finding = only(sheet.found("connectivity.open"))
    assert finding.items == ("cp",)
    assert finding.measured == pytest.approx(10.0)
    assert near(finding, 10, place)


def test_end_of_a_strip_left_out() -> None:
    """Catches a strip that was drawn too short by two micrometres at its open end."""
    sheet = Sheet(circuit={"lines": {"la": None}, "coupled": {"cp": PAIR}})
    sheet.pair("cp", 5, 15, 5, 0.5, 0.3)
    sheet.shapes[2] = replace(sheet.shapes[2], outline=box(5, 5.55, 14.998, 6.05))
    finding = only(sheet.found("connectivity.open"))
    assert finding.items == ("cp",)
    assert near(finding, 15, 5.8)


@pytest.mark.parametrize(("inner", "outer", "faults"), [(0.3, 4.0, 0), (0.3, 3.99, 1), (None, None, 1)])
def test_radial_stub_left_out(inner: float | None, outer: float | None, faults: int) -> None:
    """Catches a radial stub that was not drawn, or to a shorter radius: nothing else hangs on it."""
    circuit = {"lines": {"rs": {"nets": ["a"], "shape": "radial", "sector": "60 deg", "radius": "4 mm"}}}
    sheet = Sheet(circuit=circuit)
    sheet.radial("rs", (9, 5), 90.0, 60.0, 4.0)
    sheet.shapes.pop()
    if outer is not None:
        turns = [math.radians(60.0 + k) for k in range(61)]
        rim = [(9 + outer * math.cos(t), 5 + outer * math.sin(t)) for t in turns]
        sheet.copper(polygon((9, 5), *rim), "a", "radial", "rs")
    found = sheet.found("connectivity.open")
    assert [f.items for f in found] == [("rs",)] * faults


def test_bends_may_be_mitred() -> None:
    """Catches a deep mitre, off the meeting point of the centre-lines, found as missing copper."""
    sheet = Sheet()
    line = placed_line("la", ("a", "c"), [(4, 5), (10, 5), (10, 12)], 1.0, (Bend(1, 90.0, 90.0),))
    sheet.line("la", [(4, 5), (10, 5), (10, 12)], 1.0, draw=False)
    sheet.lines["la"] = line
    sheet.copper(
        polygon((4, 4.5), (9.3, 4.5), (10.5, 5.7), (10.5, 12), (9.5, 12), (9.5, 5.5), (4, 5.5)),
        "a",
        "line",
        "la",
    )
    assert sheet.found("connectivity.open") == []


def test_open_end_cut_off() -> None:
    """Catches an open stub that lost its far half: no other net tells that copper is missing."""
    circuit = {"lines": {"ls": {"nets": ["a"], "impedance": "50 ohm", "angle": "20 deg"}}}
    sheet = Sheet(circuit=circuit)
    sheet.line("ls", [(5, 5), (5, 10)], 1.0, draw=False)
    sheet.copper(box(4.5, 5, 5.5, 9), "a", "line", "ls")
    assert only(sheet.found("connectivity.open")).items == ("ls",)


def test_vias_join_the_layers() -> None:
    """Catches ground pads not joined to the plane, and vias that are not followed through."""
    sheet = Sheet()
    sheet.plane()
    sheet.part("R1", {"2": ("gnd", 10, 10, 1, 1)})
    assert set(only(sheet.found("connectivity.open")).items) == {"R1", "pour"}
    sheet.via(10, 10)
    assert sheet.found("connectivity.open") == []


@pytest.mark.parametrize(("cut", "faults"), [(0.0, 0), (0.01, 1)])
def test_a_cut_in_a_ring(cut: float, faults: int) -> None:
    """Catches a cut line passed because its halves hang together the other way round a ring."""
    circuit = {"lines": {"l1": {"nets": ["a", "b"], "width": "1 mm", "length": "9 mm"}}}
    sheet = Sheet(circuit=circuit)
    sheet.copper(box(4, 4, 8, 5), "a", "line", "l1")
    sheet.copper(box(8 + cut, 4, 12, 5), "a", "line", "l1")
    sheet.copper(box(4, 4, 5, 12), "a", "line", "la")
    sheet.copper(box(4, 11, 12, 12), "c", "line", "la")
    sheet.copper(box(11, 4, 12, 12), "c", "strip", "strip-c")
    found = [f for f in sheet.found("connectivity.open") if "cut through" in f.text]
    assert [f.items for f in found] == [("l1",)] * faults
    assert all(near(f, 8.005, 4.5, 0.51) for f in found)


def test_unplated_hole_cuts_a_line() -> None:
    """Catches copper under an unplated hole taken as still there."""
    sheet = joined()
    sheet.hole(7, 10, 2.0)
    assert only(sheet.found("connectivity.open")).measured == pytest.approx(1.732, abs=0.2)


# -- shorts


def two_lines(bridge: float | None, net: str | None = None) -> Sheet:
    """Return lines la and lb side by side, 1 mm apart, with a bridge of a width [mm] at x = 8."""
    sheet = Sheet()
    sheet.copper(box(4, 4, 14, 5), "a", "line", "la")
    sheet.copper(box(4, 6, 14, 7), "b", "line", "lb")
    if bridge is not None:
        element = "la" if net == "a" else "stray"
        sheet.copper(box(8 - bridge / 2, 4.9, 8 + bridge / 2, 6.1), net, "line", element)
    return sheet


@pytest.mark.parametrize("net", ["a", None])
def test_bridge_of_twenty_micrometres(net: str | None) -> None:
    """Catches a bridge passed, named or not, and its place."""
    finding = only(two_lines(0.02, net).found("connectivity.short"))
    assert set(finding.items) == {"la", "lb"}
    assert set(finding.nets) == {"a", "b"}
    assert near(finding, 8, 6.05 if net else 5.5, 0.02)


def test_no_bridge_no_short() -> None:
    """Catches shorts invented between lines that do not meet."""
    assert two_lines(None).found("connectivity.short") == []


def test_nets_that_meet_across_an_edge() -> None:
    """Catches nets that only touch passed: touching copper is one."""
    sheet = Sheet()
    sheet.copper(box(4, 4, 8, 6), "a", "line", "la")
    sheet.copper(box(8, 4, 10, 6), "b", "line", "lb")
    assert near(only(sheet.found("connectivity.short")), 8, 5)


def test_short_through_a_via() -> None:
    """Catches a via moved into a line: its barrel joins line and plane without any land drawn."""
    sheet = Sheet()
    sheet.plane()
    sheet.copper(box(4, 4, 14, 5), "a", "line", "la")
    sheet.via(8, 4.5, draw=False)
    finding = only(sheet.found("connectivity.short"))
    assert set(finding.items) == {"la", "via:0"}
    assert near(finding, 8, 4.5)


def test_short_through_a_plated_hole_without_net() -> None:
    """Catches plated holes left out because they carry no net."""
    sheet = Sheet()
    sheet.plane()
    sheet.copper(box(4, 4, 14, 5), "a", "line", "la")
    sheet.hole(8, 4.5, 0.5, plated=True)
    assert set(only(sheet.found("connectivity.short")).nets) == {"a", "gnd"}


def shorted_stub() -> Sheet:
    """Return line lg from (10, 15) down to its via at (10, 5), pour on the right and around its end."""
    sheet = Sheet({"copper": {"min_gap": "0.1 mm"}, "holes": {"min_copper_distance": "0.2 mm"}})
    sheet.plane()
    sheet.line("lg", [(10, 15), (10, 5)], 1.0, gap=1.0)
    sheet.via(10, 5, "line:lg")
    sheet.copper(box(11.5, 2, 16, 18))
    sheet.copper(box(4, 2, 16, 5))
    return sheet


def test_line_that_ends_on_ground_is_no_short() -> None:
    """Catches the meant connection of a shorted stub found as short, gap or hole, or not noted."""
    sheet = shorted_stub()
    for rule in ("connectivity.short", "copper.min_gap", "holes.min_copper_distance", "connectivity.open"):
        assert sheet.found(rule) == []
    assert only(sheet.noted("connectivity.short")).items == ("lg",)


def test_the_same_line_touching_ground_elsewhere_is_a_short() -> None:
    """Catches a bridge from the pour to the middle of a shorted stub passed as its meant connection."""
    sheet = shorted_stub()
    sheet.copper(box(10.4, 11, 11.6, 11.02))
    finding = only(sheet.found("connectivity.short"))
    assert set(finding.items) == {"lg", "pour"}
    assert near(finding, 10.45, 11.01, 0.02)


def test_two_bridges_are_two_findings() -> None:
    """Catches all shorts of one net folded into one finding."""
    sheet = two_lines(0.02, "a")
    sheet.copper(box(4, 8, 14, 9), "v", "line", "lv")
    sheet.copper(box(10, 6.9, 10.02, 8.1), "v", "line", "lv")
    assert {frozenset(f.items) for f in sheet.found("connectivity.short")} == {
        frozenset(("la", "lb")),
        frozenset(("lb", "lv")),
    }


# -- floating copper


def test_floating_pour() -> None:
    """Catches a piece of pour without a via passed, or one with a via found."""
    sheet = Sheet()
    sheet.plane()
    sheet.copper(box(4, 4, 8, 8))
    sheet.via(6, 6)
    sheet.copper(box(12, 4, 16, 8))
    finding = only(sheet.found("connectivity.floating"))
    assert finding.items == ("pour",)
    assert near(finding, 14, 6, 2.0)


def test_floating_scrap_without_net() -> None:
    """Catches copper of no net passed."""
    sheet = Sheet()
    sheet.plane()
    sheet.copper(Ring.circle(nm(5), nm(5), nm(0.5)), None, "mark", "fiducial")
    assert only(sheet.found("connectivity.floating")).items == ("fiducial",)


def test_scrap_that_touches_a_line_does_not_float() -> None:
    """Catches unnamed copper found although it hangs on a net."""
    sheet = Sheet()
    sheet.plane()
    sheet.copper(box(4, 4, 14, 5), "a", "line", "la")
    sheet.copper(box(5, 4.9, 6, 6), None, "mark", "tab")
    assert sheet.found("connectivity.floating") == []
    assert sheet.found("connectivity.short") == []
