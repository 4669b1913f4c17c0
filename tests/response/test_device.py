"""What transistors and feeds see, and the stability of devices."""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from layoutgen.artwork import Artwork
from layoutgen.response import respond
from layoutgen.response.chain import line, series
from layoutgen.response.device import rollett_1962_stability
from layoutgen.response.feeds import find_feeds
from layoutgen.response.network import GROUND, Network, Port, Shunt, between

MAKER = Callable[..., Artwork]
PORTS = dict[str, Any]
F0 = 2.245e9

FOOTPRINT = {
    "cutout": {"size": ["4.4 mm", "10.4 mm"], "at": ["0 mm", "0 mm"]},
    "pads": {
        "gate": {"at": ["-3.6 mm", "0 mm"], "size": ["2.4 mm", "2.0 mm"], "heading": "west"},
        "drain": {"at": ["3.6 mm", "0 mm"], "size": ["2.4 mm", "2.0 mm"], "heading": "east"},
        "source": {"ground": "flange"},
    },
}
TRANSISTOR = {
    "kind": "transistor",
    "footprint": "flange",
    "pins": {"gate": "c", "drain": "d", "source": "gnd"},
}
LINES = {
    "a": {"nets": ["in", "c"], "impedance": "30 ohm", "angle": "90 deg"},
    "b": {"nets": ["d", "o"], "impedance": "38 ohm", "angle": "60 deg"},
    "launch": {"nets": ["o", "out"], "impedance": "50 ohm", "length": "free"},
}
TERMINATIONS = {"gate": "18+2j ohm", "drain": "25-5j ohm"}


def turned(load: complex, impedance: float, degrees: float) -> complex:
    """Return a load seen through a line."""
    t = 1j * math.tan(math.radians(degrees))
    return impedance * (load + impedance * t) / (impedance + load * t)


def amplifier(artwork_of: MAKER, ports: PORTS, part: dict[str, Any], folder: Path | None = None) -> Artwork:
    tables = {"ports": ports, "lines": LINES, "parts": {"Q1": {**TRANSISTOR, **part}}}
    return artwork_of({**tables, "footprints": {"flange": FOOTPRINT}}, folder)


class TestPins:
    def test_impedances_by_hand(self, artwork_of: MAKER, ports: PORTS) -> None:
        """The conjugate, the device instead of the board, or another port's load: all are other numbers."""
        view = respond(amplifier(artwork_of, ports, {"terminations": TERMINATIONS})).device
        assert view.frequencies == (2.20e9, F0, 2.29e9, 2.0 * F0)
        gate, drain = view.pins
        assert (gate.pin, gate.device) == ("Q1.gate", 18 + 2j)
        assert (drain.pin, drain.device) == ("Q1.drain", 25 - 5j)
        for k, f in enumerate(view.frequencies):
            assert gate.wanted[k] == pytest.approx(turned(50.0, 30.0, 90.0 * f / F0), rel=1e-9)
        assert abs(gate.wanted[0].imag) > 0.5
        assert gate.wanted[1] == pytest.approx(18.0, abs=1e-9)

    def test_drawn_is_near_wanted_but_not_the_same(self, artwork_of: MAKER, ports: PORTS) -> None:
        """As drawn must come from the drawing: pads and losses move it, by a few per cent here."""
        for pin in respond(amplifier(artwork_of, ports, {"terminations": TERMINATIONS})).device.pins:
            ratio = abs(pin.as_drawn[1] - pin.wanted[1]) / abs(pin.wanted[1])
            assert 1e-4 < ratio < 0.2

    def test_data_stand_for_terminations(self, artwork_of: MAKER, ports: PORTS, tmp_path: Path) -> None:
        """The device must be taken away: in place, the gate would see it in parallel."""
        rows = [f"{f / 10} 0.5 -40 0.02 60 6 120 0.6 -30" for f in range(15, 36)]
        (tmp_path / "q.s2p").write_text("\n".join(["# GHz S MA R 50", *rows]))
        part = {"data": "q.s2p", "data_ports": ["gate", "drain"]}
        by_data = respond(amplifier(artwork_of, ports, part, tmp_path), tmp_path).device
        by_hand = respond(amplifier(artwork_of, ports, {"terminations": TERMINATIONS})).device
        assert [pin.device for pin in by_data.pins] == [None, None]
        for one, other in zip(by_data.pins, by_hand.pins, strict=True):
            assert one.wanted == pytest.approx(other.wanted, rel=1e-9)

    def test_the_second_harmonic_only_where_data_reach(
        self, artwork_of: MAKER, ports: PORTS, tmp_path: Path
    ) -> None:
        """Data of a resistor end at 4 GHz, below the second harmonic: nothing is extrapolated."""
        (tmp_path / "r.s2p").write_text("# GHz S RI R 50\n1 0 0 1 0 1 0 0 0\n4 0 0 1 0 1 0 0 0\n")
        lines = {**LINES, "b": {**LINES["b"], "nets": ["d", "e"]}}
        lines["more"] = {"nets": ["g", "o"], "impedance": "50 ohm", "angle": "30 deg"}
        parts = {
            "Q1": {**TRANSISTOR, "terminations": TERMINATIONS},
            "R1": {"kind": "resistor", "nets": ["e", "g"], "value": "1 ohm", "case": "0603", "data": "r.s2p"},
        }
        tables = {"ports": ports, "lines": lines, "parts": parts, "footprints": {"flange": FOOTPRINT}}
        view = respond(artwork_of(tables, tmp_path), tmp_path).device
        assert view.frequencies == (2.20e9, F0, 2.29e9)
        assert all(len(pin.wanted) == len(pin.as_drawn) == 3 for pin in view.pins)

    def test_without_transistor_or_feed_there_is_nothing_to_say(
        self, artwork_of: MAKER, ports: PORTS
    ) -> None:
        lines = {"t": {"nets": ["in", "out"], "impedance": "50 ohm", "angle": "90 deg"}}
        assert respond(artwork_of({"ports": ports, "lines": lines})).device is None


class TestFeeds:
    def test_a_quarter_wave_on_a_short_looks_open(self, artwork_of: MAKER, ports: PORTS) -> None:
        lines = {
            "a": {"nets": ["in", "m"], "impedance": "50 ohm", "angle": "40 deg"},
            "b": {"nets": ["m", "o"], "impedance": "50 ohm", "angle": "40 deg"},
            "launch": LINES["launch"],
            "feed": {"nets": ["m", "bank"], "impedance": "90 ohm", "angle": "90 deg"},
            "supply": {"nets": ["bank", "vd"], "length": "free"},
        }
        capacitor = {"kind": "capacitor", "nets": ["bank", "gnd"], "case": "0603"}
        parts = {"C1": {**capacitor, "value": "22 pF"}, "C2": {**capacitor, "value": "1 nF"}}
        supply = {"vd": {"kind": "dc", "net": "vd", "voltage": "5 V"}}
        artwork = artwork_of({"ports": ports | supply, "lines": lines, "parts": parts})
        (feed,) = respond(artwork).device.feeds
        assert (feed.net, feed.ports) == ("m", ("vd",))
        short = 1.0 / (2j * math.pi * F0 * 22e-12)
        short = 1.0 / (1.0 / short + 2j * math.pi * F0 * 1e-9)
        assert feed.wanted[1] == pytest.approx(90.0**2 / short, rel=1e-3)
        assert abs(feed.wanted[0]) < abs(feed.wanted[1])
        assert abs(feed.wanted[3]) < 20.0  # at the second harmonic it is a half wave on a short
        assert 200.0 < abs(feed.as_drawn[1]) < abs(feed.wanted[1])

    F = np.array([1.0])

    def network(self, *more: Any, shunts: tuple[Shunt, ...] = ()) -> Network:
        """Return a path from p to q through m with a feed at m; two ports."""
        through = (between("p", "m", line(50.0, self.F)), between("m", "q", line(50.0, self.F)))
        ports = (Port("p", 50.0), Port("q", 50.0))
        return Network(1, ports, (*through, *more), shunts)

    def test_everything_beyond_the_tee_belongs_to_it(self) -> None:
        """A resistor before the line, lumps at its far end, and nothing of the path itself."""
        beyond = between("m", "x", series(10.0)), between("x", "v", series(20.0))
        network = self.network(
            *beyond, shunts=(Shunt("v", np.array([1 / 30.0])), Shunt("m", np.array([9.0])))
        )
        ((node, z),) = find_feeds(network, {"vd": "v"}).values()
        assert node == "m" and z == pytest.approx([60.0])

    def test_two_supplies_on_one_feed_are_one(self) -> None:
        beyond = (
            between("m", "x", series(10.0)),
            between("x", "v", series(1.0)),
            between("x", "w", series(1.0)),
        )
        found = find_feeds(self.network(*beyond, between("x", GROUND, series(5.0))), {"v1": "v", "v2": "w"})
        assert list(found) == [("v1", "v2")]
        assert found["v1", "v2"][1] == pytest.approx([15.0])

    def test_a_supply_within_a_loop_of_the_path_is_none(self) -> None:
        """Fed from both ends of a line, no node parts it from the ports: there is no feed to speak of."""
        beyond = between("p", "v", series(10.0)), between("v", "q", series(10.0))
        assert find_feeds(self.network(*beyond), {"vd": "v"}) == {}

    def test_a_supply_that_reaches_no_port_is_none(self) -> None:
        assert find_feeds(self.network(between("x", "v", series(1.0))), {"vd": "v"}) == {}


class TestStability:
    def test_textbook(self) -> None:
        """Pozar, transistor at 2 GHz: K = 0.607, mu below 1, potentially unstable (from memory)."""

        def polar(size: float, degrees: float) -> complex:
            return size * np.exp(1j * math.radians(degrees))

        s = np.array(
            [[[polar(0.894, -60.6), polar(0.020, 62.4)], [polar(3.122, 123.6), polar(0.781, -27.6)]]]
        )
        k, mu = rollett_1962_stability(s)
        assert round(float(k[0]), 3) == 0.607
        assert round(float(mu[0]), 2) == 0.86

    @pytest.mark.parametrize("seed", range(6))
    def test_mu_is_the_nearest_load_on_the_edge_of_gain(self, seed: int) -> None:
        """By brute force: the least |load| at which the input reflects all, over a fine circle of loads."""
        rng = np.random.default_rng(seed)
        s = 0.6 * (rng.normal(size=(1, 2, 2)) + 1j * rng.normal(size=(1, 2, 2)))
        s[0, 0, 0] *= 0.5 / abs(s[0, 0, 0])
        mu = float(rollett_1962_stability(s)[1][0])
        (s11, s12), (s21, s22) = s[0]
        radii = np.linspace(1e-3, 3.0, 3000)[:, None] * np.exp(1j * np.linspace(0, 2 * np.pi, 721))
        seen = np.abs(s11 + s12 * s21 * radii / (1.0 - s22 * radii))
        unstable = np.any(seen >= 1.0, axis=1)
        nearest = float(np.abs(radii[np.argmax(unstable), 0])) if np.any(unstable) else math.inf
        assert nearest == pytest.approx(mu, abs=0.01) or (mu > 3.0 and math.isinf(nearest))

    def test_where_a_device_is_unstable(self, artwork_of: MAKER, ports: PORTS, tmp_path: Path) -> None:
        """Feedback grows with frequency: the range and the worst place lie at the top of the sweep."""
        rows = [f"{f / 10} 0.5 -40 {0.002 * f:.3f} 60 6 120 0.6 -30" for f in range(10, 41)]
        (tmp_path / "q.s2p").write_text("\n".join(["# GHz S MA R 50", *rows]))
        part = {"data": "q.s2p", "data_ports": ["gate", "drain"]}
        (found,) = respond(amplifier(artwork_of, ports, part, tmp_path), tmp_path).device.stability
        assert found.part == "Q1" and found.at == 4e9
        assert found.mu < 1.0 and found.k < 1.0
        assert found.unstable is not None and 1e9 < found.unstable[0] < found.unstable[1] == 4e9

    def test_data_of_a_passive_part_have_none(self, artwork_of: MAKER, ports: PORTS) -> None:
        view = respond(amplifier(artwork_of, ports, {"terminations": TERMINATIONS})).device
        assert view.stability == ()
