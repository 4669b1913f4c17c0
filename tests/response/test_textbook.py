"""Networks of the textbooks, ideal, to the digits printed there. The sources are named in each test."""

from __future__ import annotations

import math

import numpy as np
import pytest

from layoutgen.formulas.radial import radial_stub_reactance
from layoutgen.response.chain import line, series
from layoutgen.response.network import GROUND, Network, Port, between, coupled_pair
from layoutgen.response.solve import solve


def db(value: complex) -> float:
    return float(20.0 * np.log10(np.abs(value)))


def test_quarter_wave_transformer_bandwidth() -> None:
    """Pozar, Microwave Engineering, 10 to 50 ohm: Z1 = 22.36 ohm, bandwidth 29 % at SWR 1.5."""
    f = np.linspace(0.5, 1.5, 200_001)
    z1 = math.sqrt(10.0 * 50.0)
    assert z1 == pytest.approx(22.36, abs=5e-3)
    ports = (Port("a", 50.0), Port("b", 10.0))
    s = solve(Network(f.size, ports, (between("a", "b", line(z1, 0.5 * math.pi * f)),)))
    inside = f[np.abs(s[:, 0, 0]) <= 0.2]
    assert inside[-1] - inside[0] == pytest.approx(0.29, abs=5e-3)
    gamma = 0.2
    exact = 2.0 - 4.0 / math.pi * math.acos(gamma / math.sqrt(1.0 - gamma**2) * 2.0 * z1 / 40.0)
    assert inside[-1] - inside[0] == pytest.approx(exact, abs=2e-5)


def wilkinson(z2: float, z3: float, r: float, loads: tuple[float, float], f: np.ndarray) -> np.ndarray:
    theta = 0.5 * math.pi * f
    branches = (
        between("in", "two", line(z2, theta)),
        between("in", "three", line(z3, theta)),
        between("two", "three", series(r)),
    )
    ports = (Port("in", 50.0), Port("two", loads[0]), Port("three", loads[1]))
    return solve(Network(f.size, ports, branches))


class TestWilkinson:
    """Pozar: equal division with 70.71 ohm and 100 ohm; unequal K = 2 with 39.53, 158.11 and 125 ohm."""

    def test_equal(self) -> None:
        s = wilkinson(50.0 * math.sqrt(2.0), 50.0 * math.sqrt(2.0), 100.0, (50.0, 50.0), np.ones(1))[0]
        assert np.abs(np.diag(s)) == pytest.approx(0.0, abs=1e-15)
        assert s[1, 0] == pytest.approx(-1j / math.sqrt(2.0), abs=1e-15)
        assert abs(s[2, 1]) < 1e-15

    def test_equal_off_centre_by_even_and_odd_mode(self) -> None:
        """An independent analysis: each half alone, its plane of symmetry open and shorted."""
        f = np.array([0.7, 0.93, 1.2])
        z, theta = 50.0 * math.sqrt(2.0), 0.5 * math.pi * f
        t = 1j * np.tan(theta)
        even = z * (100.0 + z * t) / (z + 100.0 * t)
        odd = 1.0 / (1.0 / (z * t) + 1.0 / 50.0)
        s = wilkinson(z, z, 100.0, (50.0, 50.0), f)
        gamma_even, gamma_odd = (even - 50.0) / (even + 50.0), (odd - 50.0) / (odd + 50.0)
        assert s[:, 1, 1] == pytest.approx(0.5 * (gamma_even + gamma_odd), abs=1e-14)
        assert s[:, 2, 1] == pytest.approx(0.5 * (gamma_even - gamma_odd), abs=1e-14)

    def test_unequal(self) -> None:
        k = 2.0
        s = wilkinson(39.53, 158.11, 125.0, (50.0 / k, 50.0 * k), np.ones(1))[0]
        assert np.max(np.abs(np.diag(s))) < 5e-5
        assert abs(s[1, 0]) ** 2 / abs(s[2, 0]) ** 2 == pytest.approx(k**2, rel=5e-4)
        assert abs(s[2, 1]) < 5e-5


class TestBranchLine:
    """Pozar, Example of a 50 ohm hybrid: series arms 35.36 ohm, shunt arms 50 ohm."""

    @staticmethod
    def solve(f: np.ndarray) -> np.ndarray:
        theta = 0.5 * math.pi * f
        branches = (
            between("1", "2", line(50.0 / math.sqrt(2.0), theta)),
            between("4", "3", line(50.0 / math.sqrt(2.0), theta)),
            between("1", "4", line(50.0, theta)),
            between("2", "3", line(50.0, theta)),
        )
        return solve(Network(f.size, tuple(Port(n, 50.0) for n in "1234"), branches))

    def test_centre(self) -> None:
        s = self.solve(np.ones(1))[0]
        expected = -np.array([[0, 1j, 1, 0], [1j, 0, 0, 1], [1, 0, 0, 1j], [0, 1, 1j, 0]]) / math.sqrt(2.0)
        assert s == pytest.approx(expected, abs=1e-14)

    @pytest.mark.parametrize("f", [0.9, 1.1])
    def test_band_edge_by_even_and_odd_mode(self, f: float) -> None:
        """An independent analysis: half the hybrid, its shunt arms halved and open or shorted."""
        theta = 0.5 * math.pi * f
        gammas, ts = [], []
        for stub in (1j * math.tan(theta / 2.0), -1j / math.tan(theta / 2.0)):
            z = 1.0 / math.sqrt(2.0)
            shunt = np.array([[1.0, 0.0], [stub, 1.0]])
            main = np.array(
                [[math.cos(theta), 1j * z * math.sin(theta)], [1j / z * math.sin(theta), math.cos(theta)]]
            )
            (a, b), (c, d) = shunt @ main @ shunt
            gammas.append((a + b - c - d) / (a + b + c + d))
            ts.append(2.0 / (a + b + c + d))
        s = self.solve(np.array([f]))[0, :, 0]
        expected = [sum(gammas), sum(ts), ts[0] - ts[1], gammas[0] - gammas[1]]
        assert s == pytest.approx(0.5 * np.array(expected), abs=1e-14)


def test_stepped_impedance_low_pass() -> None:
    """Pozar, stepped-impedance filter: N = 6, 2.5 GHz, 10 and 150 ohm, 5.9 27.0 22.1 36.9 16.2 9.9 deg."""
    g = (0.517, 1.414, 1.932, 1.932, 1.414, 0.517)
    lengths = [math.degrees(gi * (10.0 / 50.0 if k % 2 == 0 else 50.0 / 150.0)) for k, gi in enumerate(g)]
    assert [round(value, 1) for value in lengths] == [5.9, 27.0, 22.1, 36.9, 16.2, 9.9]
    f = np.array([0.1, 2.5, 4.0])
    branches = [
        between(f"n{k}", f"n{k + 1}", line(10.0 if k % 2 == 0 else 150.0, math.radians(length) * f / 2.5))
        for k, length in enumerate(lengths)
    ]
    s = solve(Network(3, (Port("n0", 50.0), Port("n6", 50.0)), tuple(branches)))
    for k, share in enumerate(f / 2.5):
        product = np.eye(2, dtype=complex)
        for number, length in enumerate(lengths):
            z, theta = (10.0, 150.0)[number % 2], math.radians(length) * share
            row = [math.cos(theta), 1j * z * math.sin(theta)], [1j / z * math.sin(theta), math.cos(theta)]
            product = product @ np.array(row)
        (a, b), (c, d) = product
        assert s[k, 1, 0] == pytest.approx(2.0 / (a + b / 50.0 + c * 50.0 + d), abs=1e-13)
    assert db(s[0, 1, 0]) > -0.01
    assert -6.0 < db(s[1, 1, 0]) < -2.0
    assert db(s[2, 1, 0]) < -18.0


def test_coupled_line_coupler() -> None:
    """20 dB: 55.28 and 45.23 ohm; waves by the closed form of the coupled section."""
    c = 0.1
    even, odd = 50.0 * math.sqrt((1 + c) / (1 - c)), 50.0 * math.sqrt((1 - c) / (1 + c))
    assert (round(even, 2), round(odd, 2)) == (55.28, 45.23)
    theta = np.radians([90.0, 60.0])
    ports = tuple(Port(n, 50.0) for n in ("in", "through", "coupled", "isolated"))
    pair = coupled_pair(("in", "through", "coupled", "isolated"), line(even, theta), line(odd, theta))
    s = solve(Network(2, ports, pair))
    root = math.sqrt(1.0 - c * c)
    bottom = root * np.cos(theta) + 1j * np.sin(theta)
    assert db(s[0, 2, 0]) == pytest.approx(-20.0, abs=1e-9)
    assert s[:, 2, 0] == pytest.approx(1j * c * np.sin(theta) / bottom, abs=1e-14)
    assert s[:, 1, 0] == pytest.approx(root / bottom, abs=1e-14)
    assert np.max(np.abs(s[:, [0, 3], 0])) < 1e-14


def test_coupled_line_filter() -> None:
    """Pozar, N = 3, 0.5 dB, 10 %: 70.61 56.64 56.64 70.61 and 39.24 44.77 44.77 39.24 ohm (from memory).

    Each section is checked by the impedance matrix of a pair with two open ends.
    """
    pairs = [(70.61, 39.24), (56.64, 44.77), (56.64, 44.77), (70.61, 39.24)]
    f = np.linspace(0.9, 1.1, 41)
    theta = 0.5 * math.pi * f
    branches = [
        branch
        for k, (even, odd) in enumerate(pairs)
        for branch in coupled_pair(
            (f"n{k}", f"open a{k}", f"open b{k}", f"n{k + 1}"), line(even, theta), line(odd, theta)
        )
    ]
    s = solve(Network(f.size, (Port("n0", 50.0), Port("n4", 50.0)), tuple(branches)))
    product = np.broadcast_to(np.eye(2, dtype=complex), (f.size, 2, 2))
    for even, odd in pairs:
        z11 = -0.5j * (even + odd) / np.tan(theta)
        z12 = -0.5j * (even - odd) / np.sin(theta)
        rows = [z11 / z12, (z11**2 - z12**2) / z12], [1.0 / z12, z11 / z12]
        product = product @ np.moveaxis(np.array(rows), 2, 0)
    bottom = product[:, 0, 0] + product[:, 0, 1] / 50.0 + product[:, 1, 0] * 50.0 + product[:, 1, 1]
    assert s[:, 1, 0] == pytest.approx(2.0 / bottom, abs=1e-12)
    loss = -20.0 * np.log10(np.abs(s[:, 1, 0]))
    assert loss[20] < 0.01
    assert np.max(loss[np.abs(f - 1.0) < 0.04]) == pytest.approx(0.5, abs=0.1)
    assert loss[0] > 10.0


def test_radial_stub_reactance() -> None:
    """0.3 to 3.0 mm, 60 deg, h 0.508 mm, ee 3.5: -553.1, -80.97, +8.10, +65.5 ohm at 1, 5, 10, 15 GHz."""
    f = np.array([1e9, 5e9, 10e9, 15e9])
    x = radial_stub_reactance(f, 0.508e-3, 3.5, math.pi / 3.0, 0.3e-3, 3e-3)
    s = solve(Network(4, (Port("a", 50.0),), (between("a", GROUND, series(1j * x)),)))[:, 0, 0]
    seen = (50.0 * (1.0 + s) / (1.0 - s)).imag
    assert seen == pytest.approx([-553.1, -80.97, 8.10, 65.5], abs=0.05)
