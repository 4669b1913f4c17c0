"""Ports at everything that may carry one: lines, pads, banks, junctions, coupled pairs."""

from __future__ import annotations

import copy
import itertools
from typing import Any

import pytest

from layoutgen.circuit import build_circuit
from layoutgen.errors import InfeasibleError
from layoutgen.placement import Placement, place
from layoutgen.reading import inputs_from_data
from layoutgen.sizing import size_circuit
from tests.placement.circuits import base, chip, free, line, port, two_ports
from tests.placement.legal import faults

PAIR = {"even_impedance": "56 ohm", "odd_impedance": "45 ohm", "angle": "60 deg"}

CARRIERS: dict[str, dict[str, Any]] = {
    "pad": base(
        ports=two_ports(),
        lines={"in": free("a", "n")},
        parts={"C1": chip("capacitor", "10 pF", "n", "z")},
    ),
    "bank": base(
        ports=two_ports(),
        lines={"in": line("a", "z", angle="90 deg", z="90 ohm")},
        parts={"C1": chip("capacitor", "22 pF", "z", "gnd"), "C2": chip("capacitor", "1 nF", "z", "gnd")},
    ),
    "junction": base(
        ports=two_ports(),
        lines={
            "in": free("a", "n"),
            "mid": line("n", "z", angle="50 deg"),
            "stub": line("z", angle="40 deg", z="70 ohm"),
        },
    ),
    "pair": base(
        ports=two_ports(),
        lines={"in": free("a", "n"), "near": free("s", "j"), "far": free("t", "k")},
        parts={
            "R1": chip("resistor", "50 ohm", "j", "gnd"),
            "R2": chip("resistor", "50 ohm", "k", "gnd"),
        },
        coupled={"pick": {"nets": ["n", "z", "s", "t"], **PAIR}},
    ),
    "pair, all round": base(
        ports={"p1": port("a"), "p2": port("b"), "p3": port("c"), "p4": port("d")},
        lines={},
        coupled={"pick": {"nets": ["a", "b", "c", "d"], **PAIR}},
    ),
    "first port on a junction": base(
        ports=two_ports(),
        lines={"stub": line("a", angle="40 deg"), "on": line("a", "z", angle="60 deg")},
    ),
    "first port on a bank": base(
        ports=two_ports(),
        lines={"on": line("a", "z", angle="60 deg")},
        parts={"C1": chip("capacitor", "22 pF", "a", "gnd"), "C2": chip("capacitor", "1 nF", "a", "gnd")},
    ),
}


def placed(data: dict[str, Any]) -> Placement:
    inputs = inputs_from_data(data)
    return place(size_circuit(build_circuit(inputs.circuit, inputs.rules)))


def with_board(data: dict[str, Any], size: str | None, *, to_edge: bool, at: str | None) -> dict[str, Any]:
    data = copy.deepcopy(data)
    if size is not None:
        data["board"]["size"] = [size, size]
    for record in data["ports"].values():
        record["to_edge"] = to_edge
    if at is not None:
        data["ports"]["p1"] |= {"edge": "west", "at": at}
        data["ports"]["p2"] |= {"edge": "east", "at": at}
    return data


def port_faults(placement: Placement) -> list[str]:
    """Return ports that are not at the profile where they should be, or that no copper reaches."""
    edge = placement.sized.circuit.rules.copper.min_edge_distance * 1e9  # type: ignore[union-attr, operator]
    ends = {end for line in placement.lines.values() for end in (line.path[0], line.path[-1])}
    ends |= {end for strip in placement.strips for end in (strip.path[0], strip.path[-1])}
    ends |= {end for pair in placement.pairs.values() for path in pair.paths for end in path}
    out = []
    for name, record in placement.ports.items():
        inset = 0.0 if record.to_edge else edge
        here = {
            "west": record.x - inset,
            "east": placement.width - inset - record.x,
            "south": record.y - inset,
            "north": placement.height - inset - record.y,
        }[record.edge]
        if abs(here) > 10:
            out.append(f"{name} is {here:.0f} nm off its edge")
        if (record.x, record.y) not in ends:
            out.append(f"{name} has no copper")
        asked = placement.sized.circuit.file.ports[name].at
        along = record.y if record.edge in ("east", "west") else record.x
        if asked is not None and abs(along - asked * 1e9) > 10:
            out.append(f"{name} is not at its place along the edge")
    return out


@pytest.mark.parametrize("name", CARRIERS)
@pytest.mark.parametrize(
    ("size", "to_edge", "at"),
    list(itertools.product([None, "40 mm"], [False, True], [None, "13 mm"])),
)
def test_a_port_sits_at_the_edge_whatever_carries_it(
    name: str, size: str | None, to_edge: bool, at: str | None
) -> None:
    """Catches a traceback, a gap between copper and port, a port off its edge or place, illegal copper."""
    data = with_board(CARRIERS[name], size, to_edge=to_edge, at=at)
    try:
        placement = placed(data)
    except InfeasibleError as error:
        assert at is not None, str(error)
        assert error.element and error.reason and error.remedy
        return
    assert port_faults(placement) == []
    assert faults(placement) == []
