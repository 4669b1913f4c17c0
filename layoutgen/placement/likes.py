"""Like lines at loops: one cross-section for all of them, so that the loops can close exactly.

The pour beside the lines of a loop is not the same everywhere, and with it the width that gives the impedance
asked for differs a little from line to line, and the tees at the loop's corners with it. Opposite sides of a
hybrid would then differ in length, and four straight lines would no longer meet. Where a loop does not
close for that reason, lines in and at loops of which the same is asked share the cross-section of the first
of them; what the others' own pour would have asked for is told in a note.
"""

from __future__ import annotations

from dataclasses import replace

from layoutgen.circuit import Circuit
from layoutgen.placement.loops import find_loops
from layoutgen.sizing import SizedCircuit, SizedLine

__all__ = ["Note", "with_like_lines"]

Note = tuple[str, str, str]

_LEAST = 5e-10  # widths that differ by less [m] are equal on the grid


def with_like_lines(sized: SizedCircuit) -> tuple[SizedCircuit, tuple[Note, ...]]:
    """Return the circuit with one cross-section for like lines at loops, and a note for each changed."""
    lines = dict(sized.lines)
    notes = []
    firsts: dict[object, str] = {}
    for name in _at_loops(sized):
        first = firsts.setdefault(_request(sized.circuit, name), name)
        if _differ(lines[first], lines[name]):
            notes.append(_note(lines[first], lines[name]))
            lines[name] = _like(lines[first], lines[name])
    return (replace(sized, lines=lines) if notes else sized), tuple(notes)


def _at_loops(sized: SizedCircuit) -> list[str]:
    """Return the lines that lie on loops drawn as clusters, or meet them, in file order."""
    nets = {net for cluster in find_loops(sized).clusters for net in cluster.nets}
    return [name for name, line in sized.lines.items() if nets & set(line.nets)]


def _request(circuit: Circuit, name: str) -> object:
    """Return what the file asks of a line."""
    record = circuit.file.lines[name]
    return record.impedance, record.width, record.angle, record.length, record.kind, record.gap


def _differ(a: SizedLine, b: SizedLine) -> bool:
    return abs(a.width - b.width) > _LEAST or abs(a.beta / b.beta - 1.0) > 1e-9


def _like(first: SizedLine, other: SizedLine) -> SizedLine:
    """Return a line with the cross-section of another one; nets, current and pour stay its own."""
    return replace(
        other,
        width=first.width,
        impedance=first.impedance,
        effective_permittivity=first.effective_permittivity,
        beta=first.beta,
        mitre_percent=first.mitre_percent,
        bend_length=first.bend_length,
        loss=first.loss,
    )


def _note(first: SizedLine, other: SizedLine) -> Note:
    """Return what a line's own pour would have asked for instead."""
    text = (
        f"{other.name} is drawn like {first.name} at the same loops, {first.width * 1e3:.4f} mm wide; "
        f"its own pour would ask for {other.width * 1e3:.4f} mm"
    )
    return "assumption.pour", other.name, text
