"""The bias point against circuits worked out by hand."""

from __future__ import annotations

import pytest

from layoutgen.circuit import nominal_resistances, solve_dc
from layoutgen.errors import WrongInputError

RF = {"net": "a", "impedance": "50 ohm"}


def feed(**more):
    return {"impedance": "90 ohm", "angle": "90 deg", **more}


def resistor(a, b, ohm, **more):
    return {"kind": "resistor", "nets": [a, b], "value": f"{ohm} ohm", "case": "0603", **more}


def inductor(a, b, **more):
    return {"kind": "inductor", "nets": [a, b], "value": "10 nH", "case": "0603", **more}


def capacitor(a, b):
    return {"kind": "capacitor", "nets": [a, b], "value": "10 pF", "case": "0603"}


def test_divider_of_two_resistors(read):
    """Would catch a wrong sign or a swapped conductance: 10 V over 2 k and 3 k gives 6 V and 2 mA."""
    file = read(
        ports={"p": {**RF, "net": "m"}, "v": {"kind": "dc", "net": "v", "voltage": "10 V"}},
        parts={"R1": resistor("v", "m", 2000), "R2": resistor("m", "gnd", 3000)},
    )
    dc = solve_dc(file, {})
    assert dc.voltages["m"] == pytest.approx(6.0, rel=1e-12)
    assert dc.currents["R1"] == pytest.approx(2e-3, rel=1e-12)
    assert dc.currents["R2"] == pytest.approx(2e-3, rel=1e-12)
    assert dc.currents["v"] == pytest.approx(-2e-3, rel=1e-12)  # out of the board when positive
    assert dc.notes == ()


def test_current_shares_between_parallel_lines_by_their_resistance(read):
    """Would catch parallel paths that do not share: 1 ohm beside 3 ohm carries three quarters."""
    file = read(
        ports={
            "p": {**RF, "current": "0.4 A"},
            "v": {"kind": "dc", "net": "v", "voltage": "5 V"},
        },
        lines={"one": feed(nets=["v", "a"]), "three": feed(nets=["a", "v"])},
    )
    dc = solve_dc(file, {"one": 1.0, "three": 3.0})
    assert dc.currents["one"] == pytest.approx(0.3, rel=1e-12)
    assert dc.currents["three"] == pytest.approx(-0.1, rel=1e-12)  # written the other way round
    assert dc.voltages["a"] == pytest.approx(4.7, rel=1e-12)
    assert dc.currents["p"] == pytest.approx(0.4)


def test_equal_inductors_without_resistance_share_equally(read):
    """Would catch a singular system where branches without resistance lie in parallel."""
    file = read(
        ports={"p": {**RF, "current": "0.4 A"}, "v": {"kind": "dc", "net": "v", "voltage": "5 V"}},
        parts={"L1": inductor("v", "a"), "L2": inductor("v", "a")},
    )
    dc = solve_dc(file, {})
    assert dc.currents["L1"] == pytest.approx(0.2, rel=1e-9)
    assert dc.currents["L2"] == pytest.approx(0.2, rel=1e-9)
    assert dc.voltages["a"] == 5.0
    assert dc.currents["v"] == pytest.approx(-0.4, rel=1e-9)


def test_inductors_in_a_chain_with_lines_between(read):
    """Would catch currents of lossless branches that ignore the resistive ones beside them."""
    file = read(
        ports={"p": {**RF, "current": "0.5 A"}, "v": {"kind": "dc", "net": "v", "voltage": "5 V"}},
        lines={"w": feed(nets=["m", "n"])},
        parts={
            "L1": inductor("v", "m"),
            "L2": inductor("n", "a", series_resistance="2 ohm"),
            "R": resistor("m", "gnd", 50),
        },
    )
    dc = solve_dc(file, {"w": 1.0})
    assert dc.voltages == pytest.approx({"a": 3.5, "v": 5.0, "m": 5.0, "n": 4.5, "gnd": 0.0})
    assert dc.currents["L1"] == pytest.approx(0.6)
    assert dc.currents["L2"] == pytest.approx(0.5)
    assert dc.currents["R"] == pytest.approx(0.1)


def test_transistor_draws_from_drain_to_source(read):
    """Would catch a drain current with the wrong sign, or one that misses the feed."""
    file = read(
        ports={"p": RF, "vd": {"kind": "dc", "net": "vd", "voltage": "28 V"}},
        lines={"feed": feed(nets=["d", "vd"])},
        parts={
            "Q": {
                "kind": "transistor",
                "footprint": "fet",
                "pins": {"gate": "a", "drain": "d", "source": "gnd"},
                "dc": [{"from": "drain", "to": "source", "current": "350 mA"}],
            }
        },
    )
    dc = solve_dc(file, {"feed": 0.02})
    assert dc.currents["feed"] == pytest.approx(-0.35, rel=1e-12)  # from vd into d
    assert dc.currents["Q.drain"] == pytest.approx(0.35)
    assert dc.currents["Q.source"] == pytest.approx(-0.35)
    assert dc.currents["Q.gate"] == 0.0
    assert dc.voltages["d"] == pytest.approx(28.0 - 0.007, rel=1e-14)
    assert dc.currents["vd"] == pytest.approx(-0.35)


def test_a_small_drop_beside_a_large_supply_is_exact(read):
    """Would catch currents lost in rounding: 1 uA through 1 mohm below 28 V is a drop of 1 nV."""
    file = read(
        ports={"p": {**RF, "current": "0.000001 A"}, "v": {"kind": "dc", "net": "v", "voltage": "28 V"}},
        lines={"w": feed(nets=["v", "a"])},
    )
    assert solve_dc(file, {"w": 1e-3}).currents["w"] == pytest.approx(1e-6, rel=1e-9)


def test_capacitors_and_rf_ports_are_open_and_nets_behind_them_noted(read):
    """Would catch a capacitor that conducts, or a net without DC path that goes unmentioned."""
    file = read(
        ports={"p": RF, "v": {"kind": "dc", "net": "v", "voltage": "5 V"}},
        parts={"C": capacitor("v", "a"), "C2": capacitor("v", "gnd")},
    )
    dc = solve_dc(file, {})
    assert dc.voltages["a"] == 0.0
    assert dc.currents["C"] == 0.0
    assert dc.notes == ("no DC path to gnd or to a dc port, taken as 0 V: net a",)


def test_parts_whose_current_is_not_told_are_named(read):
    """Would catch a transistor without dc entries that silently draws nothing from its supply."""
    tables = {
        "ports": {"p": RF, "q": {"net": "b"}, "v": {"kind": "dc", "net": "v", "voltage": "5 V"}},
        "parts": {
            "Q": {
                "kind": "transistor",
                "footprint": "fet",
                "pins": {"gate": "a", "drain": "v", "source": "gnd"},
            },
            "D": {"kind": "other", "nets": ["v", "b"], "case": "0603"},
            "B": {"kind": "other", "nets": ["v", "b"], "case": "0603", "series_resistance": "1 ohm"},
        },
    }
    notes = solve_dc(read(**tables), {}).notes
    assert "no dc currents are given, taken as none: part Q" in notes
    assert any(note.endswith("taken as open for direct current: D") for note in notes)


def test_a_current_without_return_is_left_out_and_said_so(read):
    """Would catch an invented voltage on a net whose current cannot come from anywhere."""
    file = read(
        ports={"p": {**RF, "current": "0.2 A"}, "q": {**RF, "net": "b"}},
        lines={"w": feed(nets=["a", "b"])},
    )
    dc = solve_dc(file, {"w": 1.0})
    assert dc.currents["w"] == 0.0
    assert any("net a: 0.2 A" in note for note in dc.notes)


def test_current_that_circulates_in_an_island_without_supply(read):
    """Would catch an island without supply being dropped though its currents return inside it."""
    file = read(
        ports={"p": {**RF, "current": "0.2 A"}, "q": {**RF, "net": "b", "current": "-0.2 A"}},
        lines={"w": feed(nets=["a", "b"])},
    )
    dc = solve_dc(file, {"w": 1.0})
    assert dc.currents["w"] == pytest.approx(-0.2)


def test_a_lines_own_current_overrides_only_its_own(read):
    """Would catch an override that is ignored, or that leaks into neighbours."""
    file = read(
        ports={"p": {**RF, "current": "0.4 A"}, "v": {"kind": "dc", "net": "v", "voltage": "5 V"}},
        lines={"w": feed(nets=["v", "m"], current="2 A"), "x": feed(nets=["m", "a"])},
    )
    dc = solve_dc(file, {"w": 1.0, "x": 1.0})
    assert dc.currents["w"] == 2.0
    assert dc.currents["x"] == pytest.approx(0.4)


def test_both_strips_of_a_coupled_pair_conduct_for_themselves(read):
    """Would catch strips joined to one another, or an open end that carries current."""
    file = read(
        ports={
            "p": {**RF, "current": "0.1 A"},
            "v": {"kind": "dc", "net": "v", "voltage": "5 V"},
            "q": {"net": "b"},
        },
        coupled={
            "k": {
                "nets": ["v", "a", "b", "open"],
                "even_impedance": "60 ohm",
                "odd_impedance": "40 ohm",
                "angle": "90 deg",
            }
        },
    )
    dc = solve_dc(file, {"k:0": 1.0})
    assert dc.currents["k:0"] == pytest.approx(0.1)
    assert dc.currents["k:1"] == 0.0
    assert dc.voltages["b"] == 0.0


def test_two_ports_of_one_voltage_may_be_joined(read):
    """Would catch equal supplies reported as shorted, or a current counted twice."""
    file = read(
        ports={
            "p": {**RF, "current": "0.4 A"},
            "v1": {"kind": "dc", "net": "v", "voltage": "5 V"},
            "v2": {"kind": "dc", "net": "w", "voltage": "5 V"},
        },
        lines={"x": feed(nets=["v", "a"]), "y": feed(nets=["w", "a"])},
    )
    dc = solve_dc(file, {"x": 1.0, "y": 1.0})
    assert dc.currents["v1"] == pytest.approx(-0.2)
    assert dc.currents["v2"] == pytest.approx(-0.2)


def test_kirchhoffs_law_holds_at_every_net_of_a_mesh(read):
    """Would catch any branch whose current is not that of the solved voltages."""
    nets = [f"n{i}" for i in range(6)]
    parts = {}
    for i in range(6):
        for j in range(i + 1, 6):
            parts[f"R{i}{j}"] = resistor(nets[i], nets[j], 10 + 7 * i + 3 * j)
    parts["L"] = inductor("n2", "n5")
    parts["RG"] = resistor("n4", "gnd", 33)
    file = read(
        ports={
            "p": {"net": "n3", "current": "0.05 A"},
            "v": {"kind": "dc", "net": "n0", "voltage": "12 V"},
        },
        parts=parts,
    )
    dc = solve_dc(file, {})
    for net in nets:
        leaving = sum(
            dc.currents[name] * ((part.nets[0] == net) - (part.nets[1] == net))
            for name, part in file.parts.items()
        )
        leaving += {"n3": dc.currents["p"], "n0": dc.currents["v"]}.get(net, 0.0)
        assert leaving == pytest.approx(0.0, abs=1e-12)
    assert dc.voltages["n2"] == pytest.approx(dc.voltages["n5"], rel=1e-14)


def test_nominal_resistances_cover_every_conductor_with_two_ends(read):
    """Would catch a line or strip without a resistance, or an open stub with one."""
    file = read(
        ports={"p": RF, "q": {"net": "b"}},
        lines={"w": feed(nets=["a", "b"]), "stub": feed(nets=["a"])},
        coupled={
            "k": {
                "nets": ["a", "open", "b", "c"],
                "even_impedance": "60 ohm",
                "odd_impedance": "40 ohm",
                "angle": "90 deg",
            }
        },
        parts={"R": resistor("c", "gnd", 50)},
    )
    found = nominal_resistances(file)
    assert set(found) == {"w", "k:1"}
    assert found["w"] == pytest.approx(20.0 / (58e6 * 35e-6))


@pytest.mark.parametrize(
    ("ports", "lines", "parts", "words"),
    [
        ({}, {"stub": feed(nets=["v", "gnd"])}, {}, ["5 V", "gnd", "stub"]),
        ({}, {"f": feed(nets=["v", "m"])}, {"L": inductor("m", "gnd")}, ["gnd", "f, L"]),
        (
            {"w": {"kind": "dc", "net": "w", "voltage": "3 V"}},
            {"f": feed(nets=["v", "w"])},
            {},
            ["ports.v at 5 V", "f"],
        ),
        (
            {"w": {"kind": "dc", "net": "v", "voltage": "3 V"}},
            {},
            {"C": capacitor("v", "gnd")},
            ["on net v itself"],
        ),
    ],
)
def test_shorted_supply_names_the_path(read, ports, lines, parts, words):
    """Would catch a short that is missed, or a message without the elements on the way."""
    file = read(
        ports={"p": {**RF, "net": "x"}, "v": {"kind": "dc", "net": "v", "voltage": "5 V"}, **ports},
        lines=lines,
        parts={"C0": capacitor("v", "x"), **parts},
    )
    with pytest.raises(WrongInputError) as error:
        solve_dc(file, nominal_resistances(file))
    assert len(error.value.faults) == 1
    for word in words:
        assert word in str(error.value)
    assert error.value.faults[0].key in ("ports.v", "ports.w")


def test_a_resistor_to_ground_is_no_short(read):
    """Would catch a bleeder or divider taken for a short."""
    file = read(
        ports={"p": RF, "v": {"kind": "dc", "net": "v", "voltage": "5 V"}},
        lines={"f": feed(nets=["v", "a"])},
        parts={"R": resistor("a", "gnd", 100)},
    )
    assert solve_dc(file, {"f": 1.0}).currents["R"] == pytest.approx(5.0 / 101.0)
