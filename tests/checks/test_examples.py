"""The examples through all stages: clean as drawn, and every seeded fault found."""

from __future__ import annotations

import functools
import math
import random
import time
from pathlib import Path

import pytest

from layoutgen.artwork import Artwork, draw
from layoutgen.checks import check
from layoutgen.circuit import build_circuit
from layoutgen.placement import place
from layoutgen.reading import read_inputs
from layoutgen.sizing import size_circuit
from tests.checks.seeds import ANYWHERE, WITH_BANKS, Fault

EXAMPLES = sorted((Path(__file__).parents[2] / "examples").glob("*.toml"))
AMPLIFIER = "telemetry_driver"
SEEDS = range(4)


@functools.cache
def drawn(stem: str) -> Artwork:
    """Return an example's artwork."""
    path = next(path for path in EXAMPLES if path.stem == stem)
    inputs = read_inputs(path)
    return draw(place(size_circuit(build_circuit(inputs.circuit, inputs.rules))))


@pytest.mark.parametrize("path", EXAMPLES, ids=lambda path: path.stem)
def test_examples_have_no_errors(path: Path) -> None:
    """Catches an example with a finding of severity error: a false alarm, or a fault of an earlier stage."""
    errors = [
        f"{f.rule} at {f.at}: {f.text}" for f in check(drawn(path.stem)).findings if f.severity == "error"
    ]
    assert errors == []


@pytest.mark.parametrize("path", EXAMPLES, ids=lambda path: path.stem)
def test_examples_are_judged_alike_twice(path: Path) -> None:
    """Catches findings that differ from run to run."""
    assert check(drawn(path.stem)) == check(drawn(path.stem))


def found(stem: str, fault: Fault, seed: int) -> bool:
    """Tell whether one of a fault's rules has a new finding at the fault's place."""
    clean = {(f.rule, f.items) for f in check(drawn(stem)).findings}
    seeded = fault(drawn(stem), random.Random(f"{stem} {fault.__name__} {seed}"))
    result = check(seeded.artwork)
    places = [
        math.dist(f.at, seeded.at)
        for f in result.findings
        if f.rule in seeded.rules and f.severity != "note" and f.at is not None
    ]
    assert {(f.rule, f.items) for f in result.findings} - clean, "the fault changed nothing"
    return min(places, default=math.inf) <= seeded.within


@pytest.mark.parametrize("seed", SEEDS)
@pytest.mark.parametrize("fault", (*ANYWHERE, *WITH_BANKS), ids=lambda fault: fault.__name__)
def test_every_fault_of_the_amplifier_is_found(fault: Fault, seed: int) -> None:
    """Catches a fault that goes unseen, is seen elsewhere, or by the wrong rule."""
    assert found(AMPLIFIER, fault, seed)


@pytest.mark.parametrize(
    "path", [path for path in EXAMPLES if path.stem != AMPLIFIER], ids=lambda path: path.stem
)
@pytest.mark.parametrize("fault", ANYWHERE, ids=lambda fault: fault.__name__)
def test_every_fault_of_the_small_examples_is_found(path: Path, fault: Fault) -> None:
    """Catches a fault that goes unseen on a board without parts."""
    assert found(path.stem, fault, 0)


def test_the_amplifier_is_judged_in_a_blink() -> None:
    """Catches checks that take longer than a person waits: 0.3 s was asked for; four times that is slack."""
    artwork = drawn(AMPLIFIER)
    check(artwork)
    start = time.perf_counter()
    check(artwork)
    assert time.perf_counter() - start < 1.2
