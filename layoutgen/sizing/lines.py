"""Every single line: which gap and width it gets, and the faults of those that cannot be made."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence

import numpy as np

from layoutgen.circuit import GROUND, Circuit
from layoutgen.formulas.limits import ipc2221_rise, ipc2221_width
from layoutgen.origin import Fault
from layoutgen.reading import CircuitFile, Line, RuleFile
from layoutgen.sizing.pours import bare_widths, rf_pour_gaps, supply_pour_gap
from layoutgen.sizing.records import SizedLine
from layoutgen.sizing.sections import MAX_U, MIN_U, Section, impedance_limits, sections, widths_for
from layoutgen.sizing.stackup import NM, Stackup, rounded_up

__all__ = ["Gaps", "line_faults", "line_gaps", "rf_widths", "sized_lines", "supply_width"]

SUPPLY_STEP = 10e-6
"""Widths that follow from a current are rounded up to this step [m]."""

Gaps = Mapping[str, tuple[float, float, float]]
"""Per line: the pour's distance as drawn, and on the left and right as the sizing assumes it [m]."""


def is_rf(circuit: Circuit, line: Line) -> bool:
    """Tell whether a line joins anything but DC nets (ground beside a DC net counts as one)."""
    nets = [circuit.nets[name] for name in line.nets if name != GROUND]
    return not nets or not all(net.is_dc for net in nets)


def single_lines(file: CircuitFile) -> dict[str, Line]:
    """Return the lines that are no radial stubs, in file order."""
    return {name: line for name, line in file.lines.items() if line.shape is None}


def line_gaps(circuit: Circuit, stackup: Stackup, measured: Mapping[str, tuple[float, float]]) -> Gaps:
    """Return each line's pour distances: as drawn, left, right [m].

    Args:
        circuit: The circuit.
        stackup: Substrate and copper.
        measured: Gaps (left, right) that a drawing has, by line; they replace the assumed ones [m].
    """
    lines = single_lines(circuit.file)
    rf = {name: line for name, line in lines.items() if line.gap is None and is_rf(circuit, line)}
    asked = [line.impedance for line in rf.values() if line.impedance is not None]
    bare = iter(bare_widths(stackup, asked))
    widths = [
        next(bare) if line.impedance is not None else (line.width or 0.0) / stackup.height
        for line in rf.values()
    ]
    drawn = dict(
        zip(rf, rf_pour_gaps(circuit, stackup, widths, [line.nets for line in rf.values()]), strict=True)
    )
    gaps = {}
    for name, line in lines.items():
        gap = line.gap if line.gap is not None else drawn.get(name)
        if gap is None:
            gap = supply_pour_gap(circuit, stackup, line.nets)
        left, right = measured.get(name, (gap, gap))
        gaps[name] = (gap, stackup.gap_or_none(left), stackup.gap_or_none(right))
    return gaps


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


def supply_width(rules: RuleFile, stackup: Stackup, current: float) -> float:
    """Return the narrowest width [m] that carries a current [A], rounded up to 10 um.

    The largest of ``copper.min_width``, the IPC-2221 width at ``current.temperature_rise`` and the width at
    ``current.max_density``; rules that are absent ask for nothing.
    """
    least, rule = stackup.min_width, rules.current
    if rule is not None and rule.temperature_rise is not None:
        least = max(least, float(ipc2221_width(current, stackup.thickness, rule.temperature_rise)))
    if rule is not None and rule.max_density is not None:
        least = max(least, abs(current) / (rule.max_density * stackup.thickness))
    return rounded_up(least, SUPPLY_STEP)


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
