"""Nets in which more than four ends meet: chains of tees and crosses, as drawn, judged and computed."""

from __future__ import annotations

import itertools
import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from layoutgen.artwork import draw
from layoutgen.checks import check
from layoutgen.circuit import build_circuit
from layoutgen.errors import InfeasibleError, WrongInputError
from layoutgen.formulas.ends import open_end
from layoutgen.formulas.tees import cross, tee
from layoutgen.placement import Placement, Strip, place
from layoutgen.placement.chains import chained
from layoutgen.reading import inputs_from_data, read_inputs
from layoutgen.response.drawn import drawn_network
from layoutgen.response.medium import medium_of
from layoutgen.response.solve import solve
from layoutgen.response.trace import trace_copper
from layoutgen.sizing import SizedCircuit, default_budgets, size_circuit
from tests.placement.circuits import Data, base, chip, free, line, port, two_ports
from tests.placement.legal import faults

EXAMPLES = sorted((Path(__file__).parents[2] / "examples").glob("*.toml"))
STUBS = {
    "s1": line("n", angle="30 deg"),
    "s2": line("n", angle="40 deg", z="70 ohm"),
    "s3": line("n", angle="50 deg", z="60 ohm"),
    "s4": line("n", angle="25 deg", z="80 ohm"),
    "s5": line("n", "gnd", angle="35 deg", z="80 ohm"),
    "s6": line("n", angle="35 deg", z="80 ohm"),
}
FAN = {"nets": ["n"], "shape": "radial", "sector": "60 deg"}
BRANCH = {"p3": port("y")}


def star(stubs: int = 3, extra: Data | None = None, **tables: Any) -> Data:
    """Return a through line of 60 and 70 degrees with stubs and other lines at its middle."""
    lines = {"i": line("a", "n", angle="60 deg"), "o": line("n", "z", angle="70 deg")}
    some = dict(itertools.islice(STUBS.items(), stubs))
    return base(
        ports={**two_ports(), **tables.pop("ports", {})}, lines={**lines, **some, **(extra or {})}, **tables
    )


CASES: dict[str, Data] = {
    "five": star(),
    "six without pour": {key: table for key, table in star(4).items() if key != "ground"},
    "eight": star(6),
    "shunt part": star(2, parts={"C1": chip("capacitor", "1 pF", "n", "gnd")}),
    "series part": star(
        2, {"br": free("m", "y")}, parts={"C1": chip("capacitor", "1 pF", "n", "m")}, ports=BRANCH
    ),
    "radial": star(2, {"fan": FAN}),
    "port": star(2, ports={"p3": port("n")}),
    "two chains": base(
        ports=two_ports(),
        lines={
            "i": free("a", "n"),
            "m": line("n", "k", angle="60 deg"),
            "o": free("k", "z"),
            **{f"{s}{x}": line(x, angle="30 deg", z="80 ohm") for x in "nk" for s in "tuv"},
        },
    ),
    "loop": base(
        ports=two_ports(),
        lines={
            "i": free("a", "n"),
            "u": line("n", "k", angle="120 deg"),
            "v": line("n", "k", angle="120 deg", z="70 ohm"),
            "o": free("k", "z"),
            **dict(itertools.islice(STUBS.items(), 2)),
        },
    ),
    "pair": base(
        ports=two_ports(),
        lines={"i": free("a", "n"), "o": free("q", "z"), **dict(itertools.islice(STUBS.items(), 3))},
        coupled={
            "cp": {
                "nets": ["n", "open", "open", "q"],
                "even_impedance": "70 ohm",
                "odd_impedance": "40 ohm",
                "angle": "60 deg",
            }
        },
    ),
}


def sized(data: Data) -> SizedCircuit:
    inputs = inputs_from_data(data)
    return size_circuit(build_circuit(inputs.circuit, inputs.rules))


def drain() -> Placement:
    """Return the driver with a second feed and two stubs at its drain, six arms in all."""
    inputs = read_inputs(next(path for path in EXAMPLES if path.stem == "telemetry_driver"))
    file = inputs.circuit
    lines = dict(file.lines)
    lines["drain_feed"] = lines["drain_feed"].model_copy(update={"nets": ("d", "d_bank")})
    lines["feed_2"] = lines["drain_feed"].model_copy(update={"nets": ("d", "d_bank_2")})
    lines["supply_2"] = lines["drain_supply"].model_copy(update={"nets": ("d_bank_2", "vd_2")})
    for name, angle in (("stub_1", 20.0), ("stub_2", 25.0)):
        lines[name] = lines["stub_in"].model_copy(
            update={"nets": ("d",), "impedance": 50.0, "angle": math.radians(angle)}
        )
    ports = {**file.ports, "vd_2": file.ports["vd"].model_copy(update={"net": "vd_2", "edge": "south"})}
    parts = {**file.parts, "C11": file.parts["C7"].model_copy(update={"nets": ("d_bank_2", "gnd")})}
    changed = file.model_copy(update={"lines": lines, "ports": ports, "parts": parts})
    return place(size_circuit(build_circuit(changed, inputs.rules)))


def chain_of(placement: Placement, net: str) -> list[Strip]:
    """Return the strips of a net between its lines' ends, in order."""
    nodes = {
        one.path[0 if index == 0 else -1]
        for one in placement.lines.values()
        for index, name in enumerate(one.nets)
        if name == net
    }
    return [s for s in placement.strips if s.net == net and {s.path[0], s.path[-1]} <= nodes]


@pytest.mark.parametrize("name", CASES)
def test_crowded_nets_are_drawn_legally(name: str) -> None:
    """Catches arms over one another, loose strips, wrong lengths, and names made for the search alone."""
    asked = sized(CASES[name])
    placement = place(asked)
    assert faults(placement) == []
    assert placement.sized.circuit is asked.circuit
    assert set(placement.lines) == set(asked.lines) - set(asked.radials)
    for element in (*placement.lines.values(), *placement.pairs.values(), *placement.radials.values()):
        table = "coupled" if element.name in placement.pairs else "lines"
        assert element.nets == getattr(asked.circuit.file, table)[element.name].nets
        assert placement.sized.circuit is asked.circuit
    used = [
        entry.at
        for one in placement.lines.values()
        for entry in one.budget
        if not entry.at.startswith("bend")
    ]
    assert not any(" " in at for at in used)
    assert {pad.net for part in placement.parts.values() for pad in part.pads} <= set(asked.circuit.nets)


@pytest.mark.parametrize(("name", "count"), [("five", 1), ("six without pour", 1), ("eight", 2)])
def test_a_chain_is_straight_and_has_four_arms_at_most(name: str, count: int) -> None:
    """Catches a strip that is bent, missing or too narrow, and a fifth arm at one of its ends."""
    placement = place(sized(CASES[name]))
    strips = chain_of(placement, "n")
    assert len(strips) == count
    assert [strip.name for strip in strips] == ["strip:n", "strip:n.2"][:count]
    through = [placement.lines["i"], placement.lines["o"]]
    points = [through[0].path[-1], *(strip.path[-1] for strip in strips)]
    assert strips[0].path[0] == points[0] and points[-1] == through[1].path[0]
    assert all(a.path[-1] == b.path[0] for a, b in itertools.pairwise(strips))
    axis = {y for point in (*through[0].path[-2:], *points, *through[1].path[:2]) for y in point[1:]}
    assert len(axis) == 1
    for joint in points:
        arms = sum(joint in (one.path[0], one.path[-1]) for one in placement.lines.values())
        arms += sum(joint in (strip.path[0], strip.path[-1]) for strip in strips)
        assert 3 <= arms <= 4
    assert all(strip.width == max(one.width for one in through) for strip in strips)


def test_a_strip_is_as_short_as_the_spacing_rule_lets_it_be() -> None:
    """Catches strips longer than need be: the nearest arms on one side are as near as the rule allows."""
    placement = place(sized(CASES["eight"]))
    spacing = 3.0 * 508_000
    stubs = [placement.lines[name] for name in STUBS]
    for strip in chain_of(placement, "n"):
        at = [
            [one for one in stubs if end in (one.path[0], one.path[-1])]
            for end in (strip.path[0], strip.path[-1])
        ]
        gaps = [
            abs(a.path[0][0] - b.path[0][0]) - (a.width + b.width) / 2
            for a in at[0]
            for b in at[1]
            if (a.path[1][1] > a.path[0][1]) == (b.path[1][1] > b.path[0][1])
        ]
        assert spacing - 10 <= min(gaps) < spacing + 3_000


def test_a_radial_stub_gets_a_side_to_itself() -> None:
    """Catches a chain stretched by the breadth of a radial stub that could stand opposite the others."""
    placement = place(sized(CASES["radial"]))
    (strip,) = chain_of(placement, "n")
    assert math.dist(*strip.path) < 3e6 < placement.radials["fan"].outer_radius


def test_a_drain_with_two_feeds_and_two_stubs() -> None:
    """Catches a transistor's crowded net: its lead is one end of the chain, the output line the other."""
    placement = drain()
    assert faults(placement) == []
    (strip,) = chain_of(placement, "d")
    assert placement.lines["drain_tab"].path[0] == strip.path[-1]
    assert {placement.lines[name].path[0] for name in ("drain_feed", "feed_2")} == {strip.path[0]}
    assert {placement.lines[name].path[0] for name in ("stub_1", "stub_2")} == {strip.path[-1]}
    artwork = draw(placement)
    assert [found for found in check(artwork).findings if found.severity == "error"] == []


def supply(current: str) -> Data:
    """Return a supply that feeds three loads from one node, each of a third of about the current."""
    loads = {f"b{k}": free("n", f"y{k}", z="") for k in (1, 2, 3)}
    parts = {
        f"R{k}": {"kind": "resistor", "nets": [f"y{k}", "gnd"], "value": "10 ohm", "case": "2512"}
        for k in (1, 2, 3)
    }
    return base(
        ports={
            "v": {"kind": "dc", "net": "v", "voltage": current},
            "p1": port("a"),
            "p2": port("z"),
        },
        lines={"through": free("a", "z"), "feed": free("v", "n", z=""), "s": free("n", "x", z=""), **loads},
        parts={**parts, "R4": chip("resistor", "10 ohm", "x", "gnd", case="2512")},
    )


def test_strips_carry_the_current_of_what_lies_beyond() -> None:
    """Catches a strip's current taken from one arm or summed with a wrong sign, or a strip too narrow."""
    asked = sized(supply("10 V"))
    placement = place(asked)
    assert faults(placement) == []
    (strip,) = chain_of(placement, "n")
    beyond = [
        abs(asked.circuit.dc.currents[name])
        for name, one in placement.lines.items()
        if "n" in one.nets and strip.path[-1] in (one.path[0], one.path[-1])
    ]
    before = [
        asked.circuit.dc.currents[name] * (1.0 if one.nets[1] == "n" else -1.0)
        for name, one in placement.lines.items()
        if "n" in one.nets and strip.path[0] in (one.path[0], one.path[-1])
    ]
    assert strip.current == pytest.approx(abs(math.fsum(before)), rel=1e-9)
    assert strip.current > 0.9 and len(beyond) + len(before) == 5
    assert strip.width >= max(
        one.width for one in placement.lines.values() if "n" in one.nets and one.name != "feed"
    )
    findings = check(draw(placement)).findings
    assert [found for found in findings if found.severity == "error"] == []


def test_the_response_is_that_of_the_same_elements_in_a_row() -> None:
    """Catches a strip left out of the as-drawn circuit, or one junction of five arms in place of two."""
    lines = {"i": free("a", "n"), "o": free("n", "z"), **dict(itertools.islice(STUBS.items(), 3))}
    data = base(ports=two_ports(), lines=lines)
    del data["ground"]
    placement = place(sized(data))
    assert not any(one.bends for one in placement.lines.values())
    artwork = draw(placement)
    f = np.array([1.0e9, 2.245e9, 4.0e9])
    found = solve(drawn_network(artwork, f, {}))
    assert found == pytest.approx(_by_hand(placement, f), abs=1e-9)
    assert not [note for note in trace_copper(artwork).notes if "taken as one" in note[2]]


def _by_hand(placement: Placement, f: np.ndarray) -> np.ndarray:
    """Return S (B, 2, 2) of a through line with three open stubs from its elements' own formulas."""
    h, t, er = 0.508e-3, 35e-6 / 0.508e-3, 3.55
    medium = medium_of(placement.sized.circuit, f)
    (strip,) = chain_of(placement, "n")
    lines = placement.lines
    side = {name: lines[name].path[0] for name in ("s1", "s2", "s3")}
    pair = [name for name in side if side[name] == strip.path[0]]
    (last,) = (name for name in side if side[name] == strip.path[-1])
    u = {name: one.width * 1e-9 / h for name, one in lines.items()}
    middle = strip.width * 1e-9 / h
    four = cross(u["i"], middle, u[pair[0]], u[pair[1]], er, f * h, t)
    three = tee(middle, u["o"], u[last], er, f * h, t)

    def section(width: float, length: Any) -> np.ndarray:
        one = medium.line(width * 1e-9)
        angle = one.wave_number * length
        z = one.impedance * np.ones_like(f)
        return np.array([[np.cos(angle), 1j * z * np.sin(angle)], [1j * np.sin(angle) / z, np.cos(angle)]])

    def stub(name: str, plane: Any) -> Any:
        length = lines[name].centre_line * 1e-9 + (open_end(u[name], er, t) - plane) * h
        a, _, c, _ = section(lines[name].width, length).reshape(4, -1)
        return c / a

    def across(y: Any) -> np.ndarray:
        return np.array([[np.ones_like(y), np.zeros_like(y)], [y, np.ones_like(y)]])

    first = stub(pair[0], four.d_n) + stub(pair[1], four.d_s) + 1j * four.susceptance
    second = stub(last, three.d_side) + 1j * three.susceptance
    row = [
        section(lines["i"].width, lines["i"].centre_line * 1e-9 - four.d_w * h),
        across(first),
        section(strip.width, math.dist(*strip.path) * 1e-9 - (four.d_e + three.d_a) * h),
        across(second),
        section(lines["o"].width, lines["o"].centre_line * 1e-9 - three.d_b * h),
    ]
    whole = row[0]
    for matrix in row[1:]:
        whole = np.einsum("ijb,jkb->ikb", whole, matrix)
    a, b, c, d = whole[0, 0], whole[0, 1] / 50.0, whole[1, 0] * 50.0, whole[1, 1]
    down = a + b + c + d
    s = np.array([[a + b - c - d, 2.0 * np.ones_like(a)], [2.0 * np.ones_like(a), -a + b - c + d]]) / down
    return np.moveaxis(s, 2, 0)


def test_the_list_of_sizes_has_the_same_corrections() -> None:
    """Catches arms of a crowded net that are listed without what their junction takes off their length."""
    lines = {"i": free("a", "n"), "o": free("n", "z"), **dict(itertools.islice(STUBS.items(), 3))}
    asked = sized(base(ports=two_ports(), lines=lines))
    placement = place(asked)
    listed = default_budgets(asked)
    assert [listed[name][1][1].cause for name in ("s1", "s2", "s3")] == ["cross", "cross", "tee"]
    for name in ("s1", "s2", "s3"):
        assert placement.lines[name].bends == ()
        assert listed[name][0] == pytest.approx(placement.lines[name].centre_line * 1e-9, abs=2e-9)


def test_strips_grow_where_what_follows_asks_for_room() -> None:
    """Catches a circuit refused for want of room that a longer strip gives, or drawn otherwise again."""
    parts = {"C1": chip("capacitor", "1 pF", "n", "m"), "R1": chip("resistor", "100 ohm", "n", "m")}
    asked = sized(star(2, {"br": free("m", "y")}, parts=parts, ports=BRANCH))
    placement = place(asked)
    assert faults(placement) == []
    assert placement.choices is not None and placement.choices.longer > 0.0
    again = place(asked, placement.choices)
    assert (again.lines, again.strips, again.choices) == (
        placement.lines,
        placement.strips,
        placement.choices,
    )


def test_a_row_of_stubs_can_be_combed() -> None:
    """Catches a row of stubs given up because the longest is bent across the way of those beside it."""
    lines = {f"e{k}": line("n", angle=f"{angle} deg") for k, angle in enumerate((26, 66, 43, 28))}
    bridge = {"i": free("a", "n"), "o": line("n", "k", angle="55 deg"), "o2": free("k", "z")}
    parts = {"C1": chip("capacitor", "1 pF", "n", "gnd")}
    asked = sized(base(ports=two_ports(), lines={**bridge, **lines}, parts=parts))
    placement = place(asked)
    assert faults(placement) == []
    assert not placement.sized.circuit.file.layout.hints
    combed, plain = (chained(asked, combed=on).circuit.file.layout.hints for on in (True, False))
    strips = {"strip 1 of n", "strip 2 of n"}
    assert (set(combed), set(plain)) == ({*lines, *strips}, strips)
    assert all(hint.route is not None and hint.route.turns == () for hint in combed.values())


@pytest.mark.parametrize(("south", "count"), [(("s1", "s2"), 1), (("s1", "s2", "s3"), 2)])
def test_hints_that_ask_for_one_side_are_kept(south: tuple[str, ...], count: int) -> None:
    """Catches stubs put opposite each other at one junction though hints have both leave southward."""
    hints = {name: {"leave": "south"} for name in south}
    placement = place(sized(star(layout={"hints": hints})))
    assert faults(placement) == []
    assert len(chain_of(placement, "n")) == count
    for name in south:
        (x0, y0), (x1, y1) = placement.lines[name].path[:2]
        assert x0 == x1 and y1 < y0


def test_no_room_is_told_in_the_words_of_the_circuit() -> None:
    """Catches a message that names nets of the search, or gives up a hint that nobody wrote."""
    data = star(6)
    data["board"]["size"] = ["30 mm", "6 mm"]
    with pytest.raises(InfeasibleError, match=r"a board of .* would do") as caught:
        place(sized(data))
    assert "n (" not in str(caught.value) and "layout.hints" not in str(caught.value)


@pytest.mark.parametrize("path", EXAMPLES, ids=lambda path: path.stem)
def test_other_circuits_are_left_as_they_are(path: Path) -> None:
    """Catches a copy, or a change, of a circuit whose nets have four arms at most, or a bank."""
    inputs = read_inputs(path)
    asked = size_circuit(build_circuit(inputs.circuit, inputs.rules))
    assert chained(asked) is asked


def test_without_any_line_five_pads_are_still_refused() -> None:
    """Catches a fifth arm drawn over another where no line gives the strips a cross-section."""
    ports = {f"p{k}": port(f"y{k}") for k in range(5)}
    parts = {f"R{k}": chip("resistor", "50 ohm", "n", f"y{k}") for k in range(5)}
    with pytest.raises(WrongInputError, match="arms"):
        place(sized(base(ports=ports, lines={}, parts=parts)))
