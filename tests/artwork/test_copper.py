"""Signal copper: drawn as placed, cut back only at cut-outs and the profile."""

from __future__ import annotations

import math
from types import ModuleType

import pytest
import shapely

from layoutgen.artwork import Artwork, draw
from layoutgen.geometry import stroke

NAMES = ("straight", "tee", "feed", "stage", "shorted")


def _of(artwork: Artwork, element: str, role: str) -> list[shapely.Polygon]:
    return [
        shapely.Polygon(s.outline.chords())
        for s in artwork.on("copper_top")
        if s.origin.element == element and s.role == role
    ]


@pytest.mark.parametrize("name", ["straight", "tee", "feed"])
def test_lines_are_the_mitred_strokes_of_their_paths(boards: ModuleType, name: str) -> None:
    """Would catch a line touched by the pour's cleaning, a lost mitre, or a wrong width."""
    placement = boards.BOARDS[name]().placement()
    artwork = draw(placement)
    for line in placement.lines.values():
        (shape,) = [s for s in artwork.on("copper_top") if s.origin.element == line.name and s.role == "line"]
        assert shape.outline == stroke(line.path, line.width, [b.mitre_percent for b in line.bends])
        assert shape.net == next(net for net in line.nets if net != "gnd")
        assert not shape.holes


@pytest.mark.parametrize("name", NAMES)
def test_signal_copper_is_the_same_with_and_without_a_pour(boards: ModuleType, name: str) -> None:
    """Would catch any influence of the ground on the lines' own copper."""
    with_ground, without = boards.BOARDS[name](), boards.BOARDS[name]()
    without.ground = None
    signal = [
        [s for s in draw(b.placement()).on("copper_top") if s.net != "gnd"] for b in (with_ground, without)
    ]
    assert signal[0] == signal[1]


@pytest.mark.parametrize("name", NAMES)
def test_copper_keeps_the_edge_distance_but_for_pads_at_their_own_cutout(
    boards: ModuleType, measures: ModuleType, name: str
) -> None:
    """Would catch a line, strip or pour that is cut by the board house's router."""
    placement = boards.BOARDS[name]().placement()
    artwork = draw(placement)
    board = shapely.box(0, 0, placement.width, placement.height)
    cutouts = [p.cutout.polygon() for p in placement.parts.values() if p.cutout is not None]
    for shape in (*artwork.on("copper_top"), *artwork.on("copper_bottom")):
        copper = measures.polygon(shape)
        assert board.exterior.distance(copper) >= 300_000
        if shape.role != "pad":
            assert all(cutout.distance(copper) >= 300_000 for cutout in cutouts), shape.origin


def test_a_line_wider_than_its_pad_is_cut_back_and_the_pad_stays(boards: ModuleType) -> None:
    """Would catch a drain line that overhangs the slot, or a pad clipped with it."""
    placement = boards.stage().placement()
    artwork = draw(placement)
    (drain,) = _of(artwork, "drain", "line")
    assert drain.bounds[0] == 20_000_000 + 2_200_000 + 300_000
    pads = [p for p in _of(artwork, "Q1", "pad") if p.centroid.x > 20_000_000]
    assert pads[0].bounds == (22_400_000, 11_000_000, 24_800_000, 15_000_000)
    exempt = [note for note in artwork.notes if note[0] == "copper.min_edge_distance"]
    assert [(element, "exempt" in text) for _, element, text in exempt] == [("Q1", True), ("Q1", True)]
    assert "gate" in exempt[0][2] and "0.200 mm" in exempt[0][2]


def test_a_port_runs_to_the_profile_only_when_asked(boards: ModuleType) -> None:
    """Would catch a launch that stops short of an edge connector, or one that runs off the board unasked."""
    reaches = []
    for to_edge in (False, True):
        board = boards.BoardBuilder(20.0, 12.0)
        board.line("main", [(0.0, 6.0), (19.7, 6.0)], 1.1, ("a", "b"))
        board.port("rf_in", "a", 0.0, 6.0, 0.0, 1.1, to_edge=to_edge).port(
            "rf_out", "b", 19.7, 6.0, 180.0, 1.1
        )
        (line,) = _of(draw(board.placement()), "main", "line")
        reaches.append(line.bounds[0])
    assert reaches == [300_000, 0]


def test_a_port_at_the_profile_is_not_etched_back_from_it(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch artwork clipped at the profile, whose finished copper ends an undercut inside it."""
    board = boards.BoardBuilder(20.0, 12.0)
    board.rules = {"copper": {"undercut": "20 um"}}
    board.line("main", [(0.0, 6.0), (19.7, 6.0)], 1.1, ("a", "b"))
    board.port("rf_in", "a", 0.0, 6.0, 0.0, 1.1, to_edge=True).port("rf_out", "b", 19.7, 6.0, 180.0, 1.1)
    (line,) = measures.areas(draw(board.placement()), "line", undercut=20_000)
    assert line.bounds == (0, 5_450_000, 19_700_000, 6_550_000)


def test_radial_stub_keeps_its_arc(boards: ModuleType) -> None:
    """Would catch an arc handed on as chords: DXF must show a true arc."""
    artwork = draw(boards.shorted().placement())
    (shape,) = [s for s in artwork.on("copper_top") if s.role == "radial"]
    arcs = [bulge for bulge in shape.outline.bulges if bulge]
    assert 4.0 * sum(math.atan(bulge) for bulge in arcs) == pytest.approx(math.radians(60.0), rel=1e-6)
    assert len(arcs) == 2  # pieces of at most 30 degrees each


def test_pair_is_two_strips_with_their_gap_and_no_pour_between(
    boards: ModuleType, measures: ModuleType
) -> None:
    """Would catch a pair drawn as one strip, or ground poured into its slot."""
    artwork = draw(boards.shorted().placement())
    first, second = _of(artwork, "pickup", "pair")
    assert first.distance(second) == 200_000
    between = shapely.box(18_000_000, 4_500_000, 36_000_000, 4_700_000)
    assert all(not piece.intersects(between) for piece in measures.areas(artwork, "pour"))


def test_pair_far_apart_still_has_no_pour_between(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch ground poured between strips whose slot is wider than two pour gaps."""
    board = boards.BoardBuilder(44.0, 20.0, gap=0.3)
    board.pair("pickup", 10.0, 30.0, 6.0, 1.0, 4.0)
    artwork = draw(board.placement())
    between = shapely.box(10_000_000, 6_500_000, 30_000_000, 10_500_000)
    assert all(not piece.intersects(between) for piece in measures.areas(artwork, "pour"))


@pytest.mark.parametrize("name", NAMES)
def test_every_via_has_a_round_land_on_its_net(boards: ModuleType, name: str) -> None:
    """Would catch lands as polygons, lands left out, or lands of another size than the via says."""
    artwork = draw(boards.BOARDS[name]().placement())
    lands = [s for s in artwork.on("copper_top") if s.role == "land"]
    assert len(lands) == len(artwork.vias)
    for via, land in zip(artwork.vias, lands, strict=True):
        (x0, y0), (x1, y1) = land.outline.points
        assert land.outline.bulges == (1.0, 1.0)
        assert (x0 + x1, y0 + y1, x1 - x0) == (2 * via.x, 2 * via.y, via.land)
        assert land.net == via.net


@pytest.mark.parametrize("name", NAMES)
def test_artwork_is_drawn_wider_by_the_undercut_and_nothing_else_changes(
    boards: ModuleType, measures: ModuleType, name: str
) -> None:
    """Would catch an undercut lost on some role, added twice, or one that moves vias or finished copper."""
    plain = draw(boards.BOARDS[name]().placement())
    board = boards.BOARDS[name]()
    board.rules = {"copper": {"undercut": "20 um"}}
    grown = draw(board.placement())
    assert grown.vias == plain.vias
    for role in ("line", "pair", "radial", "pad", "strip", "land", "ground", "pour"):
        finished = shapely.union_all(measures.areas(plain, role, tolerance=50.0))
        drawn = shapely.union_all(measures.areas(grown, role, tolerance=50.0))
        expected = finished.buffer(20_000, join_style="mitre", mitre_limit=8.0)
        assert drawn.symmetric_difference(expected).area <= 3e-3 * max(expected.length * 20_000, 1.0), role


def test_crossed_outlines_of_too_short_legs_still_give_copper(
    boards: ModuleType, measures: ModuleType
) -> None:
    """Would catch a crash on a leg shorter than the line is wide; checks must be able to see such a line."""
    board = boards.BoardBuilder(20.0, 14.0)
    board.line("kink", [(2.0, 5.0), (9.0, 5.0), (9.0, 5.4), (16.0, 5.4)], 2.0, ("a", "b"), mitre=0.0)
    artwork = draw(board.placement())
    copper = shapely.union_all(measures.areas(artwork, "line"))
    assert copper.buffer(1).contains(shapely.LineString([(2_000_001, 5_000_000), (9_000_000, 5_000_000)]))
    assert copper.is_valid
