"""Slits between lands of ground vias that stand within a line's distance, where the pour may not come."""

from __future__ import annotations

from types import ModuleType

import pytest
import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork import Artwork, draw

LEAST = {"copper": {"min_gap": "0.3 mm"}}


def _board(boards: ModuleType, *extra: list[tuple[float, float]], apart: float = 0.8) -> Artwork:
    """Return a line with two vias of a part beside it, within the pour's distance; extra lines in the way."""
    board = boards.BoardBuilder(20.0, 12.0, rules=LEAST, gap=1.5)
    board.line("main", [(0.5, 4.0), (19.5, 4.0)], 1.0, ("a", "b"))
    for k, path in enumerate(extra):
        board.line(f"extra_{k}", path, 0.3, (f"x{k}",))
    board.via(10.0, 5.25)
    board.via(10.0 + apart, 5.25)
    artwork: Artwork = draw(board.placement())
    return artwork


def _copper(artwork: Artwork, ground: bool) -> BaseGeometry:
    shapes = [s for s in artwork.on("copper_top") if (s.net == "gnd") == ground]
    return shapely.union_all([shapely.Polygon(s.outline.chords(50.0)) for s in shapes if s.role != "pour"])


@pytest.mark.parametrize("apart", [0.65, 0.8, 0.89])
def test_lands_nearer_than_the_least_gap_are_bridged(boards: ModuleType, apart: float) -> None:
    """Would catch a slit that no house etches between lands of one net, or a bridge thinner than a land."""
    artwork = _board(boards, apart=apart)
    ground = _copper(artwork, ground=True)
    whole = shapely.box(10e6, 4.96e6, 10e6 + apart * 1e6, 5.54e6)
    assert ground.covers(whole)
    assert ground.distance(_copper(artwork, ground=False)) >= 450_000 - 2


def test_lands_at_the_least_gap_stay_apart(boards: ModuleType) -> None:
    """Would catch copper added where nothing asks for it."""
    between = shapely.Point(10.45e6, 5.25e6)
    assert not _copper(_board(boards, apart=0.901), ground=True).intersects(between)


def test_no_bridge_comes_nearer_to_signal_copper_than_allowed(boards: ModuleType) -> None:
    """Would catch a bridge run over, or nearer than the least gap to, a line between the lands."""
    artwork = _board(boards, [(10.4, 8.0), (10.4, 5.75)])
    ground, signal = _copper(artwork, ground=True), _copper(artwork, ground=False)
    assert not ground.intersects(shapely.Point(10.4e6, 5.25e6))
    assert ground.distance(signal) > 200_000
