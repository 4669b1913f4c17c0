"""Units: text to SI and back, whole nanometres. Catches a wrong factor, a lost digit, a lenient unit."""

from __future__ import annotations

import math
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from layoutgen import units
from layoutgen.units import (
    DIMENSIONS,
    QuantityError,
    all_units,
    from_nm,
    nm_to_mm_text,
    parse_heading,
    parse_quantity,
    quantity_text,
    to_nm,
    units_of,
)


class TestFactors:
    @pytest.mark.parametrize(
        ("text", "dimension", "value"),
        [
            ("1 m", "length", 1.0),
            ("0.508 mm", "length", 0.508e-3),
            ("35 um", "length", 35e-6),
            ("35 \u00b5m", "length", 35e-6),
            ("35 \u03bcm", "length", 35e-6),
            ("10 nm", "length", 1e-8),
            ("1 mil", "length", 25.4e-6),
            ("1 in", "length", 25.4e-3),
            ("2.245 GHz", "frequency", 2.245e9),
            ("50 ohm", "resistance", 50.0),
            ("50 \u03a9", "resistance", 50.0),
            ("1 k\u2126", "resistance", 1e3),
            ("8.2 pF", "capacitance", 8.2e-12),
            ("0.5 nH", "inductance", 0.5e-9),
            ("-2.8 V", "voltage", -2.8),
            ("350 mA", "current", 0.35),
            ("0.1 W", "power", 0.1),
            ("58 MS/m", "conductivity", 58e6),
            ("180 deg", "angle", math.pi),
            ("1 rad", "angle", 1.0),
            ("20 K", "temperature", 20.0),
            ("12 K/W", "thermal_resistance", 12.0),
            ("1 ns", "time", 1e-9),
            ("5 %", "fraction", 0.05),
            ("-30 dB", "level", -30.0),
            ("0.5 mm^2", "area", 0.5e-6),
            ("120 A/mm^2", "current_density", 120e6),
            ("1.5e-3 m", "length", 1.5e-3),
            ("1E3 Hz", "frequency", 1e3),
            ("+.5mm", "length", 0.5e-3),
            ("5.mm", "length", 5e-3),
        ],
    )
    def test_value(self, text: str, dimension: units.RealDimension, value: float) -> None:
        """Each unit of the contract has its factor, correctly rounded."""
        assert parse_quantity(text, dimension) == value

    @pytest.mark.parametrize(
        ("text", "value"),
        [
            ("50 ohm", 50),
            ("12-8j ohm", 12 - 8j),
            ("12 - 8j ohm", 12 - 8j),
            ("12+8j ohm", 12 + 8j),
            ("12 -8j ohm", 12 - 8j),
            ("1.5e1-.5j kohm", 15000 - 500j),
            ("-8j ohm", -8j),
        ],
    )
    def test_impedance(self, text: str, value: complex) -> None:
        """Complex values in every spelling of the contract."""
        assert parse_quantity(text, "impedance") == value

    @given(st.integers(1, 10**9), st.integers(-30, 6), st.sampled_from(["mm", "um", "nm", "mil", "in", "m"]))
    def test_correctly_rounded(self, digits: int, exponent: int, unit: str) -> None:
        """The float is the nearest one to the decimal text: no product of two roundings."""
        factors = {"m": "1", "mm": "1e-3", "um": "1e-6", "nm": "1e-9", "mil": "25.4e-6", "in": "25.4e-3"}
        exact = Fraction(f"{digits}e{exponent}") * Fraction(factors[unit])
        assert parse_quantity(f"{digits}e{exponent} {unit}", "length") == float(exact)

    def test_mil_is_25400_nanometres(self) -> None:
        """The one inch factor there is."""
        assert units.MIL_NM == 25_400
        assert to_nm(parse_quantity("1 mil", "length")) == to_nm(units.MIL) == 25_400
        assert to_nm(units.INCH) == 25_400_000


class TestRefused:
    @pytest.mark.parametrize(
        ("text", "dimension", "phrase"),
        [
            ("5 V", "length", "a voltage"),
            ("5 ohm", "length", "an ohm value"),
            ("5", "length", "without a unit"),
            ("5 GHZ", "frequency", "case-sensitive: GHz"),
            ("5 khz", "frequency", "case-sensitive: kHz"),
            ("5 furlong", "length", "unknown unit"),
            ("5 km", "length", "unknown unit"),
            ("5 cm", "length", "unknown unit"),
            ("nan mm", "length", "not finite"),
            ("-inf mm", "length", "not finite"),
            ("1e999 mm", "length", "not finite"),
            ("1e99999999999999999999 mm", "length", "not finite"),
            ("5  mm", "length", "not a number and a unit"),
            (" 5 mm", "length", "not a number and a unit"),
            ("5 mm ", "length", "unknown unit"),
            ("5 mm 3", "length", "unknown unit"),
            ("\u22125 mm", "length", "not a number and a unit"),
            ("5,0 mm", "length", "unknown unit"),
            ("1_000 mm", "length", "unknown unit"),
            ("0x10 mm", "length", "unknown unit"),
            ("\u0665 mm", "length", "not a number and a unit"),
            ("5\nmm", "length", "not a number and a unit"),
            ("", "length", "an empty text"),
            ("mm", "length", "not a number and a unit"),
            ("1+2j ohm", "resistance", "a complex value"),
            ("9-j6 ohm", "impedance", "not a number and a unit"),
            ("1+2j mm", "impedance", "a length"),
            ("1+2i ohm", "impedance", "not a number and a unit"),
            ("1+1e999j ohm", "impedance", "not finite"),
            ("9" * 201, "length", "201 characters"),
        ],
    )
    def test_phrase(self, text: str, dimension: units.Dimension, phrase: str) -> None:
        """Nothing but number, one optional blank, unit of the dimension; the phrase tells which it was."""
        with pytest.raises(QuantityError) as caught:
            parse_quantity(text, dimension)
        assert phrase in caught.value.found

    @given(st.text(max_size=40), st.sampled_from(sorted(DIMENSIONS)))
    def test_any_text_reads_or_is_refused(self, text: str, dimension: units.Dimension) -> None:
        """No text brings any other exception, or a value that is not finite."""
        try:
            value = parse_quantity(text, dimension)
        except QuantityError:
            return
        assert math.isfinite(value.real) and math.isfinite(value.imag)

    @given(
        st.from_regex(
            r"[+-]?[0-9]{0,5}\.?[0-9]{0,5}([eE][+-]?[0-9]{1,25})? ?(mm|THz|deg|ohm|%)?", fullmatch=True
        ),
        st.sampled_from(sorted(DIMENSIONS)),
    )
    def test_near_misses(self, text: str, dimension: units.Dimension) -> None:
        """Huge exponents and half numbers neither hang nor raise anything else."""
        try:
            value = parse_quantity(text, dimension)
        except QuantityError:
            return
        assert math.isfinite(value.real)

    def test_table_is_closed(self) -> None:
        """The lengths that are read are those of the contract and no more."""
        assert sorted(all_units("length")) == sorted(
            ["m", "mm", "um", "\u00b5m", "\u03bcm", "nm", "mil", "in"]
        )

    def test_no_unit_has_two_meanings(self) -> None:
        """Two dimensions never share a unit, impedance and resistance apart."""
        names = [
            unit for dimension in DIMENSIONS if dimension != "impedance" for unit in all_units(dimension)
        ]
        assert len(names) == len(set(names))

    def test_units_shown_are_units_read(self) -> None:
        """What a message recommends is accepted."""
        for dimension in DIMENSIONS:
            for unit in units_of(dimension):
                assert parse_quantity(f"1 {unit}", dimension) != 0
            assert parse_quantity(DIMENSIONS[dimension].example, dimension) != 0


class TestHeadings:
    @pytest.mark.parametrize(
        ("text", "degrees"),
        [
            ("east", 0.0),
            ("north", 90.0),
            ("west", 180.0),
            ("south", 270.0),
            ("-90 deg", 270.0),
            ("450 deg", 90.0),
            ("360 deg", 0.0),
            ("-1e-20 deg", 0.0),
            ("30 deg", 30.0),
        ],
    )
    def test_exact_degrees(self, text: str, degrees: float) -> None:
        """Quarter turns are exact, and every heading is within one turn."""
        assert parse_heading(text) == degrees

    def test_radians(self) -> None:
        """Radians are read too."""
        assert parse_heading(f"{math.pi / 2} rad") == pytest.approx(90.0, abs=1e-12)

    @pytest.mark.parametrize("text", ["up", "North", "90", "90 mm", ""])
    def test_refused(self, text: str) -> None:
        """Words in other case, bare numbers and other units are no headings."""
        with pytest.raises(QuantityError):
            parse_heading(text)

    @given(st.floats(-1e6, 1e6))
    def test_within_one_turn(self, degrees: float) -> None:
        """The heading is the angle but for whole turns."""
        heading = parse_heading(f"{degrees!r} deg")
        assert 0.0 <= heading < 360.0
        turns = (degrees - heading) / 360.0
        assert abs(turns - round(turns)) < 1e-9


class TestNanometres:
    @given(st.floats(-10.0, 10.0))
    def test_half_to_even_of_the_exact_value(self, metres: float) -> None:
        """Rounding takes the float's exact value: no product that rounds first."""
        assert to_nm(metres) == round(Fraction(metres) * 10**9)

    @pytest.mark.parametrize(("metres", "nanometres"), [(2.5e-9, 3), (-1500e-9, -1500), (0.0, 0)])
    def test_values(self, metres: float, nanometres: int) -> None:
        """The float 2.5e-9 lies just above 2.5 nm."""
        assert to_nm(metres) == nanometres

    def test_exact_halves_go_to_even(self) -> None:
        """Where a float lies exactly half way between two, the even neighbour is taken."""
        for numerator in (1, 3, 5, -1, -3):
            metres = numerator / 2**10
            exact = Fraction(metres) * 10**9
            assert exact.denominator == 2
            assert to_nm(metres) % 2 == 0

    @pytest.mark.parametrize("metres", [math.nan, math.inf, -math.inf])
    def test_no_length(self, metres: float) -> None:
        """NaN and infinity never become a number of nanometres."""
        with pytest.raises(ValueError, match="no length"):
            to_nm(metres)

    @given(st.integers(-(2**53), 2**53))
    def test_there_and_back(self, nanometres: int) -> None:
        """Whole nanometres survive the way through metres, up to the floats' 53 bits."""
        assert abs(to_nm(from_nm(nanometres)) - nanometres) <= abs(nanometres) * 2.0**-52

    @given(st.integers(-(2**31), 2**31))
    def test_every_gds_coordinate_survives(self, nanometres: int) -> None:
        """Within a board of 2 m the way through metres is exact."""
        assert to_nm(from_nm(nanometres)) == nanometres

    @given(st.integers())
    def test_millimetre_text_is_exact(self, nanometres: int) -> None:
        """Six decimals hold the whole number, sign included."""
        text = nm_to_mm_text(nanometres)
        assert Fraction(text) * 10**6 == nanometres
        assert len(text.partition(".")[2]) == 6
        assert text != "-0.000000"


class TestText:
    @pytest.mark.parametrize(
        ("value", "dimension", "text"),
        [
            (2.245e9, "frequency", "2.245 GHz"),
            (0.508e-3, "length", "0.508 mm"),
            (8.2e-12, "capacitance", "8.2 pF"),
            (0.35, "current", "350 mA"),
            (-2.8, "voltage", "-2.8 V"),
            (math.pi / 2, "angle", "90 deg"),
            (0.05, "fraction", "5 %"),
            (58e6, "conductivity", "58 MS/m"),
            (999.9999999e6, "frequency", "1 GHz"),
            (0.0, "length", "0 mm"),
            (0.0, "current", "0 A"),
            (12 - 8j, "impedance", "12-8j ohm"),
            (50 + 0j, "impedance", "50 ohm"),
            (120e6, "current_density", "120 A/mm^2"),
            (1200.0, "resistance", "1.2 kohm"),
        ],
    )
    def test_for_people(self, value: complex, dimension: units.Dimension, text: str) -> None:
        """Short numbers with a fitting prefix."""
        assert quantity_text(value, dimension) == text

    @given(
        st.sampled_from([name for name in DIMENSIONS if name != "impedance"]),
        st.floats(1e-18, 1e15),
        st.sampled_from([1.0, -1.0]),
    )
    def test_round_trip(self, dimension: units.RealDimension, size: float, sign: float) -> None:
        """What is shown reads back as the value, within the digits shown."""
        value = sign * size
        assert parse_quantity(quantity_text(value, dimension, 12), dimension) == pytest.approx(
            value, rel=1e-11
        )

    @given(st.floats(1e-3, 1e6), st.floats(-1e6, 1e6))
    def test_impedance_round_trip(self, real: float, imaginary: float) -> None:
        """Complex values read back too."""
        value = complex(real, imaginary)
        shown = parse_quantity(quantity_text(value, "impedance", 12), "impedance")
        assert shown.real == pytest.approx(real, rel=1e-11)
        assert shown.imag == pytest.approx(imaginary, rel=1e-11)
