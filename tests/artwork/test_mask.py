"""Solder mask and paste."""

from __future__ import annotations

import math
from types import ModuleType

import pytest
import shapely

from layoutgen.artwork import Artwork, draw
from layoutgen.geometry import Ring
from layoutgen.origin import Origin
from layoutgen.placement import PlacedPad, PlacedPart

NAMES = ("straight", "tee", "feed", "stage", "shorted")


def _top(artwork: Artwork, measures: ModuleType) -> shapely.Geometry:
    return shapely.union_all(measures.areas(artwork, "opening", layer="soldermask_top"))


@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize("covered", [False, True])
def test_pads_are_open_with_their_expansion(
    boards: ModuleType, measures: ModuleType, name: str, covered: bool
) -> None:
    """Would catch a pad under mask, or an opening without the room for misregistration."""
    board = boards.BOARDS[name]()
    board.board = {"mask_over_lines": covered}
    placement = board.placement()
    opening = _top(draw(placement), measures).buffer(1)
    for part in placement.parts.values():
        for pad in (pad for pad in part.pads if pad.ground != "flange"):
            assert opening.covers(pad.outline.polygon().buffer(50_000, join_style="mitre"))


def test_rf_lines_are_bare_and_supply_lines_covered(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch mask on lines whose impedance was computed bare, or solder free to run along supplies."""
    placement = boards.feed().placement()
    opening = _top(draw(placement), measures)
    for name in ("left", "right", "feed"):
        path = shapely.LineString(placement.lines[name].path)
        assert opening.buffer(1).covers(path)
    assert not opening.intersects(shapely.LineString([(27_000_000, 17_000_000), (29_000_000, 22_000_000)]))


def test_mask_over_lines_covers_them_but_for_pads_and_ports(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch mask_over_lines without effect, or a port that nothing can be soldered to."""
    board = boards.straight()
    board.board = {"mask_over_lines": True}
    opening = _top(draw(board.placement()), measures)
    assert not opening.intersects(shapely.box(2_400_000, 7_000_000, 27_600_000, 9_000_000))
    for x in (1_000_000, 29_000_000):
        assert opening.covers(shapely.Point(x, 8_000_000))


def test_supply_ports_are_open_at_their_end(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch a supply that no wire can be soldered to."""
    opening = _top(draw(boards.feed().placement()), measures)
    assert opening.covers(shapely.Point(29_000_000, 25_000_000))


@pytest.mark.parametrize("apart", [0.12, 0.19, 0.21, 0.35])
def test_openings_with_too_narrow_a_web_are_one(
    boards: ModuleType, measures: ModuleType, apart: float
) -> None:
    """Would catch slivers of mask that peel off."""
    board = boards.BoardBuilder(20.0, 14.0)
    board.chip("C1", 8.0, 7.0, 0.0, ("a", "b")).chip("C2", 8.0, 7.0 + 0.95 + apart, 0.0, ("c", "d"))
    artwork = draw(board.placement())
    openings = [measures.polygon(s) for s in artwork.on("soldermask_top")]
    assert len(openings) == (2 if apart < 0.2 else 4)
    gaps = [a.distance(b) for i, a in enumerate(openings) for b in openings[i + 1 :]]
    assert min(gaps) >= 99_999


@pytest.mark.parametrize("name", NAMES)
def test_vias_of_the_pour_stay_covered(boards: ModuleType, measures: ModuleType, name: str) -> None:
    """Would catch a via in an opening: solder runs through it."""
    artwork = draw(boards.BOARDS[name]().placement())
    opening = _top(artwork, measures)
    for via in artwork.vias:
        if via.purpose in ("fence", "pour"):
            assert not opening.intersects(shapely.Point(via.x, via.y).buffer(via.drill / 2))


def test_bottom_is_bare_on_a_carrier_and_covered_elsewhere(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch mask between the plane and the carrier that the transistor's flange is bolted to."""
    stage = draw(boards.stage().placement())
    (opening,) = stage.on("soldermask_bottom")
    assert opening.outline == stage.on("profile")[0].outline
    plain = draw(boards.straight().hole(4.0, 4.0, 2.7).placement())
    (screw,) = plain.on("soldermask_bottom")
    assert measures.polygon(screw).covers(shapely.Point(4_000_000, 4_000_000).buffer(2_600_000))
    assert not draw(boards.straight().placement()).on("soldermask_bottom")


def test_paste_is_on_part_pads_only(boards: ModuleType) -> None:
    """Would catch paste at ports, on lines, or missing on a pad."""
    placement = boards.feed().placement()
    paste = [(s.origin.element, s.outline) for s in draw(placement).on("paste_top")]
    assert paste == [(part.name, pad.outline) for part in placement.parts.values() for pad in part.pads]


def test_paste_of_an_exposed_pad_is_a_window_of_panes(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch a full pane of paste under a slug: the part floats on it and gas is trapped."""
    board = boards.BoardBuilder(20.0, 14.0)
    outline = Ring.box(8_000_000, 5_000_000, 12_000_000, 8_000_000)
    slug = PlacedPad(
        pin="slug",
        net="gnd",
        x=10_000_000,
        y=6_500_000,
        outline=outline,
        heading=0.0,
        ground="vias",
        thermal=12.0,
    )
    board.parts["U1"] = PlacedPart(
        name="U1",
        x=10_000_000,
        y=6_500_000,
        heading=0.0,
        pads=(slug,),
        outline=outline,
        courtyard=outline,
        cutout=None,
        origin=Origin("U1"),
    )
    panes = [measures.polygon(s) for s in draw(board.placement()).on("paste_top")]
    assert len(panes) == 2 * 2
    pad = outline.polygon()
    assert all(pad.contains(pane) for pane in panes)
    assert max(max(pane.bounds[2] - pane.bounds[0], pane.bounds[3] - pane.bounds[1]) for pane in panes) < 2e6
    assert 0.45 < sum(pane.area for pane in panes) / pad.area < 0.75
    assert min(a.distance(b) for i, a in enumerate(panes) for b in panes[i + 1 :]) >= 299_000


@pytest.mark.parametrize("apart", [0.0, 0.03, 0.079, 0.099])
def test_openings_that_corners_bring_together_are_one(
    boards: ModuleType, measures: ModuleType, apart: float
) -> None:
    """Would catch a web that comes off: closing leaves one where two openings face each other by corners."""
    board = boards.BoardBuilder(20.0, 12.0)
    step = 0.1 + apart / math.sqrt(2.0)
    board.line("low", [(3.0, 5.0), (10.0, 5.0)], 1.0, ("a", "open"))
    board.line("high", [(10.0 + step, 6.0 + step), (17.0, 6.0 + step)], 1.0, ("b", "open"))
    artwork = draw(board.placement())
    opening = _top(artwork, measures)
    assert len(shapely.get_parts(opening)) == 1
    between = shapely.Point((10.0 + step / 2.0) * 1e6, (5.5 + step / 2.0) * 1e6)
    assert opening.covers(between.buffer(40_000))
    lines = shapely.union_all(
        [piece.outline.polygon() for piece in artwork.on("copper_top") if piece.net != "gnd"]
    )
    assert lines.buffer(60_000, join_style="mitre").buffer(120_000).covers(opening)


def test_openings_a_web_apart_stay_two(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch mask taken away that holds."""
    board = boards.BoardBuilder(20.0, 12.0)
    board.line("low", [(3.0, 5.0), (10.0, 5.0)], 1.0, ("a", "open"))
    board.line("high", [(10.2, 6.2), (17.0, 6.2)], 1.0, ("b", "open"))
    assert len(shapely.get_parts(_top(draw(board.placement()), measures))) == 2
