"""Properties of the formulas over their whole range: inverses, order, limits, flags, no warning, no NaN."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from layoutgen.formulas.coupled import coupled_pair, kirschning_jansen_1984_permittivity
from layoutgen.formulas.microstrip import (
    hammerstad_jensen_1980,
    jansen_kirschning_1983_impedance,
    kirschning_jansen_1982_permittivity,
    wheeler_hammerstad_width,
)
from layoutgen.formulas.pour import microstrip_beside_pour, pour_gap_for_shift
from layoutgen.formulas.radial import radial_stub_line, radial_stub_radius, radial_stub_reactance
from layoutgen.formulas.synthesis import coupled_dimensions, width_for_impedance

MANY = settings(max_examples=60, deadline=None)


def logarithmic(low, high):
    """Draw a number evenly on a logarithmic scale."""
    return st.floats(math.log(low), math.log(high)).map(lambda x: min(max(math.exp(x), low), high))


WIDTHS = logarithmic(0.05, 20.0)
PERMITTIVITIES = st.floats(1.0, 20.0)
THICKNESSES = st.one_of(st.just(0.0), st.floats(1e-4, 0.2))
GAPS = st.one_of(st.just(math.inf), logarithmic(0.12, 20.0))
ANY = st.floats(allow_nan=True, allow_infinity=True)


class TestSynthesis:
    """The synthesis undoes the analysis."""

    @MANY
    @given(WIDTHS, PERMITTIVITIES, THICKNESSES)
    def test_bare_line(self, u, er, t):
        """To 1e-9 over er 1 to 20, u 0.05 to 20, any thickness."""
        found = width_for_impedance(hammerstad_jensen_1980(u, er, t).impedance, er, t)
        assert found.u == pytest.approx(u, rel=1e-9)

    @MANY
    @given(WIDTHS, PERMITTIVITIES, THICKNESSES, GAPS, GAPS)
    def test_line_beside_pour(self, u, er, t, left, right):
        """The same with pour at either side, whatever the gaps."""
        found = width_for_impedance(
            microstrip_beside_pour(u, er, t, left, right).impedance, er, t, left, right
        )
        assert found.u == pytest.approx(u, rel=1e-9)

    @MANY
    @given(logarithmic(0.1, 10.0), logarithmic(0.1, 8.0), st.floats(1.0, 18.0), st.floats(0.0, 0.1), GAPS)
    def test_coupled_pair(self, u, g, er, t, gap):
        """Width and gap come back from the two impedances."""
        pair = coupled_pair(u, g, er, t, gap, gap)
        found = coupled_dimensions(pair.z_even, pair.z_odd, er, t, gap, gap)
        assert found.u == pytest.approx(u, rel=1e-7)
        assert found.g == pytest.approx(g, rel=1e-6)

    def test_a_million_widths_of_every_kind(self):
        """An array is inverted element by element: no element may spoil or wait for another."""
        rng = np.random.default_rng(7)
        u = np.exp(rng.uniform(math.log(0.05), math.log(20.0), (4, 500)))
        er, t = rng.uniform(1.0, 20.0, (4, 500)), rng.uniform(0.0, 0.2, (4, 500))
        gap = np.where(rng.random((4, 500)) < 0.5, np.inf, rng.uniform(0.12, 8.0, (4, 500)))
        found = width_for_impedance(microstrip_beside_pour(u, er, t, gap).impedance, er, t, gap)
        assert found.u.shape == (4, 500)
        assert np.max(np.abs(found.u / u - 1.0)) < 1e-9

    @pytest.mark.parametrize("z0", [0.0, -50.0, 1e9, 1e-9, math.nan, math.inf])
    def test_impossible_impedances_are_flagged(self, z0):
        """No width has this impedance: finite value, flag down, no exception."""
        found = width_for_impedance(z0, 4.4)
        assert np.isfinite(found.u)
        assert not found.in_range

    @pytest.mark.parametrize(
        ("even", "odd"), [(40.0, 50.0), (50.0, 50.0), (500.0, 1.0), (math.nan, 40.0), (60, -3)]
    )
    def test_impossible_pairs_are_flagged(self, even, odd):
        """An even impedance below the odd one has no pair: finite values, flag down."""
        found = coupled_dimensions(even, odd, 4.4)
        assert np.isfinite(found.u)
        assert np.isfinite(found.g)
        assert not found.in_range

    @MANY
    @given(st.floats(20.0, 120.0), st.floats(2.2, 9.8))
    def test_the_closed_form_agrees(self, z0, er):
        """The model spread that reports show stays below 1 % of the impedance."""
        u = wheeler_hammerstad_width(z0, er)
        assert hammerstad_jensen_1980(u, er).impedance == pytest.approx(z0, rel=0.01)


class TestOrder:
    """What grows and what falls."""

    @MANY
    @given(WIDTHS, st.floats(1.0, 19.0), THICKNESSES, GAPS)
    def test_impedance_falls(self, u, er, t, gap):
        """With width, with permittivity, with thickness, and as the pour comes nearer."""
        line = microstrip_beside_pour(u, er, t, gap, gap).impedance
        assert microstrip_beside_pour(1.01 * u, er, t, gap, gap).impedance < line
        assert microstrip_beside_pour(u, er + 0.1, t, gap, gap).impedance < line
        assert hammerstad_jensen_1980(u, er, t + 0.01).impedance < hammerstad_jensen_1980(u, er, t).impedance
        if gap < 6.0:
            assert microstrip_beside_pour(u, er, t, 0.99 * gap, gap).impedance <= line * (1 + 1e-9)

    @MANY
    @given(WIDTHS, PERMITTIVITIES, THICKNESSES)
    def test_permittivity_lies_between_air_and_substrate(self, u, er, t):
        """It may not leave 1 to er; a thin strip has at least half of its field in the substrate."""
        ee = hammerstad_jensen_1980(u, er, t).effective_permittivity
        assert 1.0 - 1e-9 <= ee <= er + 1e-9
        assert hammerstad_jensen_1980(u, er).effective_permittivity >= 0.5 * (er + 1.0) - 1e-9

    @MANY
    @given(logarithmic(0.1, 20.0), st.floats(1.05, 20.0), st.floats(0.0, 30.0))
    def test_permittivity_rises_with_frequency(self, u, er, ghz_mm):
        """From the quasi-static value towards er, never beyond."""
        ee = hammerstad_jensen_1980(u, er).effective_permittivity
        low = kirschning_jansen_1982_permittivity(ee, u, er, ghz_mm * 1e6)
        high = kirschning_jansen_1982_permittivity(ee, u, er, (ghz_mm + 1.0) * 1e6)
        assert ee - 1e-12 <= low < high < er

    @MANY
    @given(logarithmic(0.2, 8.0), logarithmic(0.1, 9.0), st.floats(1.0, 18.0), st.floats(0.0, 0.1))
    def test_even_lies_above_odd(self, u, g, er, t):
        """In impedance at any gap; both meet as the gap grows."""
        pair = coupled_pair(u, g, er, t)
        assert pair.z_even > pair.z_odd

    @MANY
    @given(logarithmic(0.2, 8.0), st.floats(1.0, 13.0), st.floats(0.0, 0.1), logarithmic(2e-3, 0.1))
    def test_pour_gap_gives_the_shift(self, u, er, t, shift):
        """The gap found shifts by what was asked; a smaller shift needs a larger gap."""
        gap = pour_gap_for_shift(u, er, t, shift)
        bare, beside = hammerstad_jensen_1980(u, er, t), microstrip_beside_pour(u, er, t, gap, gap)
        assert 1.0 - beside.impedance / bare.impedance == pytest.approx(shift, rel=1e-6)
        assert pour_gap_for_shift(u, er, t, 0.9 * shift) > gap


class TestLimits:
    """Values that are known without any formula."""

    @MANY
    @given(WIDTHS, PERMITTIVITIES, THICKNESSES)
    def test_no_pour_is_the_bare_line_exactly(self, u, er, t):
        """Bit for bit, at infinity and from six heights on."""
        bare = hammerstad_jensen_1980(u, er, t)
        for gaps in ((math.inf, math.inf), (6.0, 1e9)):
            line = microstrip_beside_pour(u, er, t, *gaps)
            assert line.impedance == bare.impedance
            assert line.effective_permittivity == bare.effective_permittivity

    @MANY
    @given(WIDTHS, PERMITTIVITIES, THICKNESSES)
    def test_pour_fades_without_a_jump(self, u, er, t):
        """Just inside of six heights the line is all but the bare one."""
        bare, line = hammerstad_jensen_1980(u, er, t), microstrip_beside_pour(u, er, t, 5.999, 5.999)
        assert line.impedance == pytest.approx(bare.impedance, rel=1e-7)

    @MANY
    @given(WIDTHS, PERMITTIVITIES, logarithmic(0.12, 5.0))
    def test_one_sided_pour_lies_between(self, u, er, gap):
        """Pour on one side: between none and both, and the side does not matter."""
        none, one, both = (microstrip_beside_pour(u, er, 0.0, *gaps).impedance for gaps in _sides(gap))
        assert both <= one <= none
        assert microstrip_beside_pour(u, er, 0.0, math.inf, gap).impedance == pytest.approx(one, rel=1e-12)

    @MANY
    @given(logarithmic(0.1, 10.0), PERMITTIVITIES, THICKNESSES)
    def test_thickness_vanishes_continuously(self, u, er, t):
        """t -> 0 gives the thin line: catches a separate branch with another value."""
        thin, nearly = hammerstad_jensen_1980(u, er), hammerstad_jensen_1980(u, er, 1e-12)
        assert nearly.impedance == pytest.approx(thin.impedance, rel=1e-9)

    @MANY
    @given(logarithmic(0.2, 8.0), st.floats(1.0, 18.0))
    def test_far_apart_lines_are_single(self, u, er):
        """g -> infinity: both modes are the single line's."""
        single, pair = hammerstad_jensen_1980(u, er), coupled_pair(u, 60.0, er)
        for value in (pair.z_even, pair.z_odd):
            assert value == pytest.approx(single.impedance, rel=5e-3)
        for value in (pair.ee_even, pair.ee_odd):
            assert value == pytest.approx(single.effective_permittivity, rel=5e-3)

    @MANY
    @given(logarithmic(0.2, 8.0), st.floats(1.5, 18.0), st.floats(0.1, 25.0))
    def test_far_apart_lines_disperse_like_single_ones(self, u, er, ghz_mm):
        """The pair's dispersion, from memory, becomes the single line's exactly: catches most slips in it."""
        ee = hammerstad_jensen_1980(u, er).effective_permittivity
        single = kirschning_jansen_1982_permittivity(ee, u, er, ghz_mm * 1e6)
        even, odd = kirschning_jansen_1984_permittivity(ee, ee, u, 90.0, er, ghz_mm * 1e6)
        assert even == pytest.approx(single, rel=1e-9)
        assert odd == pytest.approx(single, rel=1e-9)

    @MANY
    @given(logarithmic(0.2, 8.0), logarithmic(0.1, 8.0), st.floats(1.5, 18.0))
    def test_no_dispersion_at_zero_frequency(self, u, g, er):
        """All dispersion formulas give the quasi-static value back."""
        line, pair = hammerstad_jensen_1980(u, er), coupled_pair(u, g, er)
        ee = line.effective_permittivity
        assert kirschning_jansen_1982_permittivity(ee, u, er, 0.0) == pytest.approx(ee, rel=1e-14)
        modes = kirschning_jansen_1984_permittivity(pair.ee_even, pair.ee_odd, u, g, er, 0.0)
        assert modes == (pytest.approx(pair.ee_even), pytest.approx(pair.ee_odd))
        z = jansen_kirschning_1983_impedance(line.impedance, ee, ee, u, er, 0.0)
        assert z == pytest.approx(line.impedance, rel=1e-14)

    @MANY
    @given(
        st.floats(0.5e9, 10e9),
        st.floats(0.1e-3, 1.6e-3),
        st.floats(2.2, 9.8),
        st.floats(0.5, 1.5),
        st.floats(0.1, 1.0),
    )
    def test_radial_stub_found_is_a_short(self, f, h, er, angle, share):
        """The radius drawn has no reactance, and a shorter one is capacitive."""
        inner = share * 0.1 * 3e8 / f / math.sqrt(er) / 4.0
        drawn = radial_stub_radius(f, h, er, angle, inner)
        assume(drawn > 1.2 * inner)
        ee, extension = radial_stub_line(f, h, er, angle, inner, drawn)
        scale = abs(radial_stub_reactance(f, h, ee, angle, inner, 0.5 * (inner + drawn + extension)))
        assert abs(radial_stub_reactance(f, h, ee, angle, inner, drawn + extension)) < 1e-6 * scale
        assert radial_stub_reactance(f, h, ee, angle, inner, 0.9 * drawn + 0.1 * inner) < 0.0


def _sides(gap):
    """Return the gaps of no pour, pour on the left, pour on both sides."""
    return (math.inf, math.inf), (gap, math.inf), (gap, gap)


class TestFlags:
    """Outside of the range the flag is down and the value finite where possible; warnings are errors."""

    @settings(max_examples=200, deadline=None)
    @given(ANY, ANY, ANY, ANY, ANY)
    def test_lines_take_any_number(self, u, er, t, left, right):
        """Nonsense and NaN must not pass as in range, nor warn, nor raise."""
        line = microstrip_beside_pour(u, er, t, left, right)
        sensible = 0.01 <= u <= 101.0 and 0.99 <= er <= 129.0 and 0.0 <= t <= 0.31
        if not sensible:
            assert not line.in_range
        if np.isfinite([u, er, t]).all() and not np.isnan([left, right]).any():
            assert np.isfinite(line.impedance)
            assert np.isfinite(line.effective_permittivity)

    @settings(max_examples=200, deadline=None)
    @given(ANY, ANY, ANY, ANY)
    def test_pairs_take_any_number(self, u, g, er, t):
        """The same for a coupled pair."""
        pair = coupled_pair(u, g, er, t)
        if not (0.09 < u < 10.1 and 0.09 < g < 10.1 and 0.99 < er < 18.1 and 0.0 <= t < 0.21):
            assert not pair.in_range
        if np.isfinite([u, g, er, t]).all():
            assert np.isfinite(list(pair[:4])).all()

    @MANY
    @given(logarithmic(0.2, 8.0), st.floats(1.0, 13.0), st.floats(0.0, 0.2), GAPS, GAPS)
    def test_inside_the_flag_is_up(self, u, er, t, left, right):
        """The documented range is the flagged one."""
        assert microstrip_beside_pour(u, er, t, left, right).in_range == (t <= u)

    def test_shapes_broadcast(self):
        """Every field of a result has the broadcast shape, the flag too."""
        line = microstrip_beside_pour(np.ones((3, 1)), np.full(4, 3.5), 0.05, 1.0)
        assert {np.shape(value) for value in line} == {(3, 4)}
        line = hammerstad_jensen_1980(1.0, np.full(4, 3.5), np.zeros((2, 1)))
        assert {np.shape(value) for value in line} == {(2, 4)}
        pair = coupled_pair(np.ones((3, 1)), 1.0, np.full(4, 3.5))
        assert {np.shape(value) for value in pair} == {(3, 4)}
