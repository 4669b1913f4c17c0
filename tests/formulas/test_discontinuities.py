"""What discontinuities must do whatever the fit: symmetry, order, limits, flags, shapes."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from layoutgen.formulas.bends import bend_excess, douville_james_1978_mitre
from layoutgen.formulas.constants import EPS0, MU0
from layoutgen.formulas.ends import kirschning_jansen_koster_1981, open_end
from layoutgen.formulas.pads import chip_gap, pad_excess
from layoutgen.formulas.steps import line_constants, step
from layoutgen.formulas.tees import FIELD_FIT, HAMMERSTAD_1981, cross, hammerstad_1981_tee, tee
from layoutgen.formulas.vias import (
    goldfarb_pucel_1991,
    via_array_inductance,
    via_equivalent_length,
    via_inductance,
)

MANY = settings(max_examples=60, deadline=None, derandomize=True)
WIDTHS = st.floats(0.5, 5.0)
PERMITTIVITIES = st.floats(1.0, 12.9)
ANY = st.floats(allow_nan=True, allow_infinity=True)


class TestOpenEnd:
    """The extension of an open end."""

    @MANY
    @given(WIDTHS, PERMITTIVITIES)
    def test_lies_above_the_published_form(self, u, er):
        """By 4 to 17 %, never below."""
        ratio = open_end(u, er) / kirschning_jansen_koster_1981(u, er)
        assert 1.04 < ratio < 1.17

    @MANY
    @given(WIDTHS, st.floats(1.0, 12.0))
    def test_order(self, u, er):
        """Longer for wider strips, shorter for more permittivity, longer for thicker copper."""
        assert open_end(u * 1.05, er) > open_end(u, er)
        assert open_end(u, er + 0.5) < open_end(u, er)
        assert open_end(u, er, 0.07) > open_end(u, er) + 0.01

    def test_thick_ends_in_air(self):
        """Three-dimensional solutions made for this project, u 1 and 2 at t 0, 0.07, 0.14 in air."""
        u, t = np.array([[1.0], [2.0]]), np.array([0.0, 0.07, 0.14])
        solved = np.array([(0.535, 0.590, 0.625), (0.660, 0.714, 0.750)])
        assert open_end(u, 1.0, t) == pytest.approx(solved, abs=0.012)


class TestBend:
    """The length that a bend takes away."""

    @MANY
    @given(st.floats(0.3, 6.0), PERMITTIVITIES)
    def test_mitring_shortens(self, u, er):
        """A right-angle bend is shorter than its centre-line, the more so the deeper the mitre."""
        changes = bend_excess(u, er, np.array([0.0, 30.0, 50.0, 60.0])).length_change
        assert np.all(np.diff(changes) < 0.0)
        assert changes[0] < 0.0

    @MANY
    @given(st.floats(0.3, 6.0), PERMITTIVITIES, st.floats(0.0, 60.0))
    def test_sharper_turns_shorten_more(self, u, er, mitre):
        """No turn, no change; a turn of 45 degrees a fraction of the right angle's."""
        changes = bend_excess(u, er, mitre, np.array([0.0, 20.0, 45.0, 70.0, 90.0])).length_change
        assert changes[0] == 0.0
        assert np.all(np.diff(changes) < 0.0)
        assert 0.1 < changes[2] / changes[4] < 0.35

    def test_flags(self):
        """Beyond a right angle, without a neck, or very wide: flag down, value finite."""
        result = bend_excess(
            [1.0, 1.0, 50.0, 1.0, math.nan], 3.5, [60, 99, 60, 60, 60], [120, 90, 90, 45, 90]
        )
        assert result.in_range.tolist() == [False, False, False, True, False]
        assert np.isfinite(result.length_change[:4]).all()

    @pytest.mark.parametrize("u", [0.3, 0.5, 1.0, 2.0, 4.0, 6.0])
    def test_the_optimal_mitre_is_in_range(self, u):
        """The mitre that is drawn must be one that the fit covers."""
        for angle in (45.0, 90.0):
            assert bend_excess(u, 3.55, douville_james_1978_mitre(u), angle).in_range


class TestStep:
    """A step in width."""

    @MANY
    @given(WIDTHS, PERMITTIVITIES)
    def test_no_step_no_change(self, u, er):
        """Equal widths must not divide by zero, nearly equal ones must not jump."""
        same, nearly = step(u, u, er), step(u, u * (1.0 + 1e-6), er)
        assert (same.d_1, same.d_2) == (0.0, 0.0)
        assert max(abs(nearly.d_1), abs(nearly.d_2)) < 1e-3

    @MANY
    @given(WIDTHS, WIDTHS, PERMITTIVITIES)
    def test_lengths_carry_the_whole_excess(self, u1, u2, er):
        """L = L1' d1 + L2' d2 and C = C1' d1 + C2' d2: nothing lumped may remain."""
        result = step(u1, u2, er)
        l1, c1 = line_constants(u1, er)
        l2, c2 = line_constants(u2, er)
        assert l1 * result.d_1 + l2 * result.d_2 == pytest.approx(float(result.L), abs=1e-6)
        assert c1 * result.d_1 + c2 * result.d_2 == pytest.approx(float(result.C), abs=1e-5)

    def test_flags(self):
        """The fit ends at widths of 0.5 and 5."""
        assert step([0.5, 0.4, 5.0, 1.0], [5.0, 1.0, 6.0, 1.0], 3.5).in_range.tolist() == [
            True,
            False,
            False,
            True,
        ]


class TestTee:
    """A T-junction."""

    @MANY
    @given(WIDTHS, WIDTHS, WIDTHS, PERMITTIVITIES)
    def test_mains_may_be_exchanged(self, a, b, side, er):
        """The junction seen in a mirror."""
        one, other = tee(a, b, side, er, 1e6), tee(b, a, side, er, 1e6)
        assert one.d_a == pytest.approx(float(other.d_b), abs=1e-12)
        assert one.d_side == pytest.approx(float(other.d_side), abs=1e-12)
        assert one.susceptance == pytest.approx(float(other.susceptance), abs=1e-12)

    @MANY
    @given(WIDTHS, WIDTHS, PERMITTIVITIES)
    def test_nearly_equal_mains_are_equal_mains(self, u, side, er):
        """The term for unequal mains must vanish with their difference."""
        equal, nearly = tee(u, u, side, er, 1e6), tee(u, u * (1.0 + 1e-9), side, er, 1e6)
        for one, other in zip(equal[:4], nearly[:4], strict=True):
            assert other == pytest.approx(float(one), abs=1e-6)

    @MANY
    @given(WIDTHS, WIDTHS, WIDTHS)
    def test_planes_do_not_depend_on_permittivity(self, a, b, side):
        """They come from the inductances; only the susceptance feels the substrate, and it grows with fh."""
        low, high = tee(a, b, side, 2.2, 1e6), tee(a, b, side, 9.8, 2e6)
        assert low[:3] == high[:3]
        assert tee(a, b, side, 9.8, 1e6).susceptance * 2.0 == pytest.approx(float(high.susceptance))

    def test_model_is_named(self):
        """Inside of the fit's range the fit, outside Hammerstad; the flag says the same."""
        result = tee([1.0, 20.0, math.nan], 1.0, 1.0, 3.5, 1e6)
        assert result.model.tolist() == [FIELD_FIT, HAMMERSTAD_1981, HAMMERSTAD_1981]
        assert result.in_range.tolist() == [True, False, False]
        assert np.isfinite(result.d_side[:2]).all()
        assert result.d_a[1] == hammerstad_1981_tee(20.0, 1.0, 1.0, 3.5, 1e6).d_a

    def test_hammerstad_digits(self):
        """Values of the published formulas: er 2.2 h 0.79 mm 50 ohm at 2.5 GHz, side 50 and 100 ohm."""
        u, narrow, fh = 3.0801, 0.8926, 2.5e9 * 0.79e-3
        even = hammerstad_1981_tee(u, u, u, 2.2, fh)
        assert even.d_a * 0.79 == pytest.approx(0.234, abs=2e-3)
        assert even.d_side * 0.79 == pytest.approx(1.328, abs=4e-3)
        assert even.susceptance / 0.79e-3 * 0.79e-3 * 1e3 == pytest.approx(-0.29, abs=0.02)
        thin = hammerstad_1981_tee(u, u, narrow, 2.2, fh)
        assert thin.d_a * 0.79 == pytest.approx(0.061, abs=2e-3)
        assert thin.d_side * 0.79 == pytest.approx(1.120, abs=4e-3)
        assert thin.susceptance * 1e3 == pytest.approx(-0.47, abs=0.02)

    @settings(max_examples=200, deadline=None)
    @given(ANY, ANY, ANY, ANY, ANY)
    def test_any_number(self, a, b, side, er, fh):
        """Nonsense must neither warn nor raise."""
        result = tee(a, b, side, er, fh)
        if not all(0.3 < u < 8.1 for u in (a, b, side)):
            assert not result.in_range

    def test_between_the_ranges_the_fit_is_used_with_the_flag_down(self):
        """Widths of 0.2 to 0.4: Hammerstad's planes would be off by more."""
        result = tee(1.0, 1.0, 0.3, 3.5, 1e6)
        assert (str(result.model), bool(result.in_range)) == (FIELD_FIT, False)


class TestCross:
    """Four arms."""

    def test_is_made_of_two_tees(self):
        """Main planes and susceptances add, side planes are the tees' own."""
        result = cross(2.0, 1.5, 1.0, 0.7, 3.5, 1e6)
        north, south = tee(2.0, 1.5, 1.0, 3.5, 1e6), tee(2.0, 1.5, 0.7, 3.5, 1e6)
        assert result.d_w == pytest.approx(float(north.d_a + south.d_a))
        assert result.d_n == north.d_side
        assert result.d_s == south.d_side
        assert result.susceptance == pytest.approx(float(north.susceptance + south.susceptance))


class TestVia:
    """Inductance of vias."""

    def test_axis_and_edge_differ_by_the_line(self):
        """Moving the plane by a radius moves the value by the line's inductance over it."""
        r, h, w = 0.15e-3, 0.508e-3, 1.0e-3
        inductance = MU0 * line_constants(w / h, 1.0)[0]
        widest = via_inductance(r, h, w) + r * inductance
        assert widest > goldfarb_pucel_1991(r, h)

    @MANY
    @given(st.floats(0.1e-3, 0.3e-3), st.floats(0.3e-3, 1.6e-3))
    def test_thicker_vias_and_thinner_boards_have_less(self, r, h):
        """Order in both arguments."""
        assert goldfarb_pucel_1991(1.05 * r, h) < goldfarb_pucel_1991(r, h) < goldfarb_pucel_1991(r, 1.05 * h)

    @MANY
    @given(st.integers(2, 8), st.floats(0.5e-3, 3e-3))
    def test_rows_lie_between_one_and_a_share(self, count, pitch):
        """Neighbours couple, so n vias have more than 1/n of one, and less than n-1 of them."""
        one, fewer, row = (via_array_inductance(n, pitch, 0.15e-3, 0.5e-3) for n in (1, count - 1, count))
        assert one == pytest.approx(float(goldfarb_pucel_1991(0.15e-3, 0.5e-3)))
        assert one / count < row < fewer

    def test_far_apart_vias_share_evenly(self):
        """Coupling falls with distance."""
        assert via_array_inductance(4, 1.0, 0.15e-3, 0.5e-3) * 4 == pytest.approx(
            float(goldfarb_pucel_1991(0.15e-3, 0.5e-3)), rel=0.01
        )

    def test_arrays_of_vias_broadcast(self):
        """Shape of the inputs."""
        assert via_array_inductance(3, [0.8e-3, 1e-3], [[0.1e-3], [0.2e-3]], 0.5e-3).shape == (2, 2)

    def test_no_via_at_all(self):
        """A count of zero has no inductance."""
        with pytest.raises(ValueError, match="count is 0"):
            via_array_inductance(0, 1e-3, 0.15e-3, 0.5e-3)

    def test_equivalent_length_has_the_reactance(self):
        """The shorted line's own reactance at the frequency."""
        length = via_equivalent_length(0.2e-9, 50.0, 95.0, 2.2e9)
        assert 50.0 * math.tan(95.0 * length) == pytest.approx(2 * math.pi * 2.2e9 * 0.2e-9)


class TestPad:
    """A pad on a line, and the gap between two."""

    @MANY
    @given(WIDTHS, WIDTHS, PERMITTIVITIES)
    def test_excess_in_air_is_never_negative(self, line, pad, er):
        """Without dispersion of widths (air) any other impedance delays a matched line more."""
        assert pad_excess(line, pad, 1.0, 1.0) >= -1e-12
        assert pad_excess(line, line, 1.0, er) == 0.0

    def test_excess_against_a_line_of_two_impedances(self):
        """Phase of a short piece between matched lines, from its chain matrix: first order agrees to 2 %."""
        er, length = 3.66, 0.5
        (l_line, c_line), (l_pad, c_pad) = line_constants(1.0, er), line_constants(2.0, er)
        k = 0.05
        z_line, z_pad = math.sqrt(l_line / c_line), math.sqrt(l_pad / c_pad)
        theta = k * length * math.sqrt(l_pad * c_pad)
        through = 2.0 / (2.0 * np.cos(theta) + 1j * np.sin(theta) * (z_pad / z_line + z_line / z_pad))
        extra = -np.angle(through) / (k * math.sqrt(l_line * c_line)) - length
        assert pad_excess(1.0, 2.0, length, er) == pytest.approx(float(extra), rel=0.02)

    def test_gap_closes_and_opens(self):
        """The series capacitance falls as the gap opens, down to nothing; flagged outside 0.1 to 1 widths."""
        result = chip_gap(1e-3, np.array([0.05, 0.15, 0.3, 0.6, 0.9, 3.0]) * 1e-3, 1e-3, 3.66)
        assert np.all(np.diff(result.series) <= 0.0)
        assert np.all(result.series >= 0.0)
        assert result.in_range.tolist() == [False, True, True, True, True, False]

    def test_wide_gap_is_an_open_end(self):
        """At the widest gap of the formula the shunt capacitance is an open end's within a third."""
        u, er, h = 1.0, 9.6, 1e-3
        end = line_constants(u, er)[1] * EPS0 * open_end(u, er) * h
        assert chip_gap(u * h, u * h, h, er).shunt == pytest.approx(float(end), rel=0.35)
