"""Bends of lines that carry direct current: the neck a mitre leaves is as wide as the current asks."""

from __future__ import annotations

import copy
import math
from dataclasses import replace
from typing import Any

import pytest
import shapely

from layoutgen.checks import check
from layoutgen.circuit import build_circuit
from layoutgen.geometry import mitre_for_turn, stroke
from layoutgen.pipeline import run_inputs
from layoutgen.reading import circuit_from_data, rules_from_data
from layoutgen.sizing import line_budget, size_circuit
from layoutgen.sizing.necks import mitre_for_neck, neck_of_bend

WIDTH = 1_000_000


def across(turn: float, percent: float) -> float:
    """Return the least way from the inner to the outer edge of a drawn bend [nm], from its outline alone."""
    reach = 5 * WIDTH
    end = (round(reach * (1 + math.cos(math.radians(turn)))), round(reach * math.sin(math.radians(turn))))
    points = stroke([(0, 0), (reach, 0), end], WIDTH, [percent]).points
    outer, inner = points[: len(points) - 3], points[-2]  # right side there, left side back
    return shapely.LineString(outer).distance(shapely.Point(inner))


@pytest.mark.parametrize("turn", [15.0, 30.0, 45.0, 60.0, 90.0, 120.0])
@pytest.mark.parametrize("neck", [0.4, 0.85, 1.0])
def test_neck_of_a_drawn_bend(turn: float, neck: float) -> None:
    """Catches a mitre that leaves less than the neck asked for, or cuts less than it may."""
    percent = mitre_for_neck(math.inf, (turn,), 1.0, neck)
    drawn = mitre_for_turn(percent, turn, 1.0, 0.0)
    assert neck_of_bend(drawn, turn, 1.0) == pytest.approx(neck)
    assert across(turn, drawn) == pytest.approx(neck * WIDTH, abs=2.0)


def test_a_line_of_several_turns_keeps_the_neck_at_each() -> None:
    """Catches a mitre that suits one of a line's turns only."""
    percent = mitre_for_neck(60.0, (90.0, -30.0, 45.0), 1.0, 0.9)
    necks = [neck_of_bend(mitre_for_turn(percent, turn, 1.0, 0.0), turn, 1.0) for turn in (90.0, -30.0, 45.0)]
    assert min(necks) == pytest.approx(0.9)


def test_bends_that_are_wide_enough_keep_their_mitre() -> None:
    """Catches bends of lines with little or no current left less mitred than matches best."""
    assert mitre_for_neck(60.0, (90.0,), 1.0, 0.0) == 60.0
    assert mitre_for_neck(60.0, (90.0,), 1.0, math.sqrt(2.0) * 0.4) == pytest.approx(60.0)
    assert mitre_for_neck(60.0, (90.0,), 1.0, 5.0) == pytest.approx(100.0 * (1.0 - math.sqrt(0.5)))


RULES: dict[str, Any] = {
    "format": 1,
    "name": "current class",
    "copper": {"min_width": "0.125 mm", "min_gap": "0.125 mm", "min_edge_distance": "0.3 mm"},
    "holes": {"drills": ["0.3 mm"]},
    "vias": {"diameter": "0.6 mm", "drill": "0.3 mm", "min_pitch": "0.8 mm"},
    "current": {"max_density": "120 A/mm^2"},
}
CIRCUIT: dict[str, Any] = {
    "format": 1,
    "design": {"title": "Gauge supply", "frequency": "2.245 GHz", "band": ["2.20 GHz", "2.29 GHz"]},
    "substrate": {
        "relative_permittivity": 3.55,
        "loss_tangent": 0.0027,
        "height": "0.508 mm",
        "copper_thickness": "35 um",
    },
    "board": {"rules": "in-code"},
    "ground": {},
    "ports": {
        "vin": {"kind": "dc", "net": "a", "voltage": "5 V", "edge": "west"},
        "out": {"net": "b", "current": "3.78 A", "edge": "north"},
    },
    "lines": {
        "supply": {"nets": ["a", "m"], "length": "free"},
        "onward": {"nets": ["m", "b"], "length": "free", "impedance": "50 ohm"},
    },
    "layout": {"hints": {"supply": {"route": ["6 mm", "left", "5 mm", "right", "6 mm"]}}},
}
"""3.78 A ask for 0.9 mm of 35 um at 120 A/mm^2: a multiple of the step of widths, so nothing is to spare."""


def routed(*route: str) -> dict[str, Any]:
    """Return the circuit with the supply's route."""
    data = copy.deepcopy(CIRCUIT)
    data["layout"]["hints"]["supply"]["route"] = list(route)
    return data


@pytest.mark.parametrize("turn", ["", " 45 deg", " 30 deg"])
@pytest.mark.parametrize("current", [{"max_density": "120 A/mm^2"}, {"temperature_rise": "30 K"}])
def test_supply_with_nothing_to_spare(turn: str, current: dict[str, str]) -> None:
    """Catches a line as wide as its current asks that is too narrow where it bends: by default it was."""
    data = routed("6 mm", f"left{turn}", "5 mm", f"right{turn}", "6 mm")
    result = run_inputs(circuit_from_data(data), rules_from_data({**RULES, "current": current}))
    assert [f.text for f in result.checks.findings if f.severity != "note"] == []
    line = result.artwork.placement.lines["supply"]
    asked = 900_000 if "max_density" in current else line.width - 10_000
    assert line.width == 900_000 or "max_density" not in current
    for bend in line.bends:
        neck = neck_of_bend(bend.mitre_percent, bend.turn, line.width)
        assert asked - 1.0 <= neck <= line.width + 1.0


def test_the_board_would_fail_with_the_mitre_of_a_match() -> None:
    """Catches a check that no longer sees a bend's neck: the same board, its bends cut as for a match."""
    result = run_inputs(circuit_from_data(CIRCUIT), rules_from_data(RULES))
    artwork = result.artwork
    line = artwork.placement.lines["supply"]
    mitre = mitre_for_turn(58.0, 90.0, line.width, 0.0)
    copper = stroke(line.path, line.width, [mitre] * len(line.bends))
    shapes = tuple(
        shape if shape.origin.element != "supply" or shape.role != "line" else replace(shape, outline=copper)
        for shape in artwork.shapes
    )
    told = replace(line, bends=tuple(replace(bend, mitre_percent=mitre) for bend in line.bends))
    placement = replace(artwork.placement, lines={**artwork.placement.lines, "supply": told})
    found = check(replace(artwork, placement=placement, shapes=shapes)).findings
    assert {f.rule for f in found if f.severity == "error"} == {"current.max_density"}
    assert {f.items for f in found if f.severity == "error"} == {("supply",)}


def test_length_budget_uses_the_reduced_mitre() -> None:
    """Catches a bend's length correction taken for the mitre of a match while a smaller one is drawn."""
    data = copy.deepcopy(CIRCUIT)
    data["lines"]["onward"] |= {"angle": "90 deg"}
    del data["lines"]["onward"]["length"]
    sized = size_circuit(build_circuit(circuit_from_data(data), rules_from_data(RULES)))
    line = sized.lines["onward"]
    assert line.mitre_percent < 45.0  # that of a match would be 55 %
    assert line.mitre_percent == pytest.approx(100.0 * (1.0 - 0.9e-3 / (math.sqrt(2.0) * line.width)))
    straight, _ = line_budget(sized, "onward", ())
    bent, _ = line_budget(sized, "onward", (), [(90.0, line.mitre_percent)])
    assert bent - straight == pytest.approx(-line.bend_length, rel=1e-9)
