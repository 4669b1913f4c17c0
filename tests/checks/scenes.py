"""One small board for each rule, once as the rule wants it and once not: the pictures of docs/rules.md."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from layoutgen.geometry import Ring
from tests.checks.boards import Sheet, box, nm, polygon

Scene = Callable[[bool], Sheet]


def two_boxes(rules: dict[str, Any], gap: float, net: str = "b") -> Sheet:
    """Return two pieces of copper with a gap [mm]."""
    sheet = Sheet(rules, size=(12, 8))
    sheet.copper(box(2, 3, 6, 5), "v" if net == "w" else "a", "line", "la")
    sheet.copper(box(6 + gap, 3, 10, 5), "gnd" if net == "w" else net, "line", "lb")
    return sheet


def min_width(good: bool) -> Sheet:
    sheet = Sheet({"copper": {"min_width": "0.3 mm"}}, size=(12, 8))
    left = 3.4 if good else 3.2
    notch = polygon((2, 3), (10, 3), (10, 5), (6.6, 5), (6.3, left), (5.7, left), (5.4, 5), (2, 5))
    sheet.copper(notch, "a", "line", "la")
    return sheet


def min_gap(good: bool) -> Sheet:
    return two_boxes({"copper": {"min_gap": "0.3 mm"}}, 0.4 if good else 0.2)


def copper_edge(good: bool) -> Sheet:
    sheet = Sheet({"copper": {"min_edge_distance": "0.5 mm"}}, size=(12, 8))
    sheet.copper(box(0.6 if good else 0.2, 3, 8, 5), "a", "line", "la")
    return sheet


def corner_angle(good: bool) -> Sheet:
    sheet = Sheet({"copper": {"min_corner_angle": "85 deg"}}, size=(12, 8))
    half = 1.2 if good else 0.5
    sheet.copper(polygon((2, 2), (10, 2), (10, 6), (6 + half, 6), (6, 5), (6 - half, 6), (2, 6)))
    return sheet


def island(good: bool) -> Sheet:
    sheet = Sheet({"copper": {"min_island_area": "0.5 mm^2"}}, size=(12, 8))
    side = 0.9 if good else 0.4
    sheet.copper(box(6, 4, 6 + side, 4 + side))
    return sheet


def drills(good: bool) -> Sheet:
    sheet = Sheet(size=(12, 8))
    sheet.hole(6, 4, 1.0 if good else 1.3)
    return sheet


def min_diameter(good: bool) -> Sheet:
    sheet = Sheet({"holes": {"min_diameter": "0.25 mm"}}, size=(12, 8))
    sheet.hole(6, 4, 0.3 if good else 0.2)
    return sheet


def aspect(good: bool) -> Sheet:
    sheet = Sheet({"holes": {"max_aspect_ratio": 2.0}}, size=(12, 8))
    sheet.via(6, 4, drill=0.3 if good else 0.2)
    return sheet


def ring(good: bool) -> Sheet:
    sheet = Sheet({"holes": {"min_annular_ring": "0.125 mm"}}, size=(12, 8))
    sheet.via(6, 4, draw=False)
    sheet.copper(Ring.circle(nm(6.0 if good else 6.08), nm(4), nm(0.3)), role="land")
    return sheet


def web(good: bool) -> Sheet:
    sheet = Sheet({"holes": {"min_web": "0.25 mm"}}, size=(12, 8))
    sheet.hole(5, 4, 1.0)
    sheet.hole(6.4 if good else 6.1, 4, 1.0)
    return sheet


def hole_copper(good: bool) -> Sheet:
    sheet = Sheet({"holes": {"min_copper_distance": "0.2 mm"}}, size=(12, 8))
    sheet.via(6, 4)
    sheet.copper(box(6.45 if good else 6.25, 3, 9, 5), "a", "line", "la")
    return sheet


def hole_edge(good: bool) -> Sheet:
    sheet = Sheet({"holes": {"min_edge_distance": "0.5 mm"}}, size=(12, 8))
    sheet.hole(1.2 if good else 0.7, 4, 1.0)
    return sheet


def via_size(good: bool) -> Sheet:
    sheet = Sheet(size=(12, 8))
    sheet.via(6, 4, land=0.6 if good else 0.5)
    return sheet


def via_pitch(good: bool) -> Sheet:
    sheet = Sheet({"vias": {"min_pitch": "0.8 mm"}}, size=(12, 8))
    sheet.via(6, 4)
    sheet.via(6.9 if good else 6.65, 4)
    return sheet


def grounded(good: bool, rules: dict[str, Any]) -> Sheet:
    """Return R1 with two vias of its own, or one."""
    sheet = Sheet({"vias": rules}, size=(12, 8))
    sheet.part("R1", {"1": ("w", 4, 4, 1, 1.6), "2": ("gnd", 7, 4, 1, 1.6)})
    sheet.copper(box(7, 2.5, 9, 5.5), role="ground", element="R1")
    for y in (3.4, 4.6)[: 2 if good else 1]:
        sheet.via(8.4, y, "part:R1")
    return sheet


def via_current(good: bool) -> Sheet:
    return grounded(good, {"max_current": "0.2 A"})


def vias_per_pad(good: bool) -> Sheet:
    return grounded(good, {"per_ground_pad": 2})


def fence_pitch(good: bool) -> Sheet:
    sheet = Sheet({"fence": {"max_pitch": "2 mm", "max_edge_distance": "0.8 mm"}}, size=(16, 9))
    sheet.plane()
    sheet.line("la", [(1, 3), (15, 3)], 1.0, gap=0.5)
    sheet.copper(box(3, 4, 13, 8))
    for x in (3.5, 5, 7, 9, 11, 12.5) if good else (3.5, 5, 9, 11, 12.5):
        sheet.via(x, 4.5, "fence")
    return sheet


def fence_edge(good: bool) -> Sheet:
    sheet = Sheet({"fence": {"max_pitch": "20 mm", "max_edge_distance": "0.8 mm"}}, size=(16, 9))
    sheet.plane()
    sheet.line("la", [(1, 3), (15, 3)], 1.0, gap=0.5)
    sheet.copper(box(3, 4, 13, 8))
    sheet.via(8, 4.6 if good else 5.1, "fence")
    return sheet


def padded(rules: dict[str, Any]) -> Sheet:
    """Return C1 with two pads."""
    sheet = Sheet(rules, size=(12, 8))
    sheet.part("C1", {"1": ("c", 5, 4, 1, 1), "2": ("d", 7, 4, 1, 1)})
    return sheet


def expansion(good: bool) -> Sheet:
    sheet = padded({"mask": {"expansion": "0.1 mm"}})
    sheet.opening(box(4.4, 3.4, 5.6 if good else 5.4, 4.6))
    sheet.opening(box(6.4, 3.4, 7.6, 4.6))
    return sheet


def mask_web(good: bool) -> Sheet:
    sheet = padded({"mask": {"min_web": "0.2 mm"}})
    sheet.opening(box(4.2, 3.2, 5.8, 4.8))
    sheet.opening(box(6.2 if good else 5.9, 3.2, 7.8, 4.8))
    return sheet


def legend_line(good: bool) -> Sheet:
    sheet = Sheet({"legend": {"min_line": "0.15 mm"}}, size=(12, 8))
    sheet.ink(box(4, 4, 8, 4.2 if good else 4.08), "C1")
    return sheet


def legend_distance(good: bool) -> Sheet:
    sheet = padded({"legend": {"min_distance": "0.2 mm"}})
    sheet.opening(box(4.4, 3.4, 5.6, 4.6), "C1")
    sheet.ink(box(4, 4.9 if good else 4.7, 8, 5.2), "R1")
    return sheet


def fed(good: bool, current: dict[str, str]) -> Sheet:
    """Return a feed that carries 0.28 A, with a neck or without."""
    sheet = Sheet({"current": current}, size=(16, 8))
    sheet.line("lv", [(2, 4), (13, 4)], 0.8, draw=False)
    sheet.port("pv", 2, 4, 0.0, 0.8)
    sheet.part("R1", {"1": ("w", 13, 4, 1, 1), "2": ("gnd", 14.6, 4, 0.8, 1)})
    neck = 4.4 if good else 3.64
    sheet.copper(
        polygon((2, 3.6), (13, 3.6), (13, 4.4), (8, 4.4), (8, neck), (7, neck), (7, 4.4), (2, 4.4))
        if not good
        else box(2, 3.6, 13, 4.4),
        "v",
        "line",
        "lv",
    )
    return sheet


def temperature(good: bool) -> Sheet:
    return fed(good, {"temperature_rise": "10 K"})


def density(good: bool) -> Sheet:
    return fed(good, {"max_density": "100 A/mm^2"})


def voltage(good: bool) -> Sheet:
    return two_boxes({"voltage": {"table": [["30 V", "0.3 mm"]]}}, 0.4 if good else 0.2, "w")


def line_heights(good: bool) -> Sheet:
    sheet = Sheet({"spacing": {"min_line_heights": 3.0}}, size=(16, 9))
    apart = 1.6 if good else 1.2
    sheet.line("la", [(2, 3), (11, 3)], 1.0)
    sheet.line("lb", [(5, 4 + apart), (14, 4 + apart)], 1.0)
    return sheet


def coupling(good: bool) -> Sheet:
    sheet = Sheet({"spacing": {"max_coupling": "-25 dB"}}, size=(16, 9))
    apart = 3.0 if good else 0.3
    sheet.line("la", [(2, 2), (14, 2)], 1.0)
    sheet.line("lb", [(2, 3 + apart), (14, 3 + apart)], 1.0)
    return sheet


def bank(first: float, second: float, rules: dict[str, Any] | None = None) -> Sheet:
    """Return lv, a strip on its net, C2 (10 pF) and C3 (1 nF) at two places along it."""
    sheet = Sheet(rules, size=(16, 8))
    sheet.line("lv", [(1, 4), (5, 4)], 0.4)
    sheet.strip("strip-w", "w", [(5, 4), (14, 4)], 0.8)
    for name, x in (("C2", first), ("C3", second)):
        sheet.part(name, {"1": ("w", x, 5, 0.8, 1.0), "2": ("gnd", x, 6.5, 0.8, 1.0)})
    return sheet


def bank_distance(good: bool) -> Sheet:
    return bank(5.6 if good else 7.5, 12, {"bank": {"max_distance": "1 mm"}})


def bank_order(good: bool) -> Sheet:
    return bank(6, 9) if good else bank(9, 6)


def rating(good: bool) -> Sheet:
    allowed = "50 V" if good else "16 V"
    sheet = Sheet(circuit={"parts": {"C2": {"rating": {"voltage": allowed}}}}, size=(12, 8))
    sheet.part("C2", {"1": ("w", 5, 4, 1, 1), "2": ("gnd", 7, 4, 1, 1)})
    return sheet


def opened(good: bool) -> Sheet:
    sheet = Sheet(size=(14, 8))
    cut = 0.0 if good else 0.2
    sheet.port("pa", 0.5, 4, 0.0, 1.0)
    sheet.line("la", [(0.5, 4), (12, 4)], 1.0, draw=False)
    sheet.copper(box(0.5, 3.5, 7, 4.5), "a", "line", "la")
    sheet.copper(box(7 + cut, 3.5, 12, 4.5), "a", "line", "la")
    sheet.part("C1", {"1": ("c", 11.5, 4, 0.9, 0.9)})
    return sheet


def shorted(good: bool) -> Sheet:
    sheet = Sheet(size=(14, 8))
    sheet.copper(box(2, 2, 12, 3), "a", "line", "la")
    sheet.copper(box(2, 4, 12, 5), "b", "line", "lb")
    if not good:
        sheet.copper(box(6.9, 2.9, 7.1, 4.1), None, "stray", "stray")
    return sheet


def floating(good: bool) -> Sheet:
    sheet = Sheet(size=(12, 8))
    sheet.plane()
    sheet.copper(box(3, 2, 9, 6))
    if good:
        sheet.via(6, 4)
    return sheet


def ground_gap(good: bool) -> Sheet:
    sheet = Sheet(size=(14, 9))
    sheet.line("la", [(2, 3), (12, 3)], 1.0, gap=1.0)
    sheet.copper(box(4, 4.5 if good else 4.2, 10, 8))
    return sheet


def ground_vias(good: bool) -> Sheet:
    sheet = Sheet(size=(12, 8))
    sheet.plane()
    sheet.part("R1", {"1": ("w", 4, 4, 1, 1), "2": ("gnd", 7, 4, 1.2, 1.2)})
    if good:
        sheet.via(7, 4, "part:R1")
    return sheet


def under_line(good: bool) -> Sheet:
    sheet = Sheet({"copper": {"min_edge_distance": "0.5 mm"}}, size=(14, 8))
    slot = box(6, 5, 7, 7) if good else box(6, 3, 7, 6)
    sheet.plane(Ring(slot.points[::-1]))
    sheet.line("la", [(2, 4), (12, 4)], 1.0)
    return sheet


def flange(good: bool) -> Sheet:
    sheet = Sheet({"copper": {"min_edge_distance": "0.3 mm"}}, size=(14, 10))
    pads = {"gate": ("a", 3.8, 5.0, 2.0, 2.0), "source": ("gnd", 7.0, 5.0, 0.0, 0.0)}
    sheet.part("C1", pads, headings={"gate": 180.0}, cutout=box(5, 2, 9, 8), ground={"source": "flange"})
    away = 0.3 if good else 1.0
    sheet.plane(Ring(box(5 - away, 1.7, 9.3, 8.3).points[::-1]))
    return sheet


SCENES: dict[str, Scene] = {
    "copper.min_width": min_width,
    "copper.min_gap": min_gap,
    "copper.min_edge_distance": copper_edge,
    "copper.min_corner_angle": corner_angle,
    "copper.min_island_area": island,
    "holes.drills": drills,
    "holes.min_diameter": min_diameter,
    "holes.max_aspect_ratio": aspect,
    "holes.min_annular_ring": ring,
    "holes.min_web": web,
    "holes.min_copper_distance": hole_copper,
    "holes.min_edge_distance": hole_edge,
    "vias.diameter": via_size,
    "vias.min_pitch": via_pitch,
    "vias.max_current": via_current,
    "vias.per_ground_pad": vias_per_pad,
    "fence.max_pitch": fence_pitch,
    "fence.max_edge_distance": fence_edge,
    "mask.expansion": expansion,
    "mask.min_web": mask_web,
    "legend.min_line": legend_line,
    "legend.min_distance": legend_distance,
    "current.temperature_rise": temperature,
    "current.max_density": density,
    "voltage.condition": voltage,
    "spacing.min_line_heights": line_heights,
    "spacing.max_coupling": coupling,
    "bank.max_distance": bank_distance,
    "bank.order": bank_order,
    "part.rating": rating,
    "connectivity.open": opened,
    "connectivity.short": shorted,
    "connectivity.floating": floating,
    "ground.gap": ground_gap,
    "ground.vias": ground_vias,
    "ground.under_line": under_line,
    "ground.flange": flange,
}
"""By the first name of each rule."""
