"""Small circuits placed, drawn and checked as a whole: what the placer leaves between pieces of one net."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from functools import cache
from typing import Any

import pytest

from layoutgen.artwork import Artwork, draw
from layoutgen.checks import check, current_map
from layoutgen.checks.drawn import board_of
from layoutgen.checks.grounding import via_currents
from layoutgen.circuit import build_circuit
from layoutgen.placement import place
from layoutgen.reading import inputs_from_data
from layoutgen.sizing import size_circuit
from tests.placed import changed
from tests.placement.circuits import base, chip, free, line, port, two_ports

FEED = {"db": line("m", "v", width="2.5 mm", angle="40 deg"), "supply": free("v", "vd", z="", width="0.9 mm")}

SLITS: Mapping[str, dict[str, Any]] = {
    "a stub between a line and a chip": base(
        ports=two_ports(),
        lines={"in": free("a", "m"), "stub": line("m", z="100 ohm", angle="90 deg"), "out": free("n", "z")},
        parts={"C1": chip("capacitor", "22 pF", "m", "n")},
    ),
    "a stub between a chip and a line": base(
        ports=two_ports(),
        lines={"in": free("a", "m"), "stub": line("n", z="100 ohm", angle="90 deg"), "out": free("n", "z")},
        parts={"C1": chip("capacitor", "22 pF", "m", "n")},
    ),
    "unequal stubs on both sides of a chip's pad": base(
        ports=two_ports(),
        lines={
            "in": free("a", "m"),
            "one": line("n", z="100 ohm", angle="60 deg"),
            "two": line("n", z="88 ohm", angle="60 deg"),
            "out": free("n", "z"),
        },
        parts={"C1": chip("capacitor", "22 pF", "m", "n")},
    ),
    "a supply that turns off at the end of a bank": base(
        ports={
            **two_ports(),
            "vd": {"kind": "dc", "net": "vd", "voltage": "12 V", "edge": "east"},
        },
        lines={"in": free("a", "m"), **FEED, "out": free("m", "z")},
        parts={
            "C1": chip("capacitor", "22 pF", "v", "gnd"),
            "C2": chip("capacitor", "4.7 uF", "v", "gnd", case="1210"),
        },
    ),
}


def artwork_of(data: dict[str, Any]) -> Artwork:
    inputs = inputs_from_data(data)
    return draw(place(size_circuit(build_circuit(inputs.circuit, inputs.rules))))


def errors(artwork: Artwork) -> list[str]:
    return [f"{found.rule}: {found.text}" for found in check(artwork).findings if found.severity == "error"]


@pytest.mark.parametrize("name", SLITS)
def test_no_slit_is_left_at_a_node(name: str) -> None:
    """Catches a pad tied to its node through a strip narrower than what it faces: a slit stays beside it."""
    assert errors(artwork_of(SLITS[name])) == []


@pytest.mark.parametrize("case", ["0402", "0603", "1206"])
def test_the_board_grows_for_the_vias_of_a_shunt_part(case: str) -> None:
    """Catches a board sized by copper alone: the holes of a ground pad would stand too near the profile."""
    data = base(
        ports=two_ports(),
        lines={"in": free("a", "m"), "out": free("m", "z")},
        parts={"C1": chip("capacitor", "0.5 pF", "m", "gnd", case=case)},
    )
    assert errors(artwork_of(data)) == []


# -- strips of coupled pairs on gnd


def pair(*nets: str, even: str = "56 ohm", odd: str = "45 ohm", **extra: Any) -> dict[str, Any]:
    """Return a pair between two launch lines; ``nets`` are its four ends, m and n where the lines meet it."""
    pairs = {"k1": {"nets": list(nets), "even_impedance": even, "odd_impedance": odd, "angle": "60 deg"}}
    lines = {"in": free("a", "m"), "out": free("n", "z")}
    return base(ports={"p1": port("a"), "p2": port("z")}, lines=lines, coupled=pairs, **extra)


PAIRS: Mapping[str, tuple[dict[str, Any], int]] = {
    "both strips, opposite ends": (pair("m", "gnd", "gnd", "n"), 2),
    "narrow strips": (pair("m", "gnd", "gnd", "n", even="140 ohm", odd="80 ohm"), 2),
    "one strip beside a through line": (pair("m", "n", "gnd", "open"), 1),
    "both strips, at one end": (pair("m", "gnd", "n", "gnd"), 2),
}


@cache
def grounded(name: str, *, poured: bool) -> Artwork:
    data = dict(PAIRS[name][0])
    if not poured:
        del data["ground"]
    return artwork_of(data)


@pytest.mark.parametrize("poured", [True, False])
@pytest.mark.parametrize("name", PAIRS)
def test_each_strip_end_on_gnd_has_vias_in_its_plane(name: str, poured: bool) -> None:
    """Catches a strip's end on gnd left open, its vias off the plane the length counts to, or copper too near
    to the other strip or its line."""
    artwork = grounded(name, poured=poured)
    placed = artwork.placement.pairs["k1"]
    ends = [placed.paths[k // 2][-(k % 2)] for k, net in enumerate(placed.nets) if net == "gnd"]
    vias = [via for via in artwork.vias if via.purpose == "line:k1"]
    assert len(ends) == PAIRS[name][1]
    along = 0 if placed.paths[0][0][1] == placed.paths[0][1][1] else 1
    for end in ends:
        assert sum((via.x, via.y)[along] == end[along] for via in vias) >= 2
    assert errors(artwork) == []


SUPPLY = {
    "ports": {"vd": {"kind": "dc", "net": "v", "voltage": "5 V", "edge": "north"}},
    "parts": {"R1": chip("resistor", "10 ohm", "v", "m", case="0805")},
}


@pytest.mark.parametrize("name", ["both strips, opposite ends", "narrow strips"])
def test_direct_current_returns_through_a_strips_end(name: str) -> None:
    """Catches a strip's end on gnd whose current the solved sheet, its vias or the way to them leave out.

    The drop is that of the strip's squares and a few more at its ends.
    """
    artwork = artwork_of(changed(PAIRS[name][0], SUPPLY))
    maps = current_map(artwork)
    assert maps.skipped == ()
    sheet = max(maps.solved, key=lambda one: one.drop)
    shares = [t.current for t in sheet.terminals if t.item == "k1"]
    assert shares == pytest.approx([-sheet.largest / 2.0] * 2)
    placed = artwork.placement.pairs["k1"]
    squares = placed.centre_line / placed.width
    resistance = sheet.drop / sheet.largest * 58e6 * 35e-6
    assert squares < resistance < squares + 4.0
    loaded = [current for via, current in via_currents(board_of(artwork)) if via.purpose == "line:k1"]
    assert loaded == pytest.approx([sheet.largest / 2.0] * 2)


@pytest.mark.parametrize("name", ["both strips, opposite ends", "one strip beside a through line"])
def test_an_end_on_gnd_without_a_via_is_an_open(name: str) -> None:
    """Catches a check that does not look for the way from a strip's end on gnd to the plane."""
    whole = grounded(name, poured=False)
    bare = replace(whole, vias=tuple(via for via in whole.vias if via.purpose != "line:k1"))
    found = [finding for finding in check(bare).findings if finding.rule == "connectivity.open"]
    assert found
    assert all("k1" in finding.items for finding in found)


def test_a_short_between_the_strips_is_not_taken_for_the_cut_at_gnd() -> None:
    """Catches the allowance for a strip's two halves made for the two strips as well."""
    whole = grounded("both strips, opposite ends", poured=False)
    placed = whole.placement.pairs["k1"]
    (x0, y0), (x1, _) = placed.paths[0]
    strip = next(shape for shape in whole.shapes if shape.role == "pair")
    middle, reach = (x0 + x1) // 2, placed.width + placed.gap
    bridge = replace(strip, outline=type(strip.outline).box(middle, y0 - reach, middle + 500_000, y0 + reach))
    shorted = replace(whole, shapes=(*whole.shapes, bridge))
    assert any(finding.rule == "connectivity.short" for finding in check(shorted).findings)
