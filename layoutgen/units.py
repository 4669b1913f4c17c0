"""Text with units, SI floats and whole nanometres: the only conversion factors of the package.

Inside the package every value is an SI float up to the sizing stage and a whole number of nanometres from
placement on; text with units exists only where a person writes or reads it. Temperatures are rises [K],
levels stay in decibels [dB], a percentage becomes a fraction [-], angles become radians [rad] (headings alone
are kept in degrees, so that quarter turns are exact).
"""

from __future__ import annotations

import math
import re
from decimal import ROUND_HALF_EVEN, Context, Decimal
from types import MappingProxyType
from typing import Literal, NamedTuple, overload

__all__ = [
    "DIMENSIONS",
    "INCH",
    "MIL",
    "MIL_NM",
    "NM",
    "Dimension",
    "DimensionInfo",
    "QuantityError",
    "RealDimension",
    "all_units",
    "from_nm",
    "nm_to_mm_text",
    "parse_heading",
    "parse_quantity",
    "quantity_text",
    "to_nm",
    "units_of",
]

RealDimension = Literal[
    "length",
    "area",
    "frequency",
    "time",
    "resistance",
    "capacitance",
    "inductance",
    "voltage",
    "current",
    "power",
    "conductivity",
    "current_density",
    "angle",
    "temperature",
    "thermal_resistance",
    "fraction",
    "level",
]
Dimension = Literal[RealDimension, "impedance"]

NM = 1e-9
"""One nanometre [m]."""
MIL_NM = 25_400
"""One mil [nm], exactly."""
MIL = 25.4e-6
"""One mil [m]."""
INCH = 25.4e-3
"""One inch [m]."""

_NM_PER_METRE = 10**9
_NM_PER_MM = 10**6
_MAX_TEXT = 200
_MAX_EXPONENT = 10_000


class QuantityError(ValueError):
    """A text that is not a quantity of the dimension asked for.

    Args:
        found: What the text is, as a phrase that follows "found".
    """

    def __init__(self, found: str) -> None:
        """Keep the phrase."""
        self.found = found
        super().__init__(found)


class DimensionInfo(NamedTuple):
    """How a dimension is named to people: ``phrase`` "a length", ``example`` "0.5 mm", ``si`` its SI unit."""

    phrase: str
    example: str
    si: str


DIMENSIONS: MappingProxyType[Dimension, DimensionInfo] = MappingProxyType(
    {
        "length": DimensionInfo("a length", "0.5 mm", "m"),
        "area": DimensionInfo("an area", "0.5 mm^2", "m^2"),
        "frequency": DimensionInfo("a frequency", "2.2 GHz", "Hz"),
        "time": DimensionInfo("a time", "1 ns", "s"),
        "resistance": DimensionInfo("a resistance", "50 ohm", "ohm"),
        "impedance": DimensionInfo("an impedance", "12-8j ohm", "ohm"),
        "capacitance": DimensionInfo("a capacitance", "8.2 pF", "F"),
        "inductance": DimensionInfo("an inductance", "0.5 nH", "H"),
        "voltage": DimensionInfo("a voltage", "-2.8 V", "V"),
        "current": DimensionInfo("a current", "350 mA", "A"),
        "power": DimensionInfo("a power", "0.1 W", "W"),
        "conductivity": DimensionInfo("a conductivity", "58 MS/m", "S/m"),
        "current_density": DimensionInfo("a current density", "120 A/mm^2", "A/m^2"),
        "angle": DimensionInfo("an angle", "90 deg", "rad"),
        "temperature": DimensionInfo("a temperature rise", "20 K", "K"),
        "thermal_resistance": DimensionInfo("a thermal resistance", "12 K/W", "K/W"),
        "fraction": DimensionInfo("a percentage", "5 %", "-"),
        "level": DimensionInfo("a level", "-30 dB", "dB"),
    }
)

_PREFIXES = {
    "f": -15,
    "p": -12,
    "n": -9,
    "u": -6,
    "\u00b5": -6,
    "\u03bc": -6,
    "m": -3,
    "k": 3,
    "M": 6,
    "G": 9,
    "T": 12,
}
_PREFIXED: tuple[tuple[str, RealDimension], ...] = (
    ("Hz", "frequency"),
    ("s", "time"),
    ("ohm", "resistance"),
    ("\u03a9", "resistance"),  # Greek capital omega
    ("\u2126", "resistance"),  # the ohm sign: the same glyph at another code point
    ("F", "capacitance"),
    ("H", "inductance"),
    ("V", "voltage"),
    ("A", "current"),
    ("W", "power"),
    ("S/m", "conductivity"),
)
_FIXED: tuple[tuple[str, RealDimension, str], ...] = (
    ("m", "length", "1"),
    ("mm", "length", "1e-3"),
    ("um", "length", "1e-6"),
    ("\u00b5m", "length", "1e-6"),  # micro sign
    ("\u03bcm", "length", "1e-6"),  # Greek small mu: the same glyph at another code point
    ("nm", "length", "1e-9"),
    ("mil", "length", "25.4e-6"),
    ("in", "length", "25.4e-3"),
    ("mm^2", "area", "1e-6"),
    ("A/mm^2", "current_density", "1e6"),
    ("deg", "angle", "1"),  # turned into radians by math.radians, pi having no decimal form
    ("rad", "angle", "1"),
    ("K", "temperature", "1"),
    ("K/W", "thermal_resistance", "1"),
    ("%", "fraction", "1e-2"),
    ("dB", "level", "1"),
)


def _unit_table() -> dict[str, tuple[RealDimension, Decimal]]:
    """Return unit -> (dimension, factor to SI); closed and case-sensitive."""
    table = {unit: (dimension, Decimal(factor)) for unit, dimension, factor in _FIXED}
    for unit, dimension in _PREFIXED:
        table[unit] = (dimension, Decimal(1))
        for prefix, exponent in _PREFIXES.items():
            table[prefix + unit] = (dimension, Decimal(1).scaleb(exponent))
    return table


_UNITS = _unit_table()
_EXACT = Context(prec=2 * _MAX_TEXT)
_NUMBER = r"(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?"
_REAL = re.compile(rf"([+-]?{_NUMBER}) ?([^\s0-9.+-].*)?")
_COMPLEX = re.compile(rf"([+-]?{_NUMBER}) ?([+-]) ?({_NUMBER})j ?([^\s0-9.+-].*)?")
_IMAGINARY = re.compile(rf"([+-]?{_NUMBER})j ?([^\s0-9.+-].*)?")
_NOT_FINITE = re.compile(r"[+-]?(nan|inf)", re.IGNORECASE)


def units_of(dimension: Dimension) -> tuple[str, ...]:
    """Return the units in common use of a dimension, one spelling each."""
    if dimension == "length":
        return ("mm", "um", "nm", "m", "mil", "in")
    if dimension == "angle":
        return ("deg", "rad")
    return _SHOWN_IN["resistance" if dimension == "impedance" else dimension]


def all_units(dimension: Dimension) -> tuple[str, ...]:
    """Return every unit that is read as the dimension, in the table's order."""
    wanted = "resistance" if dimension == "impedance" else dimension
    return tuple(unit for unit, (kind, _) in _UNITS.items() if kind == wanted)


@overload
def parse_quantity(text: str, dimension: RealDimension) -> float: ...
@overload
def parse_quantity(text: str, dimension: Literal["impedance"]) -> complex: ...
@overload
def parse_quantity(text: str, dimension: Dimension) -> float | complex: ...
def parse_quantity(text: str, dimension: Dimension) -> float | complex:
    """Return the SI value of "number, optional blank, unit", correctly rounded.

    Args:
        text: For example ``"0.508 mm"``, ``"25mil"``, ``"12-8j ohm"``.
        dimension: What the text must be; ``"impedance"`` alone gives a complex value.

    Raises:
        QuantityError: not a number and a unit, unknown unit, unit of another dimension, or not finite.

    >>> parse_quantity("24 mil", "length")
    0.0006096
    """
    if len(text) > _MAX_TEXT:
        raise QuantityError(f"a text of {len(text)} characters")
    if dimension == "impedance":
        return _parse_impedance(text)
    number, unit = _split(text)
    return _si_value(number, unit, dimension)


def _split(text: str) -> tuple[str, str | None]:
    """Return number text and unit text (None when there is no unit)."""
    match = _REAL.fullmatch(text)
    if match is None:
        raise QuantityError(_why_not_a_quantity(text))
    return match[1], match[2]


def _why_not_a_quantity(text: str) -> str:
    """Return a phrase for a text that does not start like a quantity."""
    if _NOT_FINITE.match(text):
        return "a value that is not finite"
    if _COMPLEX.fullmatch(text) or _IMAGINARY.fullmatch(text):
        return "a complex value"
    if not text.strip():
        return "an empty text"
    return "a text that is not a number and a unit"


def _si_value(number: str, unit: str | None, dimension: RealDimension) -> float:
    """Return number times unit in SI; raise :class:`QuantityError` when it does not fit the dimension."""
    if unit is None:
        raise QuantityError("a number without a unit")
    known = _UNITS.get(unit)
    if known is None:
        raise QuantityError(f"the unknown unit{_hint(unit, dimension)}")
    kind, factor = known
    if kind != dimension:
        raise QuantityError("an ohm value" if kind == "resistance" else DIMENSIONS[kind].phrase)
    value = _scaled(number, factor)
    if not math.isfinite(value):
        raise QuantityError("a value that is not finite")
    return math.radians(value) if unit == "deg" else value


def _scaled(number: str, factor: Decimal) -> float:
    """Return number times factor as the nearest float: infinite or zero where floats end."""
    mantissa, _, exponent = number.lower().partition("e")
    if abs(int(exponent or "0")) <= _MAX_EXPONENT:
        return float(_EXACT.multiply(Decimal(number), factor))
    return float(mantissa) * (0.0 if exponent.startswith("-") or float(mantissa) == 0.0 else math.inf)


def _hint(unit: str, dimension: RealDimension) -> str:
    """Return " (GHz is written so)" for a unit that only differs in case or trailing blanks, else nothing."""
    folded = unit.strip().casefold()
    same = [known for known in all_units(dimension) if known.casefold() == folded]
    return f" (units are case-sensitive: {' or '.join(same)})" if same else ""


def _parse_impedance(text: str) -> complex:
    """Return a complex impedance [ohm]; a real text is an impedance without reactance."""
    if match := _COMPLEX.fullmatch(text):
        real, sign, imaginary, unit = match.groups()
        resistance = _si_value(real, unit, "resistance")
        return complex(resistance, _si_value(sign + imaginary, unit, "resistance"))
    if match := _IMAGINARY.fullmatch(text):
        return complex(0.0, _si_value(match[1], match[2], "resistance"))
    number, unit = _split(text)
    return complex(_si_value(number, unit, "resistance"), 0.0)


_HEADINGS = {"east": 0.0, "north": 90.0, "west": 180.0, "south": 270.0}


def parse_heading(text: str) -> float:
    """Return a heading [deg], counter-clockwise from east, 0 <= heading < 360; quarter turns are exact.

    Args:
        text: ``"east"``, ``"north"``, ``"west"``, ``"south"`` or an angle with its unit.

    Raises:
        QuantityError: neither a compass word nor an angle.

    >>> parse_heading("north"), parse_heading("-90 deg")
    (90.0, 270.0)
    """
    if text in _HEADINGS:
        return _HEADINGS[text]
    radians = parse_quantity(text, "angle")
    number, unit = _split(text)
    degrees = float(number) if unit == "deg" else math.degrees(radians)
    turned = math.fmod(degrees, 360.0)
    turned += 360.0 if turned < 0.0 else 0.0
    return 0.0 if turned == 360.0 else turned


def to_nm(metres: float) -> int:
    """Return a length [m] in whole nanometres: the exact value of the float, rounded half to even.

    Raises:
        ValueError: NaN or infinite.

    >>> to_nm(0.508e-3), to_nm(-1.4e-9)
    (508000, -1)
    """
    if not math.isfinite(metres):
        raise ValueError(f"{metres} m is no length")
    numerator, denominator = metres.as_integer_ratio()
    whole, rest = divmod(numerator * _NM_PER_METRE, denominator)
    twice = 2 * rest
    up = twice > denominator or (twice == denominator and whole % 2 == 1)
    return whole + up


def from_nm(nanometres: int) -> float:
    """Return whole nanometres as a length [m], correctly rounded."""
    return nanometres / _NM_PER_METRE


def nm_to_mm_text(nanometres: int) -> str:
    """Return whole nanometres as millimetres with six decimals, from the integer alone.

    >>> nm_to_mm_text(-1500)
    '-0.001500'
    """
    whole, rest = divmod(abs(nanometres), _NM_PER_MM)
    return f"{'-' if nanometres < 0 else ''}{whole}.{rest:06d}"


_SHOWN_IN: dict[str, tuple[str, ...]] = {
    "length": ("mm", "um", "nm"),
    "area": ("mm^2",),
    "frequency": ("THz", "GHz", "MHz", "kHz", "Hz"),
    "time": ("s", "ms", "us", "ns", "ps", "fs"),
    "resistance": ("Mohm", "kohm", "ohm", "mohm", "uohm"),
    "capacitance": ("F", "mF", "uF", "nF", "pF", "fF"),
    "inductance": ("H", "mH", "uH", "nH", "pH", "fH"),
    "voltage": ("kV", "V", "mV", "uV"),
    "current": ("kA", "A", "mA", "uA", "nA"),
    "power": ("kW", "W", "mW", "uW", "nW"),
    "conductivity": ("MS/m", "kS/m", "S/m"),
    "current_density": ("A/mm^2",),
    "angle": ("deg",),
    "temperature": ("K",),
    "thermal_resistance": ("K/W",),
    "fraction": ("%",),
    "level": ("dB",),
}


def quantity_text(value: float | complex, dimension: Dimension, digits: int = 6) -> str:
    """Return an SI value as text for people, with a prefix that keeps the number short.

    Args:
        value: In SI units; complex for ``"impedance"`` only.
        dimension: What the value is.
        digits: Significant digits, trailing zeros dropped.

    >>> quantity_text(8.2e-12, "capacitance"), quantity_text(12 - 8j, "impedance")
    ('8.2 pF', '12-8j ohm')
    """
    if dimension == "impedance":
        return _impedance_text(complex(value), digits)
    real = float(value.real)
    number = math.degrees(real) if dimension == "angle" else real
    unit = _unit_for(number, _SHOWN_IN[dimension], digits)
    return f"{_significant(number, unit, digits)} {unit}"


def _impedance_text(value: complex, digits: int) -> str:
    """Return ``12-8j ohm``; a real value without its zero reactance."""
    real = _significant(value.real, "ohm", digits)
    if value.imag == 0.0:
        return f"{real} ohm"
    imaginary = _significant(value.imag, "ohm", digits)
    return f"{real}{'' if imaginary.startswith('-') else '+'}{imaginary}j ohm"


def _unit_for(value: float, units: tuple[str, ...], digits: int) -> str:
    """Return the first unit (largest first) in which the rounded value is at least 1, else the last."""
    if value == 0.0:
        return next((unit for unit in units if _UNITS[unit][1] == 1), units[0])
    for unit in units:
        if abs(float(_significant(value, unit, digits))) >= (0.01 if unit == "mm" else 1.0):
            return unit
    return units[-1]


def _significant(value: float, unit: str, digits: int) -> str:
    """Return value / unit with so many significant digits, halves to even, plain where readable."""
    scaled = _EXACT.divide(Decimal(value), _UNITS[unit][1])
    rounded = Context(prec=digits, rounding=ROUND_HALF_EVEN).plus(scaled)
    if rounded == 0:
        return "0"
    plain = -digits <= rounded.adjusted() < 12
    return format(rounded.normalize(), "f" if plain else "e")
