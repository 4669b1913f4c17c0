"""Mitres that leave enough copper: the neck of a bend carries the line's current as the line itself does.

A bend of turn a in a line of width W, mitred by M per cent of its diagonal, has its narrowest place on that
diagonal: W / cos(a/2) (1 - M/100) remain of it. Any way from the inner to the outer edge of the bend is at
least as long as the shorter of this neck and W, so a neck as wide as the current asks makes the whole bend
wide enough.
"""

from __future__ import annotations

import math
from collections.abc import Iterable

__all__ = ["RIGHT_ANGLE", "mitre_for_neck", "neck_of_bend"]

RIGHT_ANGLE = 90.0


def neck_of_bend(percent: float, turn: float, width: float) -> float:
    """Return the copper left on the diagonal of a mitred bend, in the unit of the width.

    Args:
        percent: Cut part of the diagonal [%].
        turn: Angle of the bend [deg], either sign, below 180.
        width: Line width [any length unit].
    """
    return width / math.cos(0.5 * math.radians(abs(turn))) * (1.0 - percent / 100.0)


def mitre_for_neck(percent: float, turns: Iterable[float], width: float, neck: float) -> float:
    """Return the mitre of a right angle [%] at which each of a line's bends keeps a neck.

    Bends of other turns get that mitre times sqrt(2) sin(|turn| / 2) (``geometry.mitre_for_turn``). The
    smallest of what the turns allow is returned, and never more than ``percent``. A neck wider than the line
    is taken as wide as the line: bends are then no narrower than the rest.

    Args:
        percent: The mitre of a right angle that is wanted for its match [%].
        turns: The turns the line may take [deg], either sign.
        width: Line width [any length unit].
        neck: Least copper on the diagonal [same unit].
    """
    held = min(neck, width)
    for turn in turns:
        half = 0.5 * math.radians(abs(turn))
        share = math.sqrt(2.0) * math.sin(half)
        most = 1.0 - held * math.cos(half) / width
        if share > 0.0:
            percent = min(percent, 100.0 * most / share)
    return percent
