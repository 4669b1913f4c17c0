"""The examples through all stages: clean as drawn."""

from __future__ import annotations

import time

import pytest

from layoutgen.checks import check
from tests.seeded_faults.harness import AMPLIFIER, TESTED, drawn


@pytest.mark.parametrize("stem", TESTED)
def test_examples_have_no_errors(stem: str) -> None:
    """Catches an example with a finding of severity error: a false alarm, or a fault of an earlier stage."""
    errors = [f"{f.rule} at {f.at}: {f.text}" for f in check(drawn(stem)).findings if f.severity == "error"]
    assert errors == []


@pytest.mark.parametrize("stem", TESTED)
def test_examples_are_judged_alike_twice(stem: str) -> None:
    """Catches findings that differ from run to run."""
    assert check(drawn(stem)) == check(drawn(stem))


def test_the_amplifier_is_judged_in_a_blink() -> None:
    """Catches checks that take longer than a person waits: 0.3 s was asked for; four times that is slack."""
    artwork = drawn(AMPLIFIER)
    check(artwork)
    start = time.process_time()
    check(artwork)
    assert time.process_time() - start < 1.2
