"""The sizing stage's one function."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import replace

from layoutgen.circuit import Circuit, conductor_keys, solve_dc, with_dc
from layoutgen.errors import WrongInputError
from layoutgen.formulas.limits import dc_resistance
from layoutgen.sizing.lands import chip_notes, land_faults, part_lands
from layoutgen.sizing.lines import (
    Gaps,
    line_faults,
    line_gaps,
    rf_widths,
    single_lines,
    sized_lines,
    supply_width,
)
from layoutgen.sizing.pairs import pair_fault, pair_gap, pair_sizes, sized_pair
from layoutgen.sizing.pours import default_pour_gap, gap_note
from layoutgen.sizing.radials import radial_fault, radial_names, sized_radial
from layoutgen.sizing.records import SizedCircuit
from layoutgen.sizing.sections import sections
from layoutgen.sizing.stackup import Stackup

__all__ = ["NOMINAL_FREE_LENGTH", "dc_resistances", "size_circuit"]

NOMINAL_FREE_LENGTH = 10e-3
"""Length of a line with ``length = "free"`` in the bias point before it is placed [m]."""

_ROUNDS = 8


def size_circuit(circuit: Circuit, gaps: Mapping[str, tuple[float, float]] | None = None) -> SizedCircuit:
    """Return every size that follows from formulas and rules alone.

    Args:
        circuit: The circuit.
        gaps: By line or pair, the distance of the pour (left, right) as a drawing has it, infinity for none
            [m]; left out: the distance the sizing asks for, on both sides.

    Raises:
        WrongInputError: Substrate, impedances, widths or radii outside what the formulas cover or the board
            house can make, footprints that do not fit their parts; all in one go.
    """
    measured = gaps or {}
    stackup = Stackup.of(circuit)
    faults = [*stackup.faults(circuit), *land_faults(circuit.file)]
    if stackup.faults(circuit):
        raise WrongInputError(faults)
    drawn = line_gaps(circuit, stackup, measured)
    widths = rf_widths(circuit.file, stackup, drawn)
    faults += line_faults(circuit.file, stackup, drawn, widths)
    pairs = {
        name: (gap := pair_gap(circuit, stackup, pair, measured.get(name)), pair_sizes(stackup, pair, gap))
        for name, pair in circuit.file.coupled.items()
    }
    faults += [
        fault
        for name, (gap, sizes) in pairs.items()
        if (fault := pair_fault(circuit.file, stackup, name, gap, sizes)) is not None
    ]
    pair_widths = {name: sizes[0] for name, (_, sizes) in pairs.items()}
    if not faults:
        circuit, widths = _with_supplies(circuit, stackup, drawn, widths, pair_widths)
        faults = [
            fault
            for name in radial_names(circuit.file)
            if (fault := radial_fault(circuit, stackup, name, widths | pair_widths)) is not None
        ]
    if faults:
        raise WrongInputError(faults)
    return SizedCircuit(
        circuit=circuit,
        lines=sized_lines(circuit, stackup, drawn, widths),
        pairs={name: sized_pair(circuit, stackup, name, gap, sizes) for name, (gap, sizes) in pairs.items()},
        radials={
            name: sized_radial(circuit, stackup, name, widths | pair_widths)
            for name in radial_names(circuit.file)
        },
        lands=part_lands(circuit.file, circuit.rules),
        default_pour_gap=default_pour_gap(circuit, stackup),
        notes=(*gap_note(circuit, stackup), *chip_notes(circuit.file, circuit.rules)),
    )


def _with_supplies(
    circuit: Circuit, stackup: Stackup, gaps: Gaps, widths: dict[str, float], pair_widths: Mapping[str, float]
) -> tuple[Circuit, dict[str, float]]:
    """Return the circuit with its bias point at true widths, and the widths with those of supply lines.

    Where currents share parallel ways they depend on the widths that follow from them; a few rounds settle
    that, and a width never shrinks from round to round, so that they end.
    """
    supplies = [name for name in single_lines(circuit.file) if name not in widths]
    widths = widths | {
        name: supply_width(circuit.rules, stackup, circuit.dc.currents[name]) for name in supplies
    }
    for _ in range(_ROUNDS):
        resistances = dc_resistances(circuit, stackup, gaps, widths | dict(pair_widths), {})
        circuit = with_dc(circuit, solve_dc(circuit.file, resistances))
        wider = {
            name: max(widths[name], supply_width(circuit.rules, stackup, circuit.dc.currents[name]))
            for name in supplies
        }
        if all(wider[name] == widths[name] for name in supplies):
            break
        widths = widths | wider
    return circuit, widths


def dc_resistances(
    circuit: Circuit, stackup: Stackup, gaps: Gaps, widths: Mapping[str, float], lengths: Mapping[str, float]
) -> dict[str, float]:
    """Return the resistance [ohm] of every line and strip, for :func:`layoutgen.circuit.solve_dc`.

    Args:
        circuit: The circuit.
        stackup: Substrate and copper.
        gaps: The lines' pour distances.
        widths: Widths of lines and pairs [m].
        lengths: Centre-lines that are known [m]; others follow from the angle, free lines are 10 mm.
    """
    names = [name for name in single_lines(circuit.file) if name in widths]
    worth = sections(
        stackup,
        [widths[name] for name in names],
        [gaps[name][1] for name in names],
        [gaps[name][2] for name in names],
    )
    betas = {name: section.beta for name, section in zip(names, worth, strict=True)}
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


def placed_dc(sized: SizedCircuit, lengths: Mapping[str, float]) -> SizedCircuit:
    """Return the sized circuit with the bias point that the drawn lengths give; widths stay.

    Args:
        sized: The sized circuit.
        lengths: Centre-lines of lines and pairs [m]; those left out are as in the sizing.
    """
    circuit = sized.circuit
    stackup = Stackup.of(circuit)
    gaps = {name: (line.pour_gap, line.gap_left, line.gap_right) for name, line in sized.lines.items()}
    widths = {name: line.width for name, line in sized.lines.items()}
    widths |= {name: pair.width for name, pair in sized.pairs.items()}
    solution = solve_dc(circuit.file, dc_resistances(circuit, stackup, gaps, widths, lengths))
    circuit = with_dc(circuit, solution)
    return replace(
        sized,
        circuit=circuit,
        lines=sized_lines(circuit, stackup, gaps, widths),
        pairs={
            name: replace(
                pair,
                currents=(abs(solution.currents[f"{name}:0"]), abs(solution.currents[f"{name}:1"])),
            )
            for name, pair in sized.pairs.items()
        },
    )


def strip_width(sized: SizedCircuit, current: float) -> float:
    """Return the narrowest width [m] of copper that carries a current [A], rounded up to 10 um."""
    return supply_width(sized.circuit.rules, Stackup.of(sized.circuit), current)
