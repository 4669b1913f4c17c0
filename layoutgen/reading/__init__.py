"""Reading: circuit file and rule file in, checked records out, or every fault of both at once.

In: paths, or the same data built in code. Out: :class:`CircuitFile` and :class:`RuleFile`, frozen, in SI,
with the line of each key. Not done here: junctions, widths, lengths, anything that needs a formula; the
contents of data files.
"""

from __future__ import annotations

from layoutgen.reading.circuit_records import (
    Board,
    CircuitFile,
    CoupledPair,
    Cutout,
    Design,
    Footprint,
    Ground,
    Hint,
    Hole,
    Layout,
    Line,
    Pad,
    Part,
    PinCurrent,
    Port,
    Rating,
    Substrate,
    Tolerance,
)
from layoutgen.reading.read import (
    Inputs,
    circuit_from_data,
    inputs_from_data,
    read_circuit,
    read_inputs,
    read_rules,
    rules_from_data,
    shipped_rules,
)
from layoutgen.reading.routes import Route
from layoutgen.reading.rule_names import KEYLESS_RULES, RULE_NAMES
from layoutgen.reading.rule_records import (
    BankRules,
    CopperRules,
    CurrentRules,
    FenceRules,
    HoleRules,
    LandPatternRules,
    LegendRules,
    MaskRules,
    RuleFile,
    SpacingRules,
    ViaRules,
    VoltageRules,
    Waiver,
)
from layoutgen.reading.schema import schema
from layoutgen.reading.source import SourceMap

__all__ = [
    "KEYLESS_RULES",
    "RULE_NAMES",
    "BankRules",
    "Board",
    "CircuitFile",
    "CopperRules",
    "CoupledPair",
    "CurrentRules",
    "Cutout",
    "Design",
    "FenceRules",
    "Footprint",
    "Ground",
    "Hint",
    "Hole",
    "HoleRules",
    "Inputs",
    "LandPatternRules",
    "Layout",
    "LegendRules",
    "Line",
    "MaskRules",
    "Pad",
    "Part",
    "PinCurrent",
    "Port",
    "Rating",
    "Route",
    "RuleFile",
    "SourceMap",
    "SpacingRules",
    "Substrate",
    "Tolerance",
    "ViaRules",
    "VoltageRules",
    "Waiver",
    "circuit_from_data",
    "inputs_from_data",
    "read_circuit",
    "read_inputs",
    "read_rules",
    "rules_from_data",
    "schema",
    "shipped_rules",
]
