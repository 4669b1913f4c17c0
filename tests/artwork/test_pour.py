"""The pour: even gap, square corners, nothing that cannot be etched."""

from __future__ import annotations

from types import ModuleType

import numpy as np
import pytest
import shapely

from layoutgen.artwork import Artwork, draw

NAMES = ("straight", "tee", "feed", "stage", "shorted")
SEEDS = range(40)


def _copper(artwork: Artwork, measures: ModuleType, element: str) -> shapely.Geometry:
    shapes = [
        s
        for s in artwork.on("copper_top")
        if s.origin.element == element and s.role in ("line", "pair", "radial")
    ]
    return shapely.union_all([measures.polygon(s) for s in shapes])


def _own_ends(placement: object, name: str) -> shapely.Geometry:
    """Return the last bit of a line that ends on gnd, where the pour is to meet it."""
    line = placement.lines[name]  # type: ignore[attr-defined]
    return shapely.Point(line.path[-1]).buffer(1_100_000) if line.nets[-1] == "gnd" else shapely.Polygon()


@pytest.mark.parametrize("name", NAMES)
def test_pour_keeps_each_lines_own_gap_everywhere(
    boards: ModuleType, measures: ModuleType, name: str
) -> None:
    """Would catch a pour nearer than the impedance allows, at bends, ends, tees or ports."""
    placement = boards.BOARDS[name]().placement()
    artwork = draw(placement)
    pour = shapely.union_all(measures.areas(artwork, "pour"))
    sized = placement.sized
    for element, gap in [
        *((n, s.pour_gap) for n, s in sized.lines.items()),
        *((n, s.pour_gap) for n, s in sized.pairs.items()),
        *((n, s.pour_gap) for n, s in sized.radials.items()),
    ]:
        end = _own_ends(placement, element) if element in placement.lines else shapely.Polygon()
        near = shapely.difference(_copper(artwork, measures, element), end)
        assert near.distance(pour) >= gap * 1e9 - 0.01, element


@pytest.mark.parametrize("seed", SEEDS)
def test_pour_keeps_its_distances_on_random_boards(
    boards: ModuleType, measures: ModuleType, random_boards: ModuleType, seed: int
) -> None:
    """Would catch a gap lost in cleaning: to lines, to other pads, to drilled holes, to the profile."""
    made = random_boards.RandomBoard(seed, boards.BoardBuilder)
    placement = made.board.placement()
    artwork = draw(placement)
    pour = shapely.union_all(measures.areas(artwork, "pour", undercut=made.undercut))
    slack = 500.0 if made.undercut else 1.0  # what finding the finished outline again costs
    for name, line in placement.sized.lines.items():
        copper = _copper(artwork, measures, name).buffer(-made.undercut, join_style="mitre")
        assert copper.distance(pour) >= line.pour_gap * 1e9 - slack
    pads = [pad for part in placement.parts.values() for pad in part.pads if pad.net != "gnd"]
    for pad in pads:
        assert pad.outline.polygon().distance(pour) + slack >= 125_000
    for hole in placement.holes:
        away = shapely.Point(hole.x, hole.y).distance(pour)
        assert hole.plated or away + slack >= hole.diameter / 2 + 200_000
    board = shapely.box(0, 0, placement.width, placement.height)
    assert board.exterior.distance(pour) + slack >= 300_000


@pytest.mark.parametrize("seed", SEEDS)
def test_ground_copper_can_be_etched_on_random_boards(
    boards: ModuleType, measures: ModuleType, random_boards: ModuleType, seed: int
) -> None:
    """Would catch slivers, slits, sharp notches and islands that the cleaning left or made."""
    made = random_boards.RandomBoard(seed, boards.BoardBuilder)
    placement = made.board.placement()
    artwork = draw(placement)
    ground = measures.ground(artwork, made.undercut)
    assert measures.too_thin(ground, 124_000).is_empty
    void = shapely.box(0, 0, placement.width, placement.height).difference(ground).buffer(1)
    assert measures.too_thin(void, 124_000).is_empty
    assert [at for angle, at in measures.corners(ground, 20.0) if angle < 84.9] == []
    assert all(piece.area >= 0.5e12 for piece in measures.areas(artwork, "pour", undercut=made.undercut))


def test_gap_along_a_straight_line_is_exact_on_both_sides(boards: ModuleType) -> None:
    """Would catch a pour a few micrometres off, or one that is not even."""
    artwork = draw(boards.straight().placement())
    ys = {y for s in artwork.on("copper_top") if s.role == "pour" for _, y in s.outline.points}
    assert {8_000_000 - 550_000 - 1_000_000, 8_000_000 + 550_000 + 1_000_000} < ys
    assert artwork.line_copper["main"].gap_left == artwork.line_copper["main"].gap_right == 1_000_000


@pytest.mark.parametrize("name", ["straight", "feed"])
def test_pour_has_square_corners_beside_lines(boards: ModuleType, name: str) -> None:
    """Would catch chords and bevels in the pour's edges (the board's own rounded corners left aside)."""
    board = boards.BOARDS[name]()
    board.corner_radius = 0.0
    for shape in draw(board.placement()).on("copper_top"):
        if shape.role == "pour":
            for ring in (shape.outline, *shape.holes):
                edges = np.diff(np.array([*ring.points, ring.points[0]]), axis=0)
                assert (edges == 0).any(axis=1).all()


def test_lines_with_gaps_of_their_own_keep_them(boards: ModuleType) -> None:
    """Would catch one gap used for all lines."""
    board = boards.BoardBuilder(40.0, 20.0)
    board.line("wide", [(0.3, 6.0), (39.7, 6.0)], 1.1, ("a", "b"), gap=1.5)
    board.line("near", [(5.0, 14.0), (35.0, 14.0)], 0.6, ("c", "d"), gap=0.3)
    measured = draw(board.placement()).line_copper
    assert (measured["wide"].gap_left, measured["wide"].gap_right) == (1_500_000, 1_500_000)
    assert (measured["near"].gap_left, measured["near"].gap_right) == (300_000, 300_000)


def test_no_ground_table_means_no_pour_and_no_fence(boards: ModuleType) -> None:
    """Would catch ground drawn beside lines whose sizes assume none."""
    board = boards.feed()
    board.ground = None
    artwork = draw(board.placement())
    assert not [s for s in artwork.on("copper_top") if s.role == "pour"]
    assert {via.purpose for via in artwork.vias} == {"part:C1", "part:C2", "part:C3"}
    assert artwork.line_copper["feed"].gap_left is None
    assert [s.role for s in artwork.on("copper_bottom")] == ["plane"]


def test_pour_opens_at_the_boards_edge_beside_ports(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch ground that closes in front of a port's copper, under the connector's pin."""
    placement = boards.straight().placement()
    pour = shapely.union_all(measures.areas(draw(placement), "pour"))
    front = shapely.box(0, 8_000_000 - 1_549_000, 2_000_000, 8_000_000 + 1_549_000)
    assert not pour.intersects(front)


def test_pour_meets_a_line_that_ends_on_ground_at_its_via(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch a stub that is shorted by the pour before its via, or one that the pour leaves alone."""
    placement = boards.shorted().placement()
    artwork = draw(placement)
    pour = shapely.union_all(measures.areas(artwork, "pour"))
    stub = shapely.box(13_650_000, 12_550_000, 14_350_000, 22_000_000)
    beside = shapely.difference(stub, shapely.box(13_000_000, 21_999_000, 15_000_000, 23_000_000))
    assert pour.distance(shapely.Point(14_000_000, 22_000_000)) == 0.0
    assert pour.intersection(stub.buffer(-1)).is_empty
    assert pour.distance(beside) <= 1_000
    assert pour.distance(shapely.box(13_650_000, 13_600_000, 14_350_000, 21_000_000)) == 1_000_000


def test_ground_reaches_the_flanges_slot_on_both_sides(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch a ground that stops short of the carrier: every millimetre is source inductance."""
    placement = boards.stage().placement()
    pour = shapely.union_all(measures.areas(draw(placement), "pour"))
    for x in (20_000_000 - 2_200_000, 20_000_000 + 2_200_000):
        for y in (8_500_000, 17_500_000):
            assert pour.distance(shapely.Point(x, y)) == pytest.approx(300_000, abs=1.0)


def test_boards_margin_keeps_the_pour_off_the_edge(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch [board] margin read and not used."""
    board = boards.straight()
    board.board = {"margin": "1.25 mm"}
    artwork = draw(board.placement())
    edge = shapely.box(0, 0, 30_000_000, 16_000_000).exterior
    for shape in (*artwork.on("copper_bottom"), *[s for s in artwork.on("copper_top") if s.role == "pour"]):
        assert edge.distance(measures.polygon(shape)) == pytest.approx(1_250_000, abs=2.0)


@pytest.mark.parametrize(("gap", "poured"), [(1.2, False), (0.4, True)])
def test_a_place_too_small_for_two_vias_gets_no_pour(
    boards: ModuleType, measures: ModuleType, gap: float, poured: bool
) -> None:
    """Would catch islands of copper that nothing holds at ground: they are resonators."""
    board = boards.BoardBuilder(30.0, 20.0)
    path = [(8.0, 8.0), (8.0, 11.9), (11.9, 11.9), (11.9, 8.3), (8.6, 8.3)]
    board.line("loop", path, 0.3, ("a", "b"), gap=gap)
    pour = shapely.union_all(measures.areas(draw(board.placement()), "pour"))
    assert pour.intersects(shapely.box(8_200_000, 8_500_000, 11_700_000, 11_700_000)) == poured


@pytest.mark.parametrize("short", np.arange(-0.3, 0.31, 0.05).round(3).tolist())
def test_pour_near_a_ground_pad_either_joins_it_or_keeps_the_gap(
    boards: ModuleType, measures: ModuleType, short: float
) -> None:
    """Would catch a slit between pour and pad that is narrower than can be etched."""
    board = boards.BoardBuilder(30.0, 16.0, gap=1.3)
    board.line("main", [(0.3, 5.0), (29.7, 5.0)], 1.1, ("a", "b"))
    board.chip("C1", 15.0, 5.0 + 0.55 + 0.95 + short, 90.0, ("a", "gnd"), ground_vias=False)
    artwork = draw(board.placement())
    ground = measures.ground(artwork)
    void = shapely.box(0, 0, 30_000_000, 16_000_000).difference(ground).buffer(1)
    assert measures.too_thin(void, 124_000).is_empty
    assert measures.too_thin(ground, 124_000).is_empty


def test_foreign_vias_are_kept_clear(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch ground poured over a via of another net."""
    board = boards.straight().via(15.0, 12.0, "line:main", net="a")
    pour = shapely.union_all(measures.areas(draw(board.placement()), "pour"))
    assert pour.distance(shapely.Point(15_000_000, 12_000_000)) >= 300_000 + 125_000
