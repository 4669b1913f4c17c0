"""Circuits with loops: legal, closed to the nanometre, symmetric where the circuit is."""

from __future__ import annotations

import math
import re
from pathlib import Path
from typing import Any

import pytest

from layoutgen.artwork import draw
from layoutgen.circuit import build_circuit
from layoutgen.errors import InfeasibleError
from layoutgen.pipeline import measured_gaps
from layoutgen.placement import Placement, place
from layoutgen.reading import inputs_from_data, read_inputs
from layoutgen.sizing import size_circuit
from tests.placement.circuits import LOOPS, divider, hybrid
from tests.placement.legal import faults
from tests.placement.loop_circuits import ASIDE, FLANGE, LARGE, SMALL, between_dividers, pair_of_resistors

EXAMPLES = Path(__file__).parents[2] / "examples"
BOARDS = [EXAMPLES / f"{name}.toml" for name in ("alumina_filter", "balanced_stage")]


def placed(data: dict[str, Any]) -> Placement:
    inputs = inputs_from_data(data)
    return place(size_circuit(build_circuit(inputs.circuit, inputs.rules)))


@pytest.mark.parametrize("name", LOOPS)
def test_every_kind_of_loop_is_legal(name: str) -> None:
    """Catches a loop that does not close, a wrong length, overlaps, parts apart from their lines."""
    assert faults(placed(LOOPS[name])) == []


@pytest.mark.parametrize("name", LARGE)
def test_loops_through_transistors_and_bowed_lines_are_legal(name: str) -> None:
    """Catches such loops that find no place, or one that does not close once the pour is known."""
    inputs = inputs_from_data(LARGE[name])
    circuit = build_circuit(inputs.circuit, inputs.rules)
    first = place(size_circuit(circuit))
    assert faults(first) == []
    gaps = dict.fromkeys(list(first.lines)[:2], (2e-3, 2.1e-3))
    again = place(size_circuit(circuit, gaps=gaps), first.choices)
    assert faults(again) == []


def test_two_stages_between_dividers_are_mirror_images() -> None:
    """Catches branches laid one after the other, each as it happens to fit."""
    placement = placed(between_dividers(SMALL))
    axis = placement.ports["p1"].y
    for name in ("di", "i", "g", "d", "o", "do"):
        mirrored = [(x, 2 * axis - y) for x, y in placement.lines[f"{name}1"].path]
        assert mirrored == [*placement.lines[f"{name}2"].path]


@pytest.mark.parametrize("data", [between_dividers(FLANGE), pair_of_resistors(FLANGE, "75 deg")])
def test_parts_of_one_loop_are_pushed_apart(data: dict[str, Any]) -> None:
    """Catches a linear program that knows nothing of the bodies between its nodes."""
    parts = placed(data).parts
    first, second = (parts[name].cutout for name in ("Q1", "Q2"))
    assert first is not None and second is not None
    assert first.polygon().distance(second.polygon()) > 2.7e6  # two screws lie between them


def test_footprints_in_loops_turn_but_are_never_mirrored() -> None:
    """Catches a loop laid mirrored with a transistor in it whose leads lie at opposite corners."""
    for part in placed(pair_of_resistors(ASIDE, "45 deg")).parts.values():
        if part.name.startswith("Q"):
            pads = {pad.pin: (pad.x - part.x, pad.y - part.y) for pad in part.pads}
            (gx, gy), (dx, dy), (sx, sy) = pads["g"], pads["d"], pads["s"]
            assert (dx - gx) * (sy - gy) - (dy - gy) * (sx - gx) < 0  # s lies right of the way from g to d


@pytest.mark.parametrize("path", BOARDS, ids=lambda path: path.stem)
def test_whole_boards_with_loops_are_legal(path: Path) -> None:
    """Catches clusters, closing lines and pairs that work alone but not together, once the pour is known."""
    inputs = read_inputs(path)
    circuit = build_circuit(inputs.circuit, inputs.rules)
    first = place(size_circuit(circuit))
    assert faults(first) == []
    again = place(size_circuit(circuit, gaps=measured_gaps(draw(first))), first.choices)
    assert faults(again) == []


def test_an_equal_divider_is_its_own_mirror_image() -> None:
    """Catches arms of different shape, or outputs that are not opposite each other."""
    placement = placed(LOOPS["equal divider"])
    axis = placement.ports["p1"].y
    for first, second in (("arm_1", "arm_2"), ("out_1", "out_2")):
        mirrored = tuple((x, 2 * axis - y) for x, y in placement.lines[first].path)
        assert mirrored == placement.lines[second].path


def test_a_hybrid_is_a_rectangle() -> None:
    """Catches needless bends: four straight lines close a hybrid."""
    placement = placed(LOOPS["branch-line hybrid"])
    assert all(not placement.lines[name].bends for name in ("s1", "s2", "v1", "v2"))


def test_lines_alike_at_a_loop_are_drawn_alike() -> None:
    """Catches a hybrid that no longer closes once the pour as drawn gives its sides different widths."""
    inputs = inputs_from_data(LOOPS["branch-line hybrid"])
    circuit = build_circuit(inputs.circuit, inputs.rules)
    gaps = {"s1": (1e-3, 1.2e-3), "v1": (math.inf, 1.1e-3), "in": (math.inf, math.inf)}
    placement = place(size_circuit(circuit, gaps=gaps))
    assert faults(placement) == []
    assert placement.lines["s1"].width == placement.lines["s2"].width
    assert {element for rule, element, _ in placement.notes if rule == "assumption.pour"} >= {"s2"}


def test_the_same_loop_gives_the_same_placement() -> None:
    """Catches a dependence on hash order."""
    assert repr(placed(LOOPS["ring"]).lines) == repr(placed(LOOPS["ring"]).lines)


def test_a_loop_too_short_for_its_part_says_so() -> None:
    """Catches a reason that names neither the loop, nor what stands in the way, nor what would do."""
    data = divider()
    data["parts"]["R1"]["case"] = "2512"
    for name in ("arm_1", "arm_2"):
        data["lines"][name]["angle"] = "9 deg"
    with pytest.raises(InfeasibleError) as caught:
        placed(data)
    assert all(name in caught.value.reason for name in ("arm_1", "arm_2", "R1", "mm"))
    for angle, name in re.findall(r'angle = "([0-9.]+) deg" for (\w+)', caught.value.remedy):
        data["lines"][name]["angle"] = f"{angle} deg"
    assert faults(placed(data)) == []


def test_a_hybrid_of_unequal_sides_names_the_length_that_would_close_it() -> None:
    """Catches a remedy that does not close a loop of straight lines: what is named is tried."""
    data = hybrid()
    for name, angle in (("s1", 18.0), ("s2", 19.0), ("v1", 18.0), ("v2", 18.0)):
        data["lines"][name]["angle"] = f"{angle} deg"
    with pytest.raises(InfeasibleError) as caught:
        placed(data)
    found = re.findall(r'(angle|length) = "([0-9.]+ deg|free)" for (\w+)', caught.value.remedy)
    assert found
    for key, value, name in found:
        del data["lines"][name]["angle"]
        data["lines"][name][key] = value
    assert faults(placed(data)) == []
