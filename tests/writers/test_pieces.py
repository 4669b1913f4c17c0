"""Copper with holes cut into plain pieces."""

from __future__ import annotations

import numpy as np
import pytest
import shapely
from hypothesis import example, given
from hypothesis import strategies as st

from layoutgen.geometry import Ring
from layoutgen.writers.pieces import clean_pieces, cut_lines

CELL = 2_000_000


@st.composite
def pierced(draw: st.DrawFn) -> shapely.Polygon:
    """A skewed plate with round and slanted holes, one to a cell so that none touch."""
    columns, rows = draw(st.integers(1, 5)), draw(st.integers(1, 4))
    holes = []
    for column in range(columns):
        for row in range(rows):
            x, y = CELL * (column + 1), CELL * (row + 1)
            size, skew = draw(st.integers(2_000, 900_000)), draw(st.integers(-1000, 1000))
            if draw(st.booleans()):
                holes.append(Ring.circle(x + skew, y - skew, size).chords())
            else:
                holes.append(((x - size, y + skew), (x + skew, y - size), (x + size, y), (x, y + size)))
    width, height = CELL * (columns + 1), CELL * (rows + 1)
    outer = ((-7, 0), (width, -13), (width + 3, height), (0, height + 5))
    return shapely.Polygon(outer, draw(st.permutations(holes)))


@given(pierced())
def test_pieces_are_plain_and_cover_the_copper_once(polygon: shapely.Polygon) -> None:
    """A piece lost, doubled, with a hole or off the grid would show as area or as an invalid polygon."""
    pieces = [shapely.Polygon(points) for points in clean_pieces(polygon)]
    assert all(piece.is_valid and not piece.interiors for piece in pieces)
    vertices = sum(len(shapely.get_coordinates(ring)) for ring in (polygon.exterior, *polygon.interiors))
    allowed = (
        vertices * CELL
    )  # each crossing moves by at most half a nanometre, along edges up to a cell long
    assert shapely.union_all(pieces).symmetric_difference(polygon).area <= allowed
    assert abs(sum(piece.area for piece in pieces) - polygon.area) <= allowed


def test_neighbours_share_their_cut_exactly() -> None:
    """Pieces that rounded a slanted crossing differently would overlap or leave a sliver."""
    plate = shapely.Polygon(
        ((0, 0), (9_000_001, 777_777), (8_500_003, 6_000_000), (1, 5_123_457)),
        [((2_000_000, 1_500_000), (3_333_333, 4_000_001), (1_500_007, 3_000_000))],
    )
    pieces = [shapely.Polygon(points) for points in clean_pieces(plate)]
    assert len(pieces) == 2
    assert pieces[0].intersection(pieces[1]).area == 0.0
    assert shapely.union_all(pieces).area == sum(piece.area for piece in pieces)


def test_no_piece_exceeds_the_vertex_limit() -> None:
    """A record of more points than the format holds would be refused or wrapped by readers."""
    comb = [(k * 10_000, (k % 2) * 500_000) for k in range(600)] + [(5_990_000, -1_000_000), (0, -1_000_000)]
    plate = shapely.Polygon(comb)
    pieces = clean_pieces(plate, most=100)
    assert max(map(len, pieces)) <= 100
    assert shapely.union_all([shapely.Polygon(p) for p in pieces]).symmetric_difference(plate).area < 1e9


def test_a_row_of_holes_needs_one_cut() -> None:
    """Cutting at every hole instead of through all that line up would multiply the pieces."""
    holes = [Ring.circle(CELL * k, CELL, 500_000).chords() for k in range(1, 8)]
    assert len(clean_pieces(shapely.Polygon(Ring.box(0, 0, 8 * CELL, 2 * CELL).points, holes))) == 2


@given(st.lists(st.tuples(st.integers(0, 10**7), st.integers(3, 10**6)), min_size=1, max_size=30))
@example([(0, 10), (10, 10)])
@example([(0, 10), (9, 11)])
@example([(0, 10), (8, 11)])
def test_each_hole_is_met_by_a_cut(spans: list[tuple[int, int]]) -> None:
    """A cut that only grazes a hole leaves it in a piece."""
    ends = np.array([(low, low + size) for low, size in spans], dtype=float)
    cuts = cut_lines(ends)
    assert cuts == sorted(cuts)
    assert all(any(low < cut < high for cut in cuts) for low, high in ends)


@pytest.mark.parametrize("size", [3, 8190])
def test_what_needs_no_cut_is_left_as_it_is(size: int) -> None:
    """Cutting a legal polygon would add vertices to a line's own copper."""
    points = Ring.box(0, 0, 10, 10).points if size == 3 else tuple((k, (k % 2) + 5) for k in range(8188))
    points = (*points, (8188, 0), (0, 0)) if size != 3 else points
    assert clean_pieces(shapely.Polygon(points)) == [points]
