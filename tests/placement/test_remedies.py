"""Remedies: what a message names was placed before it was named, and suits the kind of element."""

from __future__ import annotations

import re

import pytest

from layoutgen.errors import InfeasibleError
from tests.placement.circuits import base, free, line, port, through_with
from tests.placement.legal import faults
from tests.placement.test_frames import HOLE, board, pinned, placed


def test_a_pinned_part_too_near_is_told_a_place_that_does() -> None:
    """Catches a part told to leave another way, and a place named that cannot be kept either."""
    data = pinned(at=["8 mm", "20 mm"])
    with pytest.raises(InfeasibleError) as caught:
        placed(data)
    assert "leave" not in caught.value.remedy
    at = re.search(
        r'at = \["([0-9.]+ mm)", "([0-9.]+ mm)"\] in \[layout.hints.C2\] would do', str(caught.value)
    )
    assert at is not None
    data["layout"]["hints"]["C2"]["at"] = [at[1], at[2]]
    assert faults(placed(data)) == []


def test_a_line_between_two_edges_names_the_board_it_fits() -> None:
    """Catches a size that fails with the same sentence when it is applied."""
    ports = {"p1": port("a", edge="west", at="10 mm"), "p2": port("z", edge="east", at="10 mm")}
    data = base(ports=ports, lines={"only": line("a", "z", angle="60 deg")}, board=board("30 mm", "20 mm"))
    with pytest.raises(InfeasibleError) as caught:
        placed(data)
    size = re.search(r"a board of ([0-9.]+ mm) x ([0-9.]+ mm) would do", caught.value.remedy)
    assert size is not None
    data["board"]["size"] = [size[1], size[2]]
    assert faults(placed(data)) == []


def test_a_line_too_short_for_what_stands_at_its_ends_is_told_a_length_that_does() -> None:
    """Catches advice to leave another way for a stub that has tried every way."""
    data = through_with({"tiny": line("n", "k", angle="2.5 deg"), "st": line("k", angle="14 deg")})
    data["lines"]["exit"] = free("k", "z")
    with pytest.raises(InfeasibleError) as caught:
        placed(data)
    found = re.search(r'angle = "([0-9.]+ deg)" for tiny would do', caught.value.remedy)
    assert found is not None
    data["lines"]["tiny"]["angle"] = found[1]
    assert faults(placed(data)) == []


def test_a_size_named_for_a_board_with_holes_leaves_a_way_round_them() -> None:
    """Catches the board named that would be drawn if its holes were not in the way."""
    holes = [{**HOLE, "at": ["10 mm", f"{y} mm"], "diameter": "2.7 mm"} for y in range(2, 20, 3)]
    ports = {"p1": port("a", edge="west"), "p2": port("z", edge="east")}
    mid = {"mid": line("n", "m", angle="60 deg")}
    data = through_with(mid, ports=ports, board=board("40 mm", "20 mm", holes=holes))
    with pytest.raises(InfeasibleError) as caught:
        placed(data)
    size = re.search(r"a board of ([0-9.]+ mm) x ([0-9.]+ mm) would do", caught.value.remedy)
    assert size is not None
    data["board"]["size"] = [size[1], size[2]]
    assert faults(placed(data)) == []
