"""Builds and sizes small circuits from the tables of a circuit file."""

from __future__ import annotations

import copy
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from layoutgen.circuit import Circuit, build_circuit
from layoutgen.reading import inputs_from_data, read_inputs
from layoutgen.sizing import SizedCircuit, size_circuit

BASE: dict[str, Any] = {
    "format": 1,
    "design": {"title": "test", "frequency": "2 GHz", "band": ["1.9 GHz", "2.1 GHz"]},
    "substrate": {
        "relative_permittivity": 3.66,
        "loss_tangent": 0.003,
        "height": "0.5 mm",
        "copper_thickness": "17.5 um",
    },
    "board": {"rules": "two-layer-standard"},
    "ports": {"p": {"net": "a"}, "q": {"net": "b"}},
    "lines": {"x": {"nets": ["a", "b"], "impedance": "50 ohm", "angle": "30 deg"}},
}

RULES: dict[str, Any] = {
    "format": 1,
    "name": "test class",
    "copper": {"min_width": "0.1 mm", "min_gap": "0.1 mm"},
    "holes": {"drills": ["0.3 mm"]},
    "vias": {"diameter": "0.6 mm", "drill": "0.3 mm"},
}


@pytest.fixture(scope="session")
def build() -> Callable[..., Circuit]:
    """Builds a circuit; tables given replace those of the base, ``substrate`` and ``design`` are merged."""

    def built(rules: dict[str, Any] | None = None, folder: Path | None = None, **tables: Any) -> Circuit:
        data = copy.deepcopy(BASE)
        for name in ("substrate", "design"):
            data[name].update(tables.pop(name, {}))
        both = {**RULES, **(rules or {})}
        found = inputs_from_data({**data, **tables}, rules=both, folder=folder, name="c.toml")
        return build_circuit(found.circuit, found.rules)

    return built


@pytest.fixture(scope="session")
def size(build: Callable[..., Circuit]) -> Callable[..., SizedCircuit]:
    """Sizes a circuit; see ``build``."""
    return lambda gaps=None, **tables: size_circuit(build(**tables), gaps)


@pytest.fixture(scope="session")
def amplifier() -> SizedCircuit:
    """The sized amplifier of the examples."""
    found = read_inputs(Path(__file__).parents[2] / "examples" / "telemetry_driver.toml")
    return size_circuit(build_circuit(found.circuit, found.rules))
