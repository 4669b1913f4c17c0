"""Vias beside exposed ground pads that have no room for their own."""

from __future__ import annotations

import math
from dataclasses import replace
from types import ModuleType
from typing import Any

import pytest
import shapely

from layoutgen.artwork import Artwork, draw
from layoutgen.artwork.attitude import Attitude
from layoutgen.artwork.lying import moved
from layoutgen.placement import Placement


def _board(boards: ModuleType, heading: float = 0.0, *, shut_in: bool = False) -> Placement:
    """Return a board with a part on ground whose exposed pad takes one via, beside a line."""
    board: Any = boards.BoardBuilder(20.0, 16.0)
    board.line("main", [(0.3, 5.0), (19.7, 5.0)], 1.1, ("a", "b"))
    board.chip("U1", 10.0, 8.0, heading, ("x", "gnd"), ground_vias=False)
    part = board.parts["U1"]
    pads = tuple(replace(pad, ground="vias") if pad.net == "gnd" else pad for pad in part.pads)
    board.parts["U1"] = replace(part, pads=pads)
    board.via(pads[1].x / 1e6, pads[1].y / 1e6, purpose="part:U1")
    if shut_in:
        x, y = pads[1].x / 1e6, pads[1].y / 1e6
        for k, (u, v) in enumerate(((1.2, 0.0), (-1.0, 0.0), (0.0, 1.2), (0.0, -1.2))):
            side = [(x + u - 1.6 * v, y + v - 1.6 * u), (x + u + 1.6 * v, y + v + 1.6 * u)]
            board.line(f"wall_{k}", side, 0.6, (f"w{k}",), gap=0.3)
    placement: Placement = board.placement()
    return placement


def _own(artwork: Artwork) -> list[tuple[int, int]]:
    return [(via.x, via.y) for via in artwork.vias if via.purpose == "part:U1"]


@pytest.mark.parametrize("heading", [0.0, 90.0, 180.0, 270.0])
def test_a_small_ground_pad_gets_its_second_via_beside_it(boards: ModuleType, heading: float) -> None:
    """Would catch a pad left with one via, a via under the mask opening, or one that hangs by a thread."""
    placement = _board(boards, heading)
    artwork = draw(placement)
    first, second = _own(artwork)
    pad = placement.parts["U1"].pads[1]
    area = pad.outline.polygon()
    assert area.covers(shapely.Point(first))
    assert area.distance(shapely.Point(second)) >= 50_000 + 300_000
    assert math.dist(first, second) >= 800_000
    ground = shapely.union_all(
        [
            s.outline.polygon()
            for s in artwork.on("copper_top")
            if s.role in ("ground", "pad") and s.net == "gnd"
        ]
    )
    assert ground.buffer(-290_000, join_style="mitre").covers(shapely.LineString([(pad.x, pad.y), second]))
    signal = shapely.union_all([s.outline.polygon() for s in artwork.on("copper_top") if s.net != "gnd"])
    assert signal.distance(shapely.Point(second)) >= 300_000 + 125_000


def test_the_rest_of_the_flow_sees_the_new_via(boards: ModuleType) -> None:
    """Would catch a via that is drilled but left out of the as-drawn circuit."""
    artwork = draw(_board(boards))
    placed = [(via.x, via.y) for via in artwork.placement.vias if via.purpose == "part:U1"]
    assert placed == _own(artwork)
    assert len(artwork.placement.ground_shapes) == 1


def test_no_via_is_forced_where_there_is_no_room(boards: ModuleType) -> None:
    """Would catch a via squeezed between lines for the sake of its number."""
    assert len(_own(draw(_board(boards, shut_in=True)))) == 1


@pytest.mark.parametrize("quarters", [1, 2, 3])
def test_the_new_via_turns_with_the_board(boards: ModuleType, quarters: int) -> None:
    """Would catch a side of the pad that is preferred by where it lies on the sheet."""
    placement = _board(boards)
    by = Attitude(placement.width, placement.height, quarters, mirrored=quarters == 2)
    assert list(map(by.point, _own(draw(placement)))) == _own(draw(moved(placement, by)))
