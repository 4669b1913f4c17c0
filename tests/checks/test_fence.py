"""Rules on the fence: pitch along pour edges that face a line, distance behind the edge."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest
import shapely

from layoutgen.checks.rules.fence_max_pitch import _feet
from tests.checks.boards import Sheet, box, near, only, polygon

RULES: dict[str, Any] = {"fence": {"max_pitch": "2 mm", "max_edge_distance": "0.8 mm"}}


def fenced(xs: list[float], y: float = 6.5, rules: dict[str, Any] | None = None, **circuit: Any) -> Sheet:
    """Return line la along y = 5 from 2 to 28 with pour above y = 6 from 10 to 20, vias at (xs, y)."""
    sheet = Sheet(rules or RULES, circuit)
    sheet.plane()
    sheet.line("la", [(2, 5), (28, 5)], 1.0, gap=0.5)
    sheet.copper(box(10, 6, 20, 10))
    for x in xs:
        sheet.via(x, y, "fence")
    return sheet


EVEN = [10.5, 12, 14, 16, 18, 19.5]


def test_full_row_passes() -> None:
    """Catches a sound row found; gaps of exactly the pitch pass, the ends of the edge count as axes."""
    assert fenced(EVEN).found("fence.max_pitch") == []


@pytest.mark.parametrize(("shift", "faults"), [(0.0, 0), (0.002, 1)])
def test_gap_in_the_row(shift: float, faults: int) -> None:
    """Catches a gap passed that is 2 um too wide, or found at the limit."""
    sheet = fenced([10.5, 12, 14 + shift, 16 + shift, 18, 19.5])
    found = sheet.found("fence.max_pitch")
    assert len(found) == faults
    if found:
        assert set(found[0].items) == {"la", "pour"}
        assert found[0].severity == "warning"
        assert found[0].measured == pytest.approx(2.002)
        assert near(found[0], 13, 6, 0.01)


def test_removed_via() -> None:
    """Catches a missing via in the middle, and its place."""
    finding = only(fenced([10.5, 12, 16, 18, 19.5]).found("fence.max_pitch"))
    assert finding.measured == pytest.approx(4.0)
    assert near(finding, 14, 6)


def test_removed_via_at_the_end() -> None:
    """Catches the ends of the stretch left out: 2.5 mm from the last axis to the corner."""
    finding = only(fenced([10.5, 12, 14, 16, 17.5]).found("fence.max_pitch"))
    assert finding.measured == pytest.approx(2.5, abs=0.01)


def test_pour_that_faces_no_line_needs_no_fence() -> None:
    """Catches rows asked for along the pour's other edges, or beside a line farther away than two gaps."""
    sheet = Sheet(RULES)
    sheet.line("la", [(2, 5), (28, 5)], 1.0, gap=0.5)
    sheet.copper(box(10, 6.6, 20, 10))
    assert sheet.found("fence.max_pitch") == []


def test_nothing_is_asked_for_near_parts() -> None:
    """Catches a row asked for where a part stands: within 0.3 mm of its outline."""
    sheet = fenced([10.5, 12, 18, 19.5])
    assert len(sheet.found("fence.max_pitch")) == 1
    sheet.part("C1", {"1": ("c", 15, 5, 1, 1)}, outline=box(12.2, 3, 17.8, 6.2))
    assert sheet.found("fence.max_pitch") == []


def test_vias_far_behind_the_edge_do_not_count() -> None:
    """Catches a via 0.9 mm behind the edge taken as a member of the row."""
    sheet = fenced([10.5, 12, 16, 18, 19.5])
    sheet.via(14, 6.9, "fence")
    assert len(sheet.found("fence.max_pitch")) == 1


def test_other_ground_vias_count() -> None:
    """Catches a row judged by fence vias alone: those of ground pads stand in it too."""
    sheet = fenced([10.5, 12, 16, 18, 19.5])
    sheet.via(14, 6.5, "part:R1")
    assert sheet.found("fence.max_pitch") == []


def test_row_around_a_bend() -> None:
    """Catches the long way along the edge taken for the distance of two axes inside a corner of pour."""
    sheet = Sheet(RULES)
    sheet.plane()
    sheet.line("la", [(2, 5), (20, 5), (20, 15)], 1.0, gap=0.5)
    sheet.copper(polygon((10, 6), (19, 6), (19, 15), (18, 15), (18, 7), (10, 7)))
    for x in (10.5, 12.5, 14.5, 16.5, 18.4):
        sheet.via(x, 6.6, "fence")
    for y in (8.5, 10.5, 12.5, 14.5):
        sheet.via(18.4, y, "fence")
    assert sheet.found("fence.max_pitch") == []


@pytest.mark.parametrize(("rows", "faults"), [((1, -1), 0), ((1,), 1), ((-1,), 1)])
def test_a_row_across_a_narrow_line_is_not_this_edges(rows: tuple[int, ...], faults: int) -> None:
    """Catches a missing row passed for the one across the line, as near as a fence may be: 0.8 mm."""
    sheet = Sheet({**RULES, "fence": {"max_pitch": "2 mm", "max_edge_distance": "0.8 mm"}})
    sheet.plane()
    sheet.line("la", [(5, 10), (25, 10)], 0.2, gap=0.15)
    for side in (1, -1):
        low, high = sorted((10 + side * 0.25, 10 + side * 4))
        sheet.copper(box(5, low, 25, high))
    for side in rows:
        for k in range(14):
            sheet.via(5.2 + 1.5 * k, 10 + side * 0.55, "fence")
    found = sheet.found("fence.max_pitch")
    assert len(found) == faults
    assert all(f.measured == pytest.approx(20.0) and near(f, 15, 10, 0.26) for f in found)


def test_narrow_pour_between_two_lines() -> None:
    """Catches one row in the middle of a narrow pour counted for one of its edges only."""
    sheet = Sheet(RULES)
    sheet.line("la", [(2, 5), (28, 5)], 1.0, gap=0.5)
    sheet.line("lb", [(2, 8), (28, 8)], 1.0, gap=0.5)
    sheet.copper(box(10, 6, 20, 7))
    for x in EVEN:
        sheet.via(x, 6.5, "fence")
    assert sheet.found("fence.max_pitch") == []


def test_tip_of_a_narrow_pour_without_vias() -> None:
    """Catches the last via of a finger taken as its own neighbour around the tip, 4 mm away."""
    sheet = Sheet(RULES)
    sheet.line("la", [(2, 5), (21.5, 5), (21.5, 8), (2, 8)], 1.0, gap=0.5)
    sheet.copper(box(10, 6, 20, 7))
    for x in EVEN[:-2]:
        sheet.via(x, 6.5, "fence")
    found = sheet.found("fence.max_pitch")
    assert found[0].measured == pytest.approx(9.0 - 2.0, abs=0.01)  # 4 + 1 + 4 mm less twice 0.5 mm, twice
    for x in EVEN[-2:]:
        sheet.via(x, 6.5, "fence")
    assert sheet.found("fence.max_pitch") == []


def test_wavelengths_govern_when_shorter() -> None:
    """Catches the smaller limit not taken, or the wrong name: c / (2.3 GHz sqrt(3.55)) = 69.18 mm."""
    rules = {"fence": {"max_pitch": "2 mm", "max_pitch_wavelengths": 0.028, "max_edge_distance": "0.8 mm"}}
    finding = only(fenced(EVEN, rules=rules).found("fence.max_pitch_wavelengths"))
    assert finding.limit == pytest.approx(0.028 * 69.18, abs=0.001)


def test_via_pitch_wins_over_the_fence() -> None:
    """Catches a fence that cannot be as dense as asked passed, or without the frequency it suits."""
    rules = {
        "fence": {"max_pitch": "2 mm", "max_pitch_wavelengths": 0.02, "max_edge_distance": "0.8 mm"},
        "vias": {"min_pitch": "1.6 mm"},
    }
    xs = [10.5 + 1.5 * k for k in range(7)]
    finding = only(fenced(xs, rules=rules).found("fence.max_pitch"))
    assert finding.severity == "warning"
    assert "up to 1.989 GHz" in finding.text  # 2.3 GHz x 0.02 x 69.18 mm / 1.6 mm


def test_no_fence_asked_for() -> None:
    """Catches a missing fence reported although the circuit wants none, or reported as checked."""
    sheet = fenced([], ground={"fence": False})
    assert sheet.found("fence.max_pitch") == []
    assert "no fence" in sheet.unchecked()["fence.max_pitch"]


@pytest.mark.parametrize(("behind", "faults"), [(0.8, 0), (0.802, 1)])
def test_edge_distance(behind: float, faults: int) -> None:
    """Catches a via passed too far behind the edge, or found at the limit."""
    found = fenced([14], 6 + behind).found("fence.max_edge_distance")
    assert len(found) == faults
    if found:
        assert set(found[0].items) == {"via:0", "pour"}
        assert found[0].measured == pytest.approx(behind)
        assert near(found[0], 14, 6 + behind / 2)


def test_pour_vias_may_stand_deep() -> None:
    """Catches vias that are not of the fence judged by its rule."""
    sheet = fenced(EVEN)
    sheet.via(15, 8, "pour")
    assert sheet.found("fence.max_edge_distance") == []


@pytest.mark.parametrize("off", [0.0, 0.4, -0.4])
def test_a_via_behind_a_corner_stands_by_both_edges(off: float) -> None:
    """Catches a via as far from both edges that counts for one of them, as rounding has it: a false gap."""
    stretch = shapely.LineString([(0, 0), (1_000_000, 0), (1_000_000, 1_000_000)])
    feet = list(_feet(stretch, np.array([[700_000.0 + off, 300_000.0]]), 400_000.0))
    assert sorted(round(foot.along) for foot in feet) == pytest.approx([700_000, 1_300_000], abs=1)
