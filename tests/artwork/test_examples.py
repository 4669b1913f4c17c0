"""The shipped examples through the stages: real circuits keep what the hand-made boards keep."""

from __future__ import annotations

import math
from types import ModuleType

import shapely
import shapely.ops

from layoutgen.artwork import Artwork


def test_pour_keeps_the_sized_gap_to_every_line(artwork: Artwork, measures: ModuleType) -> None:
    """Would catch a pour drawn at another distance than the widths were computed for."""
    undercut = measures.undercut_of(artwork)
    pour = shapely.union_all(measures.areas(artwork, "pour", undercut=undercut))
    placement = artwork.placement
    for name, line in placement.lines.items():
        shapes = [s for s in artwork.on("copper_top") if s.origin.element == name and s.role == "line"]
        copper = shapely.union_all([measures.polygon(s, undercut) for s in shapes])
        gap = placement.sized.lines[name].pour_gap * 1e9
        if line.nets[-1] == "gnd":
            path = shapely.LineString(line.path)
            last = shapely.ops.substring(path, path.length - gap, path.length)
            copper = copper.difference(last.buffer(line.width, cap_style="flat"))
        assert copper.distance(pour) >= gap - 0.01


def test_measured_gaps_are_what_was_sized_or_more(artwork: Artwork) -> None:
    """Would catch gaps in the report that the drawing does not have."""
    for name, measured in artwork.line_copper.items():
        wished = artwork.placement.sized.lines[name].pour_gap * 1e9
        for gap in (measured.gap_left, measured.gap_right):
            assert gap is None or not math.isfinite(wished) or gap >= wished - 1.0


def test_ground_can_be_etched(artwork: Artwork, measures: ModuleType) -> None:
    """Would catch slivers, slits and sharp notches where pour, pads and vias of real parts meet."""
    copper_rules = artwork.placement.sized.circuit.rules.copper
    thin = 0.99e9 * min(copper_rules.min_width, copper_rules.min_gap)
    sharp = math.degrees(copper_rules.min_corner_angle) - 0.1
    ground = measures.ground(artwork, measures.undercut_of(artwork))
    assert measures.too_thin(ground, thin).is_empty
    placement = artwork.placement
    void = shapely.box(0, 0, placement.width, placement.height).difference(ground).buffer(1)
    assert measures.too_thin(void, thin).is_empty
    assert [at for angle, at in measures.corners(ground, 20.0) if angle < sharp] == []


def test_every_line_is_drawn_whole(artwork: Artwork) -> None:
    """Would catch a line cut in two by a cut-out, or lost."""
    for name in artwork.placement.lines:
        drawn = [s for s in artwork.on("copper_top") if s.origin.element == name and s.role == "line"]
        assert len(drawn) == 1


def test_everything_is_named(artwork: Artwork) -> None:
    """Would catch a part that nobody can find on the board, and a text left out without a word."""
    printed = {shape.origin.element for shape in artwork.on("legend_top")}
    told = {element for rule, element, _ in artwork.notes if rule == "legend.min_distance"}
    assert {*artwork.placement.parts, *artwork.placement.ports, "board"} <= printed | told
