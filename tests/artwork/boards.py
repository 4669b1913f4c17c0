"""Placed boards built by hand, so that the artwork stage is tested without the stages before it.

A board is told in millimetres; nothing is routed or sized here.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field
from typing import Any

import shapely

from layoutgen.circuit import Circuit, DcSolution, Net
from layoutgen.geometry import Ring, mitre_for_turn, turn_degrees
from layoutgen.origin import Origin
from layoutgen.placement import (
    Bend,
    PlacedHole,
    PlacedLine,
    PlacedPad,
    PlacedPair,
    PlacedPart,
    PlacedPort,
    PlacedRadial,
    PlacedVia,
    Placement,
    Strip,
)
from layoutgen.reading import circuit_from_data, rules_from_data
from layoutgen.sizing import SizedCircuit, SizedLine, SizedPair, SizedRadial
from tests.placed import changed, nm, placed_line, placed_pair, placed_port, placed_radial, sized_line

RULES: dict[str, Any] = {
    "format": 1,
    "name": "test class",
    "copper": {
        "min_width": "0.125 mm",
        "min_gap": "0.125 mm",
        "min_edge_distance": "0.30 mm",
        "min_corner_angle": "85 deg",
        "min_island_area": "0.5 mm^2",
    },
    "holes": {
        "drills": ["0.3 mm", "1.0 mm", "2.7 mm"],
        "min_annular_ring": "0.125 mm",
        "min_web": "0.25 mm",
        "min_copper_distance": "0.20 mm",
        "min_edge_distance": "0.50 mm",
    },
    "vias": {"diameter": "0.6 mm", "drill": "0.3 mm", "min_pitch": "0.8 mm", "per_ground_pad": 2},
    "fence": {"max_pitch": "2.0 mm", "max_pitch_wavelengths": 0.05, "max_edge_distance": "0.8 mm"},
    "mask": {"expansion": "0.05 mm", "min_web": "0.10 mm"},
    "legend": {"min_line": "0.12 mm", "min_distance": "0.15 mm"},
}


@dataclass
class BoardBuilder:
    """Collects placed things; ``placement()`` freezes them."""

    width: float
    height: float
    corner_radius: float = 0.0
    ground: dict[str, Any] | None = field(default_factory=dict)
    rules: dict[str, Any] = field(default_factory=dict)
    board: dict[str, Any] = field(default_factory=dict)
    title: str = "Gauge telemetry driver"
    gap: float = 1.0
    substrate_height: float = 0.508
    lines: dict[str, PlacedLine] = field(default_factory=dict)
    sized_lines: dict[str, SizedLine] = field(default_factory=dict)
    pairs: dict[str, PlacedPair] = field(default_factory=dict)
    sized_pairs: dict[str, SizedPair] = field(default_factory=dict)
    radials: dict[str, PlacedRadial] = field(default_factory=dict)
    sized_radials: dict[str, SizedRadial] = field(default_factory=dict)
    parts: dict[str, PlacedPart] = field(default_factory=dict)
    ports: dict[str, PlacedPort] = field(default_factory=dict)
    strips: list[Strip] = field(default_factory=list)
    vias: list[PlacedVia] = field(default_factory=list)
    holes: list[PlacedHole] = field(default_factory=list)
    grounds: list[tuple[Ring, Origin]] = field(default_factory=list)
    dc_nets: set[str] = field(default_factory=set)

    def line(
        self,
        name: str,
        path: list[tuple[float, float]],
        width: float,
        nets: tuple[str, ...] = ("a", "b"),
        gap: float | None = None,
        mitre: float = 60.0,
        rf: bool = True,
    ) -> BoardBuilder:
        """Add a line along a path."""
        points = tuple((nm(x), nm(y)) for x, y in path)
        bends = tuple(_bend(points, i, mitre, nm(width)) for i in range(1, len(points) - 1))
        self.lines[name] = placed_line(name, nets, path, width, bends)
        pour_gap = self.gap if gap is None else gap
        self.sized_lines[name] = sized_line(
            name,
            nets,
            width,
            pour_gap if self.ground is not None else math.inf,
            rf=rf,
            mitre=mitre,
            assumed_gap=pour_gap,
        )
        return self

    def pair(self, name: str, x0: float, x1: float, y: float, width: float, gap: float) -> BoardBuilder:
        """Add a coupled pair heading east, its second strip north of the first."""
        nets = ("a1", "a2", "b1", "open")
        self.pairs[name] = placed_pair(name, nets, x0, x1, y, width, gap)
        self.sized_pairs[name] = SizedPair(
            name=name,
            nets=nets,
            width=width * 1e-3,
            gap=gap * 1e-3,
            even_impedance=56.0,
            odd_impedance=45.0,
            permittivity_even=2.9,
            permittivity_odd=2.5,
            angle=1.0,
            length=None,
            beta=80.0,
            pour_gap=self.gap * 1e-3,
            currents=(0.0, 0.0),
            flags=(),
        )
        return self

    def radial(
        self, name: str, apex: tuple[float, float], heading: float, sector: float, inner: float, outer: float
    ) -> BoardBuilder:
        """Add a radial stub."""
        self.radials[name] = placed_radial(name, ("e",), apex, heading, sector, inner, outer)
        self.sized_radials[name] = SizedRadial(
            name=name,
            nets=("e",),
            sector=math.radians(sector),
            inner_radius=inner * 1e-3,
            outer_radius=outer * 1e-3,
            pour_gap=self.gap * 1e-3,
            flags=(),
        )
        return self

    def port(
        self, name: str, net: str, x: float, y: float, heading: float, width: float, to_edge: bool = False
    ) -> BoardBuilder:
        """Add a port."""
        self.ports[name] = placed_port(name, net, x, y, heading, width, to_edge=to_edge)
        return self

    def chip(
        self,
        name: str,
        x: float,
        y: float,
        heading: float,
        nets: tuple[str, str],
        pad: tuple[float, float] = (0.85, 0.95),
        pitch: float = 1.55,
        ground_vias: bool = True,
    ) -> BoardBuilder:
        """Add a two-pad chip; a pad on gnd gets two vias beyond it and the copper between."""
        turn = _Turn(x, y, heading)
        pads = []
        for pin, net, side in (("1", nets[0], -1.0), ("2", nets[1], 1.0)):
            middle = turn.at(side * pitch / 2.0, 0.0)
            pads.append(
                PlacedPad(
                    pin=pin,
                    net=net,
                    x=middle[0],
                    y=middle[1],
                    outline=turn.box(side * pitch / 2.0, 0.0, *pad),
                    heading=(heading + (180.0 if side < 0 else 0.0)) % 360.0,
                )
            )
            if net == "gnd" and ground_vias:
                self._ground_vias(name, turn, side, pitch / 2.0 + pad[0] / 2.0, pad[1])
        reach = pitch + pad[0]
        self.parts[name] = PlacedPart(
            name=name,
            x=nm(x),
            y=nm(y),
            heading=heading,
            pads=tuple(pads),
            outline=turn.box(0.0, 0.0, pitch, pad[1]),
            courtyard=turn.box(0.0, 0.0, reach + 0.5, pad[1] + 0.5),
            cutout=None,
            origin=Origin(name),
        )
        return self

    def _ground_vias(self, name: str, turn: _Turn, side: float, outer: float, across: float) -> None:
        """Put two vias beyond a ground pad, and the copper that joins them to it."""
        for offset in (-0.4, 0.4):
            x, y = turn.at(side * (outer + 0.4), offset)
            self.via(x / 1e6, y / 1e6, purpose=f"part:{name}")
        half = max(across, 1.4)
        self.grounds.append((turn.box(side * (outer + 0.35), 0.0, 0.72, half), Origin(name)))

    def via(self, x: float, y: float, purpose: str = "part:X", net: str = "gnd") -> BoardBuilder:
        """Add a via that came with a part or line."""
        self.vias.append(
            PlacedVia(
                x=nm(x),
                y=nm(y),
                drill=300_000,
                land=600_000,
                net=net,
                purpose=purpose,
                origin=Origin(purpose),
            )
        )
        return self

    def hole(self, x: float, y: float, diameter: float, plated: bool = False) -> BoardBuilder:
        """Add a drilled hole."""
        self.holes.append(
            PlacedHole(x=nm(x), y=nm(y), diameter=nm(diameter), plated=plated, origin=Origin("board"))
        )
        return self

    def strip(self, name: str, net: str, path: list[tuple[float, float]], width: float) -> BoardBuilder:
        """Add a strip."""
        points = tuple((nm(x), nm(y)) for x, y in path)
        self.strips.append(
            Strip(name=name, net=net, width=nm(width), path=points, current=0.0, origin=Origin(name))
        )
        return self

    def flange(self, name: str, x: float, y: float) -> BoardBuilder:
        """Add the transistor over its cut-out: gate to the west, drain to the east, two screws."""
        turn = _Turn(x, y, 0.0)
        pads = [
            PlacedPad(
                pin="gate",
                net="g",
                x=nm(x - 3.6),
                y=nm(y),
                outline=turn.box(-3.6, 0, 2.4, 2.0),
                heading=180.0,
            ),
            PlacedPad(
                pin="drain", net="d", x=nm(x + 3.6), y=nm(y), outline=turn.box(3.6, 0, 2.4, 4.0), heading=0.0
            ),
            PlacedPad(
                pin="source",
                net="gnd",
                x=nm(x),
                y=nm(y),
                outline=turn.box(0, 0, 0, 0),
                heading=0.0,
                ground="flange",
            ),
        ]
        self.parts[name] = PlacedPart(
            name=name,
            x=nm(x),
            y=nm(y),
            heading=0.0,
            pads=tuple(pads),
            outline=turn.box(0, 0, 9.6, 10.4),
            courtyard=turn.box(0, 0, 10.1, 17.6),
            cutout=turn.box(0, 0, 4.4, 10.4),
            origin=Origin(name),
        )
        return self.hole(x, y + 7.2, 2.7).hole(x, y - 7.2, 2.7)

    def placement(self) -> Placement:
        """Return the frozen placement."""
        sized = SizedCircuit(
            circuit=self._circuit(),
            lines=self.sized_lines,
            pairs=self.sized_pairs,
            radials=self.sized_radials,
            lands={},
            default_pour_gap=self.gap * 1e-3,
        )
        return Placement(
            sized=sized,
            width=nm(self.width),
            height=nm(self.height),
            corner_radius=nm(self.corner_radius),
            lines=self.lines,
            pairs=self.pairs,
            radials=self.radials,
            parts=self.parts,
            ports=self.ports,
            strips=tuple(self.strips),
            vias=tuple(self.vias),
            holes=tuple(self.holes),
            ground_shapes=tuple(self.grounds),
            notes=(),
        )

    def _circuit(self) -> Circuit:
        """Return a circuit that has the design, substrate, board and ground of this board."""
        data: dict[str, Any] = {
            "format": 1,
            "design": {
                "title": self.title,
                "frequency": "2.245 GHz",
                "band": ["2.20 GHz", "2.29 GHz"],
                "revision": "A",
            },
            "substrate": {
                "relative_permittivity": 3.55,
                "loss_tangent": 0.0027,
                "height": f"{self.substrate_height} mm",
                "copper_thickness": "35 um",
            },
            "board": {"rules": "in-code", **self.board},
            "ports": {"p": {"net": "a"}, "q": {"net": "b"}},
            "lines": {"l": {"nets": ["a", "b"], "width": "1 mm", "length": "10 mm"}},
        }
        if self.ground is not None:
            data["ground"] = self.ground
        nets = {net: Net(name=net, ends=(), voltage=None, is_dc=True) for net in sorted(self.dc_nets)}
        return Circuit(
            file=circuit_from_data(data),
            rules=rules_from_data(changed(RULES, self.rules)),
            nets=nets,
            dc=DcSolution(voltages={}, currents={}, notes=()),
            spine=(),
            loops=(),
        )


def _bend(points: tuple[tuple[int, int], ...], i: int, mitre: float, width: int) -> Bend:
    """Return the bend at a vertex, mitred in the measure of its turn."""
    turn = turn_degrees(points[i - 1], points[i], points[i + 1])
    return Bend(i, turn, mitre_for_turn(mitre, turn, width, 125_000))


@dataclass(frozen=True)
class _Turn:
    """A part's frame on the board, quarter turns only [mm, deg]."""

    x: float
    y: float
    heading: float

    def at(self, px: float, py: float) -> tuple[int, int]:
        """Return a point of the frame on the board [nm]."""
        cos, sin = ((1, 0), (0, 1), (-1, 0), (0, -1))[round(self.heading / 90.0) % 4]
        return nm(self.x) + nm(px) * cos - nm(py) * sin, nm(self.y) + nm(px) * sin + nm(py) * cos

    def box(self, px: float, py: float, width: float, height: float) -> Ring:
        """Return a box about a point of the frame [nm]."""
        a, b = self.at(px - width / 2.0, py - height / 2.0), self.at(px + width / 2.0, py + height / 2.0)
        return Ring.box(*a, *b)


def straight() -> BoardBuilder:
    """A 50 ohm line between two ports."""
    board = BoardBuilder(30.0, 16.0)
    board.line("main", [(0.3, 8.0), (29.7, 8.0)], 1.1, ("a", "b"))
    return board.port("rf_in", "a", 0.3, 8.0, 0.0, 1.1).port("rf_out", "b", 29.7, 8.0, 180.0, 1.1)


def tee() -> BoardBuilder:
    """A line with an open stub to the north."""
    board = BoardBuilder(30.0, 20.0, corner_radius=1.0)
    board.line("left", [(0.3, 6.0), (15.0, 6.0)], 1.1, ("a", "t"))
    board.line("right", [(15.0, 6.0), (29.7, 6.0)], 1.1, ("t", "b"))
    board.line("stub", [(15.0, 6.0), (15.0, 15.0)], 1.6, ("t",))
    return board.port("rf_in", "a", 0.3, 6.0, 0.0, 1.1).port("rf_out", "b", 29.7, 6.0, 180.0, 1.1)


def feed() -> BoardBuilder:
    """A through line with a folded feed into a bank of three shunt capacitors, and its supply."""
    board = BoardBuilder(34.0, 26.0, corner_radius=1.0)
    board.line("left", [(0.3, 6.0), (12.0, 6.0)], 1.1, ("a", "t"))
    board.line("right", [(12.0, 6.0), (33.7, 6.0)], 1.1, ("t", "b"))
    board.line(
        "feed",
        [(12.0, 6.0), (12.0, 16.0), (16.0, 16.0), (16.0, 11.0), (20.0, 11.0), (20.0, 17.0)],
        0.3,
        ("t", "k"),
    )
    board.strip("bank", "k", [(20.0, 17.0), (25.0, 17.0)], 0.95)
    for i, x in enumerate((20.0, 22.0, 24.0)):
        board.chip(f"C{i + 1}", x, 17.0 - 0.775 - 0.3, 270.0, ("k", "gnd")) if i else board.chip(
            "C1", 20.0, 17.0 + 0.775 + 0.3, 90.0, ("k", "gnd")
        )
    board.line("supply", [(25.0, 17.0), (29.0, 17.0), (29.0, 25.7)], 0.4, ("k", "v"), gap=0.3, rf=False)
    board.dc_nets = {"v"}
    board.port("rf_in", "a", 0.3, 6.0, 0.0, 1.1).port("rf_out", "b", 33.7, 6.0, 180.0, 1.1)
    return board.port("vd", "v", 29.0, 25.7, 270.0, 0.4)


def stage() -> BoardBuilder:
    """A flange transistor over its cut-out between wide lines."""
    board = BoardBuilder(40.0, 26.0, corner_radius=1.0)
    board.flange("Q1", 20.0, 13.0)
    board.line("gate", [(0.3, 13.0), (17.6, 13.0)], 1.6, ("a", "g"))
    board.line("drain", [(22.4, 13.0), (30.0, 13.0)], 5.6, ("d", "f"))
    board.line("out", [(30.0, 13.0), (39.7, 13.0)], 1.1, ("f", "b"))
    return board.port("rf_in", "a", 0.3, 13.0, 0.0, 1.6).port("rf_out", "b", 39.7, 13.0, 180.0, 1.1)


def shorted() -> BoardBuilder:
    """A line with a stub that ends on gnd, a radial stub and a coupled pair beside it."""
    board = BoardBuilder(44.0, 30.0)
    board.line("left", [(0.3, 12.0), (14.0, 12.0)], 1.1, ("a", "t"))
    board.line("right", [(14.0, 12.0), (43.7, 12.0)], 1.1, ("t", "b"))
    board.line("short", [(14.0, 12.0), (14.0, 22.0)], 0.7, ("t", "gnd"))
    board.via(14.0, 22.0, "line:short").via(14.0, 22.8, "line:short")
    board.grounds.append((Ring.box(nm(13.65), nm(21.7), nm(14.35), nm(23.1)), Origin("short")))
    board.radial("bypass", (28.0, 12.0), 90.0, 60.0, 0.65, 8.0)
    board.pair("pickup", 18.0, 36.0, 4.0, 1.0, 0.2)
    return board.port("rf_in", "a", 0.3, 12.0, 0.0, 1.1).port("rf_out", "b", 43.7, 12.0, 180.0, 1.1)


BOARDS = {"straight": straight, "tee": tee, "feed": feed, "stage": stage, "shorted": shorted}


def polygons(shapes: Any) -> list[shapely.Polygon]:
    """Return shapes as polygons with their holes [nm]."""
    return [shapely.Polygon(s.outline.chords(), [h.chords() for h in s.holes]) for s in shapes]
