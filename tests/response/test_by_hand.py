"""Small schematics against matrices written out by hand: nothing of the project's solver is used for them."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from layoutgen.artwork import Artwork
from layoutgen.response import respond

MAKER = Callable[..., Artwork]
PORTS = dict[str, Any]
F0 = 2.245e9
GRID = np.linspace(0.5e9, 5e9, 46)

FOOTPRINT = {
    "pads": {
        "gate": {"at": ["-2.4 mm", "0 mm"], "size": ["1.2 mm", "0.9 mm"], "heading": "west"},
        "drain": {"at": ["2.4 mm", "0 mm"], "size": ["1.2 mm", "0.9 mm"], "heading": "east"},
        "source": {"at": ["0 mm", "-2.0 mm"], "size": ["0.9 mm", "1.2 mm"], "heading": "south"},
    }
}
LINES = {
    "a": {"nets": ["in", "g"], "impedance": "60 ohm", "angle": "40 deg"},
    "b": {"nets": ["d", "out"], "impedance": "35 ohm", "angle": "55 deg"},
    "below": {"nets": ["s", "gnd"], "impedance": "70 ohm", "angle": "25 deg"},
}
PART = {
    "kind": "transistor",
    "footprint": "device",
    "pins": {"gate": "g", "drain": "d", "source": "s"},
    "planes": "pad_inner",
}


def device() -> np.ndarray:
    """Return the invented S-parameters (46, 2, 2) of an amplifier, gate first, changing with frequency."""
    turn = np.exp(-0.4j * GRID / 1e9)
    s = np.array([[0.7 * turn, 0.05 * turn**2], [4.0 / (1.0 + GRID / 2e9) * turn**0.5, 0.5 * turn.conj()]])
    return np.moveaxis(s, 2, 0)


def write_data(path: Path, s: np.ndarray) -> None:
    """Write S (46, 2, 2) as a version 1 file: S11 S21 S12 S22."""
    rows = ["# GHz S RI R 50"]
    for f, ((s11, s12), (s21, s22)) in zip(GRID, s, strict=True):
        numbers = [f"{v.real:.12g} {v.imag:.12g}" for v in (s11, s21, s12, s22)]
        rows.append(" ".join([f"{f / 1e9:.9g}", *numbers]))
    path.write_text("\n".join(rows) + "\n")


def at(s: np.ndarray, frequencies: np.ndarray) -> np.ndarray:
    """Return S (F, 2, 2) between its points, straight lines in the real and the imaginary part."""
    both = [[s[:, i, j] for j in (0, 1)] for i in (0, 1)]
    rows = [
        [np.interp(frequencies, GRID, v.real) + 1j * np.interp(frequencies, GRID, v.imag) for v in row]
        for row in both
    ]
    return np.moveaxis(np.array(rows), 2, 0)


def z_of(s: np.ndarray, z0: float = 50.0) -> np.ndarray:
    one = np.eye(2)
    return z0 * (one + s) @ np.linalg.inv(one - s)


def abcd_of(z: np.ndarray) -> np.ndarray:
    z11, z12, z21, z22 = z[:, 0, 0], z[:, 0, 1], z[:, 1, 0], z[:, 1, 1]
    rows = [[z11 / z21, (z11 * z22 - z12 * z21) / z21], [1.0 / z21, z22 / z21]]
    return np.moveaxis(np.array(rows), 2, 0)


def line(z: float, degrees: float, f: np.ndarray) -> np.ndarray:
    theta = np.radians(degrees) * f / F0
    rows = [[np.cos(theta), 1j * z * np.sin(theta)], [1j * np.sin(theta) / z, np.cos(theta)]]
    return np.moveaxis(np.array(rows), 2, 0)


def s_of_chain(chain: np.ndarray, z0: float = 50.0) -> np.ndarray:
    a, b, c, d = chain[:, 0, 0], chain[:, 0, 1], chain[:, 1, 0], chain[:, 1, 1]
    total = a + b / z0 + c * z0 + d
    rows = [
        [(a + b / z0 - c * z0 - d) / total, 2.0 * (a * d - b * c) / total],
        [2.0 / total, (-a + b / z0 - c * z0 + d) / total],
    ]
    return np.moveaxis(np.array(rows), 2, 0)


def expected(f: np.ndarray) -> np.ndarray:
    """Return S of line, device on a shorted stub below its source, line."""
    below = 1j * 70.0 * np.tan(np.radians(25.0) * f / F0)
    with_stub = z_of(at(device(), f)) + below[:, None, None]
    return s_of_chain(line(60.0, 40.0, f) @ abcd_of(with_stub) @ line(35.0, 55.0, f))


@pytest.mark.parametrize("turned", [False, True])
def test_a_device_with_feedback_below_its_source(
    artwork_of: MAKER, ports: PORTS, tmp_path: Path, turned: bool
) -> None:
    """Data taken to ground instead of to the common pin, or ports in the order of the pins, not their own."""
    s = device()
    write_data(tmp_path / "q.s2p", s[:, ::-1, ::-1] if turned else s)
    order = ["drain", "gate"] if turned else ["gate", "drain"]
    part = {**PART, "data": "q.s2p", "data_ports": order}
    tables = {"ports": ports, "lines": LINES, "parts": {"Q1": part}, "footprints": {"device": FOOTPRINT}}
    response = respond(artwork_of(tables, tmp_path), tmp_path)
    assert response.wanted == pytest.approx(expected(response.frequencies), abs=1e-9)
    assert np.max(np.abs(response.wanted[:, 1, 0])) > 1.5
    spot = np.abs(response.as_drawn_at_spots[1, 1, 0] / response.wanted_at_spots[1, 1, 0])
    assert spot == pytest.approx(1.0, abs=0.25)
    assert spot != pytest.approx(1.0, abs=1e-3)


def test_a_filter_of_parts_by_value(artwork_of: MAKER, ports: PORTS) -> None:
    """Series inductance or resistance left out, or a shunt part taken as a series one."""
    parts = {
        "L1": {
            "kind": "inductor",
            "nets": ["c", "d"],
            "value": "3.3 nH",
            "case": "0603",
            "series_resistance": "0.4 ohm",
        },
        "C1": {
            "kind": "capacitor",
            "nets": ["d", "gnd"],
            "value": "1.2 pF",
            "case": "0402",
            "series_inductance": "0.4 nH",
            "series_resistance": "0.2 ohm",
        },
    }
    lines = {
        "a": {"nets": ["in", "c"], "impedance": "50 ohm", "angle": "20 deg"},
        "b": {"nets": ["d", "out"], "impedance": "50 ohm", "angle": "30 deg"},
    }
    response = respond(artwork_of({"ports": ports, "lines": lines, "parts": parts}))
    f = response.frequencies
    w = 2.0 * np.pi * f
    one, zero = np.ones_like(f), np.zeros_like(f)
    inductor = np.moveaxis(np.array([[one, 0.4 + 1j * w * 3.3e-9], [zero, one]]), 2, 0)
    y = 1.0 / (0.2 + 1j * w * 0.4e-9 + 1.0 / (1j * w * 1.2e-12))
    capacitor = np.moveaxis(np.array([[one, zero], [y, one]]), 2, 0)
    chain = line(50.0, 20.0, f) @ inductor @ capacitor @ line(50.0, 30.0, f)
    assert response.wanted == pytest.approx(s_of_chain(chain), abs=1e-9)
