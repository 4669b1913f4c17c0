"""Builds small circuits from the tables of a circuit file."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest

from layoutgen.circuit import Circuit, build_circuit
from layoutgen.reading import CircuitFile, Inputs, inputs_from_data

BASE = {
    "format": 1,
    "design": {"title": "test", "frequency": "2 GHz", "band": ["1.9 GHz", "2.1 GHz"]},
    "substrate": {
        "relative_permittivity": 3.55,
        "loss_tangent": 0.0027,
        "height": "0.508 mm",
        "copper_thickness": "35 um",
    },
    "board": {"rules": "two-layer-standard"},
}

FET = {
    "pads": {
        "gate": {"at": ["-2 mm", "0 mm"], "size": ["1 mm", "1 mm"], "heading": "west"},
        "drain": {"at": ["2 mm", "0 mm"], "size": ["1 mm", "1 mm"], "heading": "east"},
        "source": {"at": ["0 mm", "0 mm"], "size": ["1 mm", "1 mm"], "ground": "vias"},
    }
}


def inputs(**tables: Any) -> Inputs:
    """Return the records of a circuit whose tables are given."""
    return inputs_from_data({**BASE, "footprints": {"fet": FET}, **tables}, name="c.toml")


@pytest.fixture(scope="session")
def read() -> Callable[..., CircuitFile]:
    """Reads a circuit from its tables."""
    return lambda **tables: inputs(**tables).circuit


@pytest.fixture(scope="session")
def build() -> Callable[..., Circuit]:
    """Builds a circuit from its tables."""

    def built(**tables: Any) -> Circuit:
        found = inputs(**tables)
        return build_circuit(found.circuit, found.rules)

    return built
