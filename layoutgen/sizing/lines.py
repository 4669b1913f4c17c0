"""Every single line: which gap and width it gets, and the faults of those that cannot be made."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace

import numpy as np

from layoutgen.circuit import Circuit
from layoutgen.formulas.limits import ipc2221_rise
from layoutgen.origin import Fault
from layoutgen.reading import CircuitFile, Line
from layoutgen.sizing.junctions import bend_change
from layoutgen.sizing.kinds import is_rf, single_lines
from layoutgen.sizing.necks import RIGHT_ANGLE, mitre_for_neck
from layoutgen.sizing.pours import Gaps
from layoutgen.sizing.records import SizedLine
from layoutgen.sizing.sections import MAX_U, MIN_U, Section, impedance_limits, sections, widths_for
from layoutgen.sizing.stackup import NM, Stackup
from layoutgen.sizing.supplies import current_width

__all__ = ["line_faults", "rf_widths", "sized_lines"]


def rf_widths(file: CircuitFile, stackup: Stackup, gaps: Gaps) -> dict[str, float]:
    """Return the width [m] of each line that has an impedance or a width; supply lines come later."""
    lines = single_lines(file)
    asked = {name: line.impedance for name, line in lines.items() if line.impedance is not None}
    found = widths_for(
        stackup, list(asked.values()), [gaps[name][1] for name in asked], [gaps[name][2] for name in asked]
    )
    given = {name: line.width for name, line in lines.items() if line.width is not None}
    return {**dict(zip(asked, found, strict=True)), **given}


def line_faults(file: CircuitFile, stackup: Stackup, gaps: Gaps, widths: Mapping[str, float]) -> list[Fault]:
    """Return a fault for each line whose impedance or width is outside the formula or below ``min_width``."""
    faults = []
    for name, line in single_lines(file).items():
        if line.kind == "grounded_coplanar" and file.ground is None:
            key = f"lines.{name}.kind"
            faults.append(
                Fault(
                    file.location(key),
                    key,
                    '"grounded_coplanar" without [ground]',
                    "a [ground] table, for its pour",
                )
            )
        fault = _section_fault(file, stackup, name, line, gaps[name], widths.get(name))
        if fault is not None:
            faults.append(fault)
    return faults


def _section_fault(
    file: CircuitFile,
    stackup: Stackup,
    name: str,
    line: Line,
    gap: tuple[float, float, float],
    width: float | None,
) -> Fault | None:
    """Return the fault of one line's impedance or width, or None."""
    h = stackup.height
    if line.impedance is not None:
        if width is not None and max(stackup.min_width, MIN_U * h) - NM <= width <= MAX_U * h:
            return None
        low, high = impedance_limits(stackup, gap[1], gap[2])
        key = f"lines.{name}.impedance"
        return Fault(
            file.location(key),
            key,
            f"{line.impedance:g} ohm",
            f"{_up(low)} to {_down(high)} ohm here (widths of {MAX_U:g} substrate heights "
            f"down to {max(stackup.min_width, MIN_U * h) * 1e3:g} mm)",
        )
    if line.width is not None and not MIN_U <= line.width / h <= MAX_U:
        key = f"lines.{name}.width"
        return Fault(
            file.location(key),
            key,
            f"{line.width * 1e3:g} mm",
            f"{MIN_U * h * 1e3:g} to {MAX_U * h * 1e3:g} mm, the range of Hammerstad and Jensen 1980",
        )
    return None


def _up(ohm: float) -> str:
    """Return an impedance to a hundredth of an ohm, rounded up."""
    return f"{math.ceil(ohm * 100.0) / 100.0:.2f}"


def _down(ohm: float) -> str:
    """Return an impedance to a hundredth of an ohm, rounded down."""
    return f"{math.floor(ohm * 100.0) / 100.0:.2f}"


def sized_lines(
    circuit: Circuit, stackup: Stackup, gaps: Gaps, widths: Mapping[str, float]
) -> dict[str, SizedLine]:
    """Return every line's record; currents are those of the circuit's bias point."""
    lines = single_lines(circuit.file)
    names = list(lines)
    worth = sections(
        stackup,
        [widths[name] for name in names],
        [gaps[name][1] for name in names],
        [gaps[name][2] for name in names],
    )
    rises = _rises(circuit, stackup, [widths[name] for name in names], names)
    worth = [
        _with_neck(circuit, stackup, name, widths[name], section)
        for name, section in zip(names, worth, strict=True)
    ]
    return {
        name: _sized(circuit, name, lines[name], gaps[name], widths[name], section, rise)
        for name, section, rise in zip(names, worth, rises, strict=True)
    }


def _rises(circuit: Circuit, stackup: Stackup, widths: Sequence[float], names: Sequence[str]) -> list[float]:
    """Return the temperature rise [K] of each line by IPC-2221."""
    if not names:
        return []
    currents = np.array([circuit.dc.currents[name] for name in names])
    return [float(rise) for rise in ipc2221_rise(currents, np.asarray(widths), stackup.thickness)]


def _with_neck(circuit: Circuit, stackup: Stackup, name: str, width: float, section: Section) -> Section:
    """Return a line's cross-section, its mitre reduced where the neck of a bend would not carry the current.

    Bends are right angles, unless a hint names the turns.
    """
    layout = circuit.file.layout
    hint = layout.hints.get(name) if layout is not None else None
    turns = (RIGHT_ANGLE,) if hint is None or hint.route is None else hint.route.turns
    neck = current_width(circuit.rules, stackup, circuit.dc.currents[name])
    percent = mitre_for_neck(section.mitre_percent, turns, width, neck)
    if percent == section.mitre_percent:
        return section
    change = bend_change(width / stackup.height, stackup.er, percent, RIGHT_ANGLE, stackup.t)
    return replace(section, mitre_percent=percent, bend_length=change * stackup.height)


def _sized(
    circuit: Circuit,
    name: str,
    line: Line,
    gap: tuple[float, float, float],
    width: float,
    section: Section,
    rise: float,
) -> SizedLine:
    """Return one line's record."""
    free = line.length == "free"
    return SizedLine(
        name=name,
        nets=line.nets,
        width=width,
        impedance=section.impedance,
        asked_impedance=line.impedance,
        angle=line.angle,
        length=0.0 if line.length == "free" else line.length,
        free=free,
        rf=is_rf(circuit, line),
        effective_permittivity=section.effective_permittivity,
        beta=section.beta,
        pour_gap=gap[0],
        gap_left=gap[1],
        gap_right=gap[2],
        mitre_percent=section.mitre_percent,
        bend_length=section.bend_length,
        current=abs(circuit.dc.currents[name]),
        temperature_rise=rise,
        loss=section.loss,
        spread=section.spread,
        flags=section.flags,
    )
