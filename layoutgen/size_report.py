"""What ``layoutgen size`` says: tables and JSON of a circuit that has sizes but no place yet.

Lengths are those of lines drawn straight between the junctions as the schematic has them; bends and free
lines are known only once the circuit is placed.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from layoutgen.numbers import fixed, json_text, mm
from layoutgen.sizing import (
    BudgetEntry,
    SizedCircuit,
    SizedLine,
    SizedPair,
    SizedRadial,
    default_budgets,
    default_junctions,
    junction_flags,
)
from layoutgen.units import to_nm

__all__ = ["SizeTable", "size_json", "size_tables"]

Budgets = Mapping[str, tuple[float, tuple[BudgetEntry, ...]]]
Entry = dict[str, object]


@dataclass(frozen=True, slots=True)
class SizeTable:
    """One table: title, headings, rows of text."""

    title: str
    heads: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]


def size_tables(sized: SizedCircuit) -> list[SizeTable]:
    """Return the tables of lines, pairs, radial stubs, length budgets and flags; empty ones are left out.

    Raises:
        WrongInputError: Lines whose corrections leave no length.
    """
    budgets = default_budgets(sized)
    tables = [
        _lines(sized, budgets),
        _pairs(sized, budgets),
        _radials(sized),
        _budgets(sized, budgets),
        _flags(sized),
    ]
    return [table for table in tables if table.rows]


def size_json(sized: SizedCircuit) -> str:
    """Return the same as JSON text, with the keys of ``report.json`` as far as they are known.

    Raises:
        WrongInputError: Lines whose corrections leave no length.
    """
    budgets = default_budgets(sized)
    names = sized.circuit.file.lines
    return json_text(
        {
            "format": 1,
            "lines": [
                _radial_entry(sized.radials[name])
                if name in sized.radials
                else _line_entry(sized.lines[name], budgets[name])
                for name in names
            ],
            "coupled": [_pair_entry(pair, budgets[pair.name]) for pair in sized.pairs.values()],
        }
    )


def _lines(sized: SizedCircuit, budgets: Budgets) -> SizeTable:
    heads = (
        "line", "nets", "asked", "ohm", "spread %", "width mm", "deg", "length mm", "pour gap mm",
        "permittivity", "loss dB", "current A", "rise K",
    )  # fmt: skip
    rows = tuple(_line_row(line, *budgets[line.name]) for line in sized.lines.values())
    return SizeTable("Lines", heads, rows)


def _line_row(line: SizedLine, length: float, entries: Sequence[BudgetEntry]) -> tuple[str, ...]:
    angle = math.fsum(entry.angle for entry in entries) if line.angle is None else line.angle
    return (
        line.name,
        ",".join(line.nets),
        _asked(line),
        fixed(line.impedance, 2),
        fixed(100.0 * line.spread, 2),
        _mm(line.width),
        "free" if line.free else fixed(math.degrees(angle), 2),
        "free" if line.free else _mm(length),
        _mm(line.pour_gap),
        fixed(line.effective_permittivity, 4),
        "free" if line.free else fixed(line.loss * length, 4),
        fixed(abs(line.current), 4),
        fixed(line.temperature_rise, 1),
    )


def _asked(line: SizedLine) -> str:
    """Return what the circuit file asked of a line: impedance and angle or length, as far as given."""
    cross = f"{line.asked_impedance:g} ohm" if line.asked_impedance is not None else "width"
    if line.free:
        return f"{cross}, free"
    if line.length is not None:
        return f"{cross}, {_mm(line.length)} mm"
    return f"{cross}, {math.degrees(line.angle or 0.0):g} deg"


def _flags(sized: SizedCircuit) -> SizeTable:
    """Return every formula that is used outside its range, by line or junction."""
    rows = [(line.name, flag) for line in sized.lines.values() for flag in line.flags]
    rows += [(pair.name, flag) for pair in sized.pairs.values() for flag in pair.flags]
    rows += [(stub.name, flag) for stub in sized.radials.values() for flag in stub.flags]
    for net in sized.circuit.nets.values():
        for arms in default_junctions(sized, net.name):
            rows += [(net.name, flag) for flag in junction_flags(sized, net.name, arms)]
    return SizeTable("Outside a formula's range", ("where", "formula, found (holds for)"), tuple(rows))


def _pairs(sized: SizedCircuit, budgets: Budgets) -> SizeTable:
    rows = tuple(
        (
            pair.name,
            ",".join(pair.nets),
            fixed(pair.even_impedance, 2),
            fixed(pair.odd_impedance, 2),
            _mm(pair.width),
            _mm(pair.gap),
            _mm(budgets[pair.name][0]),
        )
        for pair in sized.pairs.values()
    )
    return SizeTable(
        "Coupled pairs", ("pair", "nets", "even ohm", "odd ohm", "width mm", "gap mm", "length mm"), rows
    )


def _radials(sized: SizedCircuit) -> SizeTable:
    rows = tuple(
        (r.name, r.nets[0], fixed(math.degrees(r.sector), 2), _mm(r.inner_radius), _mm(r.outer_radius))
        for r in sized.radials.values()
    )
    return SizeTable("Radial stubs", ("stub", "net", "sector deg", "inner mm", "outer mm"), rows)


def _budgets(sized: SizedCircuit, budgets: Budgets) -> SizeTable:
    rows = tuple(
        (name, entry.cause, fixed(math.degrees(entry.angle), 3), entry.at or "-")
        for name in (*sized.lines, *sized.pairs)
        for entry in budgets[name][1]
    )
    return SizeTable("Length budgets", ("line", "cause", "deg", "at"), rows)


def _line_entry(line: SizedLine, budget: tuple[float, Sequence[BudgetEntry]]) -> Entry:
    length, entries = budget
    angle = math.fsum(entry.angle for entry in entries) if line.angle is None else line.angle
    return {
        "name": line.name,
        "nets": list(line.nets),
        "impedance_ohm": fixed(line.impedance),
        "angle_deg": None if line.free else fixed(math.degrees(angle)),
        "width_mm": mm(to_nm(line.width)),
        "pour_gap_mm": [_gap(line.gap_left), _gap(line.gap_right)],
        "effective_permittivity": fixed(line.effective_permittivity),
        "centre_line_mm": None if line.free else mm(to_nm(length)),
        "current_a": fixed(abs(line.current)),
        "asked": _asked(line),
        "loss_db": None if line.free else fixed(line.loss * length),
        "temperature_rise_k": fixed(line.temperature_rise),
        "model_spread": fixed(line.spread),
        "flags": list(line.flags),
        "budget": _entries(entries),
    }


def _radial_entry(radial: SizedRadial) -> Entry:
    return {
        "name": radial.name,
        "nets": list(radial.nets),
        "sector_deg": fixed(math.degrees(radial.sector)),
        "inner_radius_mm": mm(to_nm(radial.inner_radius)),
        "outer_radius_mm": mm(to_nm(radial.outer_radius)),
    }


def _pair_entry(pair: SizedPair, budget: tuple[float, Sequence[BudgetEntry]]) -> Entry:
    length, entries = budget
    return {
        "name": pair.name,
        "nets": list(pair.nets),
        "even_impedance_ohm": fixed(pair.even_impedance),
        "odd_impedance_ohm": fixed(pair.odd_impedance),
        "width_mm": mm(to_nm(pair.width)),
        "gap_mm": mm(to_nm(pair.gap)),
        "effective_permittivity": [fixed(pair.permittivity_even), fixed(pair.permittivity_odd)],
        "centre_line_mm": mm(to_nm(length)),
        "current_a": [fixed(abs(current)) for current in pair.currents],
        "budget": _entries(entries),
    }


def _entries(entries: Sequence[BudgetEntry]) -> list[Entry]:
    return [{"cause": e.cause, "angle_deg": fixed(math.degrees(e.angle)), "at": e.at} for e in entries]


def _gap(metres: float) -> str | None:
    return mm(to_nm(metres)) if math.isfinite(metres) else None


def _mm(metres: float) -> str:
    return fixed(metres * 1e3, 3) if math.isfinite(metres) else "none"
