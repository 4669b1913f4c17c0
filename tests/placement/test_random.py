"""Random circuits, without and with loops: a legal placement or a reason, never a crash or a wrong length."""

from __future__ import annotations

from typing import Any

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from layoutgen.circuit import build_circuit
from layoutgen.errors import InfeasibleError, WrongInputError
from layoutgen.placement import place
from layoutgen.reading import inputs_from_data
from layoutgen.sizing import size_circuit
from tests.placement.circuits import base, chip, free, line, port
from tests.placement.legal import faults

CASES = ["0402", "0603", "0805"]


@st.composite
def trees(draw: st.DrawFn) -> dict[str, Any]:
    """Draw a path of lines and parts between two ports, with stubs, shunt parts and feeds beside it."""
    lines: dict[str, Any] = {}
    parts: dict[str, Any] = {}
    ports = {"p1": port("a"), "p2": port("z")}
    lines["launch"] = free("a", "n0")
    count = draw(st.integers(1, 6))
    for k in range(count):
        here, there = f"n{k}", f"n{k + 1}"
        kind = draw(st.sampled_from(["line", "line", "line", "part"]))
        if kind == "part":
            parts[f"C{k}"] = chip(
                "capacitor", "10 pF", here, there, case=draw(st.sampled_from(["0402", "0603", "1206"]))
            )
            continue
        lines[f"main{k}"] = line(
            here, there, z=f"{draw(st.integers(12, 100))} ohm", angle=f"{draw(st.integers(20, 120))} deg"
        )
        _branch(draw, k, here, lines, parts, ports)
    lines["exit"] = free(f"n{count}", "z")
    data = base(ports=ports, lines=lines)
    if parts:
        data["parts"] = parts
    if draw(st.booleans()):
        data["board"]["size"] = [f"{draw(st.integers(15, 90))} mm", f"{draw(st.integers(8, 50))} mm"]
    if draw(st.integers(0, 3)) == 0:
        del data["ground"]
    return data


def _branch(
    draw: st.DrawFn, k: int, net: str, lines: dict[str, Any], parts: dict[str, Any], ports: dict[str, Any]
) -> None:
    kind = draw(st.sampled_from(["none", "stub", "short", "shunt", "feed", "cross"]))
    impedance, angle = f"{draw(st.integers(25, 100))} ohm", f"{draw(st.integers(15, 100))} deg"
    if kind in ("stub", "cross"):
        lines[f"stub{k}"] = line(net, z=impedance, angle=angle)
    if kind in ("short", "cross"):
        lines[f"short{k}"] = line(net, "gnd", z=impedance, angle=angle)
    if kind == "shunt":
        parts[f"L{k}"] = chip("inductor", "8.2 nH", net, "gnd", case=draw(st.sampled_from(["0402", "0805"])))
    if kind == "feed":
        lines[f"feed{k}"] = line(net, f"b{k}", z="90 ohm", angle="90 deg")
        lines[f"supply{k}"] = free(f"b{k}", f"v{k}", z="")
        ports[f"v{k}"] = {"kind": "dc", "net": f"v{k}", "voltage": "5 V"}
        for j in range(draw(st.integers(1, 4))):
            case = draw(st.sampled_from(["0402", "0603", "0805"]))
            parts[f"B{k}{j}"] = chip("capacitor", f"{10 ** (j + 1)} pF", f"b{k}", "gnd", case=case)


@st.composite
def loops(draw: st.DrawFn) -> dict[str, Any]:
    """Draw a path between two ports on which one to three loops lie: parallel ways, bridges, dividers."""
    lines: dict[str, Any] = {"launch": free("a", "n0")}
    parts: dict[str, Any] = {}
    ports = {"p1": port("a"), "p2": port("z")}
    count = draw(st.integers(1, 3))
    for k in range(count):
        _loop(draw, k, (f"n{k}", f"n{k + 1}"), lines, parts)
        if draw(st.booleans()):
            lines[f"stub{k}"] = line(f"s{k}", z="70 ohm", angle=f"{draw(st.integers(20, 80))} deg")
            lines[f"on{k}"] = lines.pop(f"last{k}") | {"nets": [f"m{k}", f"s{k}"]}
            lines[f"last{k}"] = line(f"s{k}", f"n{k + 1}", angle="20 deg")
    lines["exit"] = free(f"n{count}", "z")
    data = base(ports=ports, lines=lines)
    if parts:
        data["parts"] = parts
    if draw(st.integers(0, 2)) == 0:
        data["board"]["size"] = [f"{draw(st.integers(25, 120))} mm", f"{draw(st.integers(15, 80))} mm"]
    return data


def _loop(
    draw: st.DrawFn, k: int, nets: tuple[str, str], lines: dict[str, Any], parts: dict[str, Any]
) -> None:
    """Add one loop from a net on, and the line that leaves it."""
    here, there = nets
    angle = st.integers(30, 120)
    z_1, z_2 = f"{draw(st.integers(25, 90))} ohm", f"{draw(st.integers(25, 90))} ohm"
    kind = draw(st.sampled_from(["ways", "bridge", "part", "free", "beside"]))
    lines[f"one{k}"] = line(here, f"m{k}", z=z_1, angle=f"{draw(angle)} deg")
    lines[f"last{k}"] = line(f"m{k}", there, angle="30 deg")
    if kind == "ways":
        lines[f"two{k}"] = line(here, f"m{k}", z=z_2, angle=f"{draw(angle)} deg")
    elif kind == "bridge":
        lines[f"two{k}"] = line(here, f"x{k}", z=z_2, angle=f"{draw(angle)} deg")
        lines[f"tail{k}"] = line(f"x{k}", z=z_2, angle=f"{draw(angle)} deg")
        parts[f"R{k}"] = chip("resistor", "100 ohm", f"x{k}", f"m{k}", case=draw(st.sampled_from(CASES)))
    elif kind == "part":
        lines[f"two{k}"] = line(here, f"x{k}", z=z_2, angle=f"{draw(angle)} deg")
        parts[f"C{k}"] = chip("capacitor", "10 pF", f"x{k}", f"m{k}", case=draw(st.sampled_from(CASES)))
    elif kind == "free":
        lines[f"two{k}"] = free(here, f"m{k}", z=z_2)
    else:
        del lines[f"one{k}"]
        for j in range(draw(st.integers(2, 3))):
            parts[f"P{k}{j}"] = chip(
                "capacitor", f"{j + 1} pF", here, f"m{k}", case=draw(st.sampled_from(CASES))
            )


def judge(data: dict[str, Any]) -> None:
    """Place a circuit; it must be legal, or refused with element, reason and remedy."""
    inputs = inputs_from_data(data)
    try:
        placement = place(size_circuit(build_circuit(inputs.circuit, inputs.rules)))
    except InfeasibleError as error:
        assert error.element and error.reason and error.remedy
        return
    except WrongInputError as error:
        assert all(fault.key and fault.allowed for fault in error.faults)
        return
    assert faults(placement) == []
    size = data["board"].get("size")
    if size is not None:
        assert [f"{placement.width // 1_000_000} mm", f"{placement.height // 1_000_000} mm"] == size


@settings(max_examples=60, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(trees())
def test_a_random_tree_is_legal_or_refused_with_a_reason(data: dict[str, Any]) -> None:
    """Catches what hand-made circuits do not show."""
    judge(data)


@settings(max_examples=40, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(loops())
def test_random_loops_are_legal_or_refused_with_a_reason(data: dict[str, Any]) -> None:
    """Catches loops that do not close, and what loops do to their neighbours."""
    judge(data)
