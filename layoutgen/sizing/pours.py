"""How far the pour stays from lines, pairs, radial stubs, and from copper that is none of these."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from layoutgen.circuit import GROUND, OPEN, Circuit
from layoutgen.formulas.pour import pour_gap_for_shift
from layoutgen.formulas.synthesis import width_for_impedance
from layoutgen.reading import CoupledPair, Line
from layoutgen.sizing.kinds import is_rf, single_lines
from layoutgen.sizing.stackup import Stackup, clearance, rounded_up

__all__ = ["Gaps", "Pours", "pour_distances", "pour_distances_of_widths"]

Gaps = Mapping[str, tuple[float, float, float]]
"""Per line or pair: the pour's distance as drawn, and on the left and right as the sizing assumes it [m]."""

_REFERENCE_OHM = 50.0
_SUPPLY_HEIGHTS = 0.5


@dataclass(frozen=True, slots=True)
class Pours:
    """The pour's distances: of lines and pairs, the default [m], and notes on those that were raised."""

    gaps: Gaps
    default: float
    notes: tuple[str, ...]


def pour_distances(circuit: Circuit, stackup: Stackup, measured: Mapping[str, tuple[float, float]]) -> Pours:
    """Return the pour's distance from every line and coupled pair.

    From an RF line it is ``[ground] gap``, or where the pour would move the impedance of the bare line by
    the allowed share (a pair counts as a line of its width, or of sqrt(Z_even Z_odd)); from a grounded
    coplanar line its own gap; from a line that joins DC nets only ``[ground] gap`` or half a substrate
    height (a choice of this project: its impedance does not matter, and a near pour adds to its bypassing).
    It is at least ``copper.min_gap`` and the clearance of the nets' voltage, rounded up to a nanometre.
    Without ``[ground]`` it is infinite. The default, for pads and strips, is that of a 50 ohm line.

    Args:
        circuit: The circuit.
        stackup: Substrate and copper.
        measured: Gaps (left, right) that a drawing has; they replace the assumed ones [m].
    """
    lines, pairs = single_lines(circuit.file), circuit.file.coupled
    rf: dict[str, Line | CoupledPair] = {
        name: line for name, line in lines.items() if line.gap is None and is_rf(circuit, line)
    }
    rf |= pairs
    widths = _bare_widths(stackup, [*rf.values(), None])
    *shifted, default = pour_distances_of_widths(
        circuit, stackup, widths, [*([net for net in held.nets if net != OPEN] for held in rf.values()), ()]
    )
    drawn = dict(zip(rf, shifted, strict=True))
    gaps = {}
    for name in (*lines, *pairs):
        own = lines[name].gap if name in lines else None
        gap = own if own is not None else drawn.get(name)
        if gap is None:
            gap = _supply_gap(circuit, stackup, lines[name].nets)
        left, right = measured.get(name, (gap, gap))
        gaps[name] = (gap, stackup.gap_or_none(left), stackup.gap_or_none(right))
    return Pours(gaps, default, tuple(_raised(circuit, {name: gap[0] for name, gap in gaps.items()})))


def pour_distances_of_widths(
    circuit: Circuit, stackup: Stackup, widths: Sequence[float], nets: Sequence[Sequence[str]]
) -> list[float]:
    """Return the pour's distance [m] from RF copper of given widths over height [-], on given nets."""
    ground = circuit.file.ground
    if ground is None:
        return [math.inf] * len(widths)
    if ground.gap is not None:
        wished = [ground.gap] * len(widths)
    else:
        found = pour_gap_for_shift(np.asarray(widths), stackup.er, stackup.t, ground.max_impedance_shift)
        wished = [float(gap) * stackup.height for gap in found]
    return [
        rounded_up(max(gap, _least_gap(circuit, stackup, on))) for gap, on in zip(wished, nets, strict=True)
    ]


def _bare_widths(stackup: Stackup, held: Sequence[Line | CoupledPair | None]) -> list[float]:
    """Return the width over height [-] of each, as a bare line; None stands for a line of 50 ohm."""
    asked = np.array([_impedance(one) for one in held])
    found = width_for_impedance(asked, stackup.er, stackup.t).u
    return [
        one.width / stackup.height if one is not None and one.width is not None else float(u)
        for one, u in zip(held, found, strict=True)
    ]


def _impedance(held: Line | CoupledPair | None) -> float:
    """Return the impedance [ohm] that a line's or pair's distance goes by."""
    if isinstance(held, CoupledPair):
        return math.sqrt((held.even_impedance or _REFERENCE_OHM) * (held.odd_impedance or _REFERENCE_OHM))
    return _REFERENCE_OHM if held is None or held.impedance is None else held.impedance


def _least_gap(circuit: Circuit, stackup: Stackup, nets: Sequence[str]) -> float:
    """Return the least legal distance [m] of copper on these nets from ground."""
    voltages = [circuit.nets[net].voltage or 0.0 for net in nets if net != GROUND]
    return max([stackup.min_gap, *(clearance(circuit.rules, voltage) for voltage in voltages)])


def _supply_gap(circuit: Circuit, stackup: Stackup, nets: Sequence[str]) -> float:
    """Return the pour's distance [m] from a line that joins DC nets only."""
    ground = circuit.file.ground
    if ground is None:
        return math.inf
    wished = ground.gap if ground.gap is not None else _SUPPLY_HEIGHTS * stackup.height
    return rounded_up(max(wished, _least_gap(circuit, stackup, nets)))


def _raised(circuit: Circuit, drawn: Mapping[str, float]) -> list[str]:
    """Return a note for each distance above ``[ground] gap``, with the lines that it was raised for."""
    ground = circuit.file.ground
    if ground is None or ground.gap is None:
        return []
    raised: dict[float, list[str]] = {}
    for name, gap in drawn.items():
        line = circuit.file.lines.get(name)
        if gap > ground.gap * (1.0 + 1e-9) and (line is None or line.gap is None):
            raised.setdefault(gap, []).append(name)
    return [
        f"ground.gap {ground.gap * 1e3:g} mm is raised to {gap * 1e3:g} mm beside {', '.join(names)}: "
        "copper.min_gap, or the clearance of the voltage"
        for gap, names in sorted(raised.items())
    ]
