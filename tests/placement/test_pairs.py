"""Coupled pairs in a row, strips of pairs without a rule for gaps, parts that end a pair's strip."""

from __future__ import annotations

import tomllib
from functools import cache
from itertools import pairwise
from pathlib import Path
from typing import Any

import pytest
import shapely

from layoutgen.artwork import Artwork
from layoutgen.circuit import build_circuit
from layoutgen.geometry import stroke
from layoutgen.pipeline import run_inputs
from layoutgen.placement import DEFAULT_GAP, PlacedPair, Placement, place
from layoutgen.placement.model import Limits, Model
from layoutgen.placement.remedies import Remedies
from layoutgen.reading import inputs_from_data
from layoutgen.sizing import size_circuit
from tests.placement.circuits import base, chip, free, port
from tests.placement.test_frames import placed

_RULES = Path(__file__).parents[2] / "rules"
_ALUMINA = {
    "relative_permittivity": 9.8,
    "loss_tangent": 0.0002,
    "height": "0.635 mm",
    "copper_thickness": "5 um",
}
_MODES = ((68, 40), (54.2, 46.4), (52.7, 47.6), (54.2, 46.4), (68, 40))


def row(*size: str, edges: tuple[str, str] = ("west", "east")) -> dict[str, Any]:
    """Return a band pass of five pairs in a row, as drawn on alumina."""
    pairs = {
        f"p{k}": {
            "nets": [f"r{k}", "open", "open", f"r{k + 1}"],
            "even_impedance": f"{even} ohm",
            "odd_impedance": f"{odd} ohm",
            "angle": "90 deg",
        }
        for k, (even, odd) in enumerate(_MODES)
    }
    return base(
        design={"frequency": "9.4 GHz", "band": ["9.3 GHz", "9.5 GHz"]},
        substrate=_ALUMINA,
        board={"rules": "thin-film-ceramic", **({"size": list(size)} if size else {})},
        ports={"i": port("a", edge=edges[0]), "o": port("z", edge=edges[1])},
        lines={"first": free("a", "r0"), "last": free("r5", "z")},
        coupled=pairs,
    )


def strip(pair: PlacedPair, net: str, *, carries: bool) -> shapely.Polygon:
    """Return the strip of a pair that carries a net, or the other one [nm]."""
    found = [i for i in (0, 1) if (net in pair.nets[2 * i : 2 * i + 2]) == carries]
    return stroke(pair.paths[found[0]], pair.width).polygon()


def steps(placement: Placement) -> list[tuple[float, float]]:
    """Return for each two pairs in a row how far apart their other strips are, and how far in a staircase."""
    out = []
    for one, two in pairwise(placement.pairs.values()):
        net = next(iter(set(one.nets) & set(two.nets) - {"open"}))
        apart = strip(one, net, carries=False).distance(strip(two, net, carries=False))
        gaps = [placement.sized.pairs[pair.name].gap * 1e9 for pair in (one, two)]
        out.append((apart, sum(gaps) + min(one.width, two.width)))
    return out


@pytest.mark.parametrize(
    "data",
    [row(), row(edges=("south", "north")), row("20 mm", "8 mm")],
    ids=["free", "upright", "low board"],
)
def test_pairs_in_a_row_are_a_staircase(data: dict[str, Any]) -> None:
    """Catches a row folded back for a smaller board: the feed's open end beside resonator 2, and coupled."""
    for apart, wanted in steps(placed(data)):
        assert apart >= wanted - 10.0


def bare(name: str) -> dict[str, Any]:
    """Return the data of a shipped rule file that says nothing of gaps."""
    data = tomllib.loads((_RULES / f"{name}.toml").read_text(encoding="utf-8"))
    del data["copper"]["min_gap"]
    return data


_LEAST = {
    "format": 1,
    "name": "Least",
    "holes": {"drills": ["0.3 mm"]},
    "vias": {"diameter": "0.6 mm", "drill": "0.3 mm"},
}


@pytest.mark.parametrize("rules", [bare("thin-film-ceramic"), _LEAST], ids=["no gap", "no copper"])
def test_strips_keep_a_gap_where_no_rule_asks_for_one(rules: dict[str, Any]) -> None:
    """Catches an absent rule read as gap 0: unrelated strips edge to edge."""
    inputs = inputs_from_data(row(), rules=rules)
    placement = place(size_circuit(build_circuit(inputs.circuit, inputs.rules)))
    assert Limits.of(placement.sized).gap == DEFAULT_GAP
    assert min(apart for apart, _ in steps(placement)) >= DEFAULT_GAP


def test_no_short_circuit_where_no_rule_asks_for_a_gap() -> None:
    """Catches copper of two nets that touches in the artwork of a board without that rule."""
    inputs = inputs_from_data(row(), rules=bare("thin-film-ceramic"))
    findings = run_inputs(inputs.circuit, inputs.rules).checks.findings
    assert not [found.text for found in findings if found.rule == "connectivity.short"]


def coupler(width: str, gap: str, length: str, **more: Any) -> dict[str, Any]:
    """Return a coupler with a resistor straight on its isolated end."""
    pair = {"nets": ["a1", "a2", "b1", "b2"], "width": width, "gap": gap, "length": length}
    return base(
        ports={"i": port("a", edge="west"), "t": port("b", edge="east"), "c": port("d", edge="north")},
        lines={"l1": free("a", "a1"), "l2": free("a2", "b"), "l3": free("d", "b1")},
        parts={"R": chip("resistor", "50 ohm", "b2", "gnd", case="0402")},
        coupled={"k": pair},
        **more,
    )


_WIDE = coupler("1.07 mm", "0.75 mm", "20 mm")
_NARROW = coupler(
    "0.36 mm",
    "0.15 mm",
    "3.1 mm",
    design={"frequency": "9 GHz", "band": ["8.9 GHz", "9.1 GHz"]},
    substrate={**_ALUMINA, "height": "0.381 mm"},
    board={"rules": "thin-film-ceramic"},
)


@cache
def drawn(which: str) -> tuple[Artwork, list[str]]:
    """Return the artwork of a coupler, and its errors and warnings."""
    inputs = inputs_from_data({"wide": _WIDE, "narrow": _NARROW}[which])
    result = run_inputs(inputs.circuit, inputs.rules)
    return result.artwork, [
        found.text for found in result.checks.findings if found.severity in ("error", "warning")
    ]


@pytest.mark.parametrize("which", ["wide", "narrow"])
def test_a_part_may_end_a_strip_of_a_pair(which: str) -> None:
    """Catches a resistor on a coupler's end refused for its ground pad, kept off by the pour's distance."""
    artwork, faults = drawn(which)
    assert faults == []
    pair, part = artwork.placement.pairs["k"], artwork.placement.parts["R"]
    ground = next(pad for pad in part.pads if pad.net == "gnd").outline.polygon()
    height = artwork.placement.sized.circuit.file.substrate.height * 1e9
    assert ground.distance(strip(pair, "b2", carries=False)) >= height - 10.0


def test_what_goes_on_beside_a_part_at_a_pairs_end_stays_straight() -> None:
    """Catches a line's way to the edge kept off the part that ends the other strip: bends, and no pour."""
    artwork, _ = drawn("wide")
    assert not artwork.placement.lines["l2"].bends
    assert artwork.placement.choices is not None
    assert artwork.placement.choices.effort == 0


def test_a_pad_wider_than_the_strip_begins_beyond_the_pair() -> None:
    """Catches such a pad laid on the strip: nearer to the other strip than the pair's gap."""
    artwork, _ = drawn("narrow")
    placement = artwork.placement
    pair = placement.pairs["k"]
    pad = next(pad for pad in placement.parts["R"].pads if pad.net == "b2").outline.polygon()
    gap = placement.sized.pairs["k"].gap * 1e9
    other = strip(pair, "b2", carries=False)
    assert pad.distance(other) >= gap - 10.0
    assert pad.distance(strip(pair, "b2", carries=True)) >= gap - 10.0
    joint = next(strip for strip in placement.strips if strip.net == "b2")
    assert joint.width == pair.width
    assert stroke(joint.path, joint.width).polygon().intersects(pad)


def test_a_part_at_a_pairs_end_is_told_a_line_between_the_two() -> None:
    """Catches a part too near to a pair that is told other mode impedances only."""
    inputs = inputs_from_data(_WIDE)
    model = Model(size_circuit(build_circuit(inputs.circuit, inputs.rules)))
    told = Remedies(model, lambda _: None, lambda: None).best("k")
    assert told.startswith("a line between k and R, or ")
