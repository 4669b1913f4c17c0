"""Rules on direct current, voltage and ratings."""

from __future__ import annotations

import math
from typing import Any

import pytest

from layoutgen.formulas.limits import ipc2221_current
from tests.checks.boards import Sheet, box, near, only, polygon

RISE = {"current": {"temperature_rise": "20 K"}}
DENSITY = {"current": {"max_density": "100 A/mm^2"}}


def carrying(amperes: float, rules: dict[str, Any], width: float, name: str = "lv") -> Sheet:
    """Return line lv with a current of its own and a width, between two pads wide enough."""
    sheet = Sheet(rules, {"lines": {name: {"current": f"{amperes} A"}}})
    sheet.line(name, [(5, 5), (20, 5)], width)
    sheet.part("C2", {"1": ("w", 20, 5, 3, 3)})
    return sheet


LIMIT_WIDTH = 0.1
LIMIT_CURRENT = float(ipc2221_current(LIMIT_WIDTH * 1e-3, 35e-6, 20.0))


@pytest.mark.parametrize(("width", "faults"), [(LIMIT_WIDTH, 0), (LIMIT_WIDTH - 0.001, 1)])
def test_temperature_rise_of_a_line(width: float, faults: int) -> None:
    """Catches a line passed that warms by more than the limit, or found at it."""
    found = carrying(LIMIT_CURRENT, RISE, width).found("current.temperature_rise")
    assert len(found) == faults
    if found:
        assert found[0].items == ("lv",)
        assert found[0].measured == pytest.approx(20.0 * (LIMIT_WIDTH / width) ** (0.725 / 0.44), rel=1e-3)


def test_neck_that_the_width_alone_passes() -> None:
    """Catches a feed judged by its nominal width: it is narrowed at one place."""
    sheet = Sheet(RISE, {"lines": {"lv": {"current": "0.6 A"}}})
    sheet.line("lv", [(5, 5), (20, 5)], 0.3, draw=False)
    sheet.copper(
        polygon(
            (5, 4.85), (20, 4.85), (20, 5.15), (12.1, 5.15), (12.1, 4.9), (12, 4.9), (12, 5.15), (5, 5.15)
        ),
        "v",
        "line",
        "lv",
    )
    finding = only(sheet.found("current.temperature_rise"))
    assert near(finding, 12.05, 4.875)
    area = 0.05 / 0.0254 * 0.035 / 0.0254  # square mils
    assert finding.measured == pytest.approx((0.6 / (0.048 * area**0.725)) ** (1 / 0.44), rel=1e-4)


@pytest.mark.parametrize(("hole", "faults"), [(1.6, 0), (1.61, 1)])
def test_current_passes_a_hole_on_both_sides(hole: float, faults: int) -> None:
    """Catches all of the current put through the copper on one side of a hole: 4.9 A want 1.4 mm of 3 mm."""
    sheet = carrying(4.9, DENSITY, 3.0)
    sheet.hole(12, 5.2, hole)
    found = sheet.found("current.max_density")
    assert len(found) == faults
    assert all(f.measured == pytest.approx(100.0 * 1.4 / 1.39, rel=1e-3) for f in found)


def test_line_wide_enough_passes() -> None:
    """Catches a rule that finds every line that carries something."""
    assert carrying(0.35, RISE, 0.3).found("current.temperature_rise") == []


def test_narrower_pad_at_the_end_is_not_the_lines_neck() -> None:
    """Catches the narrow copper of a neighbour blamed on the line that overlaps it."""
    sheet = carrying(LIMIT_CURRENT, RISE, 0.3)
    sheet.copper(box(2, 4.97, 5.5, 5.03), "v", "pad", "x")
    assert sheet.found("current.temperature_rise") == []


def test_current_beyond_the_chart() -> None:
    """Catches a current above 35 A judged by a curve that ends there."""
    finding = only(carrying(40.0, RISE, 20.0).found("current.temperature_rise"))
    assert (finding.measured, finding.limit, finding.unit) == (40.0, 35.0, "A")


def test_strips_carry_current_too() -> None:
    """Catches strips between pads left out."""
    sheet = Sheet(RISE)
    sheet.strip("strip-w", "w", [(5, 5), (9, 5)], 0.1, current=1.0)
    assert only(sheet.found("current.temperature_rise")).items == ("strip-w",)


def test_pairs_carry_current_too() -> None:
    """Catches the strips of a coupled pair left out."""
    circuit = {
        "coupled": {
            "cp": {
                "nets": ["v", "w", "a", "c"],
                "even_impedance": "60 ohm",
                "odd_impedance": "40 ohm",
                "angle": "9 deg",
            }
        },
        "lines": {"lv": None},
    }
    sheet = Sheet(RISE, circuit)
    sheet.pair("cp", 5, 15, 5, 0.02, 0.3)
    assert only(sheet.found("current.temperature_rise")).items == ("cp",)


@pytest.mark.parametrize(("width", "faults"), [(0.2, 0), (0.199, 1)])
def test_density_of_a_line(width: float, faults: int) -> None:
    """Catches a density passed above the limit, or found at it: 0.7 A in 0.2 mm x 35 um is 100 A/mm^2."""
    found = carrying(0.7, DENSITY, width).found("current.max_density")
    assert len(found) == faults
    if found:
        assert found[0].measured == pytest.approx(100.0 * 0.2 / width, rel=1e-6)
        assert found[0].unit == "A/mm^2"


def barrels(amperes: float, count: int, rules: dict[str, Any]) -> Sheet:
    """Return a line to gnd with its current and so many vias."""
    sheet = Sheet(rules, {"lines": {"lg": {"current": f"{amperes} A"}}})
    sheet.line("lg", [(10, 10), (15, 10)], 3.0)
    for k in range(count):
        sheet.via(15, 9 + k, "line:lg")
    return sheet


BARREL = math.pi * 0.02 * (0.3 - 0.02)


@pytest.mark.parametrize(("factor", "faults"), [(0.9999, 0), (1.001, 1)])
def test_density_of_a_barrel(factor: float, faults: int) -> None:
    """Catches barrels left out or the wrong section: pi t (d - t) = 0.0176 mm^2."""
    sheet = barrels(100.0 * BARREL * factor, 1, DENSITY)
    found = [f for f in sheet.found("current.max_density") if "via:0" in f.items]
    assert len(found) == faults


def test_temperature_rise_of_barrels() -> None:
    """Catches the share of parallel vias left out."""
    assert barrels(1.5, 2, RISE).found("current.temperature_rise") == []
    found = barrels(1.5, 1, RISE).found("current.temperature_rise")
    assert [f.items for f in found] == [("via:0", "lg")]


def test_barrels_without_plating_are_listed() -> None:
    """Catches barrels that could not be judged read as passed."""
    sheet = barrels(1.5, 1, {"current": {"temperature_rise": "20 K"}, "vias": {"plating": None}})
    assert sheet.unchecked()["current.temperature_rise (vias)"] == "vias.plating is not given"


# -- voltage


def pads(gap: float, rules: dict[str, Any], net: str = "w") -> Sheet:
    """Return copper of the 28 V net and of gnd with a gap [mm] between them."""
    sheet = Sheet({"voltage": rules})
    sheet.copper(box(4, 4, 8, 6), net, "pad", "C2")
    sheet.copper(box(8 + gap, 4, 12, 6))
    return sheet


@pytest.mark.parametrize(("gap", "faults"), [(0.1, 0), (0.099, 1)])
def test_voltage_by_the_standard(gap: float, faults: int) -> None:
    """Catches the wrong row of the table: 28 V in column B2 asks for 0.1 mm."""
    found = pads(gap, {"condition": "B2"}).found("voltage.condition")
    assert len(found) == faults
    if found:
        assert set(found[0].items) == {"C2", "pour"}
        assert found[0].limit == pytest.approx(0.1)
        assert near(found[0], 8 + gap / 2, 5, 1.01)


@pytest.mark.parametrize(("gap", "faults"), [(0.7, 0), (0.699, 1)])
def test_voltage_by_a_table(gap: float, faults: int) -> None:
    """Catches a user's table read wrongly: the row is the first that holds the voltage."""
    table = {"table": [["15 V", "0.2 mm"], ["30 V", "0.7 mm"], ["60 V", "1.5 mm"]]}
    assert len(pads(gap, table).found("voltage.table")) == faults


def test_beyond_the_last_row() -> None:
    """Catches a voltage beyond the user's table read as covered by it."""
    sheet = pads(1.0, {"table": [["15 V", "0.2 mm"]]})
    assert "28 V" in sheet.unchecked()["voltage.table (above 15 V)"]


def test_nets_at_one_voltage() -> None:
    """Catches a gap asked for between nets that no voltage parts, and copper of one conductor."""
    assert pads(0.1, {"condition": "A6"}, "a").found("voltage.condition") == []
    sheet = Sheet({"voltage": {"condition": "A6"}})
    sheet.copper(box(4, 4, 8, 6), "v", "pad", "C2")
    sheet.copper(box(8.05, 4, 12, 6), "w", "pad", "C3")
    assert sheet.found("voltage.condition") == []


# -- part.rating


def rated(part: str, rating: dict[str, str]) -> Sheet:
    """Return the circuit with a rating on one part."""
    sheet = Sheet(circuit={"parts": {part: {"rating": rating}}})
    sheet.part(part, {"1": ("w", 5, 5, 1, 1), "2": ("gnd", 7, 5, 1, 1)})
    return sheet


@pytest.mark.parametrize(
    ("part", "what", "value", "rating", "faults"),
    [
        ("C2", "voltage", 28.0, "28.1 V", 0),
        ("C2", "voltage", 28.0, "27.9 V", 1),
        ("R1", "power", 7.84, "7.85 W", 0),
        ("R1", "power", 7.84, "7.8 W", 1),
        ("R1", "current", 0.28, "0.281 A", 0),
        ("R1", "current", 0.28, "0.279 A", 1),
    ],
)
def test_rating(part: str, what: str, value: float, rating: str, faults: int) -> None:
    """Catches a rating passed beyond its limit: 28 V across 100 ohm."""
    found = rated(part, {what: rating}).found("part.rating")
    assert len(found) == faults
    if found:
        assert found[0].items == (part,)
        assert found[0].measured == pytest.approx(value, rel=1e-2)
        assert near(found[0], 6, 5)


def test_parts_with_pins_are_listed() -> None:
    """Catches ratings that nobody looked at read as passed."""
    circuit = {
        "parts": {
            "Q1": {
                "kind": "transistor",
                "footprint": "can",
                "pins": {"d": "a", "s": "gnd"},
                "rating": {"power": "1 W"},
            }
        },
        "footprints": {
            "can": {
                "pads": {
                    "d": {"at": ["0 mm", "0 mm"], "size": ["1 mm", "1 mm"], "heading": "east"},
                    "s": {"at": ["0 mm", "3 mm"], "size": ["1 mm", "1 mm"], "heading": "west"},
                }
            }
        },
    }
    assert "pins" in Sheet(circuit=circuit).unchecked()["part.rating (Q1)"]
