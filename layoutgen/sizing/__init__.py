"""Fourth stage: every size that follows from formulas and rules alone.

In: a :class:`~layoutgen.circuit.Circuit`. Out: a :class:`SizedCircuit` with widths, gaps, radii, phase
constants, losses, the refined bias point, the lands of every part, and the pour's distance from each line.
:mod:`layoutgen.sizing.budget` turns angles into lengths once headings and bends are known. It places
nothing, and knows of neighbours only the pour.
"""

from layoutgen.sizing.budget import (
    Arm,
    bend_entries,
    budget_for_length,
    correction_entries,
    cross_order,
    default_arms,
    default_budgets,
    default_junctions,
    halved,
    junction_corrections,
    junction_flags,
    line_budget,
    open_end_correction,
    pad_correction,
    tee_order,
    via_correction,
)
from layoutgen.sizing.records import (
    BudgetEntry,
    Land,
    Lands,
    SizedCircuit,
    SizedLine,
    SizedPair,
    SizedRadial,
)
from layoutgen.sizing.size import placed_dc, size_circuit, sized_beside, strip_width

__all__ = [
    "Arm",
    "BudgetEntry",
    "Land",
    "Lands",
    "SizedCircuit",
    "SizedLine",
    "SizedPair",
    "SizedRadial",
    "bend_entries",
    "budget_for_length",
    "correction_entries",
    "cross_order",
    "default_arms",
    "default_budgets",
    "default_junctions",
    "halved",
    "junction_corrections",
    "junction_flags",
    "line_budget",
    "open_end_correction",
    "pad_correction",
    "placed_dc",
    "size_circuit",
    "sized_beside",
    "strip_width",
    "tee_order",
    "via_correction",
]
