"""Coupled pairs and radial stubs."""

from __future__ import annotations

import math

import pytest

from layoutgen.errors import WrongInputError
from layoutgen.formulas.coupled import coupled_pair, kirschning_jansen_1984_permittivity
from layoutgen.formulas.radial import radial_stub_line, radial_stub_reactance

C0 = 299_792_458.0
H, ER, T = 0.5e-3, 3.66, 0.035
PORTS = {"p": {"net": "a"}, "q": {"net": "b"}}


def pair(**more):
    return {
        "k": {
            "nets": ["a", "open", "open", "b"],
            "even_impedance": "60 ohm",
            "odd_impedance": "42 ohm",
            "angle": "90 deg",
            **more,
        }
    }


def by_size(width, gap):
    return {"nets": ["a", "open", "open", "b"], "width": width, "gap": gap, "angle": "90 deg"}


class TestPair:
    def test_has_both_impedances_it_was_asked_for(self, size):
        """Would catch a pair sized without thickness, or even and odd swapped."""
        k = size(lines={}, coupled=pair()).pairs["k"]
        got = coupled_pair(k.width / H, k.gap / H, ER, T)
        assert k.even_impedance == pytest.approx(60.0, rel=2e-5)
        assert k.odd_impedance == pytest.approx(42.0, rel=2e-5)
        assert float(got.z_even) == pytest.approx(k.even_impedance, rel=1e-12)
        for length in (k.width, k.gap):
            assert length * 1e9 == pytest.approx(round(length * 1e9), abs=1e-6)

    def test_angle_is_the_mean_of_the_modes(self, size):
        """Would catch a phase constant of one mode, or a static one."""
        k = size(lines={}, coupled=pair()).pairs["k"]
        static = coupled_pair(k.width / H, k.gap / H, ER, T)
        even, odd = kirschning_jansen_1984_permittivity(
            static.ee_even, static.ee_odd, k.width / H, k.gap / H, ER, 2e9 * H
        )
        mean = 0.5 * (math.sqrt(float(even)) + math.sqrt(float(odd)))
        assert k.beta == pytest.approx(2 * math.pi * 2e9 * mean / C0, rel=1e-12)
        assert (k.permittivity_even, k.permittivity_odd) == pytest.approx((float(even), float(odd)))

    def test_pour_beside_it_narrows_the_strips(self, size):
        """Would catch a pour that does not reach the pair."""
        beside = size(ground={"gap": "0.5 mm"}, lines={}, coupled=pair()).pairs["k"]
        assert beside.pour_gap == pytest.approx(0.5e-3)
        assert beside.width < size(lines={}, coupled=pair()).pairs["k"].width
        assert beside.even_impedance == pytest.approx(60.0, rel=2e-5)

    def test_measured_gaps_resize_it(self, size):
        """Would catch gaps of a drawing that are ignored for pairs."""
        tables = {"ground": {"gap": "0.5 mm"}, "lines": {}, "coupled": pair()}
        far = size(gaps={"k": (math.inf, math.inf)}, **tables).pairs["k"]
        assert far.width == size(lines={}, coupled=pair()).pairs["k"].width

    def test_given_width_and_gap_give_impedances(self, size):
        """Would catch given sizes that are changed."""
        k = size(lines={}, coupled={"k": by_size("0.8 mm", "0.2 mm")}).pairs["k"]
        got = coupled_pair(1.6, 0.4, ER, T)
        assert (k.width, k.gap) == (pytest.approx(0.8e-3), pytest.approx(0.2e-3))
        assert (k.even_impedance, k.odd_impedance) == pytest.approx((float(got.z_even), float(got.z_odd)))
        assert k.flags == ()

    def test_too_strong_a_coupling_is_refused_with_the_gap_it_needs(self, size):
        """Would catch a gap that the board house cannot etch."""
        with pytest.raises(WrongInputError) as error:
            size(lines={}, coupled=pair(even_impedance="90 ohm", odd_impedance="30 ohm"))
        (fault,) = error.value.faults
        assert fault.key == "coupled.k.even_impedance"
        assert "gap >= 0.1 mm" in fault.allowed

    def test_impedances_that_no_pair_has_are_refused(self, size):
        """Would catch a search that ends nowhere and is drawn all the same."""
        with pytest.raises(WrongInputError, match=r"coupled\.k\.even_impedance"):
            size(lines={}, coupled=pair(even_impedance="900 ohm", odd_impedance="20 ohm"))

    def test_sizes_outside_the_formula_are_refused(self, size):
        """Would catch a pair 60 mm wide that is given impedances."""
        with pytest.raises(WrongInputError, match=r"coupled\.k\.width: found 60 mm"):
            size(lines={}, coupled={"k": by_size("60 mm", "0.2 mm")})

    def test_wide_gap_is_flagged(self, size):
        """Would catch a pair outside the fitted range that passes without a word."""
        k = size(lines={}, coupled={"k": by_size("0.8 mm", "8 mm")}).pairs["k"]
        assert any("S/h 16" in flag for flag in k.flags)

    def test_currents_of_both_strips(self, size):
        """Would catch one current for both strips."""
        k = size(
            ports={
                "p": {"net": "a", "current": "0.3 A"},
                "v": {"kind": "dc", "net": "v", "voltage": "5 V"},
                "q": {"net": "b"},
            },
            lines={},
            coupled={"k": {**pair()["k"], "nets": ["v", "a", "b", "open"]}},
        ).pairs["k"]
        assert k.currents == (pytest.approx(0.3), 0.0)


class TestRadial:
    @staticmethod
    def stub(**more):
        return {
            "x": {"nets": ["a", "m"], "impedance": "50 ohm", "angle": "30 deg"},
            "y": {"nets": ["m", "b"], "impedance": "90 ohm", "angle": "30 deg"},
            "r": {"nets": ["m"], "shape": "radial", "sector": "60 deg", **more},
        }

    def test_looks_short_at_the_design_frequency(self, size):
        """Would catch a radius without the open end's extension, or at another frequency."""
        r = size(lines=self.stub()).radials["r"]
        ee, extension = radial_stub_line(2e9, H, ER, r.sector, r.inner_radius, r.outer_radius, T)
        reach = r.outer_radius + float(extension)
        x = float(radial_stub_reactance(2e9, H, float(ee), r.sector, r.inner_radius, reach))
        assert abs(x) < 1e-3
        below = float(radial_stub_reactance(1.9e9, H, float(ee), r.sector, r.inner_radius, reach))
        assert below < -0.1

    def test_inner_radius_clears_the_widest_line_at_its_apex(self, size):
        """Would catch half of the narrow line's width, or the sector's half angle in degrees."""
        sized = size(lines=self.stub())
        expected = 0.5 * sized.lines["x"].width / math.cos(math.radians(30))
        assert sized.radials["r"].inner_radius == pytest.approx(expected, abs=1.1e-9)

    def test_given_radii_are_kept(self, size):
        """Would catch given radii that are changed."""
        r = size(lines=self.stub(radius="8 mm", inner_radius="0.7 mm")).radials["r"]
        assert (r.inner_radius, r.outer_radius) == (pytest.approx(0.7e-3), pytest.approx(8e-3))

    def test_radius_within_the_inner_one_is_refused(self, size):
        """Would catch a sector turned inside out."""
        with pytest.raises(WrongInputError, match=r"lines\.r\.radius: found 0\.3 mm"):
            size(lines=self.stub(radius="0.3 mm"))

    def test_is_no_line(self, size):
        """Would catch a stub with an impedance of its own."""
        sized = size(lines=self.stub())
        assert set(sized.lines) == {"x", "y"} and set(sized.radials) == {"r"}
        assert sized.radials["r"].pour_gap == math.inf
        assert 0 < size(ground={}, lines=self.stub()).radials["r"].pour_gap < 6 * H
