"""Bands, sectors, letters."""

from __future__ import annotations

import math
import string

import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st

from layoutgen.geometry import band, lettering, lettering_size, printable, sector_cover, sector_ring, stroke


def _path(turns: list[int], leg: int) -> list[tuple[int, int]]:
    heading, points = 0.0, [(0, 0)]
    for turn in [*turns, 0]:
        x, y = points[-1]
        rad = math.radians(heading)
        points.append((round(x + leg * math.cos(rad)), round(y + leg * math.sin(rad))))
        heading += turn
    return points


@settings(max_examples=100, deadline=None, derandomize=True)
@given(
    st.lists(st.sampled_from((-90, -45, 45, 90)), max_size=4),
    st.integers(100_001, 2_000_000),
    st.integers(100_000, 1_500_000),
)
def test_nothing_outside_a_band_is_nearer_to_the_stroke_than_the_gap(
    turns: list[int], width: int, gap: int
) -> None:
    """Would catch a pour that comes too near at bends, where offset edges meet inside the corner."""
    path = _path(turns, 6_000_000)
    line = shapely.Polygon(stroke(path, width).points)
    if not line.is_valid:
        return
    area = band(path, math.ceil(width / 2) + gap, gap, gap)
    assert area.covers(line)
    assert area.boundary.distance(line) >= gap - 1e-3


def test_band_of_a_straight_line_is_exact() -> None:
    """Would catch a gap that is not the one asked for along straight lines."""
    assert band([(0, 0), (5000, 0)], 700, 100, 200).equals(shapely.box(-100, -700, 5200, 700))


def test_band_corners_are_square() -> None:
    """Would catch chords or bevels at the band's outer corner."""
    area = band([(0, 0), (5000, 0), (5000, 5000)], 700, 0, 0)
    assert area.equals(shapely.union(shapely.box(0, -700, 5700, 700), shapely.box(4300, -700, 5700, 5000)))


@settings(max_examples=60, deadline=None, derandomize=True)
@given(
    st.floats(20.0, 150.0),
    st.integers(200_000, 1_000_000),
    st.integers(1_500_000, 9_000_000),
    st.floats(0.0, 359.0),
)
def test_sector_has_its_radii_and_opening(sector: float, inner: int, outer: int, heading: float) -> None:
    """Would catch a stub whose arc is not about the apex, or whose sides miss the sector angle."""
    apex = (3_000_000, -2_000_000)
    ring = sector_ring(apex, heading, sector, inner, outer)
    on_arc = ring.points[2:-2]
    for x, y in on_arc:
        assert math.dist((x, y), apex) == pytest.approx(outer, abs=1.5)
    assert 4.0 * math.degrees(math.atan(max(ring.bulges))) <= 30.0 + 1e-9
    chord = math.dist(on_arc[0], on_arc[-1])
    assert 2.0 * math.degrees(math.asin(chord / 2.0 / outer)) == pytest.approx(sector, abs=1e-3)
    polygon = ring.polygon()
    assert polygon.is_valid
    assert polygon.exterior.is_ccw
    axis = math.radians(heading)
    tip = shapely.Point(apex[0] + outer * math.cos(axis), apex[1] + outer * math.sin(axis))
    assert polygon.exterior.distance(tip) <= 1_000.0
    assert sector_cover(apex, heading, sector, inner, outer).covers(polygon)


def test_sector_neck_is_as_wide_as_the_chord_at_the_inner_radius() -> None:
    """Would catch a throat other than 2 r sin(sector / 2), which sets the stub's impedance at its feed."""
    ring = sector_ring((0, 0), 90.0, 60.0, 500_000, 5_000_000)
    xs = [x for x, y in ring.points if y == 0]
    assert max(xs) - min(xs) == 500_000


def test_sector_grown_by_the_undercut_is_wider_everywhere_by_it() -> None:
    """Would catch an undercut lost on the arc or on the sides."""
    plain = sector_ring((0, 0), 0.0, 60.0, 500_000, 5_000_000)
    grown = sector_ring((0, 0), 0.0, 60.0, 500_000, 5_000_000, 35_000)
    distance = grown.polygon(10.0).exterior.distance(plain.polygon(10.0).exterior)
    assert distance == pytest.approx(35_000, abs=30)
    assert grown.polygon(10.0).exterior.hausdorff_distance(plain.polygon(10.0).exterior) < 35_000 * 1.5


@pytest.mark.parametrize(
    ("sector", "inner", "outer"), [(180.0, 1, 2), (0.0, 1, 2), (60.0, 2, 2), (60.0, 0, 2)]
)
def test_sectors_that_do_not_exist_are_refused(sector: float, inner: int, outer: int) -> None:
    """Would catch a degenerate outline reaching the artwork."""
    with pytest.raises(ValueError, match="sector"):
        sector_ring((0, 0), 0.0, sector, inner, outer)


@pytest.mark.parametrize("letter", [*string.digits, *string.ascii_letters, *string.punctuation])
@pytest.mark.parametrize("upright", [False, True])
def test_letters_fill_the_box_that_is_told_for_them(letter: str, upright: bool) -> None:
    """Would catch a letter drawn outside its box: texts would touch pads that the box keeps off."""
    height, pen = 900_000, 150_000
    width, depth, above = lettering_size(letter, height, pen)
    x0, y0, x1, y1 = lettering(letter, 0, 0, height, pen, upright).bounds
    if upright:
        x0, y0, x1, y1 = y0, -x1, y1, -x0
    assert x0 >= -2 and y0 >= -depth - 2 and x1 <= width + 2 and y1 <= above + 2


@pytest.mark.parametrize("letter", [*string.digits, *string.ascii_letters])
def test_letters_are_written_with_the_pen_given(letter: str) -> None:
    """Would catch strokes thinner than the board house can print."""
    pen = 150_000
    ink = lettering(letter, 0, 0, 1_000_000, pen)
    reachable = ink.buffer(-0.48 * pen).buffer(0.48 * pen * 1.05)
    assert shapely.difference(ink, reachable).area < 0.02 * pen * pen


def test_no_two_letters_look_alike() -> None:
    """Would catch a slip in the alphabet: the same strokes for two letters."""
    letters = string.digits + string.ascii_letters + string.punctuation
    drawn = {letter: lettering(letter, 0, 0, 1_000_000, 100_000) for letter in letters}
    for i, a in enumerate(letters):
        for b in letters[i + 1 :]:
            assert drawn[a].symmetric_difference(drawn[b]).area > 5e9, (a, b)


def test_texts_are_made_of_their_letters_only() -> None:
    """Would catch foreign letters that vanish from a title without a trace."""
    assert printable("Pegel Süd № 3") == "Pegel Sud No 3"
    assert printable("水") == "?"
    assert lettering_size("AB", 600, 0)[0] == pytest.approx(1000.0)
