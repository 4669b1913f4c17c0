"""What is said of a part in lists and drawings: value, package, rating, how it is mounted."""

from __future__ import annotations

from layoutgen.numbers import fixed
from layoutgen.placement import PlacedPart
from layoutgen.reading import Part
from layoutgen.units import RealDimension, quantity_text
from layoutgen.writers.plain import natural
from layoutgen.writers.records import Result

__all__ = [
    "flange_parts",
    "mounting_text",
    "package_text",
    "rating_text",
    "references",
    "rotation_text",
    "series_text",
    "value_text",
]

_VALUES: dict[str, RealDimension] = {
    "resistor": "resistance",
    "capacitor": "capacitance",
    "inductor": "inductance",
}


def references(result: Result) -> list[str]:
    """Return the names of all parts in the order of reading: C2 before C10."""
    return sorted(result.placement.parts, key=natural)


def value_text(part: Part) -> str:
    """Return a part's value with its unit; empty where there is none."""
    dimension = _VALUES.get(part.kind)
    return "" if part.value is None or dimension is None else quantity_text(part.value, dimension)


def package_text(part: Part) -> str:
    """Return the case code of a chip, or the name of the footprint in the circuit file."""
    return part.case or part.footprint or ""


def rating_text(part: Part) -> str:
    """Return what the part has to survive, as the circuit file says; empty where it says nothing."""
    rating = part.rating
    if rating is None:
        return ""
    pairs: list[tuple[float | None, RealDimension]] = [
        (rating.voltage, "voltage"),
        (rating.current, "current"),
        (rating.power, "power"),
    ]
    return ", ".join(quantity_text(value, dimension) for value, dimension in pairs if value is not None)


def series_text(part: Part) -> str:
    """Return the series resistance and inductance that the response was computed with."""
    pairs: list[tuple[float, RealDimension]] = [
        (part.series_resistance, "resistance"),
        (part.series_inductance, "inductance"),
    ]
    return ", ".join(quantity_text(value, dimension) for value, dimension in pairs if value)


def mounting_text(part: PlacedPart) -> str:
    """Return how a part is mounted: on the surface, or through a cut-out on the carrier."""
    return "surface" if part.cutout is None else "flange on the carrier"


def flange_parts(result: Result) -> list[PlacedPart]:
    """Return the parts that stand on a carrier through a cut-out."""
    return [part for part in result.placement.parts.values() if part.cutout is not None]


def rotation_text(part: PlacedPart) -> str:
    """Return a part's rotation [deg], counter-clockwise seen from the top, from 0 up to 360."""
    text = fixed(part.heading % 360.0, 3)
    return "0.000" if text == "360.000" else text
