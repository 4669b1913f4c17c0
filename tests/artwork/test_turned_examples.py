"""Examples turned and mirrored by hints: the artwork is turned or mirrored with them, to the nanometre."""

from __future__ import annotations

import tomllib
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

import pytest
import shapely

from layoutgen.artwork import Artwork, draw
from layoutgen.circuit import build_circuit
from layoutgen.geometry import Ring
from layoutgen.pipeline import run_inputs
from layoutgen.placement import place
from layoutgen.reading import inputs_from_data
from layoutgen.sizing import size_circuit
from tests.artwork.turning import Move, turned

_EXAMPLES = Path(__file__).parents[2] / "examples"
_LAYERS = ("copper_top", "copper_bottom", "soldermask_top", "soldermask_bottom", "paste_top", "profile")
_MOVES = {"90": Move(1), "180": Move(2), "270": Move(3), "mirrored": Move(mirrored=True)}
_LIGHT = ("equal_divider", "radial_stub_bias_tee", "stepped_low_pass", "stub_notch")
_PINNED = ("alumina_filter", "edge_coupled_band_pass", "telemetry_driver")


def _drawn(data: dict[str, Any]) -> Artwork:
    inputs = inputs_from_data(data)
    return draw(place(size_circuit(build_circuit(inputs.circuit, inputs.rules))))


@cache
def _plain(name: str) -> tuple[dict[str, Any], Artwork]:
    data = tomllib.loads((_EXAMPLES / f"{name}.toml").read_text(encoding="utf-8"))
    return data, _drawn(data)


@cache
def _at_rest(name: str, pinned: bool) -> Artwork:
    data, plain = _plain(name)
    return _drawn(turned(data, plain.placement, Move(), pinned=pinned))


def _outline(ring: Ring, move: Move, size: tuple[int, int]) -> list[tuple[int, int]]:
    """Return a moved outline; of a circle its four outermost points, so that no chord's phase matters."""
    points = ring.points if ring.is_straight else ring.chords(100.0)
    if len(ring.points) == 2:
        (x0, y0), (x1, y1) = ring.points
        x, y, radius = (x0 + x1) // 2, (y0 + y1) // 2, (abs(x1 - x0) + abs(y1 - y0)) // 2
        points = ((x - radius, y), (x, y - radius), (x + radius, y), (x, y + radius))
    return [move.point(*point, *size) for point in points]


def _area(artwork: Artwork, layer: str, move: Move) -> shapely.Geometry:
    """Return all that is on a layer, moved [nm]."""
    size = (artwork.placement.width, artwork.placement.height)
    shapes = [
        shapely.Polygon(_outline(shape.outline, move, size), [_outline(h, move, size) for h in shape.holes])
        for shape in artwork.on(layer)
    ]
    return shapely.union_all([shape if shape.is_valid else shape.buffer(0.0) for shape in shapes])


def _moved_list(artwork: Artwork, move: Move) -> list[tuple[Any, ...]]:
    """Return all vias and holes, moved, without regard to their order."""
    size = (artwork.placement.width, artwork.placement.height)
    vias = [(*move.point(v.x, v.y, *size), v.drill, v.land, v.net, v.purpose) for v in artwork.vias]
    holes = [(*move.point(h.x, h.y, *size), h.diameter, h.plated, h.net, "") for h in artwork.holes]
    return sorted([*vias, *holes], key=str)


def _alike(here: shapely.Geometry, there: shapely.Geometry) -> bool:
    """True when no outline is more than a nanometre off."""
    if here.is_empty or there.is_empty:
        return bool(here.is_empty and there.is_empty)
    apart = shapely.symmetric_difference(here, there)
    return bool(apart.area <= 0.5 * here.length and apart.buffer(-1.0).is_empty)


def _differing(a: Artwork, b: Artwork, move: Move) -> list[str]:
    """Return the layers of the first artwork, moved, that are not those of the second to a nanometre."""
    out = [layer for layer in _LAYERS if not _alike(_area(a, layer, move), _area(b, layer, Move()))]
    if _moved_list(a, move) != _moved_list(b, Move()):
        out.append("vias and holes")
    return out


@pytest.mark.parametrize("how", _MOVES)
@pytest.mark.parametrize("name", (*_LIGHT, *_PINNED))
def test_turned_hints_turn_every_layer(name: str, how: str) -> None:
    """Catches rows, grids, ties and roundings that depend on how the board lies."""
    data, plain = _plain(name)
    pinned, move = name in _PINNED, _MOVES[how]
    rest = _at_rest(name, pinned)
    moved = _drawn(turned(data, plain.placement, move, pinned=pinned))
    assert (moved.placement.width, moved.placement.height) == move.size(
        rest.placement.width, rest.placement.height
    )
    assert _differing(rest, moved, move) == []


@pytest.mark.parametrize("name", _PINNED)
def test_a_drawing_pinned_by_its_own_hints_is_the_same(name: str) -> None:
    """Catches a turned copy that is compared with a drawing that has nothing to do with the file's own."""
    assert _differing(_plain(name)[1], _at_rest(name, pinned=True), Move()) == []


@pytest.mark.parametrize(("name", "how"), [("shorted_stub_tee", "mirrored"), ("telemetry_driver", "90")])
def test_copies_pinned_by_settled_drawings_settle_where_these_did(name: str, how: str) -> None:
    """A first draft's widths and lengths are not the settled ones: pins that fit only these were refused."""
    data = tomllib.loads((_EXAMPLES / f"{name}.toml").read_text(encoding="utf-8"))
    settled = _settled(data)
    copied = _settled(turned(data, settled.placement, _MOVES[how], pinned=True))
    assert _differing(settled, copied, _MOVES[how]) == []


def _settled(data: dict[str, Any]) -> Artwork:
    inputs = inputs_from_data(data)
    return run_inputs(inputs.circuit, inputs.rules).artwork


def test_the_comparison_sees_three_nanometres() -> None:
    """Catches a comparison that lets differing artwork pass."""
    whole = _plain("equal_divider")[1]
    first, *others = whole.shapes
    moved = Ring(tuple((x + 3, y) for x, y in first.outline.points))
    shifted = replace(whole, shapes=(replace(first, outline=moved), *others))
    assert _differing(whole, shifted, Move()) == ["copper_top"]
    via, *rest = whole.vias
    assert _differing(whole, replace(whole, vias=(replace(via, x=via.x + 1), *rest)), Move()) == [
        "vias and holes"
    ]


@pytest.mark.parametrize("name", ["equal_divider", "quarter_wave_transformer"])
def test_symmetric_boards_have_symmetric_vias(name: str) -> None:
    """Catches a fence that begins at one end only: a symmetric circuit's mirror image is itself."""
    artwork = _plain(name)[1]
    height = artwork.placement.height
    axes = {(via.x, via.y) for via in artwork.vias}
    assert axes == {(x, height - y) for x, y in axes}


def test_names_move_no_copper() -> None:
    """Catches stitching that makes room for texts: longer names must leave the artwork as it was."""
    data, plain = _plain("equal_divider")
    longer = {**data, "design": {**data["design"], "title": "A much longer title", "revision": "B2"}}
    assert _differing(plain, _drawn(longer), Move()) == []
