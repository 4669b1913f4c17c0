"""Fixtures: the hand-made boards and the measures, loaded by path."""

from __future__ import annotations

import importlib.util
import sys
from pathlib import Path
from types import ModuleType

import pytest

_HERE = Path(__file__).parent


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
