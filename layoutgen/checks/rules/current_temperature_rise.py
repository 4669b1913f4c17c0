"""No copper is warmed too much by the direct current it carries.

What: the temperature rise of lines, strips and via barrels by the IPC-2221 equation is at most
``current.temperature_rise``.
Why: hot copper ages the laminate and moves the bias of what is soldered to it.
How measured: I = 0.048 dT^0.44 A^0.725 (A in square mils) for lines at the narrowest place of their drawn
copper, between facing edges (beside a hole all copper around it); barrels as pi t (d - t) with the drill d
taken as drilled and the constant 0.024 of conductors inside the board. Currents come from the DC solution,
vias share equally. A current beyond the chart's 35 A is a finding whatever the width. A width 10 nm short
passes. Besides, every line of one potential across the solved sheet of a net (see ``current.max_density``) is
taken as a conductor of its length that carries the current through it; half a per cent short passes there.
The current of the ground's own copper is not looked at.
Source: IPC-2221, as independent public code and pages quote it; the standard's text was not read.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.board import Board
from layoutgen.checks.carriers import Carrier, carriers, necks
from layoutgen.checks.crowding import CUT_ERROR, crowded
from layoutgen.checks.grounding import via_currents
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm
from layoutgen.checks.planar import TOLERANCE_NM
from layoutgen.checks.records import NotChecked
from layoutgen.formulas.limits import IPC2221_MAX_CURRENT, ipc2221_barrel_rise, ipc2221_rise, ipc2221_width
from layoutgen.geometry import Point

__all__ = ["RULE"]

NAME = "current.temperature_rise"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each element that gets too warm."""
    limit = board.limits.number(NAME)
    if limit is None:
        return
    if board.thickness is None:
        yield NotChecked(NAME, "the thickness of the copper is not known")
        return
    for carrier in carriers(board):
        if carrier.current > IPC2221_MAX_CURRENT:
            text = f"{carrier.item} carries {carrier.current:.2f} A, the chart ends at 35 A"
            yield _hit(text, carrier.current, IPC2221_MAX_CURRENT, "A", carrier.at, (carrier.item,))
        else:
            yield from _lines(board, carrier, limit, board.thickness * 1e-9)
    yield from _sheets(board, limit, board.thickness * 1e-9)
    yield from _barrels(board, limit)


def _sheets(board: Board, limit: float, thickness: float) -> Iterator[Outcome]:
    """Yield the hits of cuts across the solved sheets, and what could not be solved."""

    def needed(current: float) -> float:
        return float(ipc2221_width(min(current, IPC2221_MAX_CURRENT), thickness, limit)) * 1e9

    yield from board.sheets.skipped
    for place in crowded(board, lambda sheet: sheet.largest / needed(sheet.largest)):
        cut = place.cut
        if cut.current <= IPC2221_MAX_CURRENT and cut.length < needed(cut.current) * (1.0 - CUT_ERROR):
            rise = float(ipc2221_rise(cut.current, cut.length * 1e-9, thickness))
            carried = f"a cut of {mm(cut.length)} that {cut.current:.3f} A pass"
            text = f"{place.item} warms by {rise:.1f} K at {carried}"
            yield _hit(f"{text}, at most {limit:g} K", rise, limit, "K", place.at, (place.item,))


def _lines(board: Board, carrier: Carrier, limit: float, thickness: float) -> Iterator[Hit]:
    """Yield the hits of one element: too narrow as a whole, or at a neck."""
    needed = float(ipc2221_width(carrier.current, thickness, limit)) * 1e9
    found = [(neck.width, neck.at) for neck in necks(board, carrier, needed)]
    if carrier.width < needed - TOLERANCE_NM:
        found.append((carrier.width, carrier.at))
    for width, at in found:
        rise = float(ipc2221_rise(carrier.current, width * 1e-9, thickness))
        text = f"{carrier.item} warms by {rise:.1f} K where it is {mm(width)} wide ({carrier.current:.3f} A)"
        yield _hit(f"{text}, at most {limit:g} K", rise, limit, "K", at, (carrier.item,))


def _barrels(board: Board, limit: float) -> Iterator[Outcome]:
    """Yield the hits of via barrels."""
    loaded = via_currents(board)
    plating = board.limits.number("vias.plating")
    if loaded and plating is None:
        yield NotChecked(f"{NAME} (vias)", "vias.plating is not given")
        return
    for via, current in loaded:
        rise = float(ipc2221_barrel_rise(current, via.diameter * 1e-9, plating or 0.0, internal=True))
        if rise > limit * (1.0 + 1e-6):
            text = f"{via.item} warms by {rise:.1f} K ({current:.3f} A), at most {limit:g} K"
            yield _hit(
                text, rise, limit, "K", via.at, (via.item, via.purpose.partition(":")[2]), "drill_plated"
            )


def _hit(
    text: str,
    measured: float,
    limit: float,
    unit: str,
    at: Point,
    items: tuple[str, ...],
    layer: str = "copper_top",
) -> Hit:
    """Return a hit of this rule."""
    return Hit(
        rule=NAME, text=text, items=items, at=at, measured=measured, limit=limit, unit=unit, layer=layer
    )


RULE = Rule(names=(NAME,), find=find, needs_circuit=True)
