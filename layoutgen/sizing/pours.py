"""How far the pour stays from each line."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from layoutgen.circuit import GROUND, Circuit
from layoutgen.formulas.pour import pour_gap_for_shift
from layoutgen.formulas.synthesis import width_for_impedance
from layoutgen.sizing.stackup import Stackup, clearance, rounded_up

__all__ = ["bare_widths", "default_pour_gap", "gap_note", "least_gap", "rf_pour_gaps", "supply_pour_gap"]

_REFERENCE_OHM = 50.0
_SUPPLY_HEIGHTS = 0.5


def bare_widths(stackup: Stackup, impedances: Sequence[float]) -> list[float]:
    """Return the widths over height [-] of bare lines (no pour) of the impedances [ohm]."""
    if not impedances:
        return []
    found = width_for_impedance(np.asarray(impedances), stackup.er, stackup.t).u
    return [float(u) for u in found]


def rf_pour_gaps(
    circuit: Circuit, stackup: Stackup, widths: Sequence[float], nets: Sequence[Sequence[str]]
) -> list[float]:
    """Return the pour's distance [m] from RF lines of given bare widths over height [-], on given nets.

    ``[ground] gap``, or where the pour would move the impedance of the bare line by the allowed share; in
    either case at least ``copper.min_gap`` and the clearance that the nets' voltage asks for. Rounded up to
    a nanometre; infinity without ``[ground]``.
    """
    ground = circuit.file.ground
    if ground is None:
        return [math.inf] * len(widths)
    if ground.gap is not None:
        wished = [ground.gap] * len(widths)
    elif widths:
        found = pour_gap_for_shift(np.asarray(widths), stackup.er, stackup.t, ground.max_impedance_shift)
        wished = [float(gap) * stackup.height for gap in found]
    else:
        wished = []
    return [
        rounded_up(max(gap, least_gap(circuit, stackup, on))) for gap, on in zip(wished, nets, strict=True)
    ]


def least_gap(circuit: Circuit, stackup: Stackup, nets: Sequence[str]) -> float:
    """Return the least legal distance [m] of copper on these nets from ground."""
    voltages = [circuit.nets[net].voltage or 0.0 for net in nets if net in circuit.nets and net != GROUND]
    return max([stackup.min_gap, *(clearance(circuit.rules, voltage) for voltage in voltages)])


def supply_pour_gap(circuit: Circuit, stackup: Stackup, nets: Sequence[str]) -> float:
    """Return the pour's distance [m] from a line that joins DC nets only.

    ``[ground] gap``, or half a substrate height (a choice of this project: a supply line's impedance does
    not matter, and a near pour adds to its bypassing), at least what is legal.
    """
    ground = circuit.file.ground
    if ground is None:
        return math.inf
    wished = ground.gap if ground.gap is not None else _SUPPLY_HEIGHTS * stackup.height
    return rounded_up(max(wished, least_gap(circuit, stackup, nets)))


def default_pour_gap(circuit: Circuit, stackup: Stackup) -> float:
    """Return the pour's distance [m] from copper that is no line (pads, strips): that of a 50 ohm line."""
    return rf_pour_gaps(circuit, stackup, bare_widths(stackup, [_REFERENCE_OHM]), [()])[0]


def gap_note(circuit: Circuit, stackup: Stackup) -> list[str]:
    """Return a note when ``[ground] gap`` is smaller than the board house can etch."""
    ground = circuit.file.ground
    if ground is None or ground.gap is None or ground.gap >= stackup.min_gap:
        return []
    return [
        f"ground.gap {ground.gap * 1e3:g} mm is below copper.min_gap; {stackup.min_gap * 1e3:g} mm is drawn"
    ]
