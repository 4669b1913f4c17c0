"""Lines against field solutions that no fit has seen: tables by impedance, pour, coupling, dispersion."""

from __future__ import annotations

import numpy as np
import pytest

from layoutgen.formulas.coupled import coupled_pair
from layoutgen.formulas.microstrip import hammerstad_jensen_1980, kirschning_jansen_1982_permittivity
from layoutgen.formulas.pour import microstrip_beside_pour, pour_gap_for_shift
from layoutgen.formulas.synthesis import width_for_impedance

WIDTHS = {  # er: width and effective permittivity at 25, 35.355, 50, 70.711, 100 ohm
    2.2: ((7.8278, 5.0173, 3.0801, 1.7628, 0.8926), (1.9903, 1.9400, 1.8833, 1.8234, 1.7663)),
    2.55: ((7.2008, 4.5949, 2.8002, 1.5818, 0.7816), (2.2654, 2.1986, 2.1243, 2.0472, 1.9754)),
    3.0: ((6.5586, 4.1617, 2.5126, 1.3956, 0.6684), (2.6128, 2.5242, 2.4271, 2.3283, 2.2392)),
    3.5: ((5.9930, 3.7796, 2.2587, 1.2313, 0.5700), (2.9917, 2.8783, 2.7558, 2.6341, 2.5272)),
    4.4: ((5.2261, 3.2610, 1.9135, 1.0089, 0.4401), (3.6582, 3.4994, 3.3318, 3.1711, 3.0361)),
    6.15: ((4.2459, 2.5974, 1.4722, 0.7285, 0.2850), (4.9105, 4.6623, 4.4108, 4.1835, 4.0035)),
    9.8: ((3.1245, 1.8386, 0.9717, 0.4245, 0.1358), (7.3962, 6.9656, 6.5592, 6.2224, 5.9737)),
    10.2: ((3.0399, 1.7814, 0.9345, 0.4030, 0.1264), (7.6609, 7.2110, 6.7892, 6.4423, 6.1873)),
}
IMPEDANCES = np.array([25.0, 35.355, 50.0, 70.711, 100.0])

LINES = {  # er: impedance at u = 0.1, 0.25, 0.5, 1, 2, 4, 8, 10
    1.0: (262.758, 207.917, 166.700, 126.424, 89.029, 57.719, 34.674, 29.021),
    2.2: (202.578, 159.215, 126.647, 94.908, 65.702, 41.725, 24.563, 20.438),
    2.55: (191.672, 150.499, 119.577, 89.455, 61.773, 39.114, 22.961, 19.090),
    3.0: (179.959, 141.167, 112.036, 83.668, 57.634, 36.386, 21.301, 17.695),
    3.5: (169.185, 132.608, 105.142, 78.404, 53.893, 33.939, 19.822, 16.456),
    4.4: (153.883, 120.489, 95.414, 71.015, 48.680, 30.557, 17.793, 14.760),
    6.15: (133.168, 104.142, 82.349, 61.152, 41.783, 26.129, 15.162, 12.565),
    9.6: (108.932, 85.089, 67.188, 49.785, 33.910, 21.128, 12.219, 10.117),
    9.8: (107.902, 84.281, 66.547, 49.306, 33.580, 20.919, 12.097, 10.015),
    10.2: (105.928, 82.732, 65.317, 48.387, 32.947, 20.520, 11.863, 9.821),
}
LINE_WIDTHS = np.array([0.1, 0.25, 0.5, 1.0, 2.0, 4.0, 8.0, 10.0])

GAPS = np.array([0.5, 1.0, 1.5, 2.0, 3.0])
POUR_SHIFT = {  # er: change of impedance and of permittivity [%] of a 50-ohm line at GAPS
    2.2: ((-10.0, -4.2, -2.1, -1.1, -0.45), (-5.0, -3.0, -1.9, -1.2, -0.6)),
    3.5: ((-10.7, -4.2, -2.0, -1.1, -0.41), (-7.0, -4.1, -2.5, -1.5, -0.7)),
    4.4: ((-11.1, -4.3, -2.0, -1.1, -0.40), (-7.8, -4.5, -2.7, -1.7, -0.7)),
    6.15: ((-11.8, -4.5, -2.1, -1.1, -0.39), (-8.7, -5.0, -2.9, -1.8, -0.7)),
    9.8: ((-12.9, -4.7, -2.1, -1.1, -0.38), (-9.5, -5.5, -3.1, -1.8, -0.7)),
}

COUPLING = {  # er: coupling [dB] of two 50-ohm lines at 1, 2, 3, 5 h
    2.2: (-18.8, -24.1, -28.0, -33.8),
    3.5: (-18.6, -24.5, -28.8, -35.0),
    4.4: (-18.4, -24.6, -29.1, -35.5),
    9.8: (-17.4, -24.7, -30.0, -37.2),
}


@pytest.mark.parametrize("er", LINES)
def test_impedance_of_thin_lines(er):
    """Catches errors at permittivities and widths that the reference tables do not hold."""
    line = hammerstad_jensen_1980(LINE_WIDTHS, er)
    assert np.max(np.abs(line.impedance / LINES[er] - 1.0)) < 0.0012


@pytest.mark.parametrize("er", WIDTHS)
def test_width_and_permittivity_by_impedance(er):
    """Catches a synthesis that inverts something else than the analysis that is used for lengths."""
    widths, permittivities = WIDTHS[er]
    found = width_for_impedance(IMPEDANCES, er)
    assert np.max(np.abs(found.u / widths - 1.0)) < 0.003
    line = hammerstad_jensen_1980(found.u, er)
    assert np.max(np.abs(line.effective_permittivity / permittivities - 1.0)) < 0.0025


@pytest.mark.parametrize("er", POUR_SHIFT)
def test_pour_beside_a_50_ohm_line(er):
    """The pour's distance is set by this shift of the impedance; 0.5 points is the tables' own step."""
    u = width_for_impedance(50.0, er).u
    bare, beside = hammerstad_jensen_1980(u, er), microstrip_beside_pour(u, er, 0.0, GAPS, GAPS)
    shift, ee_shift = POUR_SHIFT[er]
    assert np.max(np.abs(100.0 * (beside.impedance / bare.impedance - 1.0) - shift)) < 0.5
    found = 100.0 * (beside.effective_permittivity / bare.effective_permittivity - 1.0)
    assert np.max(np.abs(found - ee_shift)) < 0.7


@pytest.mark.parametrize("er", POUR_SHIFT)
def test_one_per_cent_is_reached_at_two_heights(er):
    """The rule by which the pour is drawn: 1 % at about 2 h, whatever the permittivity."""
    u = width_for_impedance(50.0, er).u
    assert pour_gap_for_shift(u, er, 0.0, 0.01) == pytest.approx(2.07, abs=0.15)


@pytest.mark.parametrize("er", COUPLING)
def test_coupling_of_two_lines(er):
    """The spacing rule converts decibels to distance with this: good to 0.5 dB to 3 h, 1.4 dB at 5 h."""
    u = width_for_impedance(50.0, er).u
    pair = coupled_pair(u, np.array([1.0, 2.0, 3.0, 5.0]), er)
    coupling = (pair.z_even - pair.z_odd) / (pair.z_even + pair.z_odd)
    off = np.abs(20.0 * np.log10(coupling) - COUPLING[er])
    assert np.max(off[:3]) < 0.5
    assert off[3] < 1.4


def test_pair_solver_values():
    """Six pairs of another solver at er 2.2 and 10: Z even, ee even, Z odd, ee odd."""
    cases = np.array(
        [
            (2.2, 1.0, 0.1, 127.757, 1.841, 49.660, 1.624),
            (2.2, 2.0, 0.5, 77.543, 1.922, 50.965, 1.695),
            (10.0, 0.5, 0.1, 93.383, 6.750, 32.560, 5.558),
            (10.0, 1.0, 0.5, 59.031, 7.283, 37.041, 5.820),
            (10.0, 1.0, 2.0, 51.618, 7.147, 45.959, 6.225),
            (10.0, 2.0, 0.1, 40.704, 7.783, 20.660, 5.955),
        ]
    )
    er, u, g = cases[:, :3].T
    pair = coupled_pair(u, g, er)
    found = np.stack([pair.z_even, pair.ee_even, pair.z_odd, pair.ee_odd], axis=-1)
    assert np.max(np.abs(found / cases[:, 3:] - 1.0)) < 0.009


@pytest.mark.parametrize(
    ("er", "h_mm", "w_mm", "ghz", "wanted"),
    [
        (9.9, 0.5, 0.483, (1, 5, 10, 20), (6.633, 6.725, 6.880, 7.241)),
        (2.2, 1.27, 3.91, (1, 2.5, 5, 10), (1.8837, 1.8904, 1.9040, 1.9369)),
        (3.5, 0.508, 1.147, (1, 2.5, 5, 10), (2.7557, 2.7610, 2.7726, 2.8009)),
        (9.8, 0.635, 0.617, (1, 5, 10, 20), (6.577, 6.702, 6.908, 7.370)),
    ],
)
def test_dispersion_digits(er, h_mm, w_mm, ghz, wanted):
    """Catches the paper's GHz cm read as GHz mm, and any coefficient of the dispersion."""
    u = w_mm / h_mm
    ee = hammerstad_jensen_1980(u, er).effective_permittivity
    found = kirschning_jansen_1982_permittivity(ee, u, er, np.array(ghz) * 1e9 * h_mm * 1e-3)
    assert found == pytest.approx(np.array(wanted), abs=1.1e-3 if er > 9 else 1.1e-4)
