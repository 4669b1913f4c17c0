"""A line wider than the coupled strip it feeds: placed in line, notched beside the other strip."""

from __future__ import annotations

import copy

import pytest
import shapely

from layoutgen.artwork import Artwork, draw
from layoutgen.checks import check
from layoutgen.circuit import build_circuit
from layoutgen.placement import place
from layoutgen.reading import inputs_from_data
from layoutgen.sizing import size_circuit
from tests.placement.circuits import CIRCUITS
from tests.placement.legal import faults


@pytest.fixture(scope="module")
def artwork() -> Artwork:
    """Resonators of 70.61 and 39.24 ohm fed in line by 50 ohm: the feed overlaps the gap's end."""
    data = copy.deepcopy(CIRCUITS["coupled resonators"])
    for pair in data["coupled"].values():
        pair |= {"even_impedance": "70.61 ohm", "odd_impedance": "39.24 ohm"}
    inputs = inputs_from_data(data)
    return draw(place(size_circuit(build_circuit(inputs.circuit, inputs.rules))))


def copper(artwork: Artwork, name: str) -> shapely.Geometry:
    shapes = [shape for shape in artwork.on("copper_top") if shape.origin.element == name]
    return shapely.union_all([shape.outline.polygon() for shape in shapes])


@pytest.mark.parametrize(("feed", "pair"), [("in", "first"), ("out", "second")])
def test_the_feed_keeps_the_gap_to_the_other_strip(artwork: Artwork, feed: str, pair: str) -> None:
    """Catches copper of two nets nearer than may be etched, and a feed cut off from its own strip."""
    strips = shapely.get_parts(copper(artwork, pair))
    distances = sorted(strip.distance(copper(artwork, feed)) for strip in strips)
    assert distances[0] == 0.0
    assert distances[1] >= 125_000 - 1


def test_no_more_is_cut_than_the_gap_needs(artwork: Artwork) -> None:
    """Catches a notch that runs along the feed, or across all of it."""
    line = artwork.placement.lines["in"]
    whole = line.width * line.centre_line
    assert 0.0 < whole - copper(artwork, "in").area < 125_000 * line.width / 2


def resonators(**first: str) -> Artwork:
    """Draw two resonators in a row, the first pair tight and narrow, the second wide apart and wider."""
    data = copy.deepcopy(CIRCUITS["coupled resonators"])
    names = list(data["coupled"])
    old = data["coupled"][names[0]]
    for key in ("even_impedance", "odd_impedance", "width", "gap"):
        old.pop(key, None)
    old |= first
    data["coupled"][names[1]] |= {"even_impedance": "56.6 ohm", "odd_impedance": "44.8 ohm"}
    inputs = inputs_from_data(data)
    return draw(place(size_circuit(build_circuit(inputs.circuit, inputs.rules))))


def test_a_pair_wider_than_the_one_it_follows_is_notched() -> None:
    """Catches a filter refused, or copper of two resonators too near, because its first pair is tight."""
    artwork = resonators(even_impedance="70.6 ohm", odd_impedance="39.2 ohm")
    assert faults(artwork.placement) == []
    first, second = artwork.placement.pairs.values()
    assert second.width > first.width
    near = [
        a.distance(b)
        for a in shapely.get_parts(copper(artwork, first.name))
        for b in shapely.get_parts(copper(artwork, second.name))
    ]
    apart = [distance for distance in near if distance > 0.0]
    assert len(apart) == 3
    assert min(apart) >= 125_000 - 1


def test_a_pair_with_a_gap_below_the_rule_is_drawn_with_that_gap() -> None:
    """Catches strips that are silently cut narrower than stated, so that no check can see the gap."""
    artwork = resonators(width="1.0 mm", gap="0.1 mm")
    first = next(iter(artwork.placement.pairs))
    a, b = shapely.get_parts(copper(artwork, first))
    assert a.distance(b) == pytest.approx(100_000, abs=1)
    found = [finding for finding in check(artwork).findings if finding.rule == "copper.min_gap"]
    assert [finding.items for finding in found] == [(first,)]
