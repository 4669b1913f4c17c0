"""What the response found, as tables of text for a terminal or a page: the match, the device, the doubts."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from typing import NamedTuple

from layoutgen.numbers import fixed
from layoutgen.response import CLOSE_ENOUGH, Correction, DeviceView, Doubt, Response, Tolerance
from layoutgen.units import quantity_text
from layoutgen.writers.response_files import TRACE_HEADS, trace_values

__all__ = ["TextTable", "ohms", "ohms_size", "response_tables", "tolerance_tables"]


class TextTable(NamedTuple):
    """A table: its title, headings and rows of text."""

    title: str
    heads: tuple[str, ...]
    rows: Sequence[tuple[str, ...]]


def response_tables(response: Response) -> list[TextTable]:
    """Return all that the response found, tables without rows left out."""
    tables = [TextTable("Response", TRACE_HEADS, trace_values(response))]
    if response.correction is not None:
        tables += _match_tables(response.correction)
    if response.device is not None:
        tables += _device_tables(response.device)
    notes = [(element or "-", text) for _, element, text in response.notes]
    tables.append(TextTable("Assumptions of the response", ("element", "note"), notes))
    tables.append(
        TextTable("Where the circuit model is doubtful", ("where", "at mm", "why"), _doubts(response))
    )
    return [table for table in tables if table.rows]


def _match_tables(found: Correction) -> Iterator[TextTable]:
    """Yield how near the drawing comes to the schematic, and what holds the rest."""
    rows = [
        ("nothing allowed for at the lines' ends", found.unallowed),
        ("lengths of the budgets alone", found.before),
        ("as drawn", found.after),
        ("the best lengths", found.reachable if found.after > CLOSE_ENOUGH else None),
        ("what losses add to that", found.losses),
    ]
    kept = [(what, fixed(value, 4)) for what, value in rows if value is not None]
    yield TextTable("Largest difference of S in the band, without losses", ("lengths", "difference"), kept)
    held = [(holder.element, holder.cause, fixed(holder.without, 4)) for holder in found.holders]
    yield TextTable("What holds the difference", ("element", "by", "without it"), held)
    angles = [(name, fixed(math.degrees(-angle), 2)) for name, angle in found.angles.items()]
    yield TextTable("Lengths adjusted to the response", ("line", "longer by deg"), angles)


def _device_tables(view: DeviceView) -> Iterator[TextTable]:
    """Yield what pins and feeds see, and how stable transistors are."""
    heads = tuple(quantity_text(f, "frequency") for f in view.frequencies)
    pins = [
        (pin.pin, "data" if pin.device is None else ohms(pin.device), kind, *map(ohms, seen))
        for pin in view.pins
        for kind, seen in (("wanted", pin.wanted), ("as drawn", pin.as_drawn))
    ]
    yield TextTable("Impedance into the board (ohm)", ("pin", "device", "", *heads), pins)
    feeds = [
        (feed.net, ", ".join(feed.ports), kind, *map(ohms_size, seen))
        for feed in view.feeds
        for kind, seen in (("wanted", feed.wanted), ("as drawn", feed.as_drawn))
    ]
    yield TextTable("Magnitude of the impedance into the feeds (ohm)", ("net", "ports", "", *heads), feeds)
    stable = [
        (s.part, quantity_text(s.at, "frequency"), fixed(s.k, 3), fixed(s.mu, 3), _unstable(s.unstable))
        for s in view.stability
    ]
    yield TextTable("Stability where it is least", ("part", "at", "K", "mu", "mu up to 1"), stable)


def _unstable(span: tuple[float, float] | None) -> str:
    """Return the frequencies between which a transistor may oscillate."""
    return "nowhere" if span is None else " to ".join(quantity_text(f, "frequency") for f in span)


def _doubts(response: Response) -> list[tuple[str, ...]]:
    return [(", ".join(doubt.items) or "-", _at(doubt), doubt.reason) for doubt in response.doubts]


def _at(doubt: Doubt) -> str:
    """Return a doubt's place in millimetres."""
    return "-" if doubt.at is None else ", ".join(fixed(value / 1e6, 2) for value in doubt.at)


def ohms(z: complex) -> str:
    """Return an impedance with two decimals; its size alone, in three digits, when it is large.

    >>> ohms(9 - 6j), ohms(2e4 + 1e5j)
    ('9.00 - 6.00j', '1.02e+05 (magnitude)')
    """
    if not abs(z) < 1e4:
        return f"{abs(z):.3g} (magnitude)"
    return f"{fixed(z.real, 2)} {'+' if z.imag >= 0 else '-'} {fixed(abs(z.imag), 2)}j"


def ohms_size(z: complex) -> str:
    """Return an impedance's magnitude.

    >>> ohms_size(300 + 400j), ohms_size(complex("inf"))
    ('500.0', 'open')
    """
    size = abs(z)
    if not math.isfinite(size):
        return "open"
    return fixed(size, 1) if size < 1e5 else f"{size / 1e6:.4g} M"


def tolerance_tables(found: Tolerance, most: int = 12) -> list[TextTable]:
    """Return a tolerance analysis: how limits are kept, corners, and the worst contributors.

    Args:
        found: The analysis.
        most: Most rows of contributors and corners.
    """
    limits = [
        (y.limit, fixed(100.0 * y.share, 1), fixed(y.nominal, 4), fixed(y.median, 4), fixed(y.worst, 4))
        for y in found.limits
    ]
    worst = [
        (c.name, _limit(c.name, c.limit), "+" if c.sign > 0 else "-", fixed(c.change, 4))
        for c in found.contributors[:most]
    ]
    corners = [
        (_signs(corner.signs), fixed(corner.change, 4), "yes" if corner.passes else "no")
        for corner in found.corners[:most]
    ]
    return [
        TextTable("Limits", ("limit", "kept %", "nominal", "median", "worst"), limits),
        TextTable("Worst contributors", ("quantity", "plus-minus", "worse at", "change of S"), worst),
        TextTable("Corners", ("corner", "change of S", "limits kept"), corners),
    ]


def _limit(name: str, value: float) -> str:
    """Return a plus-minus limit with its unit: millimetres, a plain number, or per cent of a part's value."""
    if name == "relative_permittivity":
        return f"{value:g}"
    return f"{value * 1e3:g} mm" if name in ("height", "width") else f"{100.0 * value:g} %"


def _signs(signs: Sequence[tuple[str, int]]) -> str:
    """Return a corner as text, such as ``height +, width -``."""
    return ", ".join(f"{name} {'+' if sign > 0 else '-'}" for name, sign in signs)
