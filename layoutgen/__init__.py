"""layoutgen: from a finished microwave schematic and a board house's rules to microstrip artwork.

The flow, each stage's result going into the next one:

1. :func:`read_inputs` reads the circuit file and the rule file it names, or tells all their faults at once
   (:func:`inputs_from_data` takes the same tables built in code).
2. :func:`build_circuit` finds nets, banks and the bias point.
3. :func:`size_circuit` works out widths, phase constants and pads; angles become lengths with a budget.
4. :func:`place` gives every line its centre-line and every part its pose.
5. :func:`draw` makes copper, ground pour, vias, mask, paste and legend.
6. :func:`check` compares the drawing with the rules and the nets, from its polygons.
7. :func:`respond` computes what the schematic does, and what the drawn board does.
8. :func:`write` leaves all files in a folder, or none.

:func:`run` does 1 to 7 and lets pour and widths agree. In a notebook an artwork shows itself.

>>> from layoutgen import build_circuit, check, draw, inputs_from_data, place, respond, size_circuit
>>> inputs = inputs_from_data({
...     "format": 1,
...     "design": {"title": "Gauge link, matching section", "frequency": "2.245 GHz",
...                "band": ["2.20 GHz", "2.29 GHz"]},
...     "substrate": {"relative_permittivity": 3.55, "loss_tangent": 0.0027, "height": "0.508 mm",
...                   "copper_thickness": "35 um"},
...     "board": {"rules": "two-layer-standard"},
...     "ports": {"antenna": {"net": "a", "edge": "west"}, "gauge": {"net": "b", "edge": "east"}},
...     "lines": {"section": {"nets": ["a", "b"], "impedance": "50 ohm", "angle": "90 deg"}},
... })
>>> circuit = build_circuit(inputs.circuit, inputs.rules)
>>> sized = size_circuit(circuit)
>>> print(f"{sized.lines['section'].width * 1e3:.2f} mm wide")
1.10 mm wide
>>> artwork = draw(place(sized))
>>> [finding.rule for finding in check(artwork).findings if finding.counts]
[]
>>> response = respond(artwork)
>>> response.ports
('antenna', 'gauge')
"""

from __future__ import annotations

import importlib
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from layoutgen.artwork import Artwork, draw
    from layoutgen.checks import CheckResult, Finding, check
    from layoutgen.circuit import Circuit, build_circuit
    from layoutgen.errors import InfeasibleError, LayoutgenError, WrongInputError
    from layoutgen.pipeline import run, run_inputs
    from layoutgen.placement import Placement, place
    from layoutgen.reading import (
        CircuitFile,
        Inputs,
        RuleFile,
        circuit_from_data,
        inputs_from_data,
        read_circuit,
        read_inputs,
        read_rules,
        rules_from_data,
    )
    from layoutgen.response import Response, respond
    from layoutgen.sizing import SizedCircuit, default_budgets, size_circuit
    from layoutgen.writers import Job, Result, encode, write

__version__ = "0.1.0"

_HOMES = {
    "Artwork": "artwork",
    "CheckResult": "checks",
    "Circuit": "circuit",
    "CircuitFile": "reading",
    "Finding": "checks",
    "InfeasibleError": "errors",
    "Inputs": "reading",
    "Job": "writers",
    "LayoutgenError": "errors",
    "Placement": "placement",
    "Response": "response",
    "Result": "writers",
    "RuleFile": "reading",
    "SizedCircuit": "sizing",
    "WrongInputError": "errors",
    "build_circuit": "circuit",
    "check": "checks",
    "circuit_from_data": "reading",
    "default_budgets": "sizing",
    "draw": "artwork",
    "encode": "writers",
    "inputs_from_data": "reading",
    "place": "placement",
    "read_circuit": "reading",
    "read_inputs": "reading",
    "read_rules": "reading",
    "respond": "response",
    "rules_from_data": "reading",
    "run": "pipeline",
    "run_inputs": "pipeline",
    "size_circuit": "sizing",
    "write": "writers",
}
"""Module of each public name; imported when the name is first asked for, so that start-up stays fast."""

__all__ = [
    "Artwork",
    "CheckResult",
    "Circuit",
    "CircuitFile",
    "Finding",
    "InfeasibleError",
    "Inputs",
    "Job",
    "LayoutgenError",
    "Placement",
    "Response",
    "Result",
    "RuleFile",
    "SizedCircuit",
    "WrongInputError",
    "build_circuit",
    "check",
    "circuit_from_data",
    "default_budgets",
    "draw",
    "encode",
    "inputs_from_data",
    "place",
    "read_circuit",
    "read_inputs",
    "read_rules",
    "respond",
    "rules_from_data",
    "run",
    "run_inputs",
    "size_circuit",
    "write",
]


def __getattr__(name: str) -> Any:
    """Import a public name when it is first asked for."""
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(importlib.import_module(f"{__name__}.{_HOMES[name]}"), name)


def __dir__() -> list[str]:
    """Return the public names."""
    return sorted({*globals(), *__all__})
