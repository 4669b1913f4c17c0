"""Random tree circuits: a legal placement or a reason, never an overlap, a crash or a wrong length."""

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


@settings(max_examples=60, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(trees())
def test_a_random_tree_is_legal_or_refused_with_a_reason(data: dict[str, Any]) -> None:
    """Catches what hand-made circuits do not show."""
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
