"""Artwork built by hand, shape by shape, so that each rule is tested on copper of known size.

Coordinates are in millimetres. Nothing is routed, sized or poured here: a sheet holds what a test puts on it.
"""

from __future__ import annotations

import datetime
import math
from typing import Any

from layoutgen.artwork import Artwork, Hole, Shape, Via
from layoutgen.checks import CheckResult, Finding, check
from layoutgen.circuit import build_circuit
from layoutgen.geometry import Ring, stroke
from layoutgen.origin import Origin
from layoutgen.placement import (
    PlacedLine,
    PlacedPad,
    PlacedPair,
    PlacedPart,
    PlacedPort,
    PlacedRadial,
    Placement,
    Strip,
)
from layoutgen.reading import circuit_from_data, rules_from_data
from layoutgen.sizing import SizedCircuit, SizedLine, SizedPair, SizedRadial
from tests.placed import changed, nm, placed_line, placed_pair, placed_port, placed_radial, sized_line

XY = tuple[float, float]

CIRCUIT: dict[str, Any] = {
    "format": 1,
    "design": {"title": "River gauge test piece", "frequency": "2.2 GHz", "band": ["2.1 GHz", "2.3 GHz"]},
    "substrate": {
        "relative_permittivity": 3.55,
        "loss_tangent": 0.0027,
        "height": "0.5 mm",
        "copper_thickness": "35 um",
    },
    "board": {"rules": "two-layer-standard"},
    "ground": {"gap": "1 mm"},
    "ports": {
        "pa": {"net": "a"},
        "pb": {"net": "b"},
        "pv": {"kind": "dc", "net": "v", "voltage": "28 V"},
    },
    "lines": {
        "la": {"nets": ["a", "c"], "impedance": "50 ohm", "angle": "30 deg"},
        "lb": {"nets": ["d", "b"], "impedance": "50 ohm", "angle": "30 deg"},
        "lg": {"nets": ["b", "gnd"], "impedance": "50 ohm", "angle": "30 deg"},
        "lv": {"nets": ["v", "w"], "width": "0.5 mm", "angle": "30 deg"},
    },
    "parts": {
        "C1": {"kind": "capacitor", "nets": ["c", "d"], "value": "22 pF", "case": "0603"},
        "C2": {"kind": "capacitor", "nets": ["w", "gnd"], "value": "10 pF", "case": "0603"},
        "C3": {"kind": "capacitor", "nets": ["w", "gnd"], "value": "1 nF", "case": "0603"},
        "R1": {"kind": "resistor", "nets": ["w", "gnd"], "value": "100 ohm", "case": "1206"},
    },
}
"""Nets a and c are one conductor, so are d and b, v and w; R1 draws 0.28 A through lv."""

RULES: dict[str, Any] = {
    "format": 1,
    "name": "test class",
    "holes": {"drills": ["0.3 mm", "1 mm", "2 mm"]},
    "vias": {"diameter": "0.6 mm", "drill": "0.3 mm", "plating": "20 um"},
}


def box(x0: float, y0: float, x1: float, y1: float) -> Ring:
    """Return a rectangle between two corners [mm]."""
    return Ring.box(nm(x0), nm(y0), nm(x1), nm(y1))


def polygon(*points: XY) -> Ring:
    """Return an outline through points [mm], counter-clockwise."""
    return Ring(tuple((nm(x), nm(y)) for x, y in points))


class Sheet:
    """A drawing in the making."""

    def __init__(
        self,
        rules: dict[str, Any] | None = None,
        circuit: dict[str, Any] | None = None,
        size: XY = (30.0, 20.0),
    ) -> None:
        self.rules = rules_from_data(changed(RULES, rules or {}))
        self.file = circuit_from_data(changed(CIRCUIT, circuit or {}))
        self.size = size
        self.shapes: list[Shape] = []
        self.vias: list[Via] = []
        self.holes: list[Hole] = []
        self.lines: dict[str, PlacedLine] = {}
        self.sized: dict[str, SizedLine] = {}
        self.pairs: dict[str, PlacedPair] = {}
        self.sized_pairs: dict[str, SizedPair] = {}
        self.radials: dict[str, PlacedRadial] = {}
        self.sized_radials: dict[str, SizedRadial] = {}
        self.parts: dict[str, PlacedPart] = {}
        self.ports: dict[str, PlacedPort] = {}
        self.strips: list[Strip] = []
        self.notes: list[tuple[str, str, str]] = []
        self._shape("profile", box(0.0, 0.0, *size), "profile", None, "board")

    def _shape(
        self,
        layer: str,
        outline: Ring,
        role: str,
        net: str | None,
        element: str,
        holes: tuple[Ring, ...] = (),
    ) -> None:
        self.shapes.append(
            Shape(layer=layer, outline=outline, holes=holes, net=net, role=role, origin=Origin(element))
        )

    def copper(
        self,
        outline: Ring,
        net: str | None = "gnd",
        role: str = "pour",
        element: str = "pour",
        *,
        layer: str = "copper_top",
        holes: tuple[Ring, ...] = (),
    ) -> None:
        """Add a piece of copper."""
        self._shape(layer, outline, role, net, element, holes)

    def plane(self, *holes: Ring, inset: float = 0.5) -> None:
        """Add the bottom plane."""
        x, y = self.size
        outline = box(inset, inset, x - inset, y - inset)
        self.copper(outline, role="plane", element="board", layer="copper_bottom", holes=holes)

    def line(
        self,
        name: str,
        path: list[XY],
        width: float,
        *,
        gap: float = math.inf,
        draw: bool = True,
        rf: bool = True,
    ) -> None:
        """Add a line of the circuit along a path, its copper a stroke; gap is the pour's [mm]."""
        nets = self.file.lines[name].nets
        line = placed_line(name, nets, path, width)
        self.lines[name], self.sized[name] = line, sized_line(name, nets, width, gap, rf=rf)
        if draw:
            self.copper(stroke(line.path, nm(width)), next(n for n in nets if n != "gnd"), "line", name)

    def pair(self, name: str, x0: float, x1: float, y: float, width: float, gap: float) -> None:
        """Add a coupled pair heading east, its second strip north of the first."""
        nets = self.file.coupled[name].nets
        pair = placed_pair(name, nets, x0, x1, y, width, gap)
        self.pairs[name] = pair
        for k, path in enumerate(pair.paths):
            self.copper(stroke(path, nm(width)), nets[2 * k], "pair", name)

    def radial(self, name: str, apex: XY, heading: float, sector: float, radius: float) -> None:
        """Add a radial stub, its arc drawn as chords of a degree, its point at the apex."""
        nets = self.file.lines[name].nets
        self.radials[name] = placed_radial(name, nets, apex, heading, sector, 0.3, radius)
        turns = [math.radians(heading - sector / 2.0 + k) for k in range(round(sector) + 1)]
        rim = [(apex[0] + radius * math.cos(t), apex[1] + radius * math.sin(t)) for t in turns]
        self.copper(polygon(apex, *rim), self.file.lines[name].nets[0], "radial", name)

    def strip(self, name: str, net: str, path: list[XY], width: float, current: float = 0.0) -> None:
        """Add a strip between pads."""
        points = tuple((nm(x), nm(y)) for x, y in path)
        self.strips.append(
            Strip(name=name, net=net, width=nm(width), path=points, current=current, origin=Origin(name))
        )
        self.copper(stroke(points, nm(width)), net, "strip", name)

    def part(
        self,
        name: str,
        pads: dict[str, tuple[str, float, float, float, float]],
        *,
        headings: dict[str, float] | None = None,
        outline: Ring | None = None,
        cutout: Ring | None = None,
        ground: dict[str, str] | None = None,
        thermal: dict[str, float] | None = None,
        draw: bool = True,
    ) -> None:
        """Add a part: pin -> net, middle x, y, width, height [mm]; pads of no size meet a carrier."""
        placed = []
        for pin, (net, x, y, w, h) in pads.items():
            ring = box(x - w / 2.0, y - h / 2.0, x + w / 2.0, y + h / 2.0)
            placed.append(
                PlacedPad(
                    pin=pin,
                    net=net,
                    x=nm(x),
                    y=nm(y),
                    outline=ring,
                    heading=(headings or {}).get(pin, 0.0),
                    ground=(ground or {}).get(pin),
                    thermal=(thermal or {}).get(pin),
                )
            )
            if draw and w > 0.0:
                self.copper(ring, net, "pad", name)
        xs = [x for _, x, _, _, _ in pads.values()]
        ys = [y for _, _, y, _, _ in pads.values()]
        body = outline or box(min(xs) - 0.1, min(ys) - 0.1, max(xs) + 0.1, max(ys) + 0.1)
        x, y = sum(xs) / len(xs), sum(ys) / len(ys)
        self.parts[name] = PlacedPart(
            name=name,
            x=nm(x),
            y=nm(y),
            heading=0.0,
            pads=tuple(placed),
            outline=body,
            courtyard=body,
            cutout=cutout,
            origin=Origin(name),
        )
        if cutout is not None:
            self._shape("profile", cutout, "cutout", None, name)

    def port(
        self, name: str, x: float, y: float, heading: float, width: float, *, to_edge: bool = False
    ) -> None:
        """Add a port."""
        net = self.file.ports[name].net
        self.ports[name] = placed_port(name, net, x, y, heading, width, to_edge=to_edge)

    def via(
        self,
        x: float,
        y: float,
        purpose: str = "pour",
        *,
        net: str = "gnd",
        drill: float = 0.3,
        land: float = 0.6,
        draw: bool = True,
    ) -> None:
        """Add a via and its land on top."""
        origin = Origin(purpose.partition(":")[2] or purpose)
        via = Via(x=nm(x), y=nm(y), drill=nm(drill), land=nm(land), net=net, purpose=purpose, origin=origin)
        self.vias.append(via)
        if draw:
            ring = Ring.circle(nm(x), nm(y), nm(land / 2.0))
            self.copper(ring, net, "land", origin.element)

    def hole(self, x: float, y: float, diameter: float, *, plated: bool = False) -> None:
        """Add a hole that is no via."""
        self.holes.append(
            Hole(x=nm(x), y=nm(y), diameter=nm(diameter), plated=plated, net=None, origin=Origin("board"))
        )

    def opening(self, outline: Ring, element: str = "board") -> None:
        """Add an opening of the top mask."""
        self._shape("soldermask_top", outline, "opening", None, element)

    def ink(self, outline: Ring, element: str = "board") -> None:
        """Add a piece of legend."""
        self._shape("legend_top", outline, "legend", None, element)

    def artwork(self) -> Artwork:
        """Return the drawing."""
        sized = SizedCircuit(
            circuit=build_circuit(self.file, self.rules),
            lines=self.sized,
            pairs=self.sized_pairs,
            radials=self.sized_radials,
            lands={},
            default_pour_gap=1e-3,
        )
        placement = Placement(
            sized=sized,
            width=nm(self.size[0]),
            height=nm(self.size[1]),
            corner_radius=0,
            lines=self.lines,
            pairs=self.pairs,
            radials=self.radials,
            parts=self.parts,
            ports=self.ports,
            strips=tuple(self.strips),
            vias=(),
            holes=(),
            ground_shapes=(),
            notes=tuple(self.notes),
        )
        return Artwork(
            placement=placement,
            shapes=tuple(self.shapes),
            vias=tuple(self.vias),
            holes=tuple(self.holes),
            labels=(),
            line_copper={},
            title_anchor=(0, 0),
        )

    def check(self, today: datetime.date | None = None) -> CheckResult:
        """Return the result of the checks."""
        return check(self.artwork(), today)

    def found(self, rule: str) -> list[Finding]:
        """Return the findings of one rule, notes left out."""
        return [f for f in self.check().findings if f.rule == rule and f.severity != "note"]

    def noted(self, rule: str) -> list[Finding]:
        """Return the notes of one rule."""
        return [f for f in self.check().findings if f.rule == rule and f.severity == "note"]

    def unchecked(self) -> dict[str, str]:
        """Return what was not checked, with the reasons."""
        return {entry.rule: entry.reason for entry in self.check().not_checked}


def only(findings: list[Finding]) -> Finding:
    """Return the one finding there is."""
    assert len(findings) == 1, [(f.rule, f.text, f.at) for f in findings]
    return findings[0]


def near(finding: Finding, x: float, y: float, within: float = 0.002) -> bool:
    """Tell whether a finding lies at a place [mm]."""
    assert finding.at is not None
    return math.hypot(finding.at[0] / 1e6 - x, finding.at[1] / 1e6 - y) <= within
