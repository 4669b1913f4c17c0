"""The legend: everything named once, nothing printed where it may not be."""

from __future__ import annotations

import itertools
from types import ModuleType

import pytest
import shapely

from layoutgen.artwork import Artwork, draw

NAMES = ("straight", "tee", "feed", "stage", "shorted")


def _ink(artwork: Artwork, measures: ModuleType, *elements: str) -> shapely.Geometry:
    shapes = [s for s in artwork.on("legend_top") if not elements or s.origin.element in elements]
    return shapely.union_all([measures.polygon(s) for s in shapes])


def _assert_clear(artwork: Artwork, measures: ModuleType) -> None:
    """Assert the distances of the ink to all that it must keep off."""
    placement, ink = artwork.placement, _ink(artwork, measures)
    if ink.is_empty:
        return
    openings = shapely.union_all(measures.areas(artwork, "opening", layer="soldermask_top"))
    assert ink.distance(openings) >= 150_000
    assert shapely.box(0, 0, placement.width, placement.height).buffer(-400_000).covers(ink)
    drills = [shapely.Point(h.x, h.y).buffer(h.diameter / 2) for h in artwork.holes]
    drills += [shapely.Point(v.x, v.y).buffer(v.drill / 2) for v in artwork.vias]
    assert ink.distance(shapely.union_all(drills)) >= 150_000
    for part in placement.parts.values():
        if part.cutout is not None:
            assert ink.distance(part.cutout.polygon()) >= 150_000
    assert not ink.intersects(measures.signal(artwork))
    assert measures.too_thin(ink, 119_000).is_empty


@pytest.mark.parametrize("name", NAMES)
def test_legend_keeps_off_openings_drills_edges_and_lines(
    boards: ModuleType, measures: ModuleType, name: str
) -> None:
    """Would catch ink on solder, in holes, off the board, across lines, or too thin to print."""
    _assert_clear(draw(boards.BOARDS[name]().placement()), measures)


@pytest.mark.parametrize("seed", range(25))
def test_legend_keeps_off_them_on_random_boards(
    boards: ModuleType, measures: ModuleType, random_boards: ModuleType, seed: int
) -> None:
    """Would catch the same wherever things stand."""
    _assert_clear(draw(random_boards.RandomBoard(seed, boards.BoardBuilder).board.placement()), measures)


@pytest.mark.parametrize("name", NAMES)
def test_everything_is_named_or_noted(boards: ModuleType, measures: ModuleType, name: str) -> None:
    """Would catch a reference, port name or title lost without a word."""
    placement = boards.BOARDS[name]().placement()
    artwork = draw(placement)
    printed = {s.origin.element for s in artwork.on("legend_top")}
    noted = {element for rule, element, _ in artwork.notes if rule == "legend.min_distance"}
    assert printed | noted == {*placement.parts, *placement.ports, "board"}
    assert not printed & noted
    assert not noted


@pytest.mark.parametrize("seed", range(15))
def test_texts_do_not_overlap_and_stand_nearest_to_their_own_part(
    boards: ModuleType, measures: ModuleType, random_boards: ModuleType, seed: int
) -> None:
    """Would catch two texts in one place or run together, and references that read as another part's."""
    placement = random_boards.RandomBoard(seed, boards.BoardBuilder).board.placement()
    artwork = draw(placement)
    inks = {name: _ink(artwork, measures, name) for name in (*placement.parts, *placement.ports, "board")}
    inks = {name: ink for name, ink in inks.items() if not ink.is_empty}
    for a in inks:
        assert all(inks[a].envelope.distance(inks[b].envelope) >= 360_000 for b in inks if b != a)
    areas = {
        name: shapely.union_all([p.outline.polygon() for p in part.pads] + [part.outline.polygon()]).envelope
        for name, part in placement.parts.items()
    }
    for name in areas.keys() & inks.keys():
        own = inks[name].envelope.distance(areas[name])
        assert all(own <= inks[name].envelope.distance(area) + 150_000 for area in areas.values())


def test_title_does_not_run_on_from_a_name(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch the title printed a hair's breadth beside a port's name: they read as one word."""
    board = boards.BoardBuilder(30.0, 20.0, title="PA 3A")
    board.line("feed", [(4.0, 4.0), (4.0, 0.3)], 0.3, ("v", "w"), gap=0.3)
    board.port("vg", "w", 4.0, 0.3, 90.0, 0.3)
    artwork = draw(board.placement())
    name, title = _ink(artwork, measures, "vg").envelope, _ink(artwork, measures, "board").envelope
    assert abs(name.bounds[1] - title.bounds[1]) < 2_000_000  # side by side
    assert name.distance(title) >= 1_000_000


def test_two_names_do_not_run_together(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch names of neighbouring parts printed as one: C1C2."""
    board = boards.BoardBuilder(16.0, 10.0)
    for k in range(4):
        board.chip(f"C{k + 1}", 3.0 + 1.9 * k, 5.0, 90.0, (f"a{k}", f"b{k}"))
    artwork = draw(board.placement())
    inks = [_ink(artwork, measures, f"C{k + 1}") for k in range(4)]
    inks = [ink.envelope for ink in inks if not ink.is_empty]
    assert len(inks) > 2
    assert min(a.distance(b) for a, b in itertools.combinations(inks, 2)) >= 360_000


def test_a_board_without_room_leaves_texts_out_and_says_so(boards: ModuleType) -> None:
    """Would catch ink squeezed over pads, or a text that vanishes silently."""
    board = boards.BoardBuilder(5.0, 3.0)
    board.chip("C1", 2.5, 1.5, 0.0, ("a", "b"))
    artwork = draw(board.placement())
    noted = {element for rule, element, _ in artwork.notes if rule == "legend.min_distance"}
    printed = {s.origin.element for s in artwork.on("legend_top")}
    assert "board" in noted
    assert printed | noted == {"C1", "board"}


def test_title_and_revision_are_printed_whatever_they_are_written_in(
    boards: ModuleType, measures: ModuleType
) -> None:
    """Would catch a crash on letters that the alphabet lacks, and a title left off for them."""
    board = boards.straight()
    board.title = "Pegelfunk Süd – 水位"
    artwork = draw(board.placement())
    assert not _ink(artwork, measures, "board").is_empty
    plain = boards.straight()
    plain.title = "Pegelfunk Sud ? ??"
    assert _ink(artwork, measures, "board").equals(_ink(draw(plain.placement()), measures, "board"))


def test_title_anchor_is_where_the_title_begins(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch an anchor that is not the printed title's."""
    artwork = draw(boards.stage().placement())
    x0, y0, _, y1 = _ink(artwork, measures, "board").bounds
    assert abs(artwork.title_anchor[0] - x0) < 200_000
    assert y0 <= artwork.title_anchor[1] <= y1
    first = shapely.box(
        x0, artwork.title_anchor[1] - 200_000, x0 + 1_000_000, artwork.title_anchor[1] + 200_000
    )
    assert _ink(artwork, measures, "board").intersects(first)


def test_letters_are_large_enough_for_the_pen(boards: ModuleType, measures: ModuleType) -> None:
    """Would catch letters that run together when the board house prints broad strokes only."""
    board = boards.straight()
    board.rules = {"legend": {"min_line": "0.25 mm"}}
    ink = _ink(draw(board.placement()), measures, "rf_in")
    assert not ink.is_empty
    assert measures.too_thin(ink, 249_000).is_empty
    assert min(ink.bounds[2] - ink.bounds[0], ink.bounds[3] - ink.bounds[1]) > 1_500_000
