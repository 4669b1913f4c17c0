"""Movements of a board onto itself: exact, undone by their own inverse, orientation kept."""

from __future__ import annotations

import itertools
from types import ModuleType

import pytest
import shapely

from layoutgen.artwork.attitude import Attitude
from layoutgen.artwork.lying import attitude_of, moved
from layoutgen.artwork.records import LineCopper
from layoutgen.geometry import Ring

ALL = [Attitude(31, 17, quarters, mirrored) for quarters in range(4) for mirrored in (False, True)]
HALF_MOON = Ring(((3, 2), (9, 2), (9, 8)), (0.0, 0.5, 0.0))


@pytest.mark.parametrize("by", ALL)
def test_back_undoes_a_movement(by: Attitude) -> None:
    """Would catch an inverse that turns a mirrored board the wrong way."""
    corners = [(0, 0), (31, 0), (31, 17), (0, 17), (5, 3)]
    assert [by.back.point(by.point(point)) for point in corners] == corners
    assert by.back.back == by
    assert [by.back.heading(by.heading(angle)) for angle in (0.0, 30.0, 270.0)] == [0.0, 30.0, 270.0]
    assert [by.back.edge(by.edge(edge)) for edge in ("east", "north", "west", "south")] == [
        "east",
        "north",
        "west",
        "south",
    ]


@pytest.mark.parametrize("by", ALL)
def test_a_board_lies_on_itself_afterwards(by: Attitude) -> None:
    """Would catch a movement that leaves the board off the origin."""
    corners = {by.point(point) for point in ((0, 0), (31, 0), (31, 17), (0, 17))}
    width, height = by.size
    assert corners == {(0, 0), (width, 0), (width, height), (0, height)}


@pytest.mark.parametrize("by", ALL)
def test_edges_and_headings_go_with_points(by: Attitude) -> None:
    """Would catch edges or headings turned otherwise than the points."""
    middles = {"east": (31, 8), "west": (0, 8), "north": (15, 17), "south": (15, 0)}
    for edge, middle in middles.items():
        x, y = by.point(middle)
        width, height = by.size
        assert {"east": x == width, "west": x == 0, "north": y == height, "south": y == 0}[by.edge(edge)]
    (x0, y0), (x1, y1) = by.point((5, 5)), by.point((6, 5))
    assert {(1, 0): 0.0, (0, 1): 90.0, (-1, 0): 180.0, (0, -1): 270.0}[x1 - x0, y1 - y0] == by.heading(0.0)


@pytest.mark.parametrize("by", ALL)
def test_outlines_keep_their_arcs_and_their_way_round(by: Attitude) -> None:
    """Would catch an arc that bulges to the other side after a mirror, or an outline that runs backwards."""
    there = by.ring(HALF_MOON)
    big = Attitude(31_000_000, 17_000_000, by.quarters, by.mirrored)
    moon = Ring(tuple((x * 1_000_000, y * 1_000_000) for x, y in HALF_MOON.points), HALF_MOON.bulges)
    assert shapely.is_ccw(shapely.LinearRing(there.points))
    apart = shapely.symmetric_difference(big.geometry(moon.polygon()), big.ring(moon).polygon())
    assert apart.area < 1e-6 * moon.polygon().area
    circle = Ring.circle(7, 4, 3)
    assert by.ring(circle) == Ring.circle(*by.point((7, 4)), 3)


def test_a_mirror_swaps_left_and_right_of_a_line() -> None:
    """Would catch pour distances reported for the wrong side of a line."""
    lines = {"a": LineCopper(name="a", gap_left=1, gap_right=None)}
    assert Attitude(31, 17, 1).line_copper(lines) == lines
    assert Attitude(31, 17, 1, mirrored=True).line_copper(lines) == {
        "a": LineCopper(name="a", gap_left=None, gap_right=1)
    }


@pytest.mark.parametrize("name", ["tee", "feed", "stage", "shorted"])
def test_every_lie_of_a_board_is_drawn_as_one(boards: ModuleType, name: str) -> None:
    """Would catch a board that is drawn in different attitudes, according to how it lies."""
    placement = boards.BOARDS[name]().placement()
    lying = []
    for quarters, mirrored in itertools.product(range(4), (False, True)):
        other = moved(placement, Attitude(placement.width, placement.height, quarters, mirrored))
        laid = moved(other, attitude_of(other))
        lying.append((laid.width, laid.height, [line.path for line in laid.lines.values()], laid.vias))
    assert all(one == lying[0] for one in lying)
