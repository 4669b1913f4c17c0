"""Supply lines: widths from the bias point, and the bias point from the widths."""

from __future__ import annotations

import math
from collections.abc import Mapping

from layoutgen.circuit import Circuit, conductor_keys, solve_dc, with_dc
from layoutgen.formulas.limits import dc_resistance, ipc2221_width
from layoutgen.reading import RuleFile
from layoutgen.sizing.kinds import single_lines
from layoutgen.sizing.pours import Gaps
from layoutgen.sizing.sections import sections
from layoutgen.sizing.stackup import Stackup, rounded_up

__all__ = ["NOMINAL_FREE_LENGTH", "current_width", "dc_resistances", "supply_width", "with_supplies"]

NOMINAL_FREE_LENGTH = 10e-3
"""Length of a line with ``length = "free"`` in the bias point before it is placed [m]."""

SUPPLY_STEP = 10e-6
"""Widths that follow from a current are rounded up to this step [m]."""

_ROUNDS = 8


def current_width(rules: RuleFile, stackup: Stackup, current: float) -> float:
    """Return the width [m] that a current [A] asks for, exactly; 0 where no rule or no current asks.

    The larger of the IPC-2221 width at ``current.temperature_rise`` and the width at
    ``current.max_density``; rules that are absent ask for nothing.
    """
    least, rule = 0.0, rules.current
    if rule is not None and rule.temperature_rise is not None:
        least = max(least, float(ipc2221_width(current, stackup.thickness, rule.temperature_rise)))
    if rule is not None and rule.max_density is not None:
        least = max(least, abs(current) / (rule.max_density * stackup.thickness))
    return least


def supply_width(rules: RuleFile, stackup: Stackup, current: float) -> float:
    """Return the narrowest width [m] that carries a current [A], rounded up to 10 um.

    The larger of ``copper.min_width`` and :func:`current_width`.
    """
    return rounded_up(max(stackup.min_width, current_width(rules, stackup, current)), SUPPLY_STEP)


def with_supplies(
    circuit: Circuit, stackup: Stackup, gaps: Gaps, widths: Mapping[str, float]
) -> tuple[Circuit, dict[str, float]]:
    """Return the circuit with its bias point at true widths, and the widths with those of supply lines.

    Where currents share parallel ways they depend on the widths that follow from them; a few rounds settle
    that, and a width never shrinks from round to round, so that they end.

    Args:
        circuit: The circuit.
        stackup: Substrate and copper.
        gaps: The pour's distances.
        widths: Widths of lines and pairs, those of supply lines left out [m].
    """
    supplies = [name for name in single_lines(circuit.file) if name not in widths]
    sized = dict.fromkeys(supplies, 0.0)
    for _ in range(_ROUNDS):
        currents = circuit.dc.currents
        wider = {
            name: max(sized[name], supply_width(circuit.rules, stackup, currents[name])) for name in supplies
        }
        settled = wider == sized
        sized = wider
        if settled and supplies:
            break
        resistances = dc_resistances(circuit, stackup, gaps, {**widths, **sized}, {})
        circuit = with_dc(circuit, solve_dc(circuit.file, resistances))
        if not supplies:
            break
    return circuit, {**widths, **sized}


def dc_resistances(
    circuit: Circuit,
    stackup: Stackup,
    gaps: Gaps,
    widths: Mapping[str, float],
    lengths: Mapping[str, float],
) -> dict[str, float]:
    """Return the resistance [ohm] of every line and strip, for :func:`layoutgen.circuit.solve_dc`.

    Args:
        circuit: The circuit.
        stackup: Substrate and copper.
        gaps: The pour's distances.
        widths: Widths of lines and pairs [m].
        lengths: Centre-lines that are known [m]; others follow from the angle, free lines are 10 mm.
    """
    by_angle = [name for name, line in single_lines(circuit.file).items() if line.angle is not None]
    worth = sections(
        stackup,
        [widths[name] for name in by_angle],
        [gaps[name][1] for name in by_angle],
        [gaps[name][2] for name in by_angle],
    )
    betas = {name: section.beta for name, section in zip(by_angle, worth, strict=True)}
    found = {}
    for key in conductor_keys(circuit.file):
        name = key.partition(":")[0]
        length = lengths.get(name) or _length(circuit, stackup, name, betas)
        found[key] = float(dc_resistance(length, widths[name], stackup.thickness, stackup.conductivity))
    return found


def _length(circuit: Circuit, stackup: Stackup, name: str, betas: Mapping[str, float]) -> float:
    """Return a line's or pair's length [m] before it is placed."""
    line = circuit.file.lines.get(name)
    held = line if line is not None else circuit.file.coupled[name]
    if isinstance(held.length, float):
        return held.length
    if held.angle is not None:
        return held.angle / betas.get(name, stackup.k0 * math.sqrt(0.5 * (stackup.er + 1.0)))
    return NOMINAL_FREE_LENGTH
