"""The trust list: each kind of doubt appears where it must, and not where it need not."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import pytest

from layoutgen.artwork import Artwork, Shape, Via
from layoutgen.formulas.coupled import coupled_pair
from layoutgen.geometry import Ring
from layoutgen.origin import Origin
from layoutgen.placement import Bend
from layoutgen.response.doubts import find_doubts
from layoutgen.response.records import Doubt
from layoutgen.response.runs import parallel_runs
from layoutgen.response.trace import trace_copper

MAKER = Callable[..., Artwork]
PORTS = dict[str, Any]
MM = 1_000_000
LAUNCH = {"nets": ["o", "out"], "impedance": "50 ohm", "length": "free"}


def by_angle(near: str, far: str, impedance: float, angle: float) -> dict[str, Any]:
    nets = [near, far] if far else [near]
    return {"nets": nets, "impedance": f"{impedance} ohm", "angle": f"{angle} deg"}


def doubts(artwork: Artwork) -> tuple[Doubt, ...]:
    return find_doubts(artwork, trace_copper(artwork))


@pytest.fixture(scope="module")
def plain(artwork_of: MAKER, ports: PORTS) -> Artwork:
    """Two lines of 50 ohm in a row, a third of 45 ohm from the middle: nothing to doubt."""
    lines = {
        "a": by_angle("in", "m", 50, 60),
        "b": by_angle("m", "o", 50, 60),
        "stub": by_angle("m", "", 45, 60),
        "launch": LAUNCH,
    }
    return artwork_of({"ports": ports, "lines": lines})


def test_a_plain_board_has_none(plain: Artwork) -> None:
    """A list that always says something is not read."""
    assert doubts(plain) == ()


class TestRuns:
    @staticmethod
    def side_by_side(plain: Artwork, apart_mm: float, length_mm: float = 10.0) -> Artwork:
        """Return the artwork with its first two lines laid side by side, edge to edge at a distance."""
        placed = dict(plain.placement.lines)
        width = placed["a"].width
        y = round(apart_mm * MM) + width
        end = round(length_mm * MM)
        placed["a"] = replace(placed["a"], path=((0, 0), (20 * MM, 0)), width=width)
        placed["b"] = replace(placed["b"], path=((5 * MM, y), (5 * MM + end, y)), width=width)
        placed["stub"] = replace(placed["stub"], path=((0, 90 * MM), (0, 99 * MM)))
        placed["launch"] = replace(placed["launch"], path=((50 * MM, 0), (50 * MM, 9 * MM)))
        return replace(plain, placement=replace(plain.placement, lines=placed))

    def test_coupling_place_and_gap(self, plain: Artwork) -> None:
        """By the formula of a pair at that gap, at the upper band edge; the place lies between the two."""
        (run,) = parallel_runs(self.side_by_side(plain, 1.0).placement)
        width = plain.placement.lines["a"].width * 1e-9
        pair = coupled_pair(width / 0.508e-3, 1e-3 / 0.508e-3, 3.55, 35e-6 / 0.508e-3)
        k = (pair.z_even - pair.z_odd) / (pair.z_even + pair.z_odd)
        ee = 0.5 * (pair.ee_even + pair.ee_odd)
        turn = 2 * math.pi * 2.29e9 * math.sqrt(ee) / 299792458.0 * 10e-3
        assert run.coupling == pytest.approx(20 * math.log10(float(k) * math.sin(turn)), abs=1e-6)
        assert run.gap == pytest.approx(1e-3, rel=1e-6) and run.length == pytest.approx(10e-3)
        y = (plain.placement.lines["a"].width + MM) / 2
        assert run.at[0] == 10 * MM and abs(run.at[1] - y) < 2

    @pytest.mark.parametrize(("apart", "told"), [(0.5, True), (4.0, False)])
    def test_above_the_limit_only(self, plain: Artwork, apart: float, told: bool) -> None:
        found = [d for d in doubts(self.side_by_side(plain, apart)) if "side by side" in d.reason]
        assert [d.items for d in found] == ([("a", "b")] if told else [])

    def test_lines_in_a_row_and_across_do_not_run_side_by_side(self, plain: Artwork) -> None:
        assert [run.items for run in parallel_runs(plain.placement) if run.items == ("a", "b")] == []
        assert all("stub" in run.items for run in parallel_runs(plain.placement))


class TestFormulas:
    def test_a_line_out_of_range(self, artwork_of: MAKER, ports: PORTS) -> None:
        """Flags of the sizing, with a place on the line; those of bends only for lines with one."""
        lines = {"a": by_angle("in", "o", 9, 60), "launch": {**LAUNCH, "impedance": "9 ohm"}}
        found = doubts(artwork_of({"ports": ports, "lines": lines}))
        assert {d.items for d in found} == {("a",), ("launch",)}
        assert any("impedance beside a pour" in d.reason for d in found)
        assert not any("bend" in d.reason for d in found)

    def test_pour_nearer_than_the_range(self, artwork_of: MAKER, ports: PORTS) -> None:
        wall = {"kind": "grounded_coplanar", "gap": "0.15 mm"}
        lines = {"a": {**by_angle("in", "o", 50, 60), **wall}, "launch": LAUNCH}
        design = {"relative_permittivity": 3.55, "loss_tangent": 0.003, "height": "1.524 mm"}
        board = {"ports": ports, "lines": lines, "substrate": {**design, "copper_thickness": "35 um"}}
        found = [d for d in doubts(artwork_of(board)) if d.items == ("a",)]
        assert any("gap 0.0984 h (from 0.12)" in d.reason for d in found)

    def test_a_junction_out_of_range(self, artwork_of: MAKER, ports: PORTS) -> None:
        lines = {
            "a": by_angle("in", "m", 12, 60),
            "b": by_angle("m", "o", 12, 60),
            "stub": by_angle("m", "", 12, 30),
            "launch": LAUNCH,
        }
        artwork = artwork_of({"ports": ports, "lines": lines})
        (found,) = [d for d in doubts(artwork) if "net m: tee" in d.reason]
        assert set(found.items) == {"a", "b", "stub"}
        assert found.at == artwork.placement.lines["stub"].path[0]


class TestTooClose:
    def test_a_bend_close_to_a_junction(self, plain: Artwork) -> None:
        """Counted from edge to edge: 0.9 mm from middle to middle, of which the widths take nearly all."""
        stub = plain.placement.lines["stub"]
        x, y = stub.path[0]
        sign = 1 if stub.path[1][1] > y else -1
        bent = ((x, y), (x, y + sign * 900_000), (x + 9 * MM, y + sign * 900_000))
        bend = Bend(1, -90.0 * sign, 60.0)
        lines = {**plain.placement.lines, "stub": replace(stub, path=bent, bends=(bend,))}
        artwork = replace(plain, placement=replace(plain.placement, lines=lines))
        found = [d for d in doubts(artwork) if "substrate height" in d.reason]
        assert [d.items for d in found] == [("stub",)]
        assert "a junction and a bend" in found[0].reason
        assert found[0].at == (x, y + sign * 450_000)

    def test_a_short_line_between_two_steps(self, artwork_of: MAKER, ports: PORTS) -> None:
        lines = {
            "a": by_angle("in", "m", 50, 30),
            "short": {"nets": ["m", "n"], "impedance": "30 ohm", "length": "0.4 mm"},
            "b": by_angle("n", "o", 50, 30),
            "launch": LAUNCH,
        }
        found = [d for d in doubts(artwork_of({"ports": ports, "lines": lines})) if "height" in d.reason]
        assert [(d.items, d.reason.split(",")[0]) for d in found] == [
            (("short",), "0.40 mm between a step and a step")
        ]


class TestParts:
    @pytest.mark.parametrize(("apart", "told"), [(1.0, True), (2.5, False)])
    def test_two_chips_nearer_than_they_are_tall(
        self, artwork_of: MAKER, ports: PORTS, apart: float, told: bool
    ) -> None:
        """A 1206 is at most 1.8 mm tall, being 1.8 mm wide at most."""
        chip = {"kind": "resistor", "value": "5 ohm", "case": "1206"}
        lines = {
            "a": by_angle("in", "c", 50, 30),
            "between": by_angle("d", "e", 50, 40),
            "b": by_angle("f", "o", 50, 30),
            "launch": LAUNCH,
        }
        parts = {"R1": {**chip, "nets": ["c", "d"]}, "R2": {**chip, "nets": ["e", "f"]}}
        artwork = artwork_of({"ports": ports, "lines": lines, "parts": parts})
        assert not any("tall" in d.reason for d in doubts(artwork))
        first, second = (artwork.placement.parts[name] for name in ("R1", "R2"))
        dx = max(x for x, _ in first.outline.points) + round(apart * MM)
        dx -= min(x for x, _ in second.outline.points)
        outline = Ring(tuple((x + dx, y) for x, y in second.outline.points), second.outline.bulges)
        beside = {"R1": first, "R2": replace(second, x=second.x + dx, outline=outline)}
        artwork = replace(artwork, placement=replace(artwork.placement, parts=beside))
        found = [d for d in doubts(artwork) if "tall" in d.reason]
        assert [d.items for d in found] == ([("R1", "R2")] if told else [])

    def test_neighbours_in_a_bank_are_no_matter(self, artwork_of: MAKER, ports: PORTS) -> None:
        """They share their net and are meant to stand together."""
        capacitor = {"kind": "capacitor", "nets": ["bank", "gnd"], "case": "1206"}
        lines = {
            "a": by_angle("in", "m", 50, 40),
            "b": by_angle("m", "o", 50, 50),
            "launch": LAUNCH,
            "feed": by_angle("m", "bank", 90, 90),
            "supply": {"nets": ["bank", "vd"], "length": "free"},
        }
        parts = {"C1": {**capacitor, "value": "22 pF"}, "C2": {**capacitor, "value": "1 nF"}}
        supply = {"vd": {"kind": "dc", "net": "vd", "voltage": "5 V"}}
        found = doubts(artwork_of({"ports": ports | supply, "lines": lines, "parts": parts}))
        assert not any("tall" in d.reason for d in found)


class TestPour:
    @staticmethod
    def with_pour(plain: Artwork, *axes: tuple[int, int]) -> Artwork:
        """Return the artwork with a pour of 30 by 2 mm and vias at some places [mm]."""
        pour = Shape(
            layer="copper_top",
            outline=Ring.box(0, 0, 30 * MM, 2 * MM),
            net="gnd",
            role="pour",
            origin=Origin("pour"),
        )
        vias = tuple(
            Via(
                x=x * MM, y=y * MM, drill=300_000, land=600_000, net="gnd", purpose="pour", origin=Origin("p")
            )
            for x, y in axes
        )
        return replace(plain, shapes=(pour,), vias=vias)

    def test_a_tongue_that_resonates(self, plain: Artwork) -> None:
        """28 mm beyond the only via: a quarter wave at 1.4 GHz in this substrate, within the sweep."""
        (found,) = doubts(self.with_pour(plain, (2, 1)))
        assert found.items == ("pour",) and found.at is not None and found.at[0] == 30 * MM
        assert "28.0 mm" in found.reason and "1.4 GHz" in found.reason

    def test_vias_all_along_leave_none(self, plain: Artwork) -> None:
        assert doubts(self.with_pour(plain, *((x, 1) for x in range(0, 31, 5)))) == ()

    def test_no_via_at_all(self, plain: Artwork) -> None:
        (found,) = doubts(self.with_pour(plain))
        assert "no via" in found.reason
