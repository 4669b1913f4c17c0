"""A line wider than the coupled strip it feeds: placed in line, notched beside the other strip."""

from __future__ import annotations

import copy

import pytest
import shapely

from layoutgen.artwork import Artwork, draw
from layoutgen.circuit import build_circuit
from layoutgen.placement import place
from layoutgen.reading import inputs_from_data
from layoutgen.sizing import size_circuit
from tests.placement.circuits import CIRCUITS


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
