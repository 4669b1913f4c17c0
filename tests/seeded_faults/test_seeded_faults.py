"""Every seeded fault is found at the right place by the right rule, and nothing on the unharmed boards."""

from __future__ import annotations

import os

import pytest

from tests.seeded_faults.harness import (
    EVERYWHERE,
    KINDS,
    QUICK,
    TESTED,
    false_alarms,
    kind_of,
    missed,
    seeded,
)

SEEDS = int(os.environ.get("SEEDED_FAULTS", "300"))


@pytest.mark.parametrize("first", range(len(KINDS)), ids=lambda n: KINDS[n].__name__)
def test_every_fault_is_found(first: int) -> None:
    """Catches a kind of fault that goes unseen, is seen elsewhere, or by the wrong rule."""
    assert [text for seed in range(first, SEEDS, len(KINDS)) if (text := missed(seed))] == []


def test_at_least_25_kinds_and_every_example() -> None:
    """Catches kinds or examples left out of the harness."""
    assert len(KINDS) >= 25
    assert {kind_of(seed) for seed in range(SEEDS)} == set(KINDS)
    assert {seeded(seed).stem for seed in range(80) if kind_of(seed) in EVERYWHERE} == set(QUICK)


@pytest.mark.parametrize("stem", TESTED)
def test_unharmed_boards_have_no_finding(stem: str) -> None:
    """Catches rules that find faults where there are none: 100 % of the seeds would then mean nothing."""
    assert false_alarms(stem) == []
