"""Fixtures: the hand-made boards and the measures, loaded by path."""

from __future__ import annotations

import importlib.util
import sys
from functools import cache
from pathlib import Path
from types import ModuleType

import pytest

from layoutgen.artwork import Artwork, draw
from layoutgen.circuit import build_circuit
from layoutgen.placement import place
from layoutgen.reading import read_inputs
from layoutgen.sizing import size_circuit

_HERE = Path(__file__).parent
EXAMPLES = sorted((_HERE.parents[1] / "examples").glob("*.toml"))


@cache
def _drawn(path: Path) -> Artwork:
    inputs = read_inputs(path)
    return draw(place(size_circuit(build_circuit(inputs.circuit, inputs.rules))))


@pytest.fixture(params=EXAMPLES, ids=lambda path: path.stem)
def artwork(request: pytest.FixtureRequest) -> Artwork:
    """The artwork of one example, drawn once."""
    return _drawn(request.param)


def _load(name: str) -> ModuleType:
    key = f"artwork_tests_{name}"
    if key not in sys.modules:
        spec = importlib.util.spec_from_file_location(key, _HERE / f"{name}.py")
        assert spec is not None and spec.loader is not None
        module = importlib.util.module_from_spec(spec)
        sys.modules[key] = module
        spec.loader.exec_module(module)
    return sys.modules[key]


@pytest.fixture(scope="session")
def boards() -> ModuleType:
    """Boards built by hand."""
    return _load("boards")


@pytest.fixture(scope="session")
def measures() -> ModuleType:
    """Measures that share nothing with the code that draws."""
    return _load("measures")


@pytest.fixture(scope="session")
def random_boards() -> ModuleType:
    """Seeded random boards."""
    return _load("random_boards")
