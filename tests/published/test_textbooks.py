"""Printed examples, named after their source, with the printed digits as tolerance."""

from __future__ import annotations

import math

import numpy as np
import pytest

from layoutgen.formulas.bends import douville_james_1978_mitre
from layoutgen.formulas.constants import C0
from layoutgen.formulas.coupled import coupled_pair
from layoutgen.formulas.ends import hammerstad_open_end, kirschning_jansen_koster_1981
from layoutgen.formulas.loss import (
    conductor_attenuation,
    dielectric_attenuation,
    hammerstad_bekkadal_1975,
    propagation_constant,
    skin_depth,
    surface_resistance,
)
from layoutgen.formulas.microstrip import (
    hammerstad_1975,
    hammerstad_jensen_1980,
    wheeler_hammerstad_width,
)
from layoutgen.formulas.pour import ghione_naldi_1983
from layoutgen.formulas.radial import radial_stub_reactance
from layoutgen.formulas.synthesis import coupled_dimensions, width_for_impedance
from layoutgen.formulas.vias import goldfarb_pucel_1991, via_resistance

MIL = 25.4e-6
DEGREE = math.pi / 180.0


class TestPozarMicrostripExample:
    """Pozar 1st ed. example 4.7, later 3.7: 50 ohm, 90 degrees at 2.5 GHz, er 2.20, d 0.127 cm."""

    def test_width(self):
        """W/d = 3.081, W = 0.391 cm: catches the branch for wide strips."""
        u = wheeler_hammerstad_width(50.0, 2.20)
        assert u == pytest.approx(3.081, abs=5e-4)
        assert u * 0.127 == pytest.approx(0.391, abs=5e-4)

    def test_length(self):
        """ee = 1.87 by the simple analysis, and a quarter wave of 2.19 cm."""
        ee = hammerstad_1975(3.081, 2.20).effective_permittivity
        assert ee == pytest.approx(1.87, abs=5e-3)
        assert C0 / (4.0 * 2.5e9 * math.sqrt(ee)) * 100.0 == pytest.approx(2.19, abs=5e-3)


def test_pozar_third_edition_example_3_8():
    """er 2.55, W/d 0.5 to 10: catches either branch of the simple analysis."""
    found = hammerstad_1975(np.array([0.5, 1.0, 2.0, 4.0, 7.0, 10.0]), 2.55).impedance
    assert found == pytest.approx(np.array([119.8, 89.8, 62.2, 39.3, 25.6, 19.1]), abs=0.051)


class TestPozarAluminaExample:
    """Pozar 4th ed. example 3.7: 50 ohm, 270 degrees at 10 GHz, er 9.9, tand 0.001, d 0.5 mm, copper."""

    CONDUCTIVITY = 5.813e7

    def test_width(self):
        """W/d = 0.9654 (from a rounded A; three digits hold), W = 0.483 mm: the branch for narrow strips."""
        u = wheeler_hammerstad_width(50.0, 9.9)
        assert u == pytest.approx(0.9654, abs=5e-4)
        assert u * 0.5 == pytest.approx(0.483, abs=5e-4)

    def test_loss(self):
        """ad 0.022 and ac 0.094 dB/cm, 0.101 dB over 8.71 mm: catches nepers taken for decibels."""
        ee = hammerstad_1975(0.9654, 9.9).effective_permittivity
        assert ee == pytest.approx(6.665, abs=1.5e-3)
        dielectric = dielectric_attenuation(10e9, 9.9, ee, 0.001)
        conductor = conductor_attenuation(10e9, 50.0, 0.483e-3, self.CONDUCTIVITY)
        decibel_per_cm = 20.0 / math.log(10.0) / 100.0
        assert dielectric * decibel_per_cm == pytest.approx(0.022, abs=5e-4)
        assert conductor * decibel_per_cm == pytest.approx(0.094, abs=5e-4)
        gamma = propagation_constant(10e9, ee, conductor + dielectric)
        length = 1.5 * math.pi / gamma.imag
        assert length * 1e3 == pytest.approx(8.71, abs=0.01)
        assert gamma.real * length * 20.0 / math.log(10.0) == pytest.approx(0.101, abs=5e-4)


@pytest.mark.parametrize(
    ("height", "width", "printed", "thin"), [(6.0, 11.5, 50.3, 53.3), (10.0, 20.0, 50.0, 52.0)]
)
def test_analog_devices_layout_guidelines_table_1(height, width, printed, thin):
    """er 3.8, 1.4 mil copper: 2 to 3 ohm off when the thickness is forgotten."""
    assert hammerstad_jensen_1980(width / height, 3.8, 1.4 / height).impedance == pytest.approx(
        printed, abs=0.05
    )
    assert hammerstad_jensen_1980(width / height, 3.8).impedance == pytest.approx(thin, abs=0.05)


def test_balanis_example_14_1():
    """Patch at 10 GHz, er 2.2, h 0.1588 cm: W 1.186, ee 1.972, extension 0.081, L 0.906 cm."""
    width = 100.0 * C0 / (2.0 * 10e9) * math.sqrt(2.0 / 3.2)
    assert width == pytest.approx(1.186, abs=1e-3)
    ee = hammerstad_1975(width / 0.1588, 2.2).effective_permittivity
    assert ee == pytest.approx(1.972, abs=5e-4)
    extension = hammerstad_open_end(width / 0.1588, 2.2) * 0.1588
    assert extension == pytest.approx(0.081, abs=5e-4)
    assert 100.0 * C0 / (2.0 * 10e9 * math.sqrt(ee)) - 2.0 * extension == pytest.approx(0.906, abs=1e-3)


@pytest.mark.parametrize(
    ("er", "u", "ee", "kjk", "hammerstad"),
    [
        (2.2, 0.5, 1.730, 0.3208, 0.3339),
        (2.2, 1.0, 1.772, 0.3883, 0.3959),
        (2.2, 3.08, 1.883, 0.5176, 0.4772),
        (4.4, 1.0, 3.168, 0.3460, 0.3448),
        (4.4, 2.0, 3.344, 0.4065, 0.3934),
        (9.8, 0.5, 6.277, 0.2653, 0.2646),
        (9.8, 1.0, 6.579, 0.3173, 0.3149),
        (9.8, 2.0, 7.034, 0.3672, 0.3606),
    ],
)
def test_open_end_formulas_print_these_digits(er, u, ee, kjk, hammerstad):
    """Catches the misprinted form of the extension (0.363 instead of 0.321 in the first row)."""
    assert hammerstad_jensen_1980(u, er).effective_permittivity == pytest.approx(ee, abs=2.2e-3)
    assert kirschning_jansen_koster_1981(u, er) == pytest.approx(kjk, abs=1e-4)
    assert hammerstad_open_end(u, er) == pytest.approx(hammerstad, abs=1e-4)


@pytest.mark.parametrize(
    ("u", "percent"),
    [
        (0.25, 98.38),
        (0.5, 85.10),
        (0.75, 75.62),
        (1, 68.85),
        (1.5, 60.58),
        (2, 56.37),
        (2.75, 53.59),
        (5, 52.08),
    ],
)
def test_douville_james_mitre_digits(u, percent):
    """Catches a wrong exponent of the mitre."""
    assert douville_james_1978_mitre(u) == pytest.approx(percent, abs=6e-3)


def test_mitre_page_examples():
    """Two calculator pages: W 19.685, h 25 mil and W 1112, h 22 mil; diagonal, cut part, level of the cut."""
    for width, height, diagonal, cut, level in (
        (19.685, 25.0, 27.838, 20.726, 9.626),
        (1112.0, 22.0, 1572.61, 817.75, 44.48),
    ):
        found = douville_james_1978_mitre(width / height) / 100.0 * math.sqrt(2.0) * width
        assert math.sqrt(2.0) * width == pytest.approx(diagonal, rel=1e-4)
        assert found == pytest.approx(cut, rel=1e-4)
        assert math.sqrt(2.0) * found - width == pytest.approx(level, rel=1.2e-3)


@pytest.mark.parametrize(
    ("h_um", "d_um", "ph"),
    [
        (50, 25, 9.24),
        (100, 50, 18.47),
        (200, 100, 36.9),
        (254, 254, 26.2),
        (508, 300, 82.6),
        (635, 300, 122.3),
        (787, 400, 143.6),
        (1600, 300, 543.0),
    ],
)
def test_goldfarb_pucel_digits(h_um, d_um, ph):
    """Catches the diameter taken for the radius."""
    found = goldfarb_pucel_1991(0.5e-6 * d_um, 1e-6 * h_um) * 1e12
    assert found == pytest.approx(ph, rel=2e-3)


def test_goldfarb_pucel_of_a_physics_library():
    """h 600 mm, r 2.5 mm: 562 nH."""
    assert goldfarb_pucel_1991(2.5e-3, 0.6) * 1e9 == pytest.approx(562.0, abs=0.5)


@pytest.mark.parametrize(("t_um", "corner_mhz"), [(25.0, 7.0), (17.5, 14.3)])
def test_via_resistance_rises_from_the_skin_effect_corner(t_um, corner_mhz):
    """At the corner frequency the resistance is sqrt(2) of the direct one (from memory of the paper)."""
    direct, corner = (via_resistance(f, 0.15e-3, 1.6e-3, t_um * 1e-6, 58e6) for f in (0.0, corner_mhz * 1e6))
    assert corner / direct == pytest.approx(math.sqrt(2.0), rel=5e-3)


@pytest.mark.parametrize(
    ("ghz", "um", "mohm"),
    [
        (1, 2.090, 8.25),
        (2.5, 1.322, 13.05),
        (5, 0.935, 18.45),
        (10, 0.661, 26.09),
        (20, 0.467, 36.90),
        (30, 0.382, 45.19),
        (77, 0.238, 72.4),
    ],
)
def test_skin_depth_of_copper(ghz, um, mohm):
    """Catches angular frequency taken for frequency."""
    assert skin_depth(ghz * 1e9, 5.8e7) * 1e6 == pytest.approx(um, abs=6e-4)
    assert surface_resistance(ghz * 1e9, 5.8e7) * 1e3 == pytest.approx(mohm, abs=0.02)


@pytest.mark.parametrize(
    ("ratio", "factor"), [(0.25, 1.056), (0.5, 1.214), (1, 1.605), (1.5, 1.804), (2, 1.888), (3, 1.950)]
)
def test_hammerstad_bekkadal_digits(ratio, factor):
    """Catches the square of the ratio left out."""
    assert hammerstad_bekkadal_1975(ratio * 1e-6, 1e-6) == pytest.approx(factor, abs=6e-4)


@pytest.mark.parametrize(
    ("er", "h", "w", "s", "closed", "solver"),
    [
        (9.8, 0.635, 0.6, 0.25, 42.30, 42.27),
        (4.4, 1.6, 2.0, 0.3, 46.22, 46.21),
        (3.5, 0.508, 1.0, 0.25, 48.29, 48.19),
        (2.2, 0.787, 2.0, 0.3, 48.83, 48.77),
    ],
)
def test_ghione_naldi_digits(er, h, w, s, closed, solver):
    """Catches errors of the conformal mapping; the solver's value bounds what the closed form may be off."""
    found = ghione_naldi_1983(w / h, er, s / h).impedance
    assert found == pytest.approx(closed, abs=0.011)
    assert found == pytest.approx(solver, rel=3e-3)


class TestRadialStub:
    """ri 0.3, ro 3.0 mm, 60 degrees, h 0.508 mm, ee 3.5."""

    @pytest.mark.parametrize(("ghz", "ohm"), [(1, -553.1), (5, -80.97), (10, 8.10), (15, 65.5)])
    def test_reactance_digits(self, ghz, ohm):
        """Catches a sign or an order of the Bessel functions."""
        found = radial_stub_reactance(ghz * 1e9, 0.508e-3, 3.5, 60 * DEGREE, 0.3e-3, 3e-3)
        assert found == pytest.approx(ohm, rel=1e-3)

    def test_low_frequency_is_the_plate_capacitance(self):
        """Catches a wrong factor: at 1 MHz the sector is a plate capacitor."""
        found = radial_stub_reactance(1e6, 0.508e-3, 3.5, 60 * DEGREE, 0.3e-3, 3e-3)
        area = 0.5 * 60 * DEGREE * (3e-3**2 - 0.3e-3**2)
        capacitance = 3.5 * 8.8541878e-12 * area / 0.508e-3
        assert found == pytest.approx(-1.0 / (2.0 * math.pi * 1e6 * capacitance), rel=1e-5)


class TestPozarComponents:
    """Pozar's components, drawn by the package's synthesis and measured by its analysis."""

    def test_20_db_coupler(self):
        """Z0e 55.28, Z0o 45.23 ohm: the pair that the synthesis draws couples 20 dB."""
        voltage = 10.0 ** (-20.0 / 20.0)
        even, odd = (
            50.0 * math.sqrt((1 + voltage) / (1 - voltage)),
            50.0 * math.sqrt((1 - voltage) / (1 + voltage)),
        )
        assert (even, odd) == (pytest.approx(55.28, abs=5e-3), pytest.approx(45.23, abs=5e-3))
        found = coupled_dimensions(even, odd, 4.4)
        pair = coupled_pair(found.u, found.g, 4.4)
        assert found.in_range
        assert 20.0 * math.log10((pair.z_even - pair.z_odd) / (pair.z_even + pair.z_odd)) == pytest.approx(
            -20.0
        )

    @pytest.mark.parametrize(("ripple_j", "even", "odd"), [(0.3137, 70.61, 39.24), (0.1187, 56.64, 44.77)])
    def test_coupled_line_filter(self, ripple_j, even, odd):
        """N = 3, 0.5 dB, 10 %: both sections can be drawn, and give back the printed impedances."""
        wanted = [50.0 * (1.0 + sign * ripple_j + ripple_j**2) for sign in (1.0, -1.0)]
        assert wanted == [pytest.approx(even, abs=0.02), pytest.approx(odd, abs=0.02)]
        found = coupled_dimensions(*wanted, 4.4, 0.035)
        pair = coupled_pair(found.u, found.g, 4.4, 0.035)
        assert (pair.z_even, pair.z_odd) == (pytest.approx(wanted[0]), pytest.approx(wanted[1]))

    @pytest.mark.parametrize(
        ("impedance", "printed"),
        [
            (50.0 * math.sqrt(2.0), 70.71),  # Wilkinson divider and rat-race ring
            (50.0 / math.sqrt(2.0), 35.36),  # series arms of the branch-line coupler
            (50.0 * math.sqrt((1.0 + 2.0**2) / 2.0**3) * 4.0, 158.11),  # unequal divider, K = 2
            (50.0 * math.sqrt((1.0 + 2.0**2) / 2.0**3), 39.53),
        ],
    )
    def test_arms_of_dividers_and_couplers(self, impedance, printed):
        """Examples 8.2 and 8.5 and the unequal divider: every arm can be drawn and has its impedance."""
        assert impedance == pytest.approx(printed, abs=6e-3)
        found = width_for_impedance(impedance, 2.2, 0.03)
        assert found.in_range
        assert hammerstad_jensen_1980(found.u, 2.2, 0.03).impedance == pytest.approx(impedance, rel=1e-9)

    def test_quarter_wave_transformer(self):
        """10 to 50 ohm: 22.36 ohm and a bandwidth of 0.29 at SWR 1.5, from the line's own phase constant."""
        z1 = math.sqrt(10.0 * 50.0)
        assert z1 == pytest.approx(22.36, abs=5e-3)
        ee = 4.0
        length = 0.25 * C0 / (1e9 * math.sqrt(ee))
        frequency = np.linspace(0.7e9, 1.3e9, 60001)
        tangent = np.tan(propagation_constant(frequency, ee, 0.0).imag * length)
        z_in = z1 * (10.0 + 1j * z1 * tangent) / (z1 + 1j * 10.0 * tangent)
        inside = frequency[np.abs((z_in - 50.0) / (z_in + 50.0)) <= 0.2]
        assert (inside[-1] - inside[0]) / 1e9 == pytest.approx(0.293, abs=1e-3)

    @pytest.mark.parametrize(
        ("reactive", "lowest", "degrees"),
        [
            (0.517, "z", 5.9),
            (1.414, "y", 27.0),
            (1.932, "z", 22.1),
            (1.932, "y", 36.9),
            (1.414, "z", 16.2),
            (0.517, "y", 9.9),
        ],
    )
    def test_stepped_impedance_low_pass(self, reactive, lowest, degrees):
        """N = 6, 2.5 GHz, 150 and 10 ohm (example 9.7): both widths exist on er 4.2, lengths as printed."""
        z = 10.0 if lowest == "z" else 150.0
        angle = math.degrees(reactive * 10.0 / 50.0 if lowest == "z" else reactive * 50.0 / 150.0)
        assert angle == pytest.approx(degrees, abs=0.05)
        u = wheeler_hammerstad_width(z, 4.2)
        assert hammerstad_jensen_1980(u, 4.2).impedance == pytest.approx(z, rel=0.02)
