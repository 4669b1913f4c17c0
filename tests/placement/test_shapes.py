"""How a drawing looks: stubs straight where there is room, symmetric circuits as their own mirror image."""

from __future__ import annotations

from typing import Any

import pytest

from layoutgen.placement import Placement
from tests.placement.circuits import base, chip, free, line, port
from tests.placement.legal import faults
from tests.placement.test_frames import board, placed

GRID = 2  # [nm]: halves are rounded

EAST_WEST: dict[str, Any] = {"p1": port("a", edge="west"), "p2": port("z", edge="east")}


def stub_filter(*size: str, ends: tuple[str, ...] = ()) -> dict[str, Any]:
    """Return a filter of three quarter-wave stubs, open or on gnd, on a board of a size if one is given."""
    lines: dict[str, Any] = {"launch": free("a", "n0")}
    for k, impedance in enumerate(("50 ohm", "35 ohm", "50 ohm")):
        lines[f"stub_{k}"] = line(f"n{k}", *ends, z=impedance, angle="90 deg")
        if k < 2:
            lines[f"link_{k}"] = line(f"n{k}", f"n{k + 1}", z="60 ohm", angle="90 deg")
    lines["exit"] = free("n2", "z")
    more = {"board": board(*size)} if size else {}
    return base(ports=EAST_WEST, lines=lines, **more)


def attenuator() -> dict[str, Any]:
    """Return a pi attenuator between two free lines."""
    parts = {
        "R1": chip("resistor", "150 ohm", "n", "gnd"),
        "R2": chip("resistor", "37.4 ohm", "n", "m"),
        "R3": chip("resistor", "150 ohm", "m", "gnd"),
    }
    lines = {"launch": free("a", "n"), "exit": free("m", "z")}
    return base(ports=EAST_WEST, lines=lines, parts=parts)


def ladder() -> dict[str, Any]:
    """Return a symmetric low pass of steps."""
    steps = (("n", "o", "20 ohm"), ("o", "q", "90 ohm"), ("q", "m", "20 ohm"))
    lines = {f"step_{k}": line(a, b, z=z, angle="30 deg") for k, (a, b, z) in enumerate(steps)}
    return base(ports=EAST_WEST, lines={"launch": free("a", "n"), **lines, "exit": free("m", "z")})


def coupled_filter() -> dict[str, Any]:
    """Return a band pass of two coupled pairs between free lines."""
    pairs = {
        name: {"nets": nets, "even_impedance": "70 ohm", "odd_impedance": "39 ohm", "angle": "90 deg"}
        for name, nets in (("p", ["n", "open", "open", "k"]), ("q", ["k", "open", "open", "m"]))
    }
    return base(ports=EAST_WEST, lines={"launch": free("a", "n"), "exit": free("m", "z")}, coupled=pairs)


def stub_bends(placement: Placement) -> list[int]:
    """Return the number of bends of each stub."""
    return [len(drawn.bends) for name, drawn in placement.lines.items() if name.startswith("stub")]


@pytest.mark.parametrize("size", [(), ("60 mm", "40 mm")], ids=["free", "sized"])
@pytest.mark.parametrize("ends", [(), ("gnd",)], ids=["open", "shorted"])
def test_stubs_are_straight_where_there_is_room(size: tuple[str, ...], ends: tuple[str, ...]) -> None:
    """Catches stubs folded beside the line that they leave, only to save area of the board."""
    placement = placed(stub_filter(*size, ends=ends))
    assert stub_bends(placement) == [0, 0, 0]
    assert faults(placement) == []


def test_stubs_fold_where_the_board_leaves_no_room() -> None:
    """Catches straight stubs insisted on, so that a low board has no placement."""
    placement = placed(stub_filter("60 mm", "15 mm"))
    assert all(bends > 0 for bends in stub_bends(placement))
    assert faults(placement) == []


@pytest.mark.parametrize("make", [stub_filter, attenuator, ladder])
def test_a_symmetric_circuit_is_its_own_mirror_image(make: Any) -> None:
    """Catches a last line to a port that is longer than the first: its least length, the board's step."""
    placement = placed(make())
    launch, out = placement.lines["launch"], placement.lines["exit"]
    assert launch.centre_line == pytest.approx(out.centre_line, abs=GRID)
    mirrored = sorted(placement.width - x for drawn in placement.lines.values() for x, _ in drawn.path)
    assert mirrored == pytest.approx(
        sorted(x for drawn in placement.lines.values() for x, _ in drawn.path), abs=GRID
    )


def test_lines_at_coupled_pairs_are_alike_and_straight() -> None:
    """Catches a line to a port too short beside a pair, which then swerves, or one longer than the other."""
    placement = placed(coupled_filter())
    launch, out = placement.lines["launch"], placement.lines["exit"]
    assert (launch.bends, out.bends) == ((), ())
    assert launch.centre_line == pytest.approx(out.centre_line, abs=GRID)
