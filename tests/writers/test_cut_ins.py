"""Holes cut into one outline: the area stays, cuts are horizontal, arcs stay arcs."""

from __future__ import annotations

import itertools
import math
from collections import Counter

import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st

from layoutgen.geometry import Ring
from layoutgen.writers.cut_ins import arc_centre, one_outline
from layoutgen.writers.outlines import doubled_area

BOARD = Ring.box(0, 0, 10_000_000, 8_000_000)
QUARTER = math.tan(math.pi / 8)
ROUNDED = Ring(
    ((2_000_000, 0), (8_000_000, 0), (10_000_000, 2_000_000), (10_000_000, 6_000_000),
     (8_000_000, 8_000_000), (2_000_000, 8_000_000), (0, 6_000_000), (0, 2_000_000)),
    (0.0, QUARTER) * 4,
)  # fmt: skip


def area(ring: Ring) -> float:
    """Return the area [nm^2] of an outline, arcs as arcs."""
    return doubled_area(ring) / 2.0


def expected(outline: Ring, holes: list[Ring]) -> float:
    return abs(area(outline)) - math.fsum(abs(area(hole)) for hole in holes)


def region(ring: Ring) -> shapely.Geometry:
    return shapely.make_valid(shapely.Polygon(ring.chords(2)))


def test_without_holes_nothing_changes() -> None:
    """A pad must not get vertices that it does not have."""
    assert one_outline(BOARD, []) == BOARD


def test_an_outline_that_runs_clockwise_is_turned() -> None:
    """Holes must run against the outline, whichever way it came."""
    hole = Ring.circle(5_000_000, 4_000_000, 1_000_000)
    assert area(one_outline(Ring(BOARD.points[::-1]), [hole])) == pytest.approx(expected(BOARD, [hole]))


@pytest.mark.parametrize("outline", [BOARD, ROUNDED])
def test_a_grid_of_round_holes(outline: Ring) -> None:
    """Cuts in one row run through the same height: each must end at its neighbour, not run through it."""
    holes = [Ring.circle(x * 1_000_000, y * 1_000_000, 300_000) for x in range(1, 10) for y in range(1, 8)]
    if outline is ROUNDED:
        holes = [h for h in holes if region(outline).contains_properly(region(h))]
    one = one_outline(outline, holes)
    wanted = region(outline).difference(shapely.union_all([region(hole) for hole in holes]))
    rounding = 1.0 if outline is BOARD else 1e7  # a vertex put into an arc is off it by half a nanometre
    assert area(one) == pytest.approx(expected(outline, holes), abs=rounding)
    assert region(one).symmetric_difference(wanted).area < 1e-6 * wanted.area


def test_arcs_stay_arcs() -> None:
    """Chords instead of arcs would lose up to a micrometre along every round edge."""
    hole = Ring.circle(5_000_000, 4_000_000, 1_000_000)
    one = one_outline(ROUNDED, [hole])
    assert sum(bulge != 0.0 for bulge in one.bulges) == 4 + 2


def test_a_cut_that_meets_an_arc_splits_it_on_its_circle() -> None:
    """The new vertex must lie on the circle within a rounding, and both pieces must have its centre."""
    outline = Ring.circle(0, 0, 5_000_000)
    one = one_outline(outline, [Ring.box(-1_000_000, 1_000_000, 1_000_000, 2_000_000)])
    ends = list(zip(one.points, (*one.points[1:], one.points[0]), one.bulges, strict=True))
    arcs = [(p, q, b) for p, q, b in ends if b]
    assert len(arcs) == 3
    for start, end, bulge in arcs:
        assert math.dist(arc_centre(start, end, bulge), (0, 0)) < 3.0
        assert abs(math.hypot(*start) - 5_000_000) < 1.0


def test_a_west_end_inside_an_arc_becomes_a_vertex() -> None:
    """A hole whose westmost point is on an arc, at no vertex, would be cut across its own edge."""
    ring = Ring(
        tuple((round(5e6 + 1e6 * math.cos(a)), round(4e6 + 1e6 * math.sin(a))) for a in (-1.0, 1.1)),
        (math.tan(2.1 / 4), math.tan((2 * math.pi - 2.1) / 4)),
    )
    one = one_outline(BOARD, [ring])
    assert area(one) == pytest.approx(expected(BOARD, [ring]), rel=1e-7)
    assert min(x for x, y in one.points if x > 0 and 0 < y < 8_000_000) == pytest.approx(4_000_000, abs=2)


def test_holes_that_touch_each_other_need_no_cut_between() -> None:
    """A cut of no length would be a draw of no length, which readers refuse."""
    first = Ring.box(2_000_000, 2_000_000, 4_000_000, 4_000_000)
    second = Ring(((4_000_000, 3_000_000), (6_000_000, 2_000_000), (6_000_000, 4_000_000)))
    one = one_outline(BOARD, [second, first])
    assert all(p != q for p, q in itertools.pairwise(one.points))
    assert area(one) == pytest.approx(expected(BOARD, [first, second]))


def test_a_hole_outside_is_refused() -> None:
    """A cut that meets nothing would run to the end of the world."""
    with pytest.raises(ValueError, match="outside"):
        one_outline(BOARD, [Ring.box(-3_000_000, 1_000_000, -2_000_000, 2_000_000)])


@st.composite
def holes_in_board(draw: st.DrawFn) -> list[Ring]:
    """Return holes of any form, none touching another, one to a cell of a grid."""
    holes = []
    for column, row in itertools.product(range(5), range(4)):
        if not draw(st.booleans()):
            continue
        x = 1_000_000 + 2_000_000 * column + draw(st.integers(-99_999, 99_999))
        y = 1_000_000 + 2_000_000 * row + draw(st.integers(-99_999, 99_999))
        radius = draw(st.integers(1_000, 800_000))
        turn = draw(st.floats(0.0, 2.0 * math.pi))
        sides = draw(st.integers(2, 6))
        angles = [turn + 2.0 * math.pi * k / sides for k in range(sides)]
        points = tuple((round(x + radius * math.cos(a)), round(y + radius * math.sin(a))) for a in angles)
        round_edges = sides == 2 or draw(st.booleans())
        bulges = (math.tan(math.pi / 2.0 / sides),) * sides if round_edges else ()
        holes.append(Ring(points, bulges))
    return holes


@given(holes_in_board())
@settings(max_examples=60, deadline=None)
def test_any_holes_keep_the_area_and_cut_horizontally(holes: list[Ring]) -> None:
    """The area of the one outline is the outline's less the holes', and each cut is run twice, level."""
    one = one_outline(BOARD, holes)
    edges = zip(one.points, (*one.points[1:], one.points[0]), strict=True)
    straight = one.bulges or (0.0,) * len(one.points)
    counts = Counter(frozenset(edge) for edge, bulge in zip(edges, straight, strict=True) if not bulge)
    cuts = [edge for edge, count in counts.items() if count == 2]
    assert max(counts.values()) <= 2
    assert all(len({y for _, y in cut}) == 1 for cut in cuts)
    edge_length = 1e7 * 4 + sum(2 * math.pi * 8e5 for _ in holes)
    assert abs(area(one) - expected(BOARD, holes)) < 1.0 * edge_length
