"""Strokes: mitre geometry by facts of the trade, widths, corners."""

from __future__ import annotations

import itertools
import math

import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st

from layoutgen.geometry import mitre_for_turn, mitre_reach, path_length, stroke, turn_degrees

MIL = 25_400


@pytest.mark.parametrize(
    ("width", "height", "diagonal", "cut", "past_inner"),
    [(19.685, 25.0, 27.838, 20.726, 9.626), (1112.0, 22.0, 1572.61, 817.75, 44.48)],
)
def test_right_angle_mitre_has_the_published_diagonal_cut_and_overreach(
    width: float, height: float, diagonal: float, cut: float, past_inner: float
) -> None:
    """Douville-James as two calculator pages print it [mil]; catches X taken on the edge, or sqrt(2) lost."""
    percent = 52.0 + 65.0 * math.exp(-1.35 * width / height)
    w = round(width * MIL)
    far = 20 * w
    ring = stroke([(0, 0), (far, 0), (far, far)], w, [percent])
    line = shapely.Polygon(ring.points)
    corner = shapely.Point(far + w / 2, -w / 2)
    assert line.distance(corner) / MIL == pytest.approx(cut, abs=2e-3 * cut**0.5)
    inner = (far - w / 2, w / 2)
    assert math.dist((corner.x, corner.y), inner) / MIL == pytest.approx(diagonal, rel=1e-4)
    on_edge = max(x for x, y in ring.points if abs(y + w // 2) <= 1)
    assert (inner[0] - on_edge) / MIL == pytest.approx(past_inner, abs=2e-2)


@pytest.mark.parametrize("percent", [0.0, 30.0, 56.37, 98.38])
def test_chamfer_legs_are_twice_width_times_mitre(percent: float) -> None:
    """Would catch the leg taken as sqrt(2) W M / 100, an error seen in public code."""
    w = 1_000_000
    ring = stroke([(0, 0), (9 * w, 0), (9 * w, 9 * w)], w, [percent])
    leg = (9 * w + w // 2) - max(x for x, y in ring.points if y == -w // 2)
    assert leg == pytest.approx(2.0 * w * percent / 100.0, abs=1.0)


@pytest.mark.parametrize("turn", [30.0, 45.0, 90.0, -45.0, -90.0])
def test_mitre_cuts_the_same_share_of_the_corner_at_every_angle(turn: float) -> None:
    """Would catch a mitre for a right angle used at 45 degrees, where it cuts into the line."""
    percent, w = 60.0, 2_000_000
    scaled = mitre_for_turn(percent, turn, w, 0.0)
    shares = []
    for angle, mitre in ((turn, scaled), (90.0, percent)):
        rad = math.radians(angle)
        far = 10 * w
        path = [(0, 0), (far, 0), (round(far + far * math.cos(rad)), round(far * math.sin(rad)))]
        whole, cut = (shapely.Polygon(stroke(path, w, [m]).points).area for m in (0.0, mitre))
        half = abs(rad) / 2.0
        excess = (w / 2.0) ** 2 * math.tan(half)  # the triangle beyond the line between the two square ends
        shares.append((whole - cut) / (4.0 * excess))
    assert shares[0] == pytest.approx(shares[1], rel=1e-4)


def test_mitre_is_reduced_to_leave_the_neck() -> None:
    """Would catch a neck thinner than the board house can etch at narrow lines."""
    percent = mitre_for_turn(98.38, 90.0, 250.0, 125.0)
    diagonal = 250.0 * math.sqrt(2.0)
    assert diagonal * (1.0 - percent / 100.0) == pytest.approx(125.0)


@pytest.mark.parametrize(("percent", "turn"), [(52.0, 90.0), (85.0, 90.0), (32.0, 45.0), (10.0, 90.0)])
def test_reach_is_where_the_stroke_is_straight_again(percent: float, turn: float) -> None:
    """Would catch a reach that is too short: a leg of that length would run into the chamfer."""
    w, far = 1_000_000, 30_000_000
    rad = math.radians(turn)
    path = [(0, 0), (far, 0), (round(far + far * math.cos(rad)), round(far * math.sin(rad)))]
    straight_until = max(x for x, y in stroke(path, w, [percent]).points if y == -w // 2)
    inner_until = max(x for x, y in stroke(path, w, [percent]).points if y == w // 2)
    assert far - min(straight_until, inner_until) == pytest.approx(mitre_reach(percent, turn, w), abs=2.0)


@settings(max_examples=80, deadline=None, derandomize=True)
@given(
    st.integers(100_000, 3_000_000),
    st.lists(st.sampled_from((-90, -45, 45, 90)), min_size=0, max_size=4),
    st.floats(20.0, 70.0),
)
def test_stroke_is_a_valid_counter_clockwise_outline_of_the_right_area(
    width: int, turns: list[int], percent: float
) -> None:
    """Would catch crossed outlines and corners counted twice: area = width x length less the mitres."""
    heading, points, leg = 0.0, [(0, 0)], 10 * width
    for turn in [*turns, 0]:
        x, y = points[-1]
        points.append(
            (
                round(x + leg * math.cos(math.radians(heading))),
                round(y + leg * math.sin(math.radians(heading))),
            )
        )
        heading += turn
    if not shapely.LineString(points).is_simple:
        return
    ring = stroke(points, width, [mitre_for_turn(percent, t, width, 0.0) for t in turns])
    area = shapely.Polygon(ring.points)
    expected = width * path_length(points)
    for turn in turns:
        half = math.radians(abs(turn)) / 2.0
        cut = mitre_for_turn(percent, turn, width, 0.0) / 100.0 * width / math.cos(half)
        expected -= cut**2 / math.tan(half)
    if area.is_valid:  # legs may pass near each other when the path curls up
        assert area.exterior.is_ccw
        assert area.area == pytest.approx(expected, rel=1e-5)


def test_turns_are_signed() -> None:
    """Would catch left and right swapped."""
    assert turn_degrees((0, 0), (1, 0), (1, 1)) == pytest.approx(90.0)
    assert turn_degrees((0, 0), (1, 0), (1, -1)) == pytest.approx(-90.0)
    assert turn_degrees((0, 0), (1, 0), (2, 1)) == pytest.approx(45.0)


@pytest.mark.parametrize(("path", "mitres"), [([(0, 0)], ()), ([(0, 0), (9, 0), (9, 9)], (50.0, 50.0))])
def test_paths_and_mitres_that_do_not_match_are_refused(
    path: list[tuple[int, int]], mitres: tuple[float, ...]
) -> None:
    """Would catch a mitre silently applied to the wrong bend."""
    with pytest.raises(ValueError, match=r"vertices|bends"):
        stroke(path, 2, mitres)


def test_a_chamfer_that_ends_at_a_square_end_gives_no_point_twice() -> None:
    """Would catch edges of no length, which an offset cannot turn into a normal."""
    half = 1_000 * math.tan(math.radians(22.5))
    reach = round(mitre_reach(60.0, 45.0, 2_000.0))
    assert reach > half
    for length in range(reach - 3, reach + 4):
        ring = stroke(
            [(0, 0), (10_000, 0), (10_000 + round(length * 0.7071), round(length * 0.7071))], 2_000, [60.0]
        )
        assert all(a != b for a, b in itertools.pairwise((*ring.points, ring.points[0])))
