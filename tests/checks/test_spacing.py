"""Rules on lines that are not meant to couple, and on banks."""

from __future__ import annotations

import math
from typing import Any

import pytest

from layoutgen.formulas.coupled import coupled_pair
from tests.checks.boards import Sheet, near, only

RULES: dict[str, Any] = {"spacing": {"min_line_heights": 3.0}}
H = 0.5
PAIR = {
    "coupled": {
        "cp": {
            "nets": ["a", "c", "d", "open"],
            "even_impedance": "60 ohm",
            "odd_impedance": "40 ohm",
            "angle": "9 deg",
        }
    }
}


@pytest.mark.parametrize(("heights", "faults"), [(3.0, 0), (2.998, 1)])
def test_two_lines_side_by_side(heights: float, faults: int) -> None:
    """Catches two lines passed below three heights, or found at them."""
    sheet = Sheet(RULES)
    sheet.line("la", [(4, 5), (14, 5)], 1.0)
    sheet.line("lb", [(8, 6 + heights * H), (18, 6 + heights * H)], 1.0)
    found = sheet.found("spacing.min_line_heights")
    assert len(found) == faults
    if found:
        assert set(found[0].items) == {"la", "lb"}
        assert found[0].severity == "warning"
        assert found[0].measured == pytest.approx(heights)
        assert near(found[0], 11, 5.5 + heights * H / 2, 3.1)


def tee(width: float, turn: float = 90.0) -> Sheet:
    """Return la and lb, joined by C1's nets being one node, with lg leaving the same node at an angle."""
    sheet = Sheet(RULES)
    sheet.line("lb", [(5, 10), (15, 10)], width)
    c, s = math.cos(math.radians(turn)), math.sin(math.radians(turn))
    sheet.line("lg", [(15, 10), (15 + 9 * c, 10 + 9 * s)], width)
    return sheet


@pytest.mark.parametrize("width", [0.2, 1.1, 3.0, 5.6])
def test_lines_of_one_junction(width: float) -> None:
    """Catches the arms of a tee found for lying near each other at their common node, however wide."""
    assert tee(width).found("spacing.min_line_heights") == []


def test_lines_that_leave_a_node_and_run_on_together() -> None:
    """Catches a shared node taken as a licence to run side by side all the way."""
    assert len(tee(0.5, 172.0).found("spacing.min_line_heights")) == 1


def test_lines_joined_by_a_part() -> None:
    """Catches the two lines at a series capacitor found: they end a millimetre from each other."""
    sheet = Sheet(RULES)
    sheet.line("la", [(4, 5), (10, 5)], 1.0)
    sheet.part("C1", {"1": ("c", 9.6, 5, 0.8, 0.8), "2": ("d", 11.1, 5, 0.8, 0.8)})
    sheet.line("lb", [(10.7, 5), (18, 5)], 1.0)
    assert sheet.found("spacing.min_line_heights") == []


@pytest.mark.parametrize(("gap", "faults"), [(1.5, 0), (1.499, 1)])
def test_legs_of_one_folded_line(gap: float, faults: int) -> None:
    """Catches a fold nearer than the rule passed: legs of one line are counted."""
    sheet = Sheet(RULES)
    sheet.line("la", [(4, 5), (14, 5), (14, 5.4 + gap), (4, 5.4 + gap)], 0.4)
    found = sheet.found("spacing.min_line_heights")
    assert len(found) == faults
    assert all(f.items == ("la",) for f in found)


def test_a_jog_is_no_fold() -> None:
    """Catches a line that steps aside found for its legs being near each other at the step."""
    sheet = Sheet(RULES)
    sheet.line("la", [(4, 5), (10, 5), (10, 5.8), (16, 5.8)], 0.4)
    assert sheet.found("spacing.min_line_heights") == []


def test_strips_of_a_pair_are_meant_to_couple() -> None:
    """Catches a coupled pair found for its own two strips, or left out against other lines."""
    sheet = Sheet(RULES, PAIR)
    sheet.pair("cp", 5, 15, 5, 1.0, 0.2)
    assert sheet.found("spacing.min_line_heights") == []
    sheet.line("lv", [(5, 8), (15, 8)], 0.4)
    assert set(only(sheet.found("spacing.min_line_heights")).items) == {"cp", "lv"}


def fed_pair(turn: float, other: str = "open") -> Sheet:
    """Return a pair whose first strip ends at net d, fed there by lb at a turn [deg], the end beside open."""
    sheet = Sheet(RULES, {"coupled": {"cp": {**PAIR["coupled"]["cp"], "nets": ["a", "d", "c", other]}}})
    sheet.pair("cp", 5, 15, 5, 1.0, 0.2)
    c, s = math.cos(math.radians(turn)), math.sin(math.radians(turn))
    sheet.line("lb", [(15, 5), (15 + 9 * c, 5 + 9 * s)], 1.0)
    return sheet


@pytest.mark.parametrize("other", ["open", "gnd"])
def test_what_goes_on_from_a_pair_begins_beside_its_other_end(other: str) -> None:
    """Catches a feed found for lying a gap's width from the end of the strip that it couples to."""
    assert fed_pair(0.0, other).found("spacing.min_line_heights") == []
    assert fed_pair(-90.0, other).found("spacing.min_line_heights") == []


@pytest.mark.parametrize("other", ["open", "gnd"])
def test_a_pairs_end_is_no_licence_to_run_along_it(other: str) -> None:
    """Catches a line that leaves a pair's end and comes back along the strips passed as part of the pair."""
    sheet = fed_pair(0.0, other)
    sheet.line("lb", [(15, 5), (20, 5), (20, 7.5), (6, 7.5)], 1.0)
    finding = only([f for f in sheet.found("spacing.min_line_heights") if "cp" in f.items])
    assert finding.measured == pytest.approx(0.3 / H)


def test_two_feeds_of_one_pair() -> None:
    """Catches feeds found where they leave the two strips, or passed where they run on side by side."""
    sheet = Sheet(RULES, {"coupled": {"cp": {**PAIR["coupled"]["cp"], "nets": ["a", "open", "v", "open"]}}})
    sheet.pair("cp", 5, 15, 5, 1.0, 0.2)
    sheet.line("la", [(5, 5), (3.5, 5)], 1.0)
    sheet.line("lv", [(5, 6.2), (3.5, 6.2)], 1.0)
    assert sheet.found("spacing.min_line_heights") == []
    sheet.line("la", [(5, 5), (1, 5)], 1.0)
    sheet.line("lv", [(5, 6.2), (1, 6.2)], 1.0)
    assert set(only(sheet.found("spacing.min_line_heights")).items) == {"la", "lv"}


def test_radial_stub_against_other_lines() -> None:
    """Catches a radial stub left out, or found for lying near its host."""
    circuit = {"lines": {"rs": {"nets": ["a"], "shape": "radial", "sector": "60 deg", "radius": "4 mm"}}}
    sheet = Sheet(RULES, circuit)
    sheet.line("la", [(4, 5), (14, 5)], 1.0)
    sheet.radial("rs", (9, 5), 90.0, 60.0, 4.0)
    assert sheet.found("spacing.min_line_heights") == []
    sheet.line("lv", [(4, 10), (14, 10)], 0.4)
    assert set(only(sheet.found("spacing.min_line_heights")).items) == {"rs", "lv"}


@pytest.mark.parametrize(("margin", "faults"), [(0.05, 0), (-0.05, 1)])
def test_coupling(margin: float, faults: int) -> None:
    """Catches the coupling of two equal lines computed wrongly: k sin(beta l) at the band's upper edge."""
    pair = coupled_pair(2.0, 3.0, 3.55, 0.07)
    k = float((pair.z_even - pair.z_odd) / (pair.z_even + pair.z_odd))
    ee = float((pair.ee_even + pair.ee_odd) / 2)
    coupling = 20 * math.log10(k * math.sin(2 * math.pi * 2.3e9 * math.sqrt(ee) / 299792458.0 * 8e-3))
    sheet = Sheet({"spacing": {"max_coupling": f"{coupling + margin} dB"}})
    sheet.line("la", [(4, 5), (12, 5)], 1.0)
    sheet.line("lv", [(2, 7.5), (20, 7.5)], 1.0)
    found = sheet.found("spacing.max_coupling")
    assert len(found) == faults
    assert all(f.measured == pytest.approx(coupling, abs=1e-3) for f in found)


@pytest.mark.parametrize(("margin", "faults"), [(0.05, 0), (-0.05, 1)])
def test_coupling_does_not_count_what_lies_at_a_shared_node(margin: float, faults: int) -> None:
    """Catches the length near a shared node, which no line can leave otherwise, counted as a parallel run.

    la leaves net c for the east, lx for the north and then the east: 10 mm run side by side, less 3 h of way
    and half a line's width from c.
    """
    pair = coupled_pair(2.0, 4.0, 3.55, 0.07)
    k = float((pair.z_even - pair.z_odd) / (pair.z_even + pair.z_odd))
    ee = float((pair.ee_even + pair.ee_odd) / 2)
    lap = 10.0 - (3.0 * H + 0.5)
    coupling = 20 * math.log10(k * math.sin(2 * math.pi * 2.3e9 * math.sqrt(ee) / 299792458.0 * lap * 1e-3))
    circuit = {"lines": {"lx": {"nets": ["c", "d"], "impedance": "50 ohm", "angle": "30 deg"}}}
    sheet = Sheet(
        {"spacing": {"max_coupling": f"{coupling + margin} dB"}}, {**circuit, "parts": {"C1": None}}
    )
    sheet.line("la", [(14, 5), (4, 5)], 1.0)
    sheet.line("lx", [(4, 5), (4, 8), (14, 8)], 1.0)
    found = sheet.found("spacing.max_coupling")
    assert len(found) == faults
    assert all(f.measured == pytest.approx(coupling, abs=1e-3) for f in found)


def test_lines_that_cross_at_right_angles_do_not_couple() -> None:
    """Catches a coupling computed for lines that do not run in parallel."""
    sheet = Sheet({"spacing": {"max_coupling": "-60 dB"}})
    sheet.line("la", [(4, 5), (12, 5)], 1.0)
    sheet.line("lv", [(14, 2), (14, 12)], 1.0)
    assert sheet.found("spacing.max_coupling") == []


# -- banks


def bank(first: float, second: float, rules: dict[str, Any] | None = None) -> Sheet:
    """Return lv fed from the left, a strip on its net w, C2 (10 pF) and C3 (1 nF) at two places along it."""
    sheet = Sheet(rules)
    sheet.line("lv", [(2, 10), (10, 10)], 0.4)
    sheet.strip("strip-w", "w", [(10, 10), (20, 10)], 0.8)
    for name, x in (("C2", first), ("C3", second)):
        sheet.part(name, {"1": ("w", x, 11, 0.8, 1.0), "2": ("gnd", x, 12.5, 0.8, 1.0)})
    return sheet


def test_bank_in_order() -> None:
    """Catches a sound bank found, also with the two capacitors at one place."""
    assert bank(10.5, 13).found("bank.order") == []
    assert bank(10.5, 10.5).found("bank.order") == []


def test_swapped_capacitors() -> None:
    """Catches a swapped pair passed."""
    finding = only(bank(13, 10.5).found("bank.order"))
    assert set(finding.items) == {"C2", "C3"}
    assert near(finding, 11.75, 11, 0.6)


@pytest.mark.parametrize(("distance", "faults"), [(1.0, 0), (1.001, 1)])
def test_bank_distance(distance: float, faults: int) -> None:
    """Catches a first capacitor passed too far from the feed's end, or found at the limit."""
    sheet = bank(10.4 + math.sqrt(distance**2 - 0.3**2), 16, {"bank": {"max_distance": "1 mm"}})
    found = sheet.found("bank.max_distance")
    assert len(found) == faults
    if found:
        assert set(found[0].items) == {"lv", "C2"}
        assert found[0].measured == pytest.approx(distance, abs=1e-6)
