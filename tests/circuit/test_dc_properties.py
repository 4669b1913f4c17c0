"""Random networks: Kirchhoff's laws hold whatever is joined."""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layoutgen.circuit import solve_dc
from layoutgen.errors import WrongInputError

NETS = ["n0", "n1", "n2", "n3", "n4", "gnd"]


@st.composite
def networks(draw):
    """Draw resistors and inductors (some without resistance) between six nets."""
    parts = {}
    for i in range(draw(st.integers(2, 10))):
        a, b = draw(st.lists(st.sampled_from(NETS), min_size=2, max_size=2, unique=True))
        if draw(st.booleans()):
            ohm = draw(st.floats(0.01, 1e5))
            parts[f"R{i}"] = {"kind": "resistor", "nets": [a, b], "value": f"{ohm!r} ohm", "case": "0603"}
        else:
            ohm = draw(st.sampled_from([0.0, 0.5, 20.0]))
            parts[f"L{i}"] = {
                "kind": "inductor",
                "nets": [a, b],
                "value": "1 nH",
                "case": "0603",
                "series_resistance": f"{ohm!r} ohm",
            }
    volts = draw(st.sampled_from(["0.1 V", "-2.8 V", "28 V"]))
    draws = {f"n{i}": draw(st.sampled_from([None, 0.35, -0.002])) for i in range(1, 5)}
    return parts, volts, draws


@settings(max_examples=150, deadline=None)
@given(networks())
def test_currents_balance_and_follow_from_the_voltages(read, network):
    """Would catch any current that is not conserved, and any that does not obey Ohm's law."""
    parts, volts, draws = network
    ports = {"v": {"kind": "dc", "net": "n0", "voltage": volts}}
    for net, current in draws.items():
        ports[f"p{net}"] = {"net": net} | ({} if current is None else {"current": f"{current} A"})
        ports[f"q{net}"] = {"net": net}
    parts = {"C": {"kind": "capacitor", "nets": ["n0", "gnd"], "value": "1 pF", "case": "0603"}, **parts}
    file = read(ports=ports, parts=parts)
    try:
        dc = solve_dc(file, {})
    except WrongInputError as error:
        assert "v" in str(error)
        return
    lost = {note.split(":")[0].removeprefix("net ") for note in dc.notes if "no DC path and" in note}
    scale = max(1e-3, *(abs(value) for value in dc.currents.values()))
    for net in NETS[1:5]:
        if net in lost:
            continue
        leaving = sum(
            dc.currents[name] * ((part.nets[0] == net) - (part.nets[1] == net))
            for name, part in file.parts.items()
        )
        assert leaving + dc.currents[f"p{net}"] == pytest.approx(0.0, abs=1e-7 * scale)
    for name, part in file.parts.items():
        if part.kind == "capacitor":
            continue
        ohm = part.value if part.kind == "resistor" else part.series_resistance
        drop = dc.voltages[part.nets[0]] - dc.voltages[part.nets[1]]
        assert drop == pytest.approx(dc.currents[name] * ohm, abs=1e-7 * max(1.0, scale * ohm))
