"""A board told by hand with one of everything that a writer must get right, and a real one."""

from __future__ import annotations

import itertools
import math
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from layoutgen.artwork import Artwork, Hole, Label, LineCopper, Shape, Via
from layoutgen.checks import CheckResult, Finding, NotChecked
from layoutgen.circuit import build_circuit
from layoutgen.geometry import Ring, stroke
from layoutgen.origin import Origin
from layoutgen.placement import (
    Bend,
    PlacedHole,
    PlacedLine,
    PlacedPad,
    PlacedPart,
    PlacedPort,
    PlacedRadial,
    Placement,
    Strip,
)
from layoutgen.reading import inputs_from_data
from layoutgen.response import Response
from layoutgen.sizing import BudgetEntry, SizedCircuit, size_circuit
from layoutgen.writers import Result

ROOT = Path(__file__).parents[2]

CIRCUIT: dict[str, Any] = {
    "format": 1,
    "design": {
        "title": "Gauge <link> & stub",
        "frequency": "2.245 GHz",
        "band": ["2.20 GHz", "2.29 GHz"],
        "revision": "B",
    },
    "substrate": {
        "relative_permittivity": 3.55,
        "loss_tangent": 0.0027,
        "height": "0.508 mm",
        "copper_thickness": "35 um",
    },
    "board": {"rules": "two-layer-standard", "size": ["20 mm", "12 mm"], "corner_radius": "1 mm"},
    "ports": {
        "rf_in": {"net": "in", "edge": "west"},
        "rf_out": {"net": "out", "edge": "east", "impedance": "40-3j ohm"},
    },
    "lines": {
        "first": {"nets": ["in", "a"], "impedance": "50 ohm", "angle": "40 deg"},
        "second": {"nets": ["b", "out"], "impedance": "50 ohm", "angle": "30 deg"},
        "fan": {"nets": ["a"], "shape": "radial", "sector": "60 deg", "radius": "3 mm"},
    },
    "parts": {
        "C1": {"kind": "capacitor", "nets": ["a", "b"], "value": "8.2 pF", "case": "0603"},
        "Q1": {
            "kind": "transistor",
            "footprint": "can",
            "pins": {"top": "b", "base": "gnd"},
        },
    },
    "footprints": {
        "can": {
            "cutout": {"size": ["2 mm", "2 mm"], "at": ["0 mm", "0 mm"]},
            "pads": {
                "top": {"at": ["0 mm", "1.5 mm"], "size": ["1 mm", "0.6 mm"], "heading": "north"},
                "base": {"ground": "flange"},
            },
        }
    },
}

WIDTH = 1_100_000


def _line(name: str, nets: tuple[str, ...], path: tuple[tuple[int, int], ...], degrees: float) -> PlacedLine:
    angle = math.radians(degrees)
    bends = tuple(Bend(i, 90.0, 55.0) for i in range(1, len(path) - 1))
    length = math.fsum(math.dist(a, b) for a, b in itertools.pairwise(path))
    budget = (BudgetEntry("line", angle - 0.05, name), BudgetEntry("tee", 0.05, nets[0]))
    return PlacedLine(
        name=name,
        nets=nets,
        width=WIDTH,
        path=path,
        bends=bends,
        centre_line=length,
        budget=budget,
        angle=angle,
        origin=Origin(name),
    )


def _sized() -> SizedCircuit:
    inputs = inputs_from_data(CIRCUIT)
    return size_circuit(build_circuit(inputs.circuit, inputs.rules))


def _placement() -> Placement:
    first = _line("first", ("in", "a"), ((300_000, 4_000_000), (8_000_000, 4_000_000)), 40.0)
    bent = (
        (10_000_000, 4_000_000),
        (14_000_000, 4_000_000),
        (14_000_000, 8_000_001),
        (19_700_000, 8_000_001),
    )
    second = _line("second", ("b", "out"), bent, 30.0)
    fan = PlacedRadial(
        name="fan",
        nets=("a",),
        apex=(6_000_000, 4_000_000),
        heading=90.0,
        sector_deg=60.0,
        inner_radius=635_085,
        outer_radius=3_000_000,
        origin=Origin("fan"),
    )
    c1 = PlacedPart(
        name="C1",
        x=9_000_000,
        y=4_000_000,
        heading=0.0,
        pads=(_pad("1", "a", 8_200_000, 4_000_000), _pad("2", "b", 9_800_000, 4_000_000)),
        outline=Ring.box(8_000_000, 3_500_000, 10_000_000, 4_500_000),
        courtyard=Ring.box(7_500_000, 3_000_000, 10_500_000, 5_000_000),
        cutout=None,
        origin=Origin("C1"),
    )
    q1 = PlacedPart(
        name="Q1",
        x=12_000_000,
        y=1_500_000,
        heading=0.0,
        pads=(_pad("top", "b", 12_000_000, 3_000_000),),
        outline=Ring.box(11_000_000, 500_000, 13_000_000, 3_300_000),
        courtyard=Ring.box(10_500_000, 0, 13_500_000, 3_800_000),
        cutout=Ring.box(11_000_000, 500_000, 13_000_000, 2_500_000),
        origin=Origin("Q1"),
    )
    return Placement(
        sized=_sized(),
        width=20_000_000,
        height=12_000_000,
        corner_radius=1_000_000,
        lines={"first": first, "second": second},
        pairs={},
        radials={"fan": fan},
        parts={"C1": c1, "Q1": q1},
        ports={
            "rf_in": _port("rf_in", "in", 300_000, 4_000_000, 0.0, "west"),
            "rf_out": _port("rf_out", "out", 19_700_000, 8_000_001, 180.0, "east"),
        },
        strips=(
            Strip(
                name="strip:b",
                net="b",
                width=500_000,
                path=((12_000_000, 3_300_000), (12_000_000, 4_000_000)),
                current=0.25,
                origin=Origin("b"),
            ),
        ),
        vias=(),
        holes=(
            PlacedHole(x=3_000_000, y=9_000_000, diameter=2_700_000, plated=False, origin=Origin("board")),
        ),
        ground_shapes=(),
        notes=(),
    )


def _pad(pin: str, net: str, x: int, y: int) -> PlacedPad:
    box = Ring.box(x - 400_000, y - 450_000, x + 400_000, y + 450_000)
    return PlacedPad(pin=pin, net=net, x=x, y=y, outline=box, heading=0.0)


def _port(name: str, net: str, x: int, y: int, heading: float, edge: str) -> PlacedPort:
    return PlacedPort(
        name=name,
        net=net,
        x=x,
        y=y,
        heading=heading,
        edge=edge,
        width=WIDTH,
        to_edge=False,
        origin=Origin(name),
    )


def _rounded(width: int, height: int, radius: int) -> Ring:
    """A rounded rectangle: straight edges, and quarter circles as bulges."""
    w, h, r = width, height, radius
    points = ((r, 0), (w - r, 0), (w, r), (w, h - r), (w - r, h), (r, h), (0, h - r), (0, r))
    quarter = math.tan(math.pi / 8)
    return Ring(points, (0.0, quarter) * 4)


def _fan(apex: tuple[int, int], inner: int, outer: int) -> Ring:
    """A radial stub of 60 degrees to the north: the outer arc as one bulge."""
    x, y = apex
    a, b = math.radians(60.0), math.radians(120.0)
    points = [
        (x + r * math.cos(t), y + r * math.sin(t))
        for r, t in ((inner, a), (outer, a), (outer, b), (inner, b))
    ]
    return Ring(
        tuple((round(px), round(py)) for px, py in points), (0.0, math.tan(math.radians(60.0) / 4), 0.0, 0.0)
    )


def _shapes(placement: Placement) -> tuple[Shape, ...]:
    shapes = [
        _shape(
            "copper_top",
            stroke(line.path, line.width, [b.mitre_percent for b in line.bends]),
            line.nets[0],
            "line",
            n,
        )
        for n, line in placement.lines.items()
    ]
    fan = placement.radials["fan"]
    shapes.append(
        _shape("copper_top", _fan(fan.apex, fan.inner_radius, fan.outer_radius), "a", "radial", "fan")
    )
    for part in placement.parts.values():
        for pad in part.pads:
            shapes.append(_shape("copper_top", pad.outline, pad.net, "pad", part.name))
            shapes.append(_shape("soldermask_top", pad.outline, None, "opening", part.name))
            shapes.append(_shape("paste_top", pad.outline, None, "paste", part.name))
    strip = placement.strips[0]
    shapes.append(_shape("copper_top", stroke(strip.path, strip.width), "b", "strip", "b"))
    pour = Shape(
        layer="copper_top",
        outline=Ring.box(300_000, 300_000, 10_000_000, 11_700_000),
        holes=(
            Ring(Ring.box(350_000, 2_000_000, 9_999_000, 8_000_000).points[::-1]),
            Ring(((3_900_001, 9_000_000), (2_100_001, 9_000_000)), (-1.0, -1.0)),
            Ring(((7_000_000, 9_500_000), (7_600_003, 10_400_000), (8_300_000, 9_100_000))),
        ),
        net="gnd",
        role="pour",
        origin=Origin("pour"),
    )
    plane = Shape(
        layer="copper_bottom",
        outline=_rounded(20_000_000, 12_000_000, 1_000_000),
        holes=(Ring(Ring.box(10_700_000, 200_000, 13_300_000, 2_800_000).points[::-1]),),
        net="gnd",
        role="plane",
        origin=Origin("board"),
    )
    return (
        *shapes,
        pour,
        plane,
        _shape("copper_top", Ring.circle(1_000_000, 1_000_000, 300_000), "gnd", "land", "pour"),
        _shape("legend_top", Ring.box(9_000_000, 5_000_000, 9_150_000, 6_000_000), None, "legend", "C1"),
        _shape("profile", _rounded(20_000_000, 12_000_000, 1_000_000), None, "profile", "board"),
        _shape("profile", Ring.box(11_000_000, 500_000, 13_000_000, 2_500_000), None, "cutout", "Q1"),
    )


def _shape(layer: str, outline: Ring, net: str | None, role: str, name: str) -> Shape:
    return Shape(layer=layer, outline=outline, net=net, role=role, origin=Origin(name))


def _artwork() -> Artwork:
    placement = _placement()
    return Artwork(
        placement=placement,
        shapes=_shapes(placement),
        vias=tuple(
            Via(
                x=x,
                y=1_000_000,
                drill=300_000,
                land=600_000,
                net="gnd",
                purpose="pour",
                origin=Origin("pour"),
            )
            for x in (1_000_000, 2_000_000, 3_500_000)
        ),
        holes=(
            Hole(
                x=3_000_000, y=9_000_000, diameter=2_700_000, plated=False, net=None, origin=Origin("board")
            ),
        ),
        labels=(
            Label(
                layer="reference", text="+", x=0, y=0, height=500_000, rotation=0.0, origin=Origin("board")
            ),
            Label(
                layer="reference",
                text="first",
                x=4_000_000,
                y=4_000_000,
                height=500_000,
                rotation=90.0,
                origin=Origin("first"),
            ),
        ),
        line_copper={
            "first": LineCopper(name="first", gap_left=1_123_200, gap_right=None),
            "second": LineCopper(name="second", gap_left=None, gap_right=None),
        },
        title_anchor=(1_000_000, 300_000),
    )


def _finding(severity: str, at: tuple[int, int] | None, waived: str | None = None) -> Finding:
    return Finding(
        rule="copper.min_gap" if severity != "note" else "dc.assumption",
        severity=severity,
        measured=0.1 if at else None,
        limit=0.125 if at else None,
        unit="mm" if at else "",
        at=at,
        layer="copper_top" if at else "",
        items=("C1", "first"),
        nets=("a", "b"),
        text=f"{severity} & <text>",
        waived=waived,
    )


def make_response(ports: int) -> Response:
    """A passive-looking response of any number of ports, no two entries alike."""
    frequencies = np.linspace(2.11e9, 2.38e9, 28)
    spots = np.array([2.20e9, 2.245e9, 2.29e9])

    def at(f: np.ndarray, scale: float) -> np.ndarray:
        row, column = np.meshgrid(np.arange(ports), np.arange(ports), indexing="ij")
        size = scale * 0.8 / ports / (1.0 + np.abs(row - column))
        turn = -2.0 * np.pi * f[:, None, None] / 1e9 * (0.1 + 0.07 * row + 0.03 * column)
        return size * np.exp(1j * turn)

    return Response(
        ports=("rf_in", "rf_out", *(f"Q1.pin{k}" for k in range(ports)))[:ports],
        impedances=(50 + 0j, 40 - 3j, *(complex(9 + k, k - 2) for k in range(ports)))[:ports],
        frequencies=frequencies,
        wanted=at(frequencies, 1.0),
        as_drawn=at(frequencies, 0.95),
        notes=(("response", "C1", "taken as ideal"),),
        spots=spots,
        wanted_at_spots=at(spots, 1.0),
        as_drawn_at_spots=at(spots, 0.95),
    )


def make_result() -> Result:
    """A result with every kind of shape, and findings of every kind."""
    findings = (
        _finding("error", (9_000_000, 3_000_000)),
        _finding("warning", (15_000_000, 9_000_000)),
        _finding("error", (5_000_000, 5_000_000), waived="seen at first article"),
        _finding("note", None),
    )
    checks = CheckResult(
        findings=findings, not_checked=(NotChecked("voltage.table", "no table in the rules"),)
    )
    seconds = {"reading": 0.123456, "placement": 0.5}
    return Result(artwork=_artwork(), checks=checks, response=make_response(2), seconds=seconds)


@pytest.fixture(scope="session")
def handmade() -> Result:
    """The board told by hand."""
    return make_result()


@pytest.fixture(scope="session")
def remake() -> Callable[[], Result]:
    """The maker itself, for tests that need a second, equal result or another number of ports."""
    return make_result


@pytest.fixture(scope="session")
def with_ports(handmade: Result) -> Callable[[int], Result]:
    """Return the board with a response of so many ports."""
    return lambda count: replace(handmade, response=make_response(count))


@pytest.fixture(scope="session")
def driver() -> Result:
    """The example amplifier through all stages."""
    from layoutgen.pipeline import run

    return run(ROOT / "examples" / "telemetry_driver.toml")
