"""No copper carries more direct current than its cross-section allows.

What: current over cross-section of lines, strips and via barrels is at most ``current.max_density``.
Why: beyond it the narrowest place fuses or drifts, before the board as a whole is warm.
How measured: current of the DC solution over (narrowest drawn width, between facing edges, times copper
thickness); barrels as pi t (d - t) with the drill d taken as drilled, vias share equally. A width 10 nm
short passes. Crowding at tees, pads and corners is not looked at.
Source: the limit is the rule file's.
"""

from __future__ import annotations

from collections.abc import Iterator

from layoutgen.checks.board import Board
from layoutgen.checks.carriers import Carrier, carriers, necks
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
    yield from _barrels(board, limit)


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
