"""What is given up where nothing else does: the rule for the distance of lines, the path drawn straight."""

from __future__ import annotations

import importlib
from typing import Any

import pytest

from layoutgen.circuit import build_circuit
from layoutgen.errors import InfeasibleError
from layoutgen.placement import place
from layoutgen.reading import SpacingRules, inputs_from_data
from layoutgen.sizing import SizedCircuit, size_circuit
from tests.placement.circuits import base, chip, free, line, port, two_ports
from tests.placement.legal import faults


def under(data: dict[str, Any], **rules: Any) -> SizedCircuit:
    """Return a circuit sized under the shipped rules with some of them changed."""
    inputs = inputs_from_data(data)
    return size_circuit(build_circuit(inputs.circuit, inputs.rules.model_copy(update=rules)))


def through_capacitor() -> dict[str, Any]:
    """Return a line of given length and a free one with a chip part between them."""
    lines = {"l": line("a", "b", angle="60 deg"), "m": free("c", "z")}
    return base(ports=two_ports(), lines=lines, parts={"C1": chip("capacitor", "22 pF", "b", "c")})


def stubs_side_by_side() -> dict[str, Any]:
    """Return two stubs that hints hold to one side, nearer to each other than three substrate heights."""
    lines = {
        "in": free("a", "n"),
        "mid": line("n", "m", angle="10.5 deg"),
        "s1": line("n", angle="40 deg"),
        "s2": line("m", angle="40 deg"),
        "out": free("m", "z"),
    }
    hints = {name: {"leave": "north", "route": ["*"]} for name in ("s1", "s2")}
    return base(ports=two_ports(), lines=lines, layout={"hints": hints})


@pytest.mark.parametrize("heights", [0.0, 0.5, 1.0, 1.4, 3.0])
def test_a_looser_rule_is_no_harder(heights: float) -> None:
    """Catches a chip part that has no room beside its own line where lines may stand nearer."""
    found = place(under(through_capacitor(), spacing=SpacingRules(min_line_heights=heights)))
    assert faults(found) == []
    assert found.choices is not None and found.choices.heights is None


def test_a_rule_that_only_warns_is_kept_in_part_where_it_cannot_be_kept() -> None:
    """Catches a board refused for a warning, one drawn nearer in silence, a later draft drawn otherwise."""
    asked = under(stubs_side_by_side())
    found = place(asked)
    assert faults(found) == []
    assert found.choices is not None and found.choices.heights in (0.95 * 3, 0.8 * 3)
    assert [element for rule, element, _ in found.notes if rule == "assumption.spacing"] == [""]
    assert found.sized.circuit is asked.circuit
    apart = abs(found.lines["s1"].path[-1][0] - found.lines["s2"].path[-1][0]) - found.lines["s1"].width
    assert found.choices.heights * 508_000 <= apart < 3 * 508_000
    again = place(asked, found.choices)
    assert (again.lines, again.choices, again.notes) == (found.lines, found.choices, found.notes)


def test_a_default_distance_may_be_gone_below_too() -> None:
    """Catches a board refused for a distance that no rule asks."""
    found = place(under(stubs_side_by_side(), spacing=None))
    assert found.choices is not None and found.choices.heights is not None


def test_a_rule_that_is_an_error_is_kept_or_there_is_no_board() -> None:
    """Catches lines drawn nearer than an error allows."""
    with pytest.raises(InfeasibleError) as caught:
        place(under(stubs_side_by_side(), severity={"spacing.min_line_heights": "error"}))
    assert "1.524 mm are kept" in caught.value.reason


def test_the_first_reason_is_told_where_no_distance_does() -> None:
    """Catches a message that tells a distance at which a later try failed."""
    data = stubs_side_by_side()
    data["lines"]["mid"]["angle"] = "6 deg"
    with pytest.raises(InfeasibleError) as caught:
        place(under(data))
    assert "1.524 mm are kept" in caught.value.reason


@pytest.mark.parametrize("ahead", [0, 1, 2])
def test_of_three_arms_the_one_whose_port_lies_ahead_goes_straight_on(
    ahead: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Catches a split into three that is drawn only where the arm written first leads to the far edge."""
    module = importlib.import_module("layoutgen.placement.place")
    monkeypatch.setattr(module, "_EFFORTS", module._EFFORTS[:1])  # more find nothing, either, and take long
    edges = ["north", "south"]
    edges.insert(ahead, "east")
    ports = {f"o{k}": port(f"z{k}", edge=edge) for k, edge in enumerate(edges)}
    arms = {f"a{k}": line("t", f"m{k}", z="86.6 ohm", angle="30 deg") for k in range(3)}
    outer = {f"x{k}": free(f"m{k}", f"z{k}") for k in range(3)}
    data = base(ports={"in": port("a", edge="west"), **ports}, lines={"l0": free("a", "t"), **arms, **outer})
    asked = under(data)
    found = place(asked)
    assert faults(found) == []
    assert found.choices is not None and found.choices.spine_to == (f"o{ahead}" if ahead else None)
    told = [element for rule, element, _ in found.notes if rule == "assumption.spine"]
    assert told == ([f"o{ahead}"] if ahead else [])
    for sizes in (asked, found.sized):
        again = place(sizes, found.choices)
        assert (again.lines, again.choices, again.notes) == (found.lines, found.choices, found.notes)
