"""Ground pads reach the plane, and exposed pads are cooled.

What: each pad on gnd has a via of its own even where ``vias.per_ground_pad`` is silent; the vias under a
pad with ``thermal`` have together no more than that thermal resistance.
Why: a shunt part without a via of its own is not grounded at these frequencies; an exposed pad without
vias is not cooled.
How measured: vias as for ``vias.per_ground_pad``. Thermal: barrels whose axes lie under the pad, in
parallel, each height / (k pi t (d - t)) with the drill d taken as drilled, plating t and k = 385 W/(m K);
spreading in the plane and the solder are left out. One part in a million above the limit passes.
Source: the resistance of a barrel is that of a conductor of heat (two public pages give 192 K/W for 0.3
mm, 25 um, 1.6 mm, as does this).
"""

from __future__ import annotations

from collections.abc import Iterator

import shapely

from layoutgen.checks.board import Board
from layoutgen.checks.grounding import GroundPad, ground_pads
from layoutgen.checks.nodes import GROUND
from layoutgen.checks.outcome import Hit, Outcome, Rule
from layoutgen.checks.records import NotChecked
from layoutgen.formulas.limits import barrel_section

__all__ = ["RULE", "barrel_thermal_resistance"]

NAME = "ground.vias"
COPPER_CONDUCTIVITY = 385.0
"""Heat conductivity of plated copper [W/(m K)], from the same public pages."""


def find(board: Board) -> Iterator[Outcome]:
    """Yield a hit for each ground pad without a via, and for each one too poorly cooled."""
    counted = board.limits.get("vias.per_ground_pad") is not None
    pads = ground_pads(board)
    for pad in pads:
        if not pad.vias and not counted:
            text = f"ground pad of {pad.part} has no via of its own"
            yield Hit(rule=NAME, text=text, items=(pad.part,), at=pad.at, nets=(GROUND,))
        if pad.thermal is not None:
            yield from _heat(board, pad, pad.thermal)


def barrel_thermal_resistance(height: float, drill: float, plating: float) -> float:
    """Return a via's thermal resistance [K/W] from its height, drill and plating [m].

    >>> round(barrel_thermal_resistance(1.6e-3, 0.3e-3, 25e-6))
    192
    """
    return height / (COPPER_CONDUCTIVITY * float(barrel_section(drill, plating)))


def _heat(board: Board, pad: GroundPad, limit: float) -> Iterator[Outcome]:
    """Yield the hit of an exposed pad whose vias conduct too little heat."""
    plating = board.limits.number("vias.plating")
    if plating is None or board.height is None:
        yield NotChecked(f"{NAME} (thermal, {pad.part})", "vias.plating is not given")
        return
    under = [via for via in board.vias if pad.outline.intersects(shapely.Point(via.x, via.y))]
    conductance = sum(
        1.0 / barrel_thermal_resistance(board.height * 1e-9, via.diameter * 1e-9, plating) for via in under
    )
    resistance = 1.0 / conductance if under else None
    if resistance is not None and resistance <= limit * (1.0 + 1e-6):
        return
    found = "none are there" if resistance is None else f"they have {resistance:.1f} K/W"
    asked = f"at most {limit:g} K/W together"
    yield Hit(
        rule=NAME,
        text=f"{len(under)} vias under pad {pad.pin} of {pad.part}: {asked}, {found}",
        items=(pad.part,),
        at=pad.at,
        measured=resistance,
        limit=limit,
        unit="K/W",
        nets=(GROUND,),
    )


RULE = Rule(names=(NAME,), find=find, keyless=True, needs_circuit=True)
