"""Corporate feeds: dividers in ranks, symmetric, in file order, and no slower than the circuit grows."""

from __future__ import annotations

import importlib.util
import time
from pathlib import Path
from types import ModuleType
from typing import Any

import pytest

from layoutgen.circuit import build_circuit
from layoutgen.placement import Placement, place
from layoutgen.reading import inputs_from_data
from layoutgen.sizing import size_circuit
from tests.placement.legal import faults

SCRIPT = Path(__file__).parents[2] / "examples" / "corporate.py"


def script() -> ModuleType:
    """Return the example as a module."""
    spec = importlib.util.spec_from_file_location("corporate", SCRIPT)
    assert spec is not None and spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def placed(ways: int) -> Placement:
    data: dict[str, Any] = script().feed(ways)
    inputs = inputs_from_data(data)
    return place(size_circuit(build_circuit(inputs.circuit, inputs.rules)))


@pytest.mark.parametrize("ways", [2, 4, 8, 16])
def test_a_feed_is_legal_and_its_own_mirror_image(ways: int) -> None:
    """Catches branches without room, outputs out of order, ranks that differ, arms of different length."""
    placement = placed(ways)
    assert faults(placement) == []
    axis = placement.ports["transmitter"].y
    outputs = [port.y for name, port in placement.ports.items() if name != "transmitter"]
    assert outputs == sorted(outputs)
    assert [2 * axis - y for y in reversed(outputs)] == outputs
    corners = sorted(point for line in placement.lines.values() for point in line.path)
    assert sorted((x, 2 * axis - y) for x, y in corners) == corners


def test_all_ways_to_the_outputs_are_equally_long() -> None:
    """Catches a free line longer in one branch than in another: the outputs would not be in phase."""
    placement = placed(8)
    lengths = [
        sum(line.centre_line for name, line in placement.lines.items() if _is_on_way(name, tag))
        for tag in ("aaa", "aab", "aba", "abb", "baa", "bab", "bba", "bbb")
    ]
    assert max(lengths) - min(lengths) <= 4


def _is_on_way(name: str, tag: str) -> bool:
    """Tell whether a line lies on the way to an output."""
    return any(name in (f"arm{tag[:k]}", f"on{tag[:k]}", f"out{tag[:k]}") for k in range(1, len(tag) + 1))


def test_time_grows_no_faster_than_the_feed() -> None:
    """Catches a search whose time grows with the square of the circuit: from 8 to 32 ways, N^1.3 at most."""
    placed(2)  # imports
    seconds = []
    for ways in (8, 32):
        start = time.process_time()
        placed(ways)
        seconds.append(time.process_time() - start)
    assert seconds[1] < seconds[0] * 4**1.3
