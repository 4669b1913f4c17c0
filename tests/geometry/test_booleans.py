"""Booleans and offsets: on the grid, exact, corners kept."""

from __future__ import annotations

import math

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st
from shapely import affinity
from shapely.geometry.base import BaseGeometry

from layoutgen.geometry import (
    Ring,
    circumscribed,
    closed,
    cut,
    grow,
    joined,
    offset_ring,
    offset_rings,
    opened,
    overlap,
    pieces,
    rings_of,
    sharpened,
)

COORDINATE = st.integers(-40_000_000, 40_000_000)


@settings(max_examples=80, deadline=None, derandomize=True)
@given(COORDINATE, COORDINATE, st.integers(10_000, 5_000_000), st.sampled_from((8, 16, 32, 64)))
def test_circumscribed_polygon_holds_the_circle(x: int, y: int, radius: int, sides: int) -> None:
    """Would catch an inscribed polygon, whose flats come nearer than the distance asked for."""
    polygon = circumscribed(x, y, radius, sides)
    assert polygon.exterior.distance(shapely.Point(x, y)) >= radius
    assert max(math.dist(p, (x, y)) for p in polygon.exterior.coords) <= (radius + 3) / math.cos(
        math.pi / sides
    )


def test_booleans_stay_on_the_nanometre_grid() -> None:
    """Would catch plain booleans, which leave fractions of a nanometre where skew edges cross."""
    rng = np.random.default_rng(7)
    shapes = [
        shapely.Polygon(rng.integers(-(10**7), 10**7, (3, 2)).astype(float)).buffer(0) for _ in range(40)
    ]
    for result in (
        joined(shapes),
        cut(shapes[0], shapes[1]),
        overlap(joined(shapes[:9]), joined(shapes[9:])),
    ):
        coordinates = shapely.get_coordinates(result)
        assert np.array_equal(coordinates, np.rint(coordinates))


def test_touching_shapes_leave_no_lines_or_points_behind() -> None:
    """Would catch a mixed result, on which the next boolean fails."""
    left, right = shapely.box(0, 0, 10, 10), shapely.box(10, 2, 20, 8)
    assert overlap(left, right).is_empty
    partly = overlap(
        shapely.MultiPolygon([left, shapely.box(30, 0, 40, 10)]), joined([right, shapely.box(25, 0, 35, 5)])
    )
    assert {part.geom_type for part in shapely.get_parts(partly)} == {"Polygon"}
    assert cut(partly, left).area == partly.area


def test_growing_keeps_right_angles_and_cuts_acute_tips() -> None:
    """Would catch round joins (chords on the pour) and mitres that shoot far out of a sharp tip."""
    square = grow(shapely.box(0, 0, 1000, 1000), 300)
    assert square.equals(shapely.box(-300, -300, 1300, 1300))
    tip = grow(shapely.Polygon([(0, 0), (10_000, 900), (10_000, -900)]), 300)
    assert tip.bounds[0] > -300 * 1.6


def test_opening_takes_fins_and_leaves_the_rest_untouched() -> None:
    """Would catch an opening that rounds corners or moves edges that need no change."""
    body = shapely.box(0, 0, 10_000, 10_000)
    fin = shapely.box(10_000, 4000, 15_000, 4400)
    assert opened(joined([body, fin]), 250).equals(body)
    assert opened(joined([body, fin]), 150).equals(joined([body, fin]))


def test_closing_fills_slits_and_leaves_the_rest_untouched() -> None:
    """Would catch a closing that grows the outline."""
    comb = cut(shapely.box(0, 0, 10_000, 10_000), shapely.box(4000, 2000, 4400, 10_000))
    assert closed(comb, 250).equals(shapely.box(0, 0, 10_000, 10_000))
    assert closed(comb, 150).equals(comb)


def test_pieces_are_in_the_same_order_however_they_were_made() -> None:
    """Would catch an order that depends on how a union was computed."""
    boxes = [shapely.box(x, y, x + 5, y + 5) for x in (0, 10, 20) for y in (0, 10)]
    assert [p.bounds for p in pieces(joined(boxes))] == [p.bounds for p in pieces(joined(boxes[::-1]))]


def test_rings_run_outline_ccw_holes_cw_without_straight_vertices() -> None:
    """Would catch outlines the wrong way round, and vertices in the middle of an edge."""
    polygon = shapely.Polygon(
        [(0, 0), (0, 50), (0, 100), (100, 100), (100, 0), (50, 0)], [[(20, 20), (40, 20), (40, 40), (20, 40)]]
    )
    outline, holes = rings_of(polygon)
    assert outline.points == ((0, 0), (100, 0), (100, 100), (0, 100))
    assert not shapely.LinearRing(holes[0].points).is_ccw
    assert holes[0].points[0] == (20, 20)


def test_offset_moves_every_edge_by_the_distance_and_holes_shrink() -> None:
    """Would catch an undercut that widens holes, or that is lost at bends."""
    polygon = shapely.Polygon(
        [(0, 0), (900, 0), (900, 500), (0, 500)], [[(100, 100), (100, 300), (300, 300), (300, 100)]]
    )
    ((outline, holes),) = offset_rings(polygon, 20)
    assert outline.points == ((-20, -20), (920, -20), (920, 520), (-20, 520))
    assert shapely.Polygon(holes[0].points).bounds == (120, 120, 280, 280)
    assert offset_rings(polygon, 0) == [rings_of(polygon)]


@settings(max_examples=50, deadline=None, derandomize=True)
@given(st.integers(1, 60), st.integers(0, 89))
def test_offset_of_a_turned_box_is_exact_within_rounding(distance: int, degrees: int) -> None:
    """Would catch an offset that is only right for edges along the axes."""
    c, s = math.cos(math.radians(degrees)), math.sin(math.radians(degrees))
    points = tuple(
        (round(x * c - y * s), round(x * s + y * c)) for x, y in ((0, 0), (9000, 0), (9000, 4000), (0, 4000))
    )
    grown = offset_ring(Ring(points), distance)
    assert shapely.Polygon(points).exterior.distance(shapely.Polygon(grown.points).exterior) == pytest.approx(
        distance, abs=1.5
    )


def test_offset_of_a_circle_is_a_circle_and_other_arcs_are_refused() -> None:
    """Would catch arcs that are turned into chords without a word."""
    assert offset_ring(Ring.circle(5, 7, 100), 30) == Ring.circle(5, 7, 130)
    with pytest.raises(ValueError, match="straight"):
        offset_ring(Ring(((0, 0), (10, 0), (10, 10)), (0.0, 0.5, 0.0)), 3)


def test_edges_that_would_turn_over_are_dropped() -> None:
    """Would catch hairline spikes where a chamfer in a notch is shorter than the offset."""
    notch = [(0, 0), (1000, 0), (1000, 1000), (520, 1000), (520, 500), (519, 490), (501, 490), (500, 500)]
    polygon = shapely.Polygon([*notch, (500, 1000), (0, 1000)]).difference(shapely.box(0, 0, 1, 1))
    wide = shapely.Polygon(
        [(0, 0), (9000, 0), (9000, 9000), (5000, 9000), (5000, 5000), (4995, 4990), (4500, 9000), (0, 9000)]
    )
    for shape, distance in ((polygon, 5), (wide, 40)):
        for outline, holes in offset_rings(shape, distance):
            grown = shapely.Polygon(outline.points, [hole.points for hole in holes])
            assert grown.is_valid
            assert grown.buffer(1).covers(shape)
            assert grown.buffer(2).covers(shape.buffer(distance, quad_segs=1))
            assert all(shape.distance(shapely.Point(p)) <= 1.5 * distance for p in outline.points)


@pytest.mark.parametrize("points", [((0, 0), (10, 0), (20, 0), (5, 0)), ((0, 0), (100, 0), (100, 1), (0, 1))])
def test_outlines_of_which_nothing_is_left_are_refused(points: tuple[tuple[int, int], ...]) -> None:
    """Would catch a division by zero, or an endless search, on outlines without body."""
    with pytest.raises(ValueError, match=r"sensible|folds"):
        offset_ring(Ring(points), -5)


def test_tiny_chamfers_are_made_corners() -> None:
    """Would catch edges of a few nanometres that no maker can etch and no offset survives."""
    chamfered = shapely.Polygon(
        [(0, 0), (9000, 0), (9000, 4005), (8995, 4000), (5004, 4000), (5000, 4004), (5000, 9000), (0, 9000)]
    )
    outline, _ = rings_of(sharpened(chamfered, 50.0))
    assert outline.points == ((0, 0), (9000, 0), (9000, 4000), (5000, 4000), (5000, 9000), (0, 9000))
    large = shapely.Polygon([(0, 0), (9000, 0), (9000, 9000), (500, 9000), (0, 8500)])
    assert sharpened(large, 50.0).equals(large)


def test_a_polygon_too_fine_for_exact_offset_still_comes_out_valid() -> None:
    """Would catch crossed outlines from edges shorter than the offset."""
    notched = shapely.Polygon(
        [(0, 0), (1000, 0), (1000, 1000), (505, 1000), (500, 990), (495, 1000), (0, 1000)]
    )
    for outline, holes in offset_rings(notched, 80):
        assert shapely.Polygon(outline.points, [h.points for h in holes]).is_valid


def _notched(seed: int) -> shapely.Polygon:
    """Return a strip [nm], turned, with notches, some at a slant; every third has very fine ones."""
    random = np.random.default_rng(seed)
    length, width = (int(random.integers(*span)) for span in ((50_000, 200_000), (8_000, 40_000)))
    strip: BaseGeometry = shapely.box(0, 0, length, width)
    for _ in range(int(random.integers(1, 4))):
        deep = int(random.choice([1_000, 1_500, width // 3] if seed % 3 else [3, 100, 1_500, width // 3]))
        wide = int(random.choice([900, 3_000, 30_000] if seed % 3 else [5, 50, 3_000, 30_000]))
        at = int(random.integers(-5_000, length))
        notch = shapely.box(at, width - deep, at + wide, width + 5)
        tilt = float(random.choice([0.0, 0.0, random.uniform(-40.0, 40.0)]))
        strip = strip.difference(affinity.rotate(notch, tilt))
    turned = affinity.rotate(strip, float(random.choice([0.0, 45.0, 90.0, 33.0])), origin=(0, 0))
    return max(pieces(shapely.set_precision(turned, 1.0)), key=lambda piece: piece.area)


@pytest.mark.parametrize("distance", [20, 200, 2_000, 4_000])
def test_offset_of_notched_strips_is_the_mitred_buffer(distance: int) -> None:
    """Would catch a division by zero at repeated points, and crossed or wrong outlines at fine notches."""
    compared = 0
    for seed in range(150):
        strip = _notched(seed)
        (outline, _), at = rings_of(shapely.Polygon(strip.exterior)), seed % 3
        twice = Ring((*outline.points[: at + 1], outline.points[at], *outline.points[at + 1 :]))
        grown = shapely.Polygon(offset_ring(twice, distance).points)
        assert grown.is_valid, seed
        allowed = 0.05 * distance + 10.0
        around = shapely.Polygon(strip.buffer(distance, quad_segs=32).exterior)
        assert grown.buffer(allowed).covers(around), seed
        assert shapely.Polygon(strip.buffer(5.1 * distance + 10.0).exterior).covers(grown), seed
        wanted = strip.buffer(distance, join_style="mitre", mitre_limit=5.0)
        if seed % 3 and wanted.geom_type == "Polygon" and wanted.is_valid:  # it may break at fine notches
            edge = shapely.Polygon(wanted.exterior).exterior
            assert edge.hausdorff_distance(grown.exterior) <= allowed + 2.0, seed
            compared += 1
    assert compared > 90


def test_repeated_points_and_points_on_an_edge_do_not_move_an_offset() -> None:
    """Would catch the traceback on a pair whose end chamfer meets its square end in one point twice."""
    box = ((0, 0), (0, 0), (900, 0), (900, 500), (900, 500), (450, 500), (0, 500))
    assert set(offset_ring(Ring(box), 20).points) == {(-20, -20), (920, -20), (920, 520), (-20, 520)}


def test_a_notch_narrower_than_twice_the_offset_closes() -> None:
    """Would catch a refusal, or walls of a notch that pass through each other."""
    notched = Ring(((0, 0), (900, 0), (900, 500), (420, 500), (420, 300), (390, 300), (390, 500), (0, 500)))
    closed_up = shapely.Polygon(offset_ring(notched, 20).points)
    assert closed_up.equals(shapely.box(-20, -20, 920, 520))
    open_still = shapely.Polygon(offset_ring(notched, 10).points)
    assert open_still.area == 920 * 520 - 10 * 200
