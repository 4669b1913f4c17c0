"""The spine, the loops and the faults of whole circuits."""

from __future__ import annotations

import random
from pathlib import Path

import pytest

from layoutgen.circuit import build_circuit
from layoutgen.circuit.graph import build_graph
from layoutgen.circuit.loops import independent_loops
from layoutgen.errors import WrongInputError
from layoutgen.reading import read_inputs

IN, OUT = {"net": "in"}, {"net": "out"}


def line(*nets, **more):
    return {"nets": list(nets), "impedance": "50 ohm", "angle": "30 deg", **more}


def capacitor(a, b="gnd", value="10 pF"):
    return {"kind": "capacitor", "nets": [a, b], "value": value, "case": "0603"}


def resistor(a, b, value="100 ohm"):
    return {"kind": "resistor", "nets": [a, b], "value": value, "case": "0603"}


def fet(**pins):
    return {"kind": "transistor", "footprint": "fet", "pins": pins}


def divider(**more):
    return {
        "ports": {"p1": {"net": "in"}, "p2": {"net": "o1"}, "p3": {"net": "o2"}},
        "lines": {"arm1": line("in", "o1"), "arm2": line("in", "o2")},
        "parts": {"R": resistor("o1", "o2")},
        **more,
    }


class TestSpine:
    def test_runs_from_first_to_second_rf_port_through_parts_and_pins(self, build):
        """Would catch a spine that stops at a capacitor or a transistor, or takes a stub."""
        circuit = build(
            ports={"in": {"net": "in"}, "out": {"net": "out"}},
            lines={"a": line("in", "m"), "stub": line("m"), "b": line("d", "out")},
            parts={"C": capacitor("m", "g"), "Q": fet(gate="g", drain="d", source="gnd")},
        )
        assert circuit.spine == ("in", "a", "C", "Q", "b", "out")

    def test_prefers_the_way_without_dc_nets(self, build):
        """Would catch a spine through a shared supply that is shorter by elements."""
        circuit = build(
            ports={"in": IN, "out": OUT, "v": {"kind": "dc", "net": "v", "voltage": "5 V"}},
            lines={
                "f1": line("in", "v"),
                "f2": line("v", "out"),
                "a": line("in", "m"),
                "b": line("m", "n"),
                "c": line("n", "out"),
            },
        )
        assert circuit.spine == ("in", "a", "b", "c", "out")

    def test_goes_round_an_isolation_resistor(self, build):
        """Would catch a divider whose spine passes the resistor because it is one element."""
        circuit = build(
            **{**divider(), "ports": {"p2": {"net": "o1"}, "p3": {"net": "o2"}, "p1": {"net": "in"}}}
        )
        assert circuit.spine == ("p2", "arm1", "arm2", "p3")

    def test_passes_a_resistor_that_is_the_only_way(self, build):
        """Would catch an attenuator without a spine."""
        circuit = build(
            ports={"p": IN, "q": OUT}, lines={"a": line("in", "m")}, parts={"R": resistor("m", "out")}
        )
        assert circuit.spine == ("p", "a", "R", "q")

    def test_crosses_a_coupled_pair_from_strip_to_strip(self, build):
        """Would catch a coupled filter without a path."""
        circuit = build(
            ports={"p": IN, "q": OUT},
            coupled={
                "k": {
                    "nets": ["in", "open", "open", "out"],
                    "width": "1 mm",
                    "gap": "0.2 mm",
                    "angle": "90 deg",
                }
            },
        )
        assert circuit.spine == ("p", "k", "q")

    def test_with_one_rf_port_ends_at_the_farthest_element(self, build):
        """Would catch a one-port whose spine ends at its first junction."""
        circuit = build(
            ports={"p": IN},
            lines={"a": line("in", "m"), "stub": line("m"), "b": line("m", "n"), "end": line("n")},
        )
        assert circuit.spine == ("p", "a", "b", "end")

    def test_skips_an_rf_port_that_hangs_elsewhere(self, build):
        """Would catch a crash on two circuits that share a board."""
        circuit = build(
            ports={"p": IN, "x": {"net": "x"}, "q": OUT},
            lines={"a": line("in", "out"), "b": line("x")},
        )
        assert circuit.spine == ("p", "a", "q")

    def test_without_rf_port_starts_at_the_first_port(self, build):
        """Would catch a crash on a supply board."""
        circuit = build(
            ports={"v": {"kind": "dc", "net": "v", "voltage": "5 V"}},
            lines={"s": {"nets": ["v", "w"], "length": "free"}},
            parts={"C": capacitor("w")},
        )
        assert circuit.spine == ("v", "s", "C")

    def test_given_names_are_joined_by_what_lies_between(self, build):
        """Would catch a hint that is not binding, or gaps left in it."""
        tables = divider(layout={"spine": ["p1", "arm2", "p3"]})
        assert build(**tables).spine == ("p1", "arm2", "p3")
        tables = divider(layout={"spine": ["p2", "p3"]})
        assert build(**tables).spine == ("p2", "arm1", "arm2", "p3")
        tables = divider(layout={"spine": ["p2", "R", "p3"]})
        assert build(**tables).spine == ("p2", "R", "p3")

    def test_given_spine_leaves_a_transistor_by_another_pin(self, build):
        """Would catch a path that turns back at a named transistor."""
        circuit = build(
            ports={"in": IN, "out": OUT},
            lines={"a": line("in", "g"), "b": line("d", "out")},
            parts={"Q": fet(gate="g", drain="d", source="gnd")},
            layout={"spine": ["in", "Q", "out"]},
        )
        assert circuit.spine == ("in", "a", "Q", "b", "out")

    def test_given_spine_that_cannot_be_followed_is_an_error(self, build):
        """Would catch a binding hint dropped in silence."""
        with pytest.raises(WrongInputError) as error:
            build(
                ports={"in": IN, "out": OUT},
                lines={"a": line("in", "out"), "stub": line("out")},
                layout={"spine": ["in", "stub", "out"]},
            )
        assert 'no path from "stub" to "out"' in str(error.value)
        assert error.value.faults[0].key == "layout.spine[2]"

    def test_ties_go_to_the_element_first_in_the_file(self, build):
        """Would catch a choice that depends on the order of a set."""
        for order in (("x", "y"), ("y", "x")):
            circuit = build(ports={"p": IN, "q": OUT}, lines={name: line("in", "out") for name in order})
            assert circuit.spine == ("p", order[0], "q")


class TestLoops:
    def test_a_tree_has_none(self, build):
        """Would catch ground taken as a net that closes loops."""
        circuit = build(
            ports={"p": IN, "q": OUT},
            lines={"a": line("in", "m"), "b": line("m", "out"), "s": line("m", "gnd")},
            parts={"C": capacitor("in"), "D": capacitor("out")},
        )
        assert circuit.loops == ()

    def test_divider_has_one(self, build):
        """Would catch a loop through a part that is missed, or elements outside it listed."""
        assert build(**divider()).loops == (("arm1", "arm2", "R"),)

    def test_two_parts_in_parallel_are_one(self, build):
        """Would catch a loop of two elements that is missed."""
        circuit = build(
            ports={"p": IN, "q": OUT}, parts={"C": capacitor("in", "out"), "R": resistor("in", "out")}
        )
        assert circuit.loops == (("C", "R"),)

    def test_ladder_gives_its_meshes(self, build):
        """Would catch loops round two meshes where the two meshes themselves are shorter."""
        rails = {f"t{i}": line(f"a{i}", f"a{i + 1}") for i in range(2)}
        rails |= {f"b{i}": line(f"c{i}", f"c{i + 1}") for i in range(2)}
        rungs = {f"r{i}": line(f"a{i}", f"c{i}") for i in range(3)}
        circuit = build(ports={"p": {"net": "a0"}, "q": {"net": "c2"}}, lines=rails | rungs)
        assert {frozenset(loop) for loop in circuit.loops} == {
            frozenset({"t0", "r1", "b0", "r0"}),
            frozenset({"t1", "r2", "b1", "r1"}),
        }

    def test_elements_stand_in_order_round_the_loop(self, build):
        """Would catch neighbours in the tuple that do not meet."""
        ring = {f"l{i}": line(f"n{i}", f"n{(i + 1) % 6}") for i in (0, 3, 1, 5, 2, 4)}
        circuit = build(ports={"p": {"net": "n0"}, "q": {"net": "n3"}}, lines=ring)
        assert circuit.loops == (("l0", "l1", "l2", "l3", "l4", "l5"),)

    def test_pins_of_one_net_are_no_loop(self, build):
        """Would catch a transistor with two pins on one net taken as a loop."""
        circuit = build(
            ports={"p": IN},
            parts={"Q": fet(gate="in", drain="in", source="gnd")},
        )
        assert circuit.loops == ()

    def test_count_is_that_of_independent_loops_on_random_circuits(self, read):
        """Would catch dependent or missing loops: edges - nodes + islands, and each loop closed."""
        rng = random.Random(1)
        for _ in range(20):
            nets = [f"n{i}" for i in range(rng.randint(3, 9))]
            pairs = [rng.sample(nets, 2) for _ in range(rng.randint(3, 20))]
            lines = {f"l{i}": line(*pair) for i, pair in enumerate(pairs)}
            used = sorted({net for pair in pairs for net in pair})
            file = read(ports={f"p{net}": {"net": net} for net in used}, lines=lines)
            graph = build_graph(file)
            loops = independent_loops(graph)
            islands = len(graph.islands())
            assert len(loops) == len(lines) - len(used) + islands
            vectors = [[name in loop for name in lines] for loop in loops]
            assert _rank_mod_2(vectors) == len(loops)
            for loop in loops:
                met = [net for name in loop for net in lines[name]["nets"]]
                assert all(met.count(net) == 2 for net in met)


def _rank_mod_2(rows):
    rank, left = 0, [int("".join(map(str, map(int, row))), 2) for row in rows]
    while left:
        pivot = left.pop()
        if pivot:
            rank += 1
            low = pivot & -pivot
            left = [row ^ pivot if row & low else row for row in left]
    return rank


class TestFaults:
    def test_an_island_without_port_is_named(self, build):
        """Would catch a drawing with copper that hangs on nothing."""
        with pytest.raises(WrongInputError) as error:
            build(
                ports={"p": IN, "q": OUT},
                lines={"a": line("in", "out"), "lost": line("x", "y"), "tail": line("y", "gnd")},
                parts={"C": capacitor("x")},
            )
        (fault,) = error.value.faults
        assert fault.key == "lines.lost"
        assert "tail, C" in fault.found

    def test_a_circuit_without_port_is_refused(self, build):
        """Would catch a traceback on an empty port table."""
        with pytest.raises(WrongInputError, match="no port"):
            build(lines={"a": line("x", "y"), "b": line("x", "y")})

    def test_faults_of_several_kinds_are_reported_together(self, build):
        """Would catch a run that stops at the first fault."""
        with pytest.raises(WrongInputError) as error:
            build(
                ports={"p": IN, "v": {"kind": "dc", "net": "v", "voltage": "5 V"}},
                lines={"a": line("in", "v"), "s": line("v", "gnd"), "x": line("y", "z"), "w": line("z", "y")},
            )
        assert [fault.key for fault in error.value.faults] == ["lines.x", "ports.v"]

    def test_a_supply_line_on_a_net_that_no_supply_reaches_is_refused(self, build):
        """Would catch a line without width that would be drawn as wide as a current of zero asks for."""
        with pytest.raises(WrongInputError) as error:
            build(
                ports={"p": IN, "q": OUT, "v": {"kind": "dc", "net": "v", "voltage": "5 V"}},
                lines={
                    "a": line("in", "m"),
                    "b": line("m", "out"),
                    "s": {"nets": ["m", "n"], "length": "free"},
                },
                parts={
                    "C": capacitor("n", "v"),
                    "L": {**resistor("v", "m"), "kind": "inductor", "value": "1 nH"},
                },
            )
        assert any(fault.key.startswith("lines.s") for fault in error.value.faults)


def test_amplifier_example():
    """Would catch any change of how the example is understood."""
    found = read_inputs(Path(__file__).parents[2] / "examples" / "telemetry_driver.toml")
    circuit = build_circuit(found.circuit, found.rules)
    assert circuit.spine == (
        *("rf_in", "launch_in", "C1", "match_in", "gate_line", "gate_tab", "Q1"),
        *("drain_tab", "drain_low", "drain_mid", "C2", "launch_out", "rf_out"),
    )
    assert circuit.loops == ()
    assert circuit.nets["g_bank"].bank == ("C3", "C4", "C5", "C6")
    assert circuit.nets["d_bank"].bank == ("C7", "C8", "C9", "C10")
    assert circuit.nets["d_bank"].feed.element == "drain_feed"
    assert {name for name, net in circuit.nets.items() if net.is_dc} == {"vg", "vd", "g_bank", "d_bank"}
    assert circuit.dc.currents["drain_feed"] == pytest.approx(-0.35, rel=1e-12)
    assert circuit.dc.currents["gate_feed"] == 0.0
    assert circuit.nets["g"].voltage == pytest.approx(-2.8)
