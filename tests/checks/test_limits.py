"""Every rule at its exact limit, and the least step beyond: one row a rule, none may be missing."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import pytest

from layoutgen.checks.rules import RULES
from layoutgen.formulas.coupled import coupled_pair
from layoutgen.formulas.limits import ipc2221_current
from layoutgen.geometry import Ring
from tests.checks.boards import Sheet, box, nm, polygon

UM = 0.001
Board = Callable[[float], Sheet]


def bars(rules: dict[str, Any], gap: float, net: str, other: str, *, high: float = 2.0) -> Sheet:
    """Return copper of two nets, 4 mm long, with a gap between [mm]."""
    sheet = Sheet(rules)
    sheet.copper(box(4, 5, 8, 5 + high), net, "pad", "one")
    sheet.copper(box(8 + gap, 5, 12 + gap, 7), other, "pad", "two")
    return sheet


def width(step: float) -> Sheet:
    return bars({"copper": {"min_width": "0.2 mm"}}, 1.0, "a", "b", high=0.2 - step)


def gap(step: float) -> Sheet:
    return bars({"copper": {"min_gap": "0.2 mm"}}, 0.2 - step, "a", "b")


def slit(step: float) -> Sheet:
    sheet = Sheet({"copper": {"min_gap": "0.2 mm"}})
    sheet.copper(polygon((4, 4), (8, 4), (8, 8), (6.2 - step, 8), (6.2 - step, 5), (6, 5), (6, 8), (4, 8)))
    return sheet


def edge(step: float) -> Sheet:
    sheet = Sheet({"copper": {"min_edge_distance": "0.3 mm"}})
    sheet.copper(box(0.3 - step, 5, 4, 7))
    return sheet


def corner(step: float) -> Sheet:
    sheet = Sheet({"copper": {"min_corner_angle": "85 deg"}})
    half = 2.0 * math.tan(math.radians((85.0 - step) / 2.0))
    sheet.copper(polygon((4, 4), (16, 4), (16, 9), (10 + half, 9), (10, 7), (10 - half, 9), (4, 9)))
    return sheet


def island(step: float) -> Sheet:
    sheet = Sheet({"copper": {"min_island_area": "0.5 mm^2"}})
    sheet.copper(box(5, 5, 6 - step, 5.5))
    return sheet


def hole(rules: dict[str, Any], diameter: float) -> Sheet:
    sheet = Sheet({"holes": rules})
    sheet.hole(10, 10, diameter)
    return sheet


def ring(step: float) -> Sheet:
    sheet = Sheet({"holes": {"min_annular_ring": "0.15 mm"}})
    sheet.via(10, 10, draw=False)
    sheet.copper(Ring.circle(nm(10 + step), nm(10), nm(0.3)), role="land")
    return sheet


def web(step: float) -> Sheet:
    sheet = Sheet({"holes": {"min_web": "0.25 mm"}})
    sheet.hole(10, 10, 1.0)
    sheet.hole(10 + 1.25 - step, 10, 1.0)
    return sheet


def hole_to_copper(step: float) -> Sheet:
    sheet = Sheet({"holes": {"min_copper_distance": "0.2 mm"}})
    sheet.hole(10, 10, 1.0)
    sheet.copper(box(10.7 - step, 8, 14, 12))
    return sheet


def hole_to_edge(step: float) -> Sheet:
    sheet = Sheet({"holes": {"min_edge_distance": "0.5 mm"}})
    sheet.hole(1.0 - step, 10, 1.0)
    return sheet


def via(*, land: float = 0.6, drill: float = 0.3) -> Sheet:
    sheet = Sheet()
    sheet.via(10, 10, land=land, drill=drill)
    return sheet


def pitch(step: float) -> Sheet:
    sheet = Sheet({"vias": {"min_pitch": "0.8 mm"}})
    sheet.via(10, 10)
    sheet.via(10.8 - step, 10)
    return sheet


def loaded(rules: dict[str, Any], amperes: float) -> Sheet:
    """Return a line to gnd with two vias and a current."""
    sheet = Sheet(rules, {"lines": {"lg": {"current": f"{amperes} A"}}})
    sheet.line("lg", [(10, 10), (15, 10)], 3.0)
    for y in (9.0, 11.0):
        sheet.via(15, y, "line:lg")
    return sheet


def pad_vias(step: float) -> Sheet:
    sheet = Sheet({"vias": {"per_ground_pad": 2}})
    sheet.part("R1", {"1": ("w", 10, 10, 1, 1), "2": ("gnd", 14, 10, 3, 3)})
    for k in range(2 - round(step)):
        sheet.via(13.5 + k, 10, "part:R1")
    return sheet


def fence(rules: dict[str, Any], along: float, behind: float = 0.5) -> Sheet:
    """Return pour beside line la with five vias a pitch apart and half of it from the ends."""
    sheet = Sheet({"fence": rules})
    sheet.plane()
    sheet.line("la", [(2, 5), (28, 5)], 1.0, gap=0.5)
    sheet.copper(box(10, 6, 10 + 5 * along, 9))
    for k in range(5):
        sheet.via(10 + (k + 0.5) * along, 6 + behind, "fence")
    return sheet


WAVELENGTH = 299792458.0 / (2.3e9 * math.sqrt(3.55)) * 1e3


def expansion(step: float) -> Sheet:
    sheet = Sheet({"mask": {"expansion": "0.05 mm"}})
    sheet.part("C1", {"1": ("c", 10, 10, 1, 1)})
    sheet.opening(box(9.45, 9.45, 10.55 - step, 10.55))
    return sheet


def openings(step: float) -> Sheet:
    sheet = Sheet({"mask": {"min_web": "0.1 mm"}})
    sheet.opening(box(5, 5, 6, 6))
    sheet.opening(box(6.1 - step, 5, 7, 6))
    return sheet


def ink(step: float) -> Sheet:
    sheet = Sheet({"legend": {"min_line": "0.12 mm"}})
    sheet.ink(box(5, 5, 8, 5.12 - step))
    return sheet


def ink_at_an_opening(step: float) -> Sheet:
    sheet = Sheet({"legend": {"min_distance": "0.15 mm"}})
    sheet.opening(box(5, 5, 6, 6))
    sheet.ink(box(6.15 - step, 5, 8, 6))
    return sheet


def carrying(rules: dict[str, Any], amperes: float, wide: float) -> Sheet:
    """Return line lv with a current and a width [mm]."""
    sheet = Sheet({"current": rules}, {"lines": {"lv": {"current": f"{amperes} A"}}})
    sheet.line("lv", [(5, 5), (20, 5)], wide)
    return sheet


WARM = float(ipc2221_current(0.2e-3, 35e-6, 20.0))
BARREL = math.pi * 0.02 * (0.3 - 0.02)


def heights(step: float) -> Sheet:
    sheet = Sheet({"spacing": {"min_line_heights": 3.0}})
    sheet.line("la", [(4, 5), (14, 5)], 1.0)
    sheet.line("lb", [(4, 7.5 - step), (14, 7.5 - step)], 1.0)
    return sheet


def coupling(step: float) -> Sheet:
    pair = coupled_pair(2.0, 3.0, 3.55, 0.07)
    k = float((pair.z_even - pair.z_odd) / (pair.z_even + pair.z_odd))
    beta = 2 * math.pi * 2.3e9 * math.sqrt(float((pair.ee_even + pair.ee_odd) / 2)) / 299792458.0
    limit = 20.0 * math.log10(k * math.sin(beta * 8e-3)) - step
    sheet = Sheet({"spacing": {"max_coupling": f"{limit!r} dB"}})
    sheet.line("la", [(4, 5), (12, 5)], 1.0)
    sheet.line("lv", [(2, 7.5), (20, 7.5)], 1.0)
    return sheet


def bank(first: float, second: float) -> Sheet:
    """Return lv, its strip from (10, 10) on, C2 (10 pF) and C3 (1 nF) at two places along it [mm]."""
    sheet = Sheet({"bank": {"max_distance": "1 mm"}})
    sheet.line("lv", [(2, 10), (10, 10)], 0.4)
    sheet.strip("strip-w", "w", [(10, 10), (20, 10)], 0.8)
    for name, x in (("C2", first), ("C3", second)):
        sheet.part(name, {"1": ("w", x, 10.5, 0.8, 1.0), "2": ("gnd", x, 12.5, 0.8, 1.0)})
    return sheet


def rated(step: float) -> Sheet:
    parts = {"R1": {"nets": ["v", "gnd"], "rating": {"voltage": f"{28.0 - step} V"}}}
    return Sheet(circuit={"parts": parts})


def cut(step: float) -> Sheet:
    sheet = Sheet()
    sheet.copper(box(4, 5, 8, 6), "a", "line", "la")
    sheet.copper(box(8 + step, 5, 12, 6), "a", "line", "la")
    return sheet


def meeting(step: float) -> Sheet:
    return bars({}, UM - step, "a", "b")


def tab(step: float) -> Sheet:
    sheet = Sheet()
    sheet.plane()
    sheet.copper(box(4, 5, 8, 6), "a", "line", "la")
    sheet.copper(box(8 + step, 5, 9, 6), None, "mark", "tab")
    return sheet


def pour(step: float) -> Sheet:
    sheet = Sheet()
    sheet.line("la", [(4, 5), (14, 5)], 1.0, gap=1.0)
    sheet.copper(box(6, 6.5 - step, 12, 10))
    return sheet


def slug(step: float) -> Sheet:
    sheet = Sheet()
    least = 0.5e-3 / (385.0 * math.pi * 20e-6 * 280e-6)
    pads = {"1": ("w", 10, 10, 1, 1), "2": ("gnd", 14, 10, 4, 4)}
    sheet.part("R1", pads, ground={"2": "vias"}, thermal={"2": least / 2.0 * (1.0 - step)})
    for x in (13.0, 15.0):
        sheet.via(x, 10, "part:R1")
    return sheet


def under(step: float) -> Sheet:
    sheet = Sheet()
    sheet.plane(Ring(box(8, 5.5 - step, 9, 7).points[::-1]))
    sheet.line("la", [(4, 5), (14, 5)], 1.0)
    return sheet


def flange(step: float) -> Sheet:
    sheet = Sheet({"copper": {"min_edge_distance": "0.3 mm"}})
    pads = {"gate": ("a", 8.8, 10.0, 2.0, 2.0), "source": ("gnd", 12.0, 10.0, 0.0, 0.0)}
    sheet.part("C1", pads, headings={"gate": 180.0}, cutout=box(10, 5, 14, 15), ground={"source": "flange"})
    sheet.plane(Ring(box(9.7 - step, 4.7, 14.3, 15.3).points[::-1]))
    return sheet


LIMITS: dict[str, list[tuple[Board, float]]] = {
    "copper.min_width": [(width, UM)],
    "copper.min_gap": [(gap, UM), (slit, UM)],
    "copper.min_edge_distance": [(edge, UM)],
    "copper.min_corner_angle": [(corner, 0.1)],
    "copper.min_island_area": [(island, UM)],
    "holes.drills": [(lambda step: hole({}, 1.0 + step), UM)],
    "holes.min_diameter": [(lambda step: hole({"min_diameter": "1 mm"}, 1.0 - step), UM)],
    "holes.max_aspect_ratio": [(lambda step: hole({"max_aspect_ratio": 1.9}, 0.3 - step), UM)],
    "holes.min_annular_ring": [(ring, UM)],
    "holes.min_web": [(web, UM)],
    "holes.min_copper_distance": [(hole_to_copper, UM)],
    "holes.min_edge_distance": [(hole_to_edge, UM)],
    "vias.diameter": [
        (lambda step: via(land=0.6 + step), 2 * UM),
        (lambda step: via(land=0.6 - step), 2 * UM),
    ],
    "vias.drill": [(lambda step: via(drill=0.3 + step), 2 * UM)],
    "vias.min_pitch": [(pitch, UM)],
    "vias.max_current": [(lambda step: loaded({"vias": {"max_current": "1 A"}}, 2.0 + step), 1e-4)],
    "vias.per_ground_pad": [(pad_vias, 1.0)],
    "fence.max_pitch": [(lambda step: fence({"max_pitch": "2 mm"}, 2.0 + step), 2 * UM)],
    "fence.max_pitch_wavelengths": [
        (lambda step: fence({"max_pitch_wavelengths": 2.0 / WAVELENGTH}, 2.0 + step), 2 * UM)
    ],
    "fence.max_edge_distance": [
        (lambda step: fence({"max_pitch": "2 mm", "max_edge_distance": "0.8 mm"}, 2.0, 0.8 + step), 2 * UM)
    ],
    "mask.expansion": [(expansion, UM)],
    "mask.min_web": [(openings, UM)],
    "legend.min_line": [(ink, UM)],
    "legend.min_distance": [(ink_at_an_opening, UM)],
    "current.temperature_rise": [
        (lambda step: carrying({"temperature_rise": "20 K"}, WARM, 0.2 - step), UM),
        (
            lambda step: loaded({"current": {"temperature_rise": "20 K"}}, 2.0 * BARREL_WARM * (1.0 + step)),
            1e-4,
        ),
    ],
    "current.max_density": [
        (lambda step: carrying({"max_density": "100 A/mm^2"}, 0.7, 0.2 - step), UM),
        (lambda step: loaded({"current": {"max_density": "100 A/mm^2"}}, 200.0 * BARREL + step), 1e-4),
    ],
    "voltage.condition": [
        (lambda step: bars({"voltage": {"condition": "B2"}}, 0.1 - step, "v", "gnd"), UM),
    ],
    "voltage.table": [
        (lambda step: bars({"voltage": {"table": [["28 V", "0.7 mm"]]}}, 0.7 - step, "v", "gnd"), UM),
    ],
    "spacing.min_line_heights": [(heights, UM)],
    "spacing.max_coupling": [(coupling, 0.011)],
    "bank.max_distance": [(lambda step: bank(11.4 + step, 16.0), UM)],
    "bank.order": [(lambda step: bank(10.5 + step, 10.5), UM)],
    "part.rating": [(rated, 1e-3)],
    "connectivity.open": [(cut, 1e-6)],
    "connectivity.short": [(meeting, UM)],
    "connectivity.floating": [(tab, 1e-6)],
    "ground.gap": [(pour, 2 * UM)],
    "ground.vias": [(slug, 1e-4)],
    "ground.under_line": [(under, UM)],
    "ground.flange": [(flange, 2 * UM)],
}
"""For each rule boards by the step beyond its limit (0: at it), and the step that must be found."""

BARREL_WARM = 0.024 * 20.0**0.44 * (BARREL / 0.0254**2) ** 0.725
"""Current [A] that warms a barrel by 20 K: inner constant, section in square mils."""

CASES = [(rule, board, step) for rule, rows in LIMITS.items() for board, step in rows]


def test_every_rule_has_its_limit() -> None:
    """Catches a rule without a board at its exact limit."""
    assert set(LIMITS) == {name for rule in RULES for name in rule.names}


@pytest.mark.parametrize(("rule", "board", "step"), CASES, ids=[rule for rule, _, _ in CASES])
def test_at_the_limit_and_beyond(rule: str, board: Board, step: float) -> None:
    """Catches a board found at the exact limit, or passed by the least step beyond it."""
    assert [f.text for f in board(0.0).found(rule)] == []
    found = board(step).found(rule)
    assert found
    assert all(f.limit is None or f.measured is None or f.measured != f.limit for f in found)
