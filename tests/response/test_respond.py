"""Both responses of a circuit, its sweep and its parts' data, through all stages before."""

from __future__ import annotations

import importlib
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from layoutgen.artwork import Artwork
from layoutgen.errors import WrongInputError
from layoutgen.response import NOTE_RULE, Response, respond
from layoutgen.response.chain import series
from layoutgen.response.drawn import drawn_network
from layoutgen.response.network import GROUND, Network, Port, between
from layoutgen.response.solve import solve
from layoutgen.response.sweep import part_data
from layoutgen.response.trace import trace_copper
from layoutgen.response.wanted import wanted_network

MAKER = Callable[..., Artwork]
PORTS = dict[str, Any]

LINES = {
    "a": {"nets": ["in", "c"], "impedance": "45 ohm", "angle": "30 deg"},
    "b": {"nets": ["d", "o"], "impedance": "45 ohm", "angle": "30 deg"},
    "launch": {"nets": ["o", "out"], "impedance": "50 ohm", "length": "free"},
}
CHIP = {"kind": "resistor", "nets": ["c", "d"], "case": "0603"}
TRANSISTOR = {
    "kind": "transistor",
    "footprint": "flange",
    "pins": {"gate": "c", "drain": "d", "source": "gnd"},
}
FOOTPRINT = {
    "cutout": {"size": ["4.4 mm", "10.4 mm"], "at": ["0 mm", "0 mm"]},
    "pads": {
        "gate": {"at": ["-3.6 mm", "0 mm"], "size": ["2.4 mm", "2.0 mm"], "heading": "west"},
        "drain": {"at": ["3.6 mm", "0 mm"], "size": ["2.4 mm", "4.0 mm"], "heading": "east"},
        "source": {"ground": "flange"},
    },
}


def write_data(path: Path, frequencies: np.ndarray, s: np.ndarray) -> None:
    """Write S (F, 2, 2) or (F, 1, 1) as a version 1 file to 50 ohm."""
    rows = ["# GHz S RI R 50"]
    for f, matrix in zip(frequencies, s, strict=True):
        numbers = [f"{value.real:.12g} {value.imag:.12g}" for value in matrix.T.ravel()]
        rows.append(" ".join([f"{f / 1e9:.9g}", *numbers]))
    path.write_text("\n".join(rows) + "\n")


def series_data(frequencies: np.ndarray, impedance: complex) -> np.ndarray:
    """Return S of a series impedance."""
    size = frequencies.size
    chain = series(np.full(size, impedance))
    return solve(Network(size, (Port("a", 50.0), Port("b", 50.0)), (between("a", "b", chain),)))


WIDE = np.linspace(0.5e9, 5e9, 46)


class TestWithoutData:
    @pytest.fixture(scope="class")
    @classmethod
    def response(cls, artwork_of: MAKER, ports: PORTS) -> Response:
        return respond(
            artwork_of({"ports": ports, "lines": LINES, "parts": {"R1": {**CHIP, "value": "20 ohm"}}})
        )

    def test_what_it_holds(self, response: Response) -> None:
        assert response.ports == ("p1", "p2") and response.impedances == (50.0, 50.0)
        assert response.frequencies == pytest.approx(np.linspace(1e9, 4e9, 31))
        assert response.spots == pytest.approx([2.20e9, 2.245e9, 2.29e9])
        assert response.wanted.shape == response.as_drawn.shape == (31, 2, 2)
        assert response.wanted_at_spots.shape == response.as_drawn_at_spots.shape == (3, 2, 2)
        assert response.notes == ()

    def test_values_are_read_only(self, response: Response) -> None:
        for values in (response.frequencies, response.wanted, response.as_drawn, response.as_drawn_at_spots):
            with pytest.raises(ValueError, match="read-only"):
                values.flat[0] = 0.0

    def test_spots_lie_on_the_curve(self, response: Response) -> None:
        """Spots taken from the wrong end of the batch would be off the interpolated curve."""
        for curve, spots in (
            (response.wanted, response.wanted_at_spots),
            (response.as_drawn, response.as_drawn_at_spots),
        ):
            for k, f in enumerate(response.spots):
                near = np.argmin(np.abs(response.frequencies - f))
                assert np.max(np.abs(curve[near] - spots[k])) < 0.12

    def test_long_sweeps_in_parts(
        self, artwork_of: MAKER, ports: PORTS, monkeypatch: pytest.MonkeyPatch
    ) -> None:
        artwork = artwork_of({"ports": ports, "lines": LINES, "parts": {"R1": {**CHIP, "value": "20 ohm"}}})
        whole = respond(artwork)
        monkeypatch.setattr(importlib.import_module("layoutgen.response.respond"), "_CHUNK", 5)
        assert respond(artwork).as_drawn == pytest.approx(whole.as_drawn, abs=1e-13)

    def test_same_bytes_again(self, artwork_of: MAKER, ports: PORTS) -> None:
        tables = {"ports": ports, "lines": LINES, "parts": {"R1": {**CHIP, "value": "20 ohm"}}}
        first, second = (respond(artwork_of(tables)).as_drawn.tobytes() for _ in range(2))
        assert first == second


class TestTerminations:
    def test_order_impedances_and_match(self, artwork_of: MAKER, ports: PORTS) -> None:
        """A network that shows a pin the conjugate of its impedance is matched there: no reflection."""
        lines = {"b": LINES["b"], "launch": LINES["launch"], "a": LINES["a"]}
        part = {**TRANSISTOR, "terminations": {"drain": "7+4j ohm", "gate": "45 ohm"}}
        artwork = artwork_of(
            {"ports": ports, "lines": lines, "parts": {"Q1": part}, "footprints": {"flange": FOOTPRINT}}
        )
        response = respond(artwork)
        assert response.ports == ("p1", "p2", "Q1.drain", "Q1.gate")
        assert response.impedances == (50.0, 50.0, 7 + 4j, 45.0)
        assert [note[1] for note in response.notes] == ["Q1"]  # its drain pad, 4 mm wide, is no 45 ohm line
        spot = response.wanted_at_spots[1]
        z = 45.0 * (50.0 + 45.0j * np.tan(np.pi / 6)) / (45.0 + 50.0j * np.tan(np.pi / 6))
        assert spot[3, 3] == pytest.approx((z - 45.0) / (z + 45.0), abs=1e-9)
        assert abs(spot[0, 1]) < 1e-12
        s = response.as_drawn
        assert np.max(np.abs(s - np.swapaxes(s, 1, 2))) < 1e-12


class TestData:
    def test_a_series_part_by_data_equals_it_by_value(
        self, artwork_of: MAKER, ports: PORTS, tmp_path: Path
    ) -> None:
        """Inner planes: the same element between the same points, up to the gap that data already hold."""
        write_data(tmp_path / "r.s2p", WIDE, series_data(WIDE, 20.0))
        by_data = {**CHIP, "value": "20 ohm", "data": "r.s2p", "planes": "pad_inner"}
        tables = {"ports": ports, "lines": LINES}
        measured = artwork_of({**tables, "parts": {"R1": by_data}}, tmp_path)
        by_value = artwork_of({**tables, "parts": {"R1": {**CHIP, "value": "20 ohm"}}})
        got, expected = respond(measured, tmp_path), respond(by_value)
        assert got.wanted == pytest.approx(expected.wanted, abs=1e-10)
        f = got.frequencies
        bare = replace(trace_copper(by_value), gaps={})
        assert got.as_drawn == pytest.approx(solve(drawn_network(by_value, f, {}, copper=bare)), abs=1e-10)

    def test_outer_planes_leave_the_pads_to_the_data(
        self, artwork_of: MAKER, ports: PORTS, tmp_path: Path
    ) -> None:
        """Pads counted twice would add 0.85 mm on each side."""
        write_data(tmp_path / "r.s2p", WIDE, series_data(WIDE, 20.0))
        tables = {"ports": ports, "lines": LINES}
        lengths = {}
        for planes in ("pad_inner", "pad_outer"):
            part = {**CHIP, "value": "20 ohm", "data": "r.s2p", "planes": planes}
            copper = trace_copper(artwork_of({**tables, "parts": {"R1": part}}, tmp_path))
            lines = sum(piece.length for piece in copper.pieces)
            lengths[planes] = (lines, len([p for p in copper.pieces if p.far.startswith("pad")]))
        assert lengths["pad_inner"][1] == 2 and lengths["pad_outer"][1] == 0

    def test_a_line_ends_where_the_data_begin(self, artwork_of: MAKER, ports: PORTS, tmp_path: Path) -> None:
        """The budget takes the pads out of the lines: with ideal data nothing is left between both responses.

        Pads counted twice, or planes read the other way round, are 0.85 mm on each side, 0.04 in S.
        """
        write_data(tmp_path / "r.s2p", WIDE, series_data(WIDE, 5.0))
        part = {**CHIP, "value": "5 ohm", "data": "r.s2p", "planes": "pad_outer"}
        artwork = artwork_of({"ports": ports, "lines": LINES, "parts": {"R1": part}}, tmp_path)
        data, f = part_data(artwork.placement.sized.circuit.file, tmp_path), np.array([2.245e9])
        drawn = solve(drawn_network(artwork, f, data, lossless=True))
        assert drawn == pytest.approx(solve(wanted_network(artwork.placement, f, data)), abs=2e-6)

    def test_a_one_port_stands_on_its_vias(self, artwork_of: MAKER, ports: PORTS, tmp_path: Path) -> None:
        """Data of one port between the pad and the via, not between the pad and perfect ground."""
        write_data(tmp_path / "short.s1p", WIDE, np.full((46, 1, 1), -1.0 + 0.0j))
        lines = {
            "a": {"nets": ["in", "m"], "impedance": "50 ohm", "angle": "30 deg"},
            "b": {"nets": ["m", "o"], "impedance": "50 ohm", "angle": "30 deg"},
            "arm": {"nets": ["m", "c"], "impedance": "50 ohm", "angle": "30 deg"},
            "launch": LINES["launch"],
        }
        short = {**CHIP, "nets": ["c", "gnd"], "value": "1 uohm"}
        data = {**short, "data": "short.s1p", "planes": "pad_inner"}
        tables = {"ports": ports, "lines": lines}
        measured = respond(artwork_of({**tables, "parts": {"R1": data}}, tmp_path), tmp_path)
        by_value = artwork_of({**tables, "parts": {"R1": short}})
        bare = replace(trace_copper(by_value), gaps={})
        expected = solve(drawn_network(by_value, measured.frequencies, {}, copper=bare))
        assert measured.as_drawn == pytest.approx(expected, abs=1e-6)
        on_ground = replace(bare, posts=(), ties=tuple((post.node, GROUND) for post in bare.posts))
        without_vias = solve(drawn_network(by_value, measured.frequencies, {}, copper=on_ground))
        assert np.max(np.abs(measured.as_drawn - without_vias)) > 0.01

    def test_a_transistor_between_its_pins(self, artwork_of: MAKER, ports: PORTS, tmp_path: Path) -> None:
        """The full chain: an amplifier's gain shows between the board's ports, the right way round."""
        s = np.tile(np.array([[0.2, 0.01], [4.0, 0.3]], dtype=complex), (46, 1, 1))
        write_data(tmp_path / "q.s2p", WIDE, s)
        part = {**TRANSISTOR, "data": "q.s2p", "data_ports": ["gate", "drain"], "planes": "pad_inner"}
        lines = {name: {**line, "impedance": "50 ohm"} for name, line in LINES.items()}
        artwork = artwork_of(
            {"ports": ports, "lines": lines, "parts": {"Q1": part}, "footprints": {"flange": FOOTPRINT}},
            tmp_path,
        )
        response = respond(artwork, tmp_path)
        assert response.ports == ("p1", "p2")
        assert np.abs(response.wanted_at_spots[1]) == pytest.approx(np.abs(s[0]), abs=1e-9)
        assert abs(response.as_drawn_at_spots[1, 1, 0]) == pytest.approx(4.0, rel=0.1)
        assert [note[1] for note in response.notes] == ["Q1"]


class TestRange:
    def parts(self, name: str = "r.s2p") -> dict[str, Any]:
        return {"R1": {**CHIP, "value": "20 ohm", "data": name}}

    def test_the_sweep_is_cut_to_the_data_with_a_note(
        self, artwork_of: MAKER, ports: PORTS, tmp_path: Path
    ) -> None:
        f = np.linspace(2e9, 3e9, 11)
        write_data(tmp_path / "r.s2p", f, series_data(f, 20.0))
        artwork = artwork_of({"ports": ports, "lines": LINES, "parts": self.parts()}, tmp_path)
        response = respond(artwork, tmp_path)
        assert response.frequencies == pytest.approx(np.linspace(2e9, 3e9, 11))
        assert response.notes == ((NOTE_RULE, "R1", "r.s2p covers 2 GHz to 3 GHz: the sweep is cut to that"),)

    def test_data_that_miss_the_band_are_wrong_input(
        self, artwork_of: MAKER, ports: PORTS, tmp_path: Path
    ) -> None:
        """All faulty files in one go, each with its key; nothing is extrapolated."""
        f = np.linspace(2.21e9, 3e9, 11)
        write_data(tmp_path / "r.s2p", f, series_data(f, 20.0))
        (tmp_path / "x.s2p").write_text("not touchstone")
        lines = LINES | {"arm": {"nets": ["o", "e"], "impedance": "50 ohm", "angle": "30 deg"}}
        parts = self.parts() | {"R2": {**CHIP, "nets": ["e", "gnd"], "value": "9 ohm", "data": "x.s2p"}}
        artwork = artwork_of({"ports": ports, "lines": lines, "parts": parts}, tmp_path)
        with pytest.raises(WrongInputError) as raised:
            respond(artwork, tmp_path)
        first, second = raised.value.faults
        assert (first.key, second.key) == ("parts.R1.data", "parts.R2.data")
        assert "2.21 GHz to 3 GHz" in first.found and "2.2 GHz to 2.29 GHz" in first.allowed
        assert "no option line" in second.found

    def test_gain_in_a_passive_part_and_coarse_data_are_told(
        self, artwork_of: MAKER, ports: PORTS, tmp_path: Path
    ) -> None:
        f = np.array([1e9, 2e9, 2.5e9, 4e9])
        s = np.array([[[0.1, 1.2], [1.2, 0.1]], [[0.5, 0.5], [0.5, 0.5]]] * 2, dtype=complex)
        write_data(tmp_path / "r.s2p", f, s)
        artwork = artwork_of({"ports": ports, "lines": LINES, "parts": self.parts()}, tmp_path)
        texts = [text for _, _, text in respond(artwork, tmp_path).notes]
        assert len(texts) == 2
        assert "not passive: largest singular value 1.3" in texts[0]
        assert "coarse" in texts[1]

    @pytest.mark.parametrize(
        ("f", "s12", "told"),
        [
            (np.linspace(1e9, 4e9, 31), 0.3, "is not reciprocal: S12 and S21 differ by 0.5000 at 1 GHz"),
            (np.array([2.1e9, 2.5e9]), 0.8, "is coarse: its points at the band are too few"),
        ],
    )
    def test_data_of_a_resistor_that_cannot_be_are_told(
        self, artwork_of: MAKER, ports: PORTS, tmp_path: Path, f: np.ndarray, s12: float, told: str
    ) -> None:
        """An amplifier's file under a resistor's name; two points with anything between them."""
        s = np.tile(np.array([[0.1, s12], [0.8, 0.1]], dtype=complex), (f.size, 1, 1))
        write_data(tmp_path / "r.s2p", f, s)
        artwork = artwork_of({"ports": ports, "lines": LINES, "parts": self.parts()}, tmp_path)
        (text,) = (text for _, _, text in respond(artwork, tmp_path).notes if "cut" not in text)
        assert told in text

    def test_the_sweep_left_out_is_the_band_widened(self, artwork_of: MAKER, ports: PORTS) -> None:
        design = {"title": "x", "frequency": "2.245 GHz", "band": ["2.20 GHz", "2.29 GHz"]}
        lines = {"t": {"nets": ["in", "out"], "impedance": "50 ohm", "length": "free"}}
        frequencies = respond(artwork_of({"design": design, "ports": ports, "lines": lines})).frequencies
        assert frequencies.size == 401
        assert frequencies[[0, -1]] == pytest.approx([2.11e9, 2.38e9])

    def test_a_part_without_value_or_data_is_told_to_be_open(self, artwork_of: MAKER, ports: PORTS) -> None:
        artwork = artwork_of(
            {"ports": ports, "lines": LINES, "parts": {"X1": {**CHIP, "kind": "other"}}},
        )
        response = respond(artwork)
        assert [note[1] for note in response.notes] == ["X1"]
        assert np.max(np.abs(response.wanted[:, 1, 0])) < 1e-12
