"""No copper carries more direct current per section than allowed.

What: the current density in lines, strips, pads, the copper between them, and in via barrels is at most
``current.max_density``.
Why: too dense a current heats, and in the long run moves, the copper.
How measured: lines and strips by their current over their width at the narrowest place of their drawn copper,
between facing edges (beside a hole all copper around it), a width 10 nm short passing. Besides, the sheet of
each net off gnd is solved by finite elements; on every line of one potential (a cross-section, however it
bends) the mean density is the current through it over its length, so that tees, tapers, pads and bent necks
are judged where the current crowds; half a per cent above the limit passes there. The peak at a sharp inner
corner is not a measure: it has none but the mesh's. Barrels by pi t (d - t) with the drill d taken as
drilled. Currents come from the DC solution, vias share equally. The current of the ground's own copper is not
looked at.
Source: the limit is the board house's; the method is the textbook's.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.board import Board
from layoutgen.checks.carriers import Carrier, carriers, necks
from layoutgen.checks.crowding import CUT_ERROR, Crowded, crowded
from layoutgen.checks.grounding import via_currents
from layoutgen.checks.outcome import Hit, Outcome, Rule, mm
from layoutgen.checks.planar import TOLERANCE_NM
from layoutgen.checks.records import NotChecked
from layoutgen.formulas.limits import barrel_section
from layoutgen.geometry import Point

__all__ = ["RULE"]

NAME = "current.max_density"


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each element with too high a current density."""
    limit = board.limits.number(NAME)
    if limit is None:
        return
    if board.thickness is None:
        yield NotChecked(NAME, "the thickness of the copper is not known")
        return
    for carrier in carriers(board):
        yield from _lines(board, carrier, limit, board.thickness * 1e-9)
    yield from _sheets(board, limit, board.thickness * 1e-9)
    yield from _barrels(board, limit)


def _sheets(board: Board, limit: float, thickness: float) -> Iterator[Outcome]:
    """Yield the hits of cuts across the solved sheets, and what could not be solved."""
    yield from board.sheets.skipped
    for place in crowded(board, lambda _: limit * thickness * 1e-9):
        density = place.cut.density * 1e9 / thickness
        if density > limit * (1.0 + CUT_ERROR):
            yield _hit(_across(place), density, limit, place.at, (place.item,))


def _across(place: Crowded) -> str:
    """Return what a cut is, for people."""
    cut = place.cut
    return f"{cut.current:.3f} A of net {place.net} pass a cut of {mm(cut.length)} at {place.item}"


def _lines(board: Board, carrier: Carrier, limit: float, thickness: float) -> Iterator[Hit]:
    """Yield the hits of one element: too narrow as a whole, or at a neck."""
    needed = carrier.current / (limit * thickness) * 1e9
    found = [(neck.width, neck.at) for neck in necks(board, carrier, needed)]
    if carrier.width < needed - TOLERANCE_NM:
        found.append((carrier.width, carrier.at))
    for width, at in found:
        density = carrier.current / (width * 1e-9 * thickness)
        text = f"{carrier.item} carries {carrier.current:.3f} A where it is {mm(width)} wide"
        yield _hit(text, density, limit, at, (carrier.item,))


def _barrels(board: Board, limit: float) -> Iterator[Outcome]:
    """Yield the hits of via barrels."""
    loaded = via_currents(board)
    plating = board.limits.number("vias.plating")
    if loaded and plating is None:
        yield NotChecked(f"{NAME} (vias)", "vias.plating is not given")
        return
    for via, current in loaded:
        density = current / float(barrel_section(via.diameter * 1e-9, plating or 0.0))
        if density > limit * (1.0 + 1e-6):
            text = f"barrel of {via.item} carries {current:.3f} A"
            yield _hit(
                text, density, limit, via.at, (via.item, via.purpose.partition(":")[2]), "drill_plated"
            )


def _hit(
    text: str, density: float, limit: float, at: Point, items: tuple[str, ...], layer: str = "copper_top"
) -> Hit:
    """Return a hit of this rule; densities in [A/m^2]."""
    return Hit(
        rule=NAME,
        text=f"{text}: {density / 1e6:.1f} A/mm^2, at most {limit / 1e6:g} A/mm^2",
        items=items,
        at=at,
        measured=density / 1e6,
        limit=limit / 1e6,
        unit="A/mm^2",
        layer=layer,
    )


RULE = Rule(names=(NAME,), find=find, needs_circuit=True)
