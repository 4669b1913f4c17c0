"""Vias of fence and pour: legal everywhere, even, and where they are needed."""

from __future__ import annotations

import itertools
import math
import subprocess
import sys
from pathlib import Path
from types import ModuleType
from typing import Any

import numpy as np
import pytest
import shapely
from scipy.spatial import cKDTree

from layoutgen.artwork import Artwork, Via, draw, mending
from layoutgen.artwork.attitude import Attitude
from layoutgen.artwork.drills import Drills
from layoutgen.artwork.limits import limits_of

NAMES = ("straight", "tee", "feed", "stage", "shorted")
SEEDS = range(40)


def _own(artwork: Artwork) -> list[Via]:
    return [via for via in artwork.vias if via.purpose in ("fence", "pour")]


def _assert_legal(artwork: Artwork, measures: ModuleType, undercut: int) -> None:
    """Assert every rule that a via of the pour must keep."""
    placement, vias = artwork.placement, _own(artwork)
    pour = shapely.union_all(measures.areas(artwork, "pour", undercut=undercut)).buffer(0.5 * bool(undercut))
    foreign = measures.signal(artwork, undercut)
    board = shapely.box(0, 0, placement.width, placement.height).exterior
    cutouts = [part.cutout.polygon() for part in placement.parts.values() if part.cutout is not None]
    pads = shapely.union_all(
        [pad.outline.polygon() for part in placement.parts.values() for pad in part.pads]
    )
    for via in vias:
        axis = shapely.Point(via.x, via.y)
        assert pour.covers(axis.buffer(via.land / 2, quad_segs=32)), via
        assert foreign.distance(axis) >= via.drill / 2 + 200_000
        assert board.distance(axis) >= via.drill / 2 + 500_000
        assert all(cutout.distance(axis) >= via.drill / 2 + 500_000 for cutout in cutouts)
        assert pads.is_empty or pads.distance(axis) >= 50_000 + via.land / 2 - 1
        for hole in placement.holes:
            assert math.dist((hole.x, hole.y), (via.x, via.y)) >= (hole.diameter + via.drill) / 2 + 250_000
    axes = np.array([(v.x, v.y) for v in artwork.vias], dtype=float)
    own = np.array([(v.x, v.y) for v in vias], dtype=float).reshape(-1, 2)
    if len(own) and len(axes) > 1:
        assert cKDTree(axes).query(own, 2)[0][:, 1].min() >= 800_000


@pytest.mark.parametrize("name", NAMES)
def test_vias_are_legal_on_known_boards(boards: ModuleType, measures: ModuleType, name: str) -> None:
    """Would catch a land over the pour's edge, a hole too near to another, to copper, edge, slot or pad."""
    _assert_legal(draw(boards.BOARDS[name]().placement()), measures, 0)


@pytest.mark.parametrize("seed", SEEDS)
def test_vias_are_legal_on_random_boards(
    boards: ModuleType, measures: ModuleType, random_boards: ModuleType, seed: int
) -> None:
    """Would catch the same where things stand in any way to each other."""
    made = random_boards.RandomBoard(seed, boards.BoardBuilder)
    _assert_legal(draw(made.board.placement()), measures, made.undercut)


@pytest.mark.parametrize("seed", SEEDS)
def test_every_piece_of_pour_is_held_by_two_vias(
    boards: ModuleType, measures: ModuleType, random_boards: ModuleType, seed: int
) -> None:
    """Would catch a piece of pour that floats, or hangs on one via only."""
    artwork = draw(random_boards.RandomBoard(seed, boards.BoardBuilder).board.placement())
    axes = [shapely.Point(via.x, via.y) for via in artwork.vias]
    for piece in measures.areas(artwork, "pour"):
        assert sum(piece.covers(axis) for axis in axes) >= 2


def _edges_that_face(
    pour: shapely.Geometry, lines: shapely.Geometry, gap: float
) -> list[tuple[np.ndarray, np.ndarray]]:
    """Return the pour's edges that look at a line within two gaps over their whole length."""
    out = []
    for piece in shapely.get_parts(pour):
        oriented = shapely.geometry.polygon.orient(piece)
        for ring in (oriented.exterior, *oriented.interiors):
            for a, b in itertools.pairwise(np.asarray(ring.coords)):
                normal = np.array([b[1] - a[1], a[0] - b[0]]) / math.dist(a, b)
                swept = shapely.Polygon([a, b, b + normal * 2 * gap, a + normal * 2 * gap])
                seen = shapely.intersection(swept, lines)
                if not seen.is_empty:
                    out.append((a, b))
    return out


@pytest.mark.parametrize("name", ["straight", "tee", "shorted"])
def test_fence_leaves_no_gap_wider_than_the_pitch(
    boards: ModuleType, measures: ModuleType, name: str
) -> None:
    """Would catch a hole in the fence, at corners too; ends of an edge count as axes."""
    placement = boards.BOARDS[name]().placement()
    artwork = draw(placement)
    pour = shapely.union_all(measures.areas(artwork, "pour"))
    lines = shapely.union_all(measures.areas(artwork, "line", "pair", "radial"))
    axes = np.array([(v.x, v.y) for v in artwork.vias], dtype=float)
    edges = _edges_that_face(pour, lines, 1_000_000)
    assert len(edges) >= 2
    for a, b in edges:
        length = math.dist(a, b)
        along, across = (b - a) / length, np.array([a[1] - b[1], b[0] - a[0]]) / length
        t, depth = (axes - a) @ along, (axes - a) @ across
        by = np.sort(t[(depth > 0) & (depth <= 800_000) & (t >= -800_000) & (t <= length + 800_000)])
        marks = np.concatenate([[0.0], by[(by > 0) & (by < length)], [length]])
        assert np.diff(marks).max() <= 2_000_000 + 2


def test_fence_is_even_and_symmetric(boards: ModuleType) -> None:
    """Would catch rows with a ragged last step, or different on both sides of the line."""
    artwork = draw(boards.straight().placement())
    rows: dict[int, list[int]] = {}
    for via in artwork.vias:
        if via.purpose == "fence":
            rows.setdefault(via.y, []).append(via.x)
    assert sorted(rows) == [8_000_000 - 1_950_000, 8_000_000 + 1_950_000]
    north, south = (sorted(rows[y]) for y in sorted(rows))
    assert north == south
    steps = np.diff(north)
    assert steps.max() - steps.min() <= 1
    assert steps.max() <= 2_000_000


def test_fence_pitch_follows_the_smaller_limit(boards: ModuleType) -> None:
    """Would catch the wave length limit left out, or taken at another frequency or permittivity."""
    board = boards.straight()
    board.rules = {"fence": {"max_pitch_wavelengths": 0.02}}
    xs = sorted(v.x for v in draw(board.placement()).vias if v.purpose == "fence" and v.y > 8_000_000)
    limit = 0.02 * 299_792_458.0 / (2.29e9 * math.sqrt(3.55)) * 1e9
    assert limit - 40_000 < np.diff(xs).max() <= limit + 1


def test_least_pitch_of_vias_wins_over_the_fence(boards: ModuleType) -> None:
    """Would catch vias nearer than the board house drills them, for the fence's sake."""
    board = boards.straight()
    board.rules = {"vias": {"min_pitch": "3.1 mm"}}
    vias = draw(board.placement()).vias
    assert min(math.dist((a.x, a.y), (b.x, b.y)) for a, b in itertools.combinations(vias, 2)) >= 3_100_000


def test_without_a_fence_the_pour_is_still_stitched(boards: ModuleType) -> None:
    """Would catch fence = false being taken for no vias at all."""
    board = boards.straight()
    board.ground = {"fence": False}
    assert {via.purpose for via in draw(board.placement()).vias} == {"pour"}


def test_large_pours_are_stitched_inside(boards: ModuleType) -> None:
    """Would catch large areas of copper held at their edges only."""
    board = boards.BoardBuilder(60.0, 50.0)
    board.line("main", [(0.3, 5.0), (59.7, 5.0)], 1.1, ("a", "b"))
    axes = np.array([(v.x, v.y) for v in draw(board.placement()).vias], dtype=float)
    xs, ys = np.meshgrid(np.arange(3e6, 57e6, 5e5), np.arange(15e6, 40e6, 5e5))
    assert cKDTree(axes).query(np.column_stack([xs.ravel(), ys.ravel()]))[0].max() < 5_000_000


def test_vias_come_as_placement_then_fence_then_pour(boards: ModuleType) -> None:
    """Would catch indices of the result's list (via:N in findings) that point elsewhere."""
    placement = boards.feed().placement()
    artwork = draw(placement)
    count = len(placement.vias)
    assert [(v.x, v.y, v.purpose) for v in artwork.vias[:count]] == [
        (v.x, v.y, v.purpose) for v in placement.vias
    ]
    purposes = [via.purpose for via in artwork.vias[count:]]
    assert purposes == sorted(purposes)
    assert {via.net for via in artwork.vias} == {"gnd"}


def test_the_same_placement_gives_the_same_artwork(boards: ModuleType) -> None:
    """Would catch any use of chance or of the clock."""
    assert draw(boards.feed().placement()) == draw(boards.feed().placement())


def test_artwork_does_not_depend_on_the_hash_seed() -> None:
    """Would catch the order of a set or of hashes coming through into the drawing."""
    path = str(Path(__file__).parent / "boards.py")
    script = (
        "import importlib.util, sys\n"
        f"spec = importlib.util.spec_from_file_location('boards', {path!r})\n"
        "boards = importlib.util.module_from_spec(spec); sys.modules['boards'] = boards\n"
        "spec.loader.exec_module(boards)\n"
        "from layoutgen.artwork import draw\n"
        "a = draw(boards.feed().placement())\n"
        "sys.stdout.write(repr((a.shapes, a.vias, a.labels, a.line_copper)))\n"
    )
    out = [
        subprocess.run(
            [sys.executable, "-c", script], env={"PYTHONHASHSEED": seed}, capture_output=True, check=True
        ).stdout
        for seed in ("1", "2")
    ]
    assert out[0] == out[1]
    assert len(out[0]) > 10_000


def test_vias_move_together_where_none_fits_between_them(boards: ModuleType) -> None:
    """Would catch a fence that keeps its even places beside vias of a part, and gapes there for it."""
    board = boards.BoardBuilder(24.0, 12.0)
    board.line("main", [(0.3, 5.0), (23.7, 5.0)], 1.08, ("a", "b"), gap=1.13)
    for x in (12.7, 13.5):
        board.via(x, 5.0 + 0.54 + 1.13 + 0.888)
    artwork = draw(board.placement())
    edge = 5_000_000 + 540_000 + 1_130_000
    row = sorted(v.x for v in artwork.vias if 0 < v.y - edge <= 800_000)
    assert max(b - a for a, b in itertools.pairwise(row)) <= 2_000_000


def test_fence_goes_on_through_a_neck_of_pour(boards: ModuleType) -> None:
    """Would catch a gap in the fence where the pour beside an arc is too narrow for the usual row."""
    board = boards.BoardBuilder(24.0, 13.0)
    board.line("main", [(0.3, 5.0), (23.7, 5.0)], 1.1, ("a", "b"))
    board.radial("fan", (12.0, 5.0), 90.0, 60.0, 0.6, 6.0)
    artwork = draw(board.placement())
    above = sorted((v.x, v.y) for v in artwork.vias if v.y > 11_500_000 and 8_000_000 < v.x < 16_000_000)
    assert len(above) >= 5
    assert max(math.dist(a, b) for a, b in itertools.pairwise(above)) <= 2_000_000


def _row_beside_vias(boards: ModuleType, x0: float, depth: float) -> float:
    """Return the widest step [nm] of a fence row where three vias of a part stand behind it."""
    board = boards.BoardBuilder(24.0, 14.0)
    board.rules = {"vias": {"min_pitch": "1.1 mm"}, "fence": {"max_pitch": "1.6 mm"}}
    board.line("main", [(0.3, 5.0), (23.7, 5.0)], 1.08, ("a", "b"), gap=1.13)
    edge = 5.0 + 0.54 + 1.13
    for k in range(3):
        board.via(x0 + 1.1 * k, edge + depth)
    artwork = draw(board.placement())
    row = sorted(via.x for via in artwork.vias if 0 < via.y - edge * 1e6 <= 800_000)
    return max(b - a for a, b in itertools.pairwise(row))


@pytest.mark.parametrize("x0", [9.0, 9.6, 9.9, 10.2])
def test_a_fence_row_finds_the_places_that_close_it(boards: ModuleType, x0: float) -> None:
    """Would catch a row that gives up where vias set earlier take the places that later ones need."""
    assert _row_beside_vias(boards, x0, 1.3) <= 1_600_000


@pytest.mark.parametrize("x0", [9.0, 9.6, 10.5])
def test_a_gap_that_nothing_closes_is_as_narrow_as_it_can_be(boards: ModuleType, x0: float) -> None:
    """Would catch a row that leaves more open than the vias behind it force it to.

    They stand 0.9 mm behind the nearest that a via of the row may come to the edge, so that the next ones
    stand sqrt(1.1^2 - 0.9^2) mm before the first of them, and after the last.
    """
    least = 2_200_000 + 2.0 * math.sqrt(1.1**2 - 0.9**2) * 1e6
    assert least <= _row_beside_vias(boards, x0, 1.2) <= least + 40_000


class _StandIn:
    """Stands in for a row that gapes as much whatever is set."""

    def excess(self, drills: Drills) -> float:
        """Return a constant [nm]."""
        return 1_000.0


def test_a_mending_that_is_given_up_leaves_no_via(
    boards: ModuleType, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Would catch vias nearer than the least pitch: one moved onto an axis stayed, and the old came back."""
    limits = limits_of(boards.straight().placement().sized)
    area = shapely.box(0, 0, 10e6, 10e6)
    drills = Drills(area, limits, [], (Attitude(10_000_000, 10_000_000, mirrored=True),))
    assert drills.put(5e6, 5.45e6)
    before = drills.axes()
    assert len(before) == 2
    monkeypatch.setattr(mending, "_best_chain", lambda *_: [(5.3e6, 5.02e6)])
    row: Any = _StandIn()
    assert not mending._is_mended(row, [], before, [row], drills)
    assert drills.axes() == before
