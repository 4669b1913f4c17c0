"""Nets: ends, DC nets, banks and their feeds; and the questions later stages ask."""

from __future__ import annotations

import pytest

from layoutgen.circuit import End, EndKind, ends_of, is_shunt, is_supply, lines_at, net_of, other_end
from layoutgen.errors import WrongInputError

RF = {"net": "a", "impedance": "50 ohm"}
DC = {"kind": "dc", "net": "v", "voltage": "5 V"}
SUPPLY = {"length": "free"}


def line(*nets, **more):
    return {"nets": list(nets), "impedance": "50 ohm", "angle": "30 deg", **more}


def supply(*nets, **more):
    return {"nets": list(nets), "length": "free", **more}


def capacitor(a, b="gnd", value="10 pF"):
    return {"kind": "capacitor", "nets": [a, b], "value": value, "case": "0603"}


def other(a, b="gnd", kind="resistor", value="50 ohm"):
    return {"kind": kind, "nets": [a, b], "value": value, "case": "0603"}


def fet(**pins):
    return {"kind": "transistor", "footprint": "fet", "pins": pins}


def test_ends_stand_in_file_order_by_kind(build):
    """Would catch a lost end, a lost ground, or an order that changes from run to run."""
    circuit = build(
        ports={"p": RF},
        lines={"y": line("b", "a"), "x": line("a", "gnd")},
        parts={"Q": fet(gate="b", drain="a", source="gnd")},
    )
    assert [(end.element, end.index, end.kind.value, end.pin) for end in circuit.nets["a"].ends] == [
        ("p", 0, "port", ""),
        ("y", 1, "line", ""),
        ("x", 0, "line", ""),
        ("Q", 1, "pad", "drain"),
    ]
    assert [end.element for end in circuit.nets["gnd"].ends] == ["x", "Q"]


def test_ground_is_a_net_even_when_nothing_ends_on_it(build):
    """Would catch a KeyError on a circuit without ground."""
    assert build(ports={"p": RF, "q": {"net": "b"}}, lines={"x": line("a", "b")}).nets["gnd"].ends == ()


def test_supply_lines_carry_dc_on_and_lines_with_an_angle_do_not(build):
    """Would catch a DC net that is missed behind a supply line, or one behind a quarter wave."""
    circuit = build(
        ports={"p": RF, "v": DC},
        lines={"s": supply("v", "w"), "t": supply("w", "x"), "feed": line("x", "a")},
    )
    assert {name for name, net in circuit.nets.items() if net.is_dc} == {"v", "w", "x"}


def test_a_supply_line_with_width_leads_on_to_a_bypassed_net_only(build):
    """Would catch a wide supply line taken as RF, or an RF junction taken as DC behind it."""
    wide = supply("v", "w", width="2 mm")
    bypassed = build(
        ports={"p": RF, "v": DC},
        lines={"s": wide, "feed": line("w", "a")},
        parts={"C": capacitor("w")},
    )
    assert bypassed.nets["w"].is_dc
    junction = build(
        ports={"p": RF, "v": DC, "q": {"net": "b"}},
        lines={"s": wide, "one": line("w", "a"), "two": line("w", "b")},
    )
    assert not junction.nets["w"].is_dc


def test_a_shared_bank_of_two_feeds_is_dc_and_a_junction_without_bypass_is_not(build):
    """Would catch a push-pull stage's supply taken as RF, or an RF junction taken as a supply net."""
    lines = {"s": supply("w", "v"), "one": line("w", "a"), "two": line("w", "b")}
    ports = {"p": RF, "v": DC, "q": {"net": "b"}}
    bank = {"C": capacitor("w"), "D": capacitor("w")}
    assert build(ports=ports, lines=lines, parts=bank).nets["w"].is_dc
    with pytest.raises(WrongInputError, match=r"lines\.s: found neither impedance nor width"):
        build(ports=ports, lines=lines)


def test_a_supply_pin_with_its_bypass_is_dc(build):
    """Would catch an amplifier's supply pin whose bank cannot be fed by a line without width."""
    circuit = build(
        ports={"p": RF, "v": DC, "q": {"net": "b"}},
        lines={"s": supply("vcc", "v")},
        parts={
            "Q": fet(gate="a", drain="vcc", source="gnd"),
            "C": capacitor("vcc"),
            "D": capacitor("a", "b"),
        },
    )
    assert circuit.nets["vcc"].is_dc


def test_a_choke_leads_to_dc_only_where_nothing_of_rf_meets(build):
    """Would catch the drain net of a choke taken as DC, or the net behind a dropping resistor as RF."""
    circuit = build(
        ports={"p": RF, "v": DC},
        lines={"s": supply("m", "n"), "feed": line("n", "d"), "x": line("d", "a")},
        parts={"R": other("v", "m"), "L": other("v", "d", "inductor", "10 nH")},
    )
    assert {name for name, net in circuit.nets.items() if net.is_dc} == {"v", "m", "n"}


def test_bank_stands_by_value_and_other_kinds_last(build):
    """Would catch capacitors in file order, by text, or resistors before them."""
    circuit = build(
        ports={"p": RF, "v": DC},
        lines={"feed": line("a", "w"), "s": supply("w", "v")},
        parts={
            "C1": capacitor("w", value="1 uF"),
            "R1": other("w"),
            "C2": capacitor("w", value="22 pF"),
            "C3": capacitor("w", value="1 nF"),
            "C4": capacitor("w", value="22 pF"),
        },
    )
    assert circuit.nets["w"].bank == ("C2", "C4", "C3", "C1", "R1")
    assert circuit.nets["w"].feed == End("feed", 1, EndKind.LINE)


def test_one_shunt_part_is_no_bank(build):
    """Would catch a strip drawn for a single capacitor."""
    circuit = build(
        ports={"p": RF, "q": {"net": "b"}}, lines={"x": line("a", "b")}, parts={"C": capacitor("b")}
    )
    assert circuit.nets["b"].bank == () and circuit.nets["b"].feed is None


def test_ground_is_no_bank(build):
    """Would catch all shunt parts of the board gathered on ground."""
    circuit = build(ports={"p": RF}, parts={"C": capacitor("a"), "D": capacitor("a")})
    assert circuit.nets["gnd"].bank == ()


def test_feed_leads_to_a_pin_and_not_to_the_supply(build):
    """Would catch the supply line taken as feed where it stands first, or where both stages share it."""
    stage = {"gate": "a", "source": "gnd"}
    circuit = build(
        ports={"p": RF, "v": DC},
        lines={
            "s1": supply("v", "w1"),
            "s2": supply("w2", "v"),
            "f1": line("w1", "d1"),
            "f2": line("w2", "d2"),
            "join": line("d1", "g2"),
        },
        parts={
            "Q1": fet(**stage, drain="d1"),
            "Q2": fet(gate="g2", drain="d2", source="gnd"),
            **{f"C{i}": capacitor(f"w{1 + i % 2}") for i in range(4)},
        },
    )
    assert circuit.nets["w1"].feed == End("f1", 0, EndKind.LINE)
    assert circuit.nets["w2"].feed == End("f2", 0, EndKind.LINE)


def test_a_bank_may_be_fed_by_a_part(build):
    """Would catch a bank behind a choke that has no feed."""
    circuit = build(
        ports={"p": RF, "v": DC},
        lines={"s": supply("v", "w")},
        parts={"L": other("w", "a", "inductor", "10 nH"), "C": capacitor("w"), "D": capacitor("w")},
    )
    assert circuit.nets["w"].feed == End("L", 0, EndKind.PAD)


def test_a_bank_on_a_pin_is_fed_by_the_pin(build):
    """Would catch a longer way to RF preferred to the pin on the net itself."""
    circuit = build(
        ports={"p": RF, "q": {"net": "g"}},
        lines={"x": line("a", "g")},
        parts={"Q": fet(gate="g", drain="a", source="gnd"), "C": capacitor("g"), "D": capacitor("g")},
    )
    assert circuit.nets["g"].feed in (End("q", 0, EndKind.PORT), End("Q", 0, EndKind.PAD, "gate"))


def test_a_bank_that_leads_nowhere_takes_its_first_other_end(build):
    """Would catch a crash on a bank of a supply alone."""
    circuit = build(
        ports={"v": DC}, lines={"s": supply("v", "w")}, parts={"C": capacitor("w"), "D": capacitor("w")}
    )
    assert circuit.nets["w"].feed == End("s", 1, EndKind.LINE)


def test_other_end_goes_through_lines_parts_and_strips(read):
    """Would catch a walk that jumps strips, passes a transistor, or invents an end where a line is open."""
    file = read(
        ports={"p": RF},
        lines={"x": line("a", "b"), "stub": line("b")},
        coupled={"k": {"nets": ["b", "c", "open", "d"], "width": "1 mm", "gap": "0.2 mm", "angle": "90 deg"}},
        parts={"C": capacitor("c", "d"), "Q": fet(gate="a", drain="d", source="gnd")},
    )

    def far(element, index):
        end = next(end for end, _ in ends_of(file, element) if end.index == index)
        found = other_end(file, end)
        return None if found is None else (found.index, net_of(file, found))

    assert far("x", 0) == (1, "b") and far("x", 1) == (0, "a")
    assert far("C", 1) == (0, "c")
    assert far("k", 1) == (0, "b")
    assert far("k", 3) is None
    assert far("stub", 0) is None and far("p", 0) is None and far("Q", 1) is None


def test_net_of_an_unknown_end_is_an_error(read):
    """Would catch a silent wrong net for an open end."""
    file = read(ports={"p": RF, "q": {"net": "b"}}, lines={"x": line("a", "b"), "stub": line("a")})
    with pytest.raises(KeyError, match="stub"):
        net_of(file, End("stub", 1, EndKind.LINE))


def test_lines_at_counts_lines_and_pairs_only(build):
    """Would catch pads or ports among the lines of a junction."""
    circuit = build(
        ports={"p": RF, "q": {"net": "c"}},
        lines={"x": line("a", "b")},
        coupled={"k": {"nets": ["b", "c", "open", "c"], "width": "1 mm", "gap": "0.2 mm", "angle": "90 deg"}},
        parts={"C": capacitor("b")},
    )
    assert [(end.element, end.index) for end in lines_at(circuit.nets["b"])] == [("x", 1), ("k", 0)]


def test_shunt_and_supply(read):
    """Would catch a series part taken as shunt, or a line with an impedance taken as supply."""
    file = read(
        ports={"p": RF, "v": DC},
        lines={
            "s": supply("v", "w"),
            "wide": supply("v", "w", width="2 mm"),
            "short": {"nets": ["v", "w"], "width": "2 mm", "length": "3 mm"},
            "f": line("w", "a"),
        },
        parts={"C": capacitor("w"), "D": capacitor("w", "a")},
    )
    assert is_shunt(file.parts["C"]) and not is_shunt(file.parts["D"])
    assert [is_supply(file.lines[name]) for name in ("s", "wide", "short", "f")] == [True, True, False, False]


def test_two_pins_make_a_two_pad_part(build):
    """Would catch a part written with two pins that is no shunt part, bank or way for direct current."""
    pads = {
        "one": {"at": ["-2 mm", "0 mm"], "size": ["1 mm", "1 mm"], "heading": "west"},
        "two": {"at": ["2 mm", "0 mm"], "size": ["1 mm", "1 mm"], "heading": "east"},
    }

    def pinned(kind, value, one, two):
        return {"kind": kind, "value": value, "footprint": "big", "pins": {"one": one, "two": two}}

    circuit = build(
        ports={"p": {**RF, "current": "0.1 A"}, "v": DC},
        lines={"s": supply("v", "w")},
        parts={
            "C": pinned("capacitor", "1 nF", "gnd", "w"),
            "D": capacitor("w"),
            "L": pinned("inductor", "1 nH", "w", "a"),
        },
        footprints={"big": {"pads": pads}},
    )
    assert circuit.nets["w"].bank == ("D", "C")
    assert circuit.nets["w"].feed == End("L", 0, EndKind.PAD, "one")
    assert other_end(circuit.file, circuit.nets["w"].feed) == End("L", 1, EndKind.PAD, "two")
    assert circuit.dc.currents["L"] == pytest.approx(0.1) and circuit.dc.currents["C"] == 0.0
    assert "L.one" not in circuit.dc.currents
