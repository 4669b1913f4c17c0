"""Random circuits, without and with loops: a legal placement or a reason, never a crash or a wrong length."""

from __future__ import annotations

import random
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from layoutgen.circuit import build_circuit
from layoutgen.errors import InfeasibleError, WrongInputError
from layoutgen.placement import place
from layoutgen.reading import inputs_from_data
from layoutgen.sizing import size_circuit
from tests.placement.legal import faults
from tests.placement.random_circuits import RandomCircuit, random_circuit

CASES = 300
"""Tried at every run; several thousand more, by seed, when the placer has changed."""


def judge(data: dict[str, Any]) -> None:
    """Place a circuit; it must be legal, or refused with element, reason and remedy."""
    inputs = inputs_from_data(data)
    try:
        placement = place(size_circuit(build_circuit(inputs.circuit, inputs.rules)))
    except InfeasibleError as error:
        assert error.element and error.reason and error.remedy
        return
    except WrongInputError as error:
        assert all(fault.key and fault.allowed for fault in error.faults)
        return
    assert faults(placement) == []
    size = data["board"].get("size")
    if size is not None:
        assert [f"{placement.width // 1_000_000} mm", f"{placement.height // 1_000_000} mm"] == size


@settings(max_examples=CASES, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(st.integers(0, 2**32 - 1))
def test_a_random_circuit_is_legal_or_refused_with_a_reason(seed: int) -> None:
    """Catches what hand-made circuits do not show: overlaps, loops that do not close, crashes."""
    judge(random_circuit(random.Random(seed)))


@pytest.mark.parametrize("loops", [0, 3])
def test_a_large_random_circuit(loops: int) -> None:
    """Catches a search that grows too slow, or loses its way, with some 40 elements."""
    data = RandomCircuit(random.Random(7), 36, loops).data()
    assert 36 <= sum(len(data.get(key, ())) for key in ("lines", "parts", "coupled")) <= 50
    judge(data)
