"""Hints loosened: what is kept of them, from one to the next."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Any

from layoutgen.pins import loosened
from layoutgen.reading import CircuitFile, inputs_from_data

EXAMPLE = Path(__file__).parents[1] / "examples" / "telemetry_driver.toml"


def hinted(hints: dict[str, Any]) -> CircuitFile:
    """Return the amplifier with hints, its two supplies at places against the order of the file."""
    data = tomllib.loads(EXAMPLE.read_text("utf-8"))
    data["board"]["size"] = ["70 mm", "30 mm"]
    data["ports"]["vg"]["at"], data["ports"]["vd"]["at"] = "60 mm", "5 mm"
    data["layout"] = {"hints": hints}
    return inputs_from_data(data).circuit


def test_hints_without_places_have_nothing_to_loosen() -> None:
    """Such circuits would be drawn three times over before they are refused."""
    assert list(loosened(hinted({}))) == []
    turns = {"leave": "north", "route": ["*", "left", "*"]}
    assert list(loosened(hinted({"gate_feed": turns, "Q1": {"heading": "east"}}))) == []


def test_each_asks_less_than_the_one_before() -> None:
    """A first that asked too little would settle to another drawing; a last that asks a place, to none."""
    route = ["4 mm", "left", "11 mm", "right", "2 mm"]
    hints = {
        "gate_feed": {"leave": "north", "route": route},
        "Q1": {"at": ["30 mm", "15 mm"], "heading": "east"},
    }
    longest, turns, at_ports, bare = loosened(hinted(hints))
    legs = [f.layout.hints["gate_feed"].route.lengths for f in (longest, turns)]
    assert legs == [(4e-3, None, 2e-3), (None, None, None)]
    for file in (longest, turns):
        assert file.layout.hints["gate_feed"].route.turns == (90.0, -90.0)
        assert (file.layout.hints["Q1"].at, file.layout.hints["Q1"].heading) == (None, 0.0)
    assert at_ports.layout.hints == bare.layout.hints == {}
    assert at_ports.ports["vg"].at == 60e-3
    assert all(file.board.size is None for file in (longest, turns, at_ports, bare))


def test_freed_ports_keep_their_order_along_the_edge() -> None:
    """In the order of the file instead, two feeds would have to cross."""
    first, *_ = loosened(hinted({"Q1": {"at": ["30 mm", "15 mm"]}}))
    assert [name for name in first.ports if name in ("vg", "vd")] == ["vd", "vg"]
    assert first.ports["vg"].at is first.ports["vd"].at is None


def test_without_fixed_legs_turns_are_tried_once() -> None:
    """Twice the same circuit is twice the time."""
    assert len(list(loosened(hinted({"Q1": {"at": ["30 mm", "15 mm"]}})))) == 3
