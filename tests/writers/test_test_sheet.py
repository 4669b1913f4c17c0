"""Test sheet, ports and bias points: planes, voltages, and a safe order of switching on."""

from __future__ import annotations

import csv
import io
import itertools
import math
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import pytest
import shapely

from layoutgen.circuit import DcSolution, build_circuit
from layoutgen.reading import inputs_from_data
from layoutgen.writers import Job, Result
from layoutgen.writers.supplies import supplies_of
from layoutgen.writers.test_sheet import (
    switching_steps,
    write_bias_points,
    write_port_table,
    write_test_sheet,
)

JOB = Job(stem="board")


def rows(data: bytes) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(data.decode("utf-8"))))


@pytest.fixture(scope="module")
def ports(driver: Result) -> list[dict[str, str]]:
    return rows(write_port_table(driver, JOB))


def with_bias(
    handmade: Result, ports: dict[str, Any], parts: dict[str, Any], lines: dict[str, Any]
) -> Result:
    """Return a result whose circuit has these ports, parts and lines; nothing of it is placed."""
    data: dict[str, Any] = {
        "format": 1,
        "design": {"title": "Bias", "frequency": "2.245 GHz", "band": ["2.20 GHz", "2.29 GHz"]},
        "substrate": {
            "relative_permittivity": 3.55,
            "loss_tangent": 0.0027,
            "height": "0.508 mm",
            "copper_thickness": "35 um",
        },
        "board": {"rules": "two-layer-standard"},
        "ports": ports,
        "lines": lines,
        "parts": parts,
        "footprints": {
            "can": {
                "pads": {
                    pin: {"at": [f"{x} mm", "0 mm"], "size": ["0.5 mm", "0.5 mm"], "heading": "east"}
                    for x, pin in enumerate("gds")
                }
            }
        },
    }
    inputs = inputs_from_data(data)
    circuit = build_circuit(inputs.circuit, inputs.rules)
    placement = replace(handmade.placement, sized=replace(handmade.sized, circuit=circuit))
    return replace(handmade, artwork=replace(handmade.artwork, placement=placement))


FET = {
    "kind": "transistor",
    "footprint": "can",
    "pins": {"g": "gate", "d": "drain", "s": "gnd"},
    "dc": [{"from": "d", "to": "s", "current": "0.2 A"}],
}


def test_ports_stand_in_the_order_of_the_touchstone_files(
    driver: Result, ports: list[dict[str, str]]
) -> None:
    """A port number that belongs to another port measures the wrong parameter."""
    assert driver.response is not None
    numbered = [(row["Touchstone port"], row["Name"]) for row in ports if row["Touchstone port"]]
    assert numbered == [(str(k), name) for k, name in enumerate(driver.response.ports, start=1)]
    others = {row["Name"] for row in ports if not row["Touchstone port"]}
    assert others == {name for name, port in driver.circuit.file.ports.items() if port.kind == "dc"}


def test_planes_of_ports_are_the_ends_of_their_copper(driver: Result, ports: list[dict[str, str]]) -> None:
    """A plane beside the copper's end shifts every phase."""
    for row in ports:
        if row["Kind"] != "pin":
            port = driver.placement.ports[row["Name"]]
            place = round(float(row["x (mm)"]) * 1e6), round(float(row["y (mm)"]) * 1e6)
            assert place == (port.x, port.y)


def test_planes_of_pins_face_the_device(driver: Result, ports: list[dict[str, str]]) -> None:
    """The plane of a pin is the middle of the pad's edge towards the cut-out, looking away from it."""
    part = driver.placement.parts["Q1"]
    assert part.cutout is not None
    cutout = part.cutout.polygon()
    for row in (row for row in ports if row["Kind"] == "pin"):
        pad = next(pad for pad in part.pads if f"Q1.{pad.pin}" == row["Name"])
        point = shapely.Point(float(row["x (mm)"]) * 1e6, float(row["y (mm)"]) * 1e6)
        assert pad.outline.polygon().exterior.distance(point) < 2.0
        assert point.distance(cutout) == pytest.approx(pad.outline.polygon().distance(cutout), abs=2.0)
        turn = math.radians(float(row["Heading into the board (deg)"]))
        ahead = shapely.Point(point.x + 1e5 * math.cos(turn), point.y + 1e5 * math.sin(turn))
        assert ahead.distance(cutout) > point.distance(cutout)


def test_bias_points_have_the_solutions_voltages(driver: Result) -> None:
    """A voltage on another net's row sends the engineer hunting for a fault."""
    found = {row["Net"]: row["Expected voltage (V)"] for row in rows(write_bias_points(driver, JOB))}
    assert set(found) == set(driver.circuit.nets)
    for net, voltage in driver.circuit.dc.voltages.items():
        assert float(found[net]) == pytest.approx(voltage, abs=5.1e-5)
    assert found["vg"] == "-2.8000"
    assert found["vd"] == "28.0000"


def test_probing_points_are_on_the_nets_copper(driver: Result) -> None:
    """A probe beside the copper reads nothing."""
    copper = shapely.union_all(
        [s.outline.polygon() for s in driver.artwork.on("copper_top") if s.role != "pour"]
    )
    for row in rows(write_bias_points(driver, JOB)):
        point = shapely.Point(float(row["x (mm)"]) * 1e6, float(row["y (mm)"]) * 1e6)
        assert copper.distance(point) < 2.0, row


def test_gate_comes_before_drain_and_goes_after_it(driver: Result) -> None:
    """Drain voltage on a device whose gate is at zero destroys it."""
    assert [supply.port for supply in supplies_of(driver)] == ["vg", "vd"]
    gate, drain = supplies_of(driver)
    assert gate.control
    assert gate.pins == ("Q1.gate",)
    assert not drain.control
    assert drain.current == pytest.approx(0.35)
    steps = switching_steps(driver)
    places = [next(k for k, step in enumerate(steps) if step.startswith(f"{p} ")) for p in ("vg", "vd")]
    assert places[0] < places[1]
    assert "RF drive first, then vd, vg" in steps[-1]
    assert "350 mA" in steps[places[1]]
    assert "420 mA" in steps[places[1]]


def test_gate_comes_first_whatever_the_file_order(handmade: Result) -> None:
    """The order of the file says nothing; a gate is found through its resistor and line."""
    result = with_bias(
        handmade,
        {
            "vd": {"kind": "dc", "net": "drain", "voltage": "28 V"},
            "aux": {"kind": "dc", "net": "lamp", "voltage": "5 V"},
            "vg": {"kind": "dc", "net": "supply", "voltage": "-3 V"},
        },
        {
            "Q1": FET,
            "R1": {"kind": "resistor", "nets": ["supply", "mid"], "value": "100 ohm", "case": "0603"},
            "R2": {"kind": "resistor", "nets": ["lamp", "gnd"], "value": "100 ohm", "case": "0603"},
        },
        {"feed": {"nets": ["mid", "gate"], "impedance": "50 ohm", "angle": "30 deg"}},
    )
    assert [supply.port for supply in supplies_of(result)] == ["vg", "vd", "aux"]
    assert switching_steps(result)[1].startswith("vg (-3 V")


def test_a_positive_gate_is_held_at_zero_first(handmade: Result) -> None:
    """A device that conducts at positive gate voltage must not see that voltage before the drain is up."""
    result = with_bias(
        handmade,
        {
            "vg": {"kind": "dc", "net": "gate", "voltage": "2.6 V"},
            "vd": {"kind": "dc", "net": "drain", "voltage": "28 V"},
        },
        {"Q1": FET},
        {},
    )
    first = switching_steps(result)[1]
    assert first.startswith("vg (2.6 V")
    assert "at 0 V" in first


def test_capacitors_do_not_pass_bias(handmade: Result) -> None:
    """A supply behind a capacitor feeds nothing of the device."""
    result = with_bias(
        handmade,
        {
            "vd": {"kind": "dc", "net": "drain", "voltage": "28 V"},
            "x": {"kind": "dc", "net": "far", "voltage": "1 V"},
        },
        {"Q1": FET, "C1": {"kind": "capacitor", "nets": ["far", "gate"], "value": "1 nF", "case": "0603"}},
        {},
    )
    assert {supply.port: supply.pins for supply in supplies_of(result)} == {"vd": ("Q1.d",), "x": ()}


def test_sheet_says_what_the_tables_say(driver: Result) -> None:
    """The sheet is what is read at the bench: ports, steps, voltages, currents, response, cautions."""
    text = write_test_sheet(driver, JOB).decode("utf-8")
    for row in itertools.chain(rows(write_port_table(driver, JOB)), rows(write_bias_points(driver, JOB))):
        assert all(value in text for value in row.values())
    flat = " ".join(text.split())
    assert all(" ".join(step.split()) in flat for step in switching_steps(driver))
    assert "Highest supply voltage 28 V" in flat
    assert "Q1 must be screwed" in flat
    assert "60 V" not in flat
    assert all(note in flat for note in driver.circuit.dc.notes)


def test_a_passive_board_has_no_steps_of_bias(handmade: Result) -> None:
    """Steps about supplies that are not there confuse."""
    assert supplies_of(handmade) == []
    assert len(switching_steps(handmade)) == 1
    text = write_test_sheet(replace(handmade, response=None), JOB).decode()
    assert "no supply" in text
    assert "Expected voltage" not in text
    assert "Touchstone files in this folder" not in text


def test_dangerous_voltages_are_named(driver: Result) -> None:
    """Above 60 V the sheet must warn of touching."""
    file = driver.circuit.file
    ports = {**file.ports, "vd": file.ports["vd"].model_copy(update={"voltage": 90.0})}
    dc = DcSolution(
        voltages=driver.circuit.dc.voltages,
        currents=driver.circuit.dc.currents,
        notes=driver.circuit.dc.notes,
    )
    circuit = replace(driver.circuit, file=file.model_copy(update={"ports": ports}), dc=dc)
    placement = replace(driver.placement, sized=replace(driver.sized, circuit=circuit))
    high = replace(driver, artwork=replace(driver.artwork, placement=placement))
    assert "dangerous to touch" in write_test_sheet(high, JOB).decode()
    assert "dangerous to touch" not in write_test_sheet(driver, JOB).decode()


def test_equal_results_give_equal_bytes(remake: Callable[[], Result], handmade: Result) -> None:
    """Nets reached through a set must not decide the order of anything."""
    for write in (write_test_sheet, write_port_table, write_bias_points):
        assert write(remake(), JOB) == write(handmade, JOB)
