"""The sizing stage's one function."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace

from layoutgen.circuit import Circuit, solve_dc, with_dc
from layoutgen.errors import WrongInputError
from layoutgen.origin import Fault
from layoutgen.sizing.kinds import radial_names
from layoutgen.sizing.lands import chip_notes, part_lands
from layoutgen.sizing.lines import line_faults, rf_widths, sized_lines
from layoutgen.sizing.pairs import pair_fault, pair_sizes, sized_pair
from layoutgen.sizing.pours import pour_distances
from layoutgen.sizing.radials import radial_fault, sized_radial
from layoutgen.sizing.records import SizedCircuit
from layoutgen.sizing.stackup import Stackup
from layoutgen.sizing.supplies import dc_resistances, supply_width, with_supplies

__all__ = ["placed_dc", "size_circuit", "sized_beside", "strip_width"]


def size_circuit(
    circuit: Circuit,
    gaps: Mapping[str, tuple[float, float]] | None = None,
    corrections: Mapping[str, float] | None = None,
) -> SizedCircuit:
    """Return every size that follows from formulas and rules alone.

    Args:
        circuit: The circuit.
        gaps: By line or pair, the distance of the pour (left, right) as a drawing has it, infinity for none
            [m]; left out: the distance the sizing asks for, on both sides.
        corrections: By line or pair given by angle, its response correction [rad]; others are left out.

    Raises:
        WrongInputError: Substrate, impedances, widths or radii outside what the formulas cover or the board
            house can make, footprints that do not fit their parts; all in one go.
    """
    file, stackup = circuit.file, Stackup.of(circuit)
    _raise_any(stackup.faults(circuit))
    pours = pour_distances(circuit, stackup, gaps or {})
    widths = rf_widths(file, stackup, pours.gaps)
    pairs = pair_sizes(file, stackup, pours.gaps)
    found = [pair_fault(file, stackup, name, pours.gaps[name], size) for name, size in pairs.items()]
    _raise_any([*line_faults(file, stackup, pours.gaps, widths), *found])
    widths |= {name: size[0] for name, size in pairs.items()}
    circuit, widths = with_supplies(circuit, stackup, pours.gaps, widths)
    _raise_any([radial_fault(circuit, stackup, name, widths) for name in radial_names(file)])
    return SizedCircuit(
        circuit=circuit,
        lines=sized_lines(circuit, stackup, pours.gaps, widths),
        pairs={
            name: sized_pair(circuit, stackup, name, pours.gaps[name], pairs[name]) for name in file.coupled
        },
        radials={name: sized_radial(circuit, stackup, name, widths) for name in radial_names(file)},
        lands=part_lands(file, circuit.rules),
        default_pour_gap=pours.default,
        notes=(*pours.notes, *chip_notes(file, circuit.rules)),
        corrections=dict(corrections or {}),
    )


def _raise_any(faults: Sequence[Fault | None]) -> None:
    """Raise the faults, if there are any."""
    real = [fault for fault in faults if fault is not None]
    if real:
        raise WrongInputError(real)


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


def sized_beside(sized: SizedCircuit, measured: Mapping[str, tuple[float, float]]) -> SizedCircuit:
    """Return the sized circuit with what its lines are worth beside the pour as drawn; widths stay.

    Args:
        sized: The sized circuit.
        measured: By line, the pour's distance (left, right) in the drawing, infinity for none [m]; the others
            keep that of the sizing.
    """
    stackup = Stackup.of(sized.circuit)
    gaps = {}
    for name, line in sized.lines.items():
        left, right = measured.get(name, (line.gap_left, line.gap_right))
        gaps[name] = line.pour_gap, stackup.gap_or_none(left), stackup.gap_or_none(right)
    widths = {name: line.width for name, line in sized.lines.items()}
    return replace(sized, lines=sized_lines(sized.circuit, stackup, gaps, widths))


def strip_width(sized: SizedCircuit, current: float) -> float:
    """Return the narrowest width [m] of copper that carries a current [A], rounded up to 10 um."""
    return supply_width(sized.circuit.rules, Stackup.of(sized.circuit), current)
