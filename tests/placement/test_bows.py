"""Bows: the small surplus of a loop's line, taken up exactly."""

from __future__ import annotations

import itertools
import math

import pytest

from layoutgen.placement.closure import Apart, Bar, solve_closure, surplus
from layoutgen.placement.drawings import Drawing, Piece, Scheme, walked_steps
from layoutgen.placement.frame import Pose
from layoutgen.placement.words import LegRules, Reach, Route, bow_word, is_bow, least_legs, route_points

SQUARE = Scheme(
    tuple(
        Piece(name, a, b, True, 0.0, name)
        for name, a, b in zip("stuv", (0, 1, 2, 3), (1, 2, 3, 0), strict=True)
    ),
    (1, 1, 1, 1),
)
ROUND = ((0.0, 180.0), (90.0, 270.0), (180.0, 0.0), (270.0, 90.0))
RULES = LegRules.of(400_000, 1_500_000, 300_000, first=Reach(500_000, 0), last=Reach(500_000, 0), clear=0)


def bars(longer: int, word: tuple[float, ...] = ()) -> list[Bar]:
    """Return four lines of 20 mm, the first a little longer."""
    return [Bar(20_000_000 + longer, least_legs(word, RULES)), *[Bar(20_000_000, (1,))] * 3]


def test_the_surplus_of_a_square_is_that_of_its_longer_side() -> None:
    """Catches a program that spreads over all sides what one is too long."""
    drawing = Drawing(ROUND, ((),) * 4)
    found = surplus(SQUARE, drawing, bars(300_000), [8_000_000] * 4)
    assert found == pytest.approx((300_000, 0, 0, 0), abs=1.0)
    assert surplus(SQUARE, drawing, bars(300_000), [200_000] * 4) is None


@pytest.mark.parametrize("angle", [20.0, -22.5, 30.0])
def test_a_bow_has_its_length_and_ends_on_its_node(angle: float) -> None:
    """Catches a bow whose slanted legs are rounded so that it misses its node or its length."""
    drawing = Drawing(ROUND, (bow_word(angle), (), (), ()))
    shape = solve_closure(SQUARE, drawing, bars(777_777, bow_word(angle)))
    assert shape is not None
    route = Route(bow_word(angle), shape.legs[0])
    start = Pose(*shape.hubs[0], 0.0)
    points, end = route_points(start, route)
    assert end == Pose(*shape.hubs[1], 0.0)
    assert sum(math.dist(a, b) for a, b in itertools.pairwise(points)) == pytest.approx(20_777_777, abs=3)
    assert abs(route.legs[0] - route.legs[4]) <= 2  # in the middle of its line


def test_the_legs_of_a_bow_keep_apart() -> None:
    """Catches a bow so short that its legs face each other nearer than the spacing rule."""
    word = bow_word(30.0)
    first, slant, along, _, last = least_legs(word, RULES)
    assert slant * math.cos(math.radians(30.0)) >= RULES.apart and along >= RULES.apart
    assert min(first, last) >= 500_000 + RULES.bend
    assert is_bow(word) and not is_bow((90.0, -90.0, -90.0, 90.0)) and not is_bow((45.0,))


def test_hubs_can_be_kept_apart() -> None:
    """Catches a constraint of the wrong sign or axis: a square cannot be wider than its sides are long."""
    drawing = Drawing(ROUND, ((),) * 4)
    free = [Bar(least=(1_000_000,), free=True)] * 4
    shape = solve_closure(SQUARE, drawing, free, apart=[Apart(0, 0, 1, 7_000_000)])
    assert shape is not None
    assert shape.hubs[1][0] - shape.hubs[0][0] == 7_000_000 and shape.hubs[2][1] == 1_000_000
    assert solve_closure(SQUARE, drawing, bars(0), apart=[Apart(0, 0, 1, 21_000_000)]) is None


def test_a_ladder_is_walked_loop_by_loop() -> None:
    """Catches a walk that closes the first loop of a ladder only at its far end."""
    pieces = [("a1", 0, 1), ("b1", 1, 2), ("a2", 0, 3), ("b2", 3, 4), ("r1", 1, 3), ("r2", 2, 4)]
    ladder = Scheme(tuple(Piece(name, a, b, True, 0.0, 0) for name, a, b in pieces), (1, 0, 1, 0, 1))
    closing = [i for i, step in enumerate(walked_steps(ladder, 0, early=True)) if step.loop]
    assert closing == [2, 5]
