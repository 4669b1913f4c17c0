"""Outlines: arcs as chords, bulges, refusals."""

from __future__ import annotations

import itertools
import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layoutgen.geometry import CHORD_TOLERANCE_NM, Ring


@settings(max_examples=60, deadline=None, derandomize=True)
@given(st.integers(-(10**8), 10**8), st.integers(-(10**8), 10**8), st.integers(1_000, 50_000_000))
def test_chords_of_a_circle_stay_within_one_micrometre_inside_the_arc(x: int, y: int, radius: int) -> None:
    """Would catch chords cut too coarse for the contract's 1 um, or vertices off the arc."""
    chords = Ring.circle(x, y, radius).chords()
    for a, b in zip(chords, chords[1:] + chords[:1], strict=True):
        assert abs(math.dist(a, (x, y)) - radius) <= 1.0
        middle = ((a[0] + b[0]) / 2.0, (a[1] + b[1]) / 2.0)
        assert radius - math.dist(middle, (x, y)) <= CHORD_TOLERANCE_NM + 1.0


@settings(max_examples=60, deadline=None, derandomize=True)
@given(st.floats(-1.5, 1.5).filter(lambda bulge: abs(bulge) > 0.01), st.integers(100_000, 20_000_000))
def test_an_arc_with_a_bulge_subtends_four_times_its_arctangent(bulge: float, chord: int) -> None:
    """Would catch a bulge read with the wrong sign, or as tan(angle / 2)."""
    ring = Ring(((0, 0), (chord, 0), (chord // 2, 3 * chord)), (bulge, 0.0, 0.0))
    arc = ring.chords()[: ring.chords().index((chord, 0)) + 1]
    sagitta = max((p[1] for p in arc), key=abs)
    assert sagitta == pytest.approx(-bulge * chord / 2.0, abs=CHORD_TOLERANCE_NM + 2.0)
    length = sum(math.dist(a, b) for a, b in itertools.pairwise(arc))
    angle = 4.0 * math.atan(abs(bulge))
    assert length == pytest.approx(angle * chord / (2.0 * math.sin(angle / 2.0)), rel=1e-2)


def test_a_positive_bulge_is_counter_clockwise() -> None:
    """Would catch mirrored arcs: the half circle east of a line heading north bulges to its right."""
    ring = Ring(((0, -1000_000), (0, 1000_000)), (1.0, 1.0))
    assert any(x > 900_000 for x, _ in ring.chords()[1 : len(ring.chords()) // 2])
    assert ring.polygon().exterior.is_ccw


def test_boxes_are_counter_clockwise_whatever_corners_are_given() -> None:
    """Would catch a clockwise outline from swapped corners."""
    for corners in ((0, 0, 3, 2), (3, 2, 0, 0), (3, 0, 0, 2)):
        ring = Ring.box(*corners)
        assert ring.polygon().exterior.is_ccw
        assert ring.polygon().area == 6.0
        assert ring.is_straight


@pytest.mark.parametrize(("points", "bulges"), [(((0, 0), (1, 1)), ()), (((0, 0), (1, 0), (0, 1)), (0.5,))])
def test_what_is_no_outline_is_refused(
    points: tuple[tuple[int, int], ...], bulges: tuple[float, ...]
) -> None:
    """Would catch a two-vertex polygon, or bulges that do not match the edges, being let through."""
    with pytest.raises(ValueError, match="vertices"):
        Ring(points, bulges)


@pytest.mark.parametrize("radius", [150_000, 300_000, 300_001, 1_350_000])
def test_chords_of_a_circle_are_their_own_quarter_turn_and_mirror_image(radius: int) -> None:
    """A turned board must have turned chords; 21 of them to a half circle would not be."""
    chords = set(Ring.circle(0, 0, radius).chords())
    assert {(-y, x) for x, y in chords} == chords
    assert {(x, -y) for x, y in chords} == chords
