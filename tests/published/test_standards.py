"""IPC figures: one class per equation or table, with the digits that independent sources print."""

from __future__ import annotations

import math

import numpy as np
import pytest

from layoutgen.formulas.limits import (
    CLEARANCE_CONDITIONS,
    average_power,
    barrel_resistance,
    barrel_section,
    dc_resistance,
    ipc2221_barrel_current,
    ipc2221_barrel_rise,
    ipc2221_current,
    ipc2221_in_range,
    ipc2221_rise,
    ipc2221_width,
    ipc2221b_clearance,
    peak_voltage,
)
from layoutgen.formulas.loss import conductor_attenuation, dielectric_attenuation
from layoutgen.formulas.pour import microstrip_beside_pour
from layoutgen.formulas.synthesis import width_for_impedance

MIL = 25.4e-6


class TestIpc2221Current:
    """I = k dT^0.44 A^0.725."""

    def test_3_ampere_at_10_degrees(self):
        """74.1616 square mils: catches the area converted with the wrong power of the mil."""
        width = ipc2221_width(3.0, 35e-6, 10.0)
        assert width * 35e-6 / MIL**2 == pytest.approx(74.1616, abs=5e-4)

    def test_10_mil_at_one_ounce(self):
        """0.88552 A outside, 0.44276 A inside."""
        assert ipc2221_current(10 * MIL, 1.378 * MIL, 10.0) == pytest.approx(0.88552, abs=1e-5)
        assert ipc2221_current(10 * MIL, 1.378 * MIL, 10.0, internal=True) == pytest.approx(0.44276, abs=1e-5)

    @pytest.mark.parametrize(
        ("width_mm", "thickness_um", "amperes"),
        [(1.0, 35, (2.392, 3.244, 3.878)), (2.54, 35, (4.70, 6.38, 7.62)), (1.0, 70, (3.95, 5.36, 6.41))],
    )
    def test_three_rises(self, width_mm, thickness_um, amperes):
        """10, 20 and 30 K: catches a wrong exponent of the temperature."""
        found = ipc2221_current(width_mm * 1e-3, thickness_um * 1e-6, np.array([10.0, 20.0, 30.0]))
        digits = 5e-4 if amperes[0] < 3 and thickness_um == 35 else 6e-3
        assert found == pytest.approx(np.array(amperes), abs=digits)

    def test_inverses(self):
        """Width and rise must undo the current, for either sign of it."""
        current = ipc2221_current(0.7e-3, 18e-6, 25.0)
        assert ipc2221_width(-current, 18e-6, 25.0) == pytest.approx(0.7e-3)
        assert ipc2221_rise(-current, 0.7e-3, 18e-6) == pytest.approx(25.0)
        assert ipc2221_rise(0.0, 0.7e-3, 18e-6) == 0.0

    def test_chart_ends(self):
        """35 A outside, 17.5 A inside."""
        assert ipc2221_in_range(35.0, 20.0)
        assert not ipc2221_in_range(35.1, 20.0)
        assert not ipc2221_in_range(17.6, 20.0, internal=True)
        assert not ipc2221_in_range(5.0, 101.0)

    def test_via_barrel(self):
        """d 0.3 mm, t 25 um: 0.0216 mm^2 = 33.48 square mils, 1.69 A outside and 0.84 A inside at 10 K."""
        assert barrel_section(0.3e-3, 25e-6) * 1e6 == pytest.approx(0.02160, abs=1e-5)
        assert barrel_section(0.3e-3, 25e-6) / MIL**2 == pytest.approx(33.48, abs=0.01)
        assert ipc2221_barrel_current(0.3e-3, 25e-6, 10.0) == pytest.approx(1.69, abs=5e-3)
        assert ipc2221_barrel_current(0.3e-3, 25e-6, 10.0, internal=True) == pytest.approx(0.84, abs=5e-3)
        assert ipc2221_barrel_rise(1.6863, 0.3e-3, 25e-6) == pytest.approx(10.0, abs=0.02)

    def test_barrel_of_a_finished_hole(self):
        """pi t (d + t) when the diameter is the finished one; solid when the plating fills the drill."""
        assert barrel_section(0.25e-3, 25e-6, finished=True) == pytest.approx(math.pi * 25e-6 * 0.275e-3)
        assert barrel_section(0.3e-3, 0.2e-3) == pytest.approx(math.pi * 0.15e-3**2)


class TestResistance:
    """Copper of 58 MS/m at 20 degC."""

    def test_strip(self):
        """50 x 2 mm x 35 um: 12.3 mohm, 61.6 mV at 5 A; sheets 0.4926 and 0.985 mohm."""
        strip = dc_resistance(50e-3, 2e-3, 35e-6, 58e6)
        assert strip * 1e3 == pytest.approx(12.3, abs=0.05)
        assert 5.0 * strip * 1e3 == pytest.approx(61.6, abs=0.05)
        assert dc_resistance(1.0, 1.0, np.array([35e-6, 17.5e-6]), 58e6) * 1e3 == pytest.approx(
            np.array([0.4926, 0.985]), abs=5e-4
        )

    def test_temperature(self):
        """x 1.314 at 100 degC."""
        warm, cold = (dc_resistance(1.0, 1.0, 35e-6, 58e6, temperature) for temperature in (100.0, 20.0))
        assert warm / cold == pytest.approx(1.314, abs=5e-4)

    def test_barrel(self):
        """d 0.3 mm, t 25 um: 1.277 mohm over 1.6 mm, 0.406 over 0.508 mm."""
        found = barrel_resistance(np.array([1.6e-3, 0.508e-3]), 0.3e-3, 25e-6, 58e6) * 1e3
        assert found == pytest.approx(np.array([1.277, 0.406]), abs=6e-4)


TABLE_6_1_MM = {  # upper end of the step [V]: B1, B2, B3, B4, A5, A6, A7
    15: (0.05, 0.1, 0.1, 0.05, 0.13, 0.13, 0.13),
    30: (0.05, 0.1, 0.1, 0.05, 0.13, 0.25, 0.13),
    50: (0.1, 0.6, 0.6, 0.13, 0.13, 0.4, 0.13),
    100: (0.1, 0.6, 1.5, 0.13, 0.13, 0.5, 0.13),
    150: (0.2, 0.6, 3.2, 0.4, 0.4, 0.8, 0.4),
    170: (0.2, 1.25, 3.2, 0.4, 0.4, 0.8, 0.4),
    250: (0.2, 1.25, 6.4, 0.4, 0.4, 0.8, 0.4),
    300: (0.2, 1.25, 12.5, 0.4, 0.4, 0.8, 0.8),
    500: (0.25, 2.5, 12.5, 0.8, 0.8, 1.5, 0.8),
}


class TestIpc2221bClearance:
    """Table 6-1, as independent public code that cites the standard of 2012 has it."""

    @pytest.mark.parametrize("volts", TABLE_6_1_MM)
    def test_every_cell(self, volts):
        """The upper end of a step belongs to it, the next volt to the next; the sign does not matter."""
        for condition, clearance in zip(CLEARANCE_CONDITIONS, TABLE_6_1_MM[volts], strict=True):
            assert ipc2221b_clearance(volts, condition) * 1e3 == pytest.approx(clearance)
            assert ipc2221b_clearance(-volts, condition) * 1e3 == pytest.approx(clearance)

    def test_steps_begin_above_the_last_volt(self):
        """15.5 V is not 15 V: catches a search from the wrong side."""
        assert ipc2221b_clearance(15.5, "A6") * 1e3 == pytest.approx(0.25)
        assert ipc2221b_clearance(0.0, "B2") * 1e3 == pytest.approx(0.1)

    @pytest.mark.parametrize(
        ("condition", "mm"), [("B1", 0.50), ("B2", 3.0), ("B3", 15.0), ("B4", 1.105), ("A6", 1.805)]
    )
    def test_above_500_volt_the_increment_is_added(self, condition, mm):
        """600 V: 0.25 + 100 x 0.0025 = 0.50 mm for B1 (the standard's own example, from memory)."""
        assert ipc2221b_clearance(600.0, condition) * 1e3 == pytest.approx(mm)

    def test_unknown_column(self):
        """A misspelt condition must not fall back to some column."""
        with pytest.raises(ValueError, match="'B9' is not one of B1, B2, B3, B4, A5, A6, A7"):
            ipc2221b_clearance(10.0, "B9")


class TestPower:
    """Bahl and Gupta's average power, and the peak voltage."""

    @pytest.mark.parametrize(
        ("er", "h_mm", "tand", "conductivity", "ghz", "watt"),
        [
            (2.2, 0.787, 0.0009, 0.22, 2.0, 421.0),
            (3.5, 0.508, 0.0037, 0.69, 2.5, 390.0),
            (4.4, 1.6, 0.02, 0.3, 2.0, 103.0),
        ],
    )
    def test_boards(self, er, h_mm, tand, conductivity, ghz, watt):
        """50 ohm, 75 K above ambient; the sources' inputs are rounded, hence 10 %."""
        u = width_for_impedance(50.0, er).u
        ee = microstrip_beside_pour(u, er).effective_permittivity
        width, frequency = u * h_mm * 1e-3, ghz * 1e9
        conductor = conductor_attenuation(frequency, 50.0, width, 58e6)
        dielectric = dielectric_attenuation(frequency, er, ee, tand)
        result = average_power(
            frequency, h_mm * 1e-3, width, 50.0, ee, conductor, dielectric, conductivity, 75.0
        )
        assert result.power == pytest.approx(watt, rel=0.1)
        assert (result.low, result.high) == (0.5 * result.power, 2.0 * result.power)

    def test_peak_voltage(self):
        """100 W 100 V, 1 kW 316 V, total reflection doubles."""
        assert peak_voltage(np.array([100.0, 1000.0]), 50.0) == pytest.approx(
            np.array([100.0, 316.2]), abs=0.05
        )
        assert peak_voltage(100.0, 50.0, -1.0) == pytest.approx(200.0)
