"""Numbers as text in fixed decimals, and the JSON made of them."""

from __future__ import annotations

import json
from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from layoutgen.numbers import Fixed, fixed, json_text, mm, mm_short

VALUES = st.recursive(
    st.none() | st.booleans() | st.integers(-(10**12), 10**12) | st.text(max_size=8),
    lambda inner: st.lists(inner, max_size=5) | st.dictionaries(st.text(max_size=5), inner, max_size=5),
    max_leaves=25,
)


@given(st.integers(-(10**10), 10**10))
def test_millimetres_are_exact(nm: int) -> None:
    """A coordinate that passes through a float loses its last digit on large boards."""
    assert Decimal(mm(nm)) == Decimal(nm) / 10**6
    assert Decimal(mm_short(nm)) == Decimal(nm) / 10**6
    assert len(mm(nm).split(".")[1]) == 6


@pytest.mark.parametrize(
    ("value", "text"), [(-1e-12, "0.000000"), (-0.0, "0.000000"), (-1.5e-6, "-0.000002")]
)
def test_no_negative_zero(value: float, text: str) -> None:
    """A sign that flips with the last bit makes two runs differ."""
    assert fixed(value) == text


@pytest.mark.parametrize("value", [float("nan"), float("inf"), -float("inf")])
def test_what_is_not_finite_is_refused(value: float) -> None:
    """NaN in a file is no JSON and no coordinate."""
    with pytest.raises(ValueError, match="cannot be written"):
        fixed(value)


@given(VALUES)
def test_json_reads_back(value: object) -> None:
    """Own text for numbers must not break strings, nesting or empty containers."""
    assert json.loads(json_text(value)) == value


def test_fixed_numbers_keep_their_zeros() -> None:
    """Written by the library they would lose their decimals or gain quotes."""
    assert (
        json_text({"x_mm": mm(12_500_000), "y": [Fixed("1.0"), None]})
        == '{"x_mm": 12.500000, "y": [1.0, null]}'
    )


def test_bare_floats_are_refused() -> None:
    """Their decimals are the caller's to choose."""
    with pytest.raises(TypeError):
        json_text([0.1])
