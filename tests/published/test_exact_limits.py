"""Exact solutions by conformal mapping that the formulas must approach: coplanar line, stripline, plates."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.special import ellipk, ellipkm1

from layoutgen.formulas.constants import ETA0
from layoutgen.formulas.microstrip import hammerstad_jensen_1980
from layoutgen.formulas.numeric import elliptic_ratio
from layoutgen.formulas.pour import ghione_naldi_1983, microstrip_beside_pour


@pytest.mark.parametrize("k", [1e-6, 0.01, 0.2, 0.5, 0.9, 0.999, 1 - 1e-9])
def test_elliptic_ratio_agrees_with_scipy(k):
    """Catches modulus taken for parameter (k for k^2)."""
    assert elliptic_ratio(k, math.sqrt(1.0 - k * k)) == pytest.approx(
        ellipk(k * k) / ellipkm1(k * k), rel=1e-9
    )


@pytest.mark.parametrize(
    ("k", "z_air"),
    [(0.2, 179.010), (0.4, 135.489), (0.5, 120.484), (0.6, 107.338), (0.7, 95.047), (0.8, 82.639)],
)
def test_coplanar_line_on_a_thick_substrate(k, z_air):
    """Slots much smaller than the height: ee = (er+1)/2, Z0 sqrt(ee) as printed; agreement 1e-4."""
    u = 1e-3
    line = ghione_naldi_1983(u, 4.4, 0.5 * u * (1.0 / k - 1.0))
    exact = 0.25 * ETA0 * ellipk(1.0 - k * k) / ellipk(k * k)
    assert exact == pytest.approx(z_air, abs=6e-4)
    assert line.effective_permittivity == pytest.approx(2.7, rel=1e-4)
    assert line.impedance * np.sqrt(line.effective_permittivity) == pytest.approx(exact, rel=1e-4)


@pytest.mark.parametrize(("ee", "width", "total", "ohm"), [(4.0, 5.0, 10.0, 60.24), (4.0, 9.0, 10.0, 34.17)])
def test_coplanar_digits_of_a_physics_library(ee, width, total, ohm):
    """5 mm in 10 mm and 9 in 10 at ee 4 (60.28 and 34.19 there, with 30 pi for a quarter of eta0)."""
    scale = 1e-4
    line = ghione_naldi_1983(width * scale, 2.0 * ee - 1.0, 0.5 * (total - width) * scale)
    assert line.impedance == pytest.approx(ohm, abs=0.02)


@pytest.mark.parametrize("u", [0.1, 0.5, 1.66, 4.0, 8.0])
def test_stripline_under_the_slot(u):
    """Very wide slots: the slab's half is half a stripline of ground spacing 2 h, exactly; agreement 1e-4."""
    er = 3.66
    line = ghione_naldi_1983(u, er, 40.0)
    c = ETA0 * math.sqrt(line.effective_permittivity) / line.impedance
    c_air = ETA0 / (math.sqrt(line.effective_permittivity) * line.impedance)
    below = (c - c_air) / (er - 1.0)
    k = 1.0 / math.cosh(0.25 * math.pi * u)
    assert below == pytest.approx(2.0 * ellipk(1.0 - k * k) / ellipk(k * k), rel=1e-4)


def test_stripline_of_pozar_example_3_5():
    """er 2.2, W/b 0.830: 49.97 ohm; W/b is u/2."""
    line = ghione_naldi_1983(1.66, 2.2, 40.0)
    c, c_air = (ETA0 / line.impedance * line.effective_permittivity**power for power in (0.5, -0.5))
    below = (c - c_air) / 1.2
    assert ETA0 / (2.0 * math.sqrt(2.2) * below) == pytest.approx(49.97, abs=5e-3)


@pytest.mark.parametrize("er", [1.0, 4.4, 12.9])
def test_narrow_strip_is_a_wire_over_ground(er):
    """u -> 0: Z0 = eta/(2 pi) ln(8/u) / sqrt(ee) with ee near (er+1)/2."""
    line = hammerstad_jensen_1980(1e-3, er)
    exact = ETA0 / (2.0 * math.pi) * math.log(8e3)
    assert line.impedance * np.sqrt(line.effective_permittivity) == pytest.approx(exact, rel=1e-4)
    assert line.effective_permittivity == pytest.approx(0.5 * (er + 1.0), rel=0.05)


@pytest.mark.parametrize("er", [1.0, 4.4, 12.9])
def test_wide_strip_is_a_plate_line(er):
    """u -> infinity: Z0 = eta / (sqrt(er) u) and ee = er."""
    line = hammerstad_jensen_1980(1e4, er)
    assert line.effective_permittivity == pytest.approx(er, rel=2e-3)
    assert line.impedance == pytest.approx(ETA0 / (math.sqrt(er) * 1e4), rel=3e-3)


def test_air_needs_no_permittivity():
    """er = 1: ee = 1 exactly, with and without thickness and pour."""
    u = np.array([0.1, 1.0, 8.0])
    assert hammerstad_jensen_1980(u, 1.0).effective_permittivity == pytest.approx(1.0, abs=1e-12)
    assert hammerstad_jensen_1980(u, 1.0, 0.05).effective_permittivity == pytest.approx(1.0, abs=1e-12)
    assert microstrip_beside_pour(u, 1.0, 0.05, 0.5).effective_permittivity == pytest.approx(1.0, abs=1e-12)


def test_narrow_slots_approach_the_conformal_mapping():
    """s -> 0: the ground plane's share vanishes and the pour's blend is Ghione-Naldi's line."""
    blend, mapped = microstrip_beside_pour(2.0, 4.4, 0.0, 0.02, 0.02), ghione_naldi_1983(2.0, 4.4, 0.02)
    assert blend.impedance == pytest.approx(mapped.impedance, rel=5e-4)
    assert blend.effective_permittivity == pytest.approx(mapped.effective_permittivity, rel=5e-4)
