"""A design turned or mirrored by its hints is the same artwork turned or mirrored, to the nanometre."""

from __future__ import annotations

import copy
from collections.abc import Callable
from typing import Any

import pytest
import shapely

from layoutgen.artwork import draw
from layoutgen.circuit import build_circuit
from layoutgen.placement import Placement, place
from layoutgen.reading import inputs_from_data
from layoutgen.sizing import size_circuit
from tests.placement.circuits import FEEDBACK, base, chip, divider, free, line, port

EDGES = ["east", "north", "west", "south"]
MIRRORED = {"east": "east", "north": "south", "west": "west", "south": "north"}


def placed(data: dict[str, Any]) -> Placement:
    inputs = inputs_from_data(data)
    return place(size_circuit(build_circuit(inputs.circuit, inputs.rules)))


def turned(data: dict[str, Any], quarters: int) -> dict[str, Any]:
    """Return a circuit whose edges and hinted headings are turned counter-clockwise."""
    return _with_edges(data, {edge: EDGES[(i + quarters) % 4] for i, edge in enumerate(EDGES)})


def mirrored(data: dict[str, Any]) -> dict[str, Any]:
    """Return a circuit whose edges, hinted headings and turns are mirrored north to south."""
    data = _with_edges(data, MIRRORED)
    for hint in data.get("layout", {}).get("hints", {}).values():
        if "route" in hint:
            swap = {"left": "right", "right": "left"}
            hint["route"] = [swap.get(item, item) for item in hint["route"]]
    return data


def _with_edges(data: dict[str, Any], edges: dict[str, str]) -> dict[str, Any]:
    data = copy.deepcopy(data)
    for record in data["ports"].values():
        record["edge"] = edges[record["edge"]]
    for hint in data.get("layout", {}).get("hints", {}).values():
        for key in ("leave", "heading"):
            if key in hint:
                hint[key] = edges[hint[key]]
    return data


def points(placement: Placement) -> dict[str, list[tuple[int, int]]]:
    """Return everything that has a place [nm], twice the distance from the board's middle."""
    found: dict[str, list[tuple[int, int]]] = {name: list(x.path) for name, x in placement.lines.items()}
    for part in placement.parts.values():
        for pad in part.pads:
            found[f"{part.name}.{pad.pin}{pad.net}"] = [(pad.x, pad.y)]
    found |= {f"port {name}": [(x.x, x.y)] for name, x in placement.ports.items()}
    found["vias"] = [(via.x, via.y) for via in placement.vias]
    found["strips"] = [point for strip in placement.strips for point in strip.path]
    w, h = placement.width, placement.height
    return {name: sorted((2 * x - w, 2 * y - h) for x, y in some) for name, some in found.items()}


def is_moved(a: Placement, b: Placement, move: Any) -> list[str]:
    """Return what is not where a movement of the plane puts it, a nanometre of rounding allowed."""
    first, second = points(a), points(b)
    wrong = []
    for name, some in first.items():
        expected = sorted(move(x, y) for x, y in some)
        near = all(any(abs(x - p) <= 2 and abs(y - q) <= 2 for p, q in second[name]) for x, y in expected)
        if len(expected) != len(second[name]) or not near:
            wrong.append(f"{name}: {expected} became {second[name]}")
    return wrong


def _through(north: str = "north", **extra: Any) -> dict[str, Any]:
    """Return a through line with a hinted stub, a feed with its bank, and a coupling capacitor."""
    return base(
        ports={
            "p1": port("a", edge="west"),
            "p2": port("z", edge="east"),
            "v": {"kind": "dc", "net": "v", "voltage": "5 V", "edge": north},
        },
        lines={
            "in": free("a", "n"),
            "mid": line("n", "m", angle="60 deg"),
            "stub": line("m", angle="40 deg", z="70 ohm"),
            "out": free("k", "z"),
            "feed": line("n", "b", angle="90 deg", z="90 ohm"),
            "supply": free("b", "v", z=""),
        },
        parts={
            "C1": chip("capacitor", "22 pF", "m", "k"),
            "C2": chip("capacitor", "22 pF", "b", "gnd"),
            "C3": chip("capacitor", "1 nF", "b", "gnd"),
        },
        layout={"hints": {"stub": {"leave": "south"}}},
        **extra,
    )


def _ring() -> dict[str, Any]:
    data = divider()
    data["ports"] = {
        "p1": port("a", edge="west"),
        "p2": port("y", edge="north"),
        "p3": port("z", edge="south"),
    }
    return data


def _amplifier() -> dict[str, Any]:
    return base(
        ports={"p1": port("a", edge="west"), "p2": port("z", edge="east")},
        lines={
            "in": free("a", "n"),
            "base": line("n", "b", angle="30 deg"),
            "stub": line("n", angle="50 deg"),
            "collector": line("c", "z", angle="40 deg"),
        },
        parts={"Q1": {"kind": "transistor", "footprint": "small", "pins": {"b": "b", "c": "c", "e": "gnd"}}},
        footprints={"small": FEEDBACK},
        layout={"hints": {"stub": {"leave": "north"}, "Q1": {"heading": "east"}}},
    )


DESIGNS = {"through": _through(), "divider": _ring(), "amplifier": _amplifier()}


@pytest.mark.parametrize("name", DESIGNS)
@pytest.mark.parametrize("quarters", [1, 2, 3])
def test_turned_hints_turn_the_artwork(name: str, quarters: int) -> None:
    """Catches a choice that depends on east and north, or rounding that turns with the board."""
    moves = {1: lambda x, y: (-y, x), 2: lambda x, y: (-x, -y), 3: lambda x, y: (y, -x)}
    plain, other = placed(DESIGNS[name]), placed(turned(DESIGNS[name], quarters))
    size = (plain.width, plain.height)
    assert (other.width, other.height) == (size if quarters == 2 else size[::-1])
    assert is_moved(plain, other, moves[quarters]) == []


@pytest.mark.parametrize("name", ["through"])
def test_mirrored_hints_mirror_the_artwork(name: str) -> None:
    """Catches a preference for left or right that outweighs the hints."""
    plain, other = placed(DESIGNS[name]), placed(mirrored(DESIGNS[name]))
    assert (plain.width, plain.height) == (other.width, other.height)
    assert is_moved(plain, other, lambda x, y: (x, -y)) == []


Move = Callable[[int, int], tuple[int, int]]


def drawn(data: dict[str, Any], move: Move) -> dict[str, shapely.Geometry]:
    """Return signal copper, pour and paste as moved [half nm, from the board's middle]."""
    artwork = draw(placed(data))
    w, h = artwork.placement.width, artwork.placement.height
    found: dict[str, list[shapely.Polygon]] = {"signal": [], "pour": [], "paste": []}
    for shape in (*artwork.on("copper_top"), *artwork.on("paste_top")):
        kind = "paste" if shape.layer == "paste_top" else "signal" if shape.net != "gnd" else shape.role
        if kind in found:
            rings = [ring.chords(900.0) for ring in (shape.outline, *shape.holes)]
            moved = [[move(2 * x - w, 2 * y - h) for x, y in ring] for ring in rings]
            found[kind].append(shapely.Polygon(moved[0], moved[1:]))
    return {kind: shapely.union_all(shapes) for kind, shapes in found.items()}


def differs(a: shapely.Geometry, b: shapely.Geometry) -> bool:
    """True when two areas differ by more than a nanometre along their edges."""
    return bool(shapely.symmetric_difference(a, b).area > 4.0 * (a.length + 1.0))


COPPER_MOVES: dict[str, tuple[Callable[[dict[str, Any]], dict[str, Any]], Move]] = {
    "quarter": (lambda data: turned(data, 1), lambda x, y: (-y, x)),
    "half": (lambda data: turned(data, 2), lambda x, y: (-x, -y)),
    "mirror": (mirrored, lambda x, y: (x, -y)),
}


@pytest.mark.parametrize("name", ["through", "amplifier"])
def test_vias_move_with_the_hints(name: str) -> None:
    """Catches rows and grids of vias that begin at the board's west or south end, however it lies."""
    change, move = COPPER_MOVES["quarter"]
    plain, other = draw(placed(DESIGNS[name])), draw(placed(change(DESIGNS[name])))
    axes = []
    for artwork in (plain, other):
        w, h = artwork.placement.width, artwork.placement.height
        axes.append([(2 * via.x - w, 2 * via.y - h, via.purpose) for via in artwork.vias])
    assert sorted((*move(x, y), purpose) for x, y, purpose in axes[0]) == sorted(axes[1])


@pytest.mark.parametrize("how", COPPER_MOVES)
def test_copper_and_pour_move_with_the_hints(how: str) -> None:
    """Catches a pour that is cleaned otherwise in one direction than in another, or copper off by a bit."""
    change, move = COPPER_MOVES[how]
    plain = drawn(DESIGNS["through"], move)
    other = drawn(change(DESIGNS["through"]), lambda x, y: (x, y))
    assert [kind for kind in plain if differs(plain[kind], other[kind])] == []
