"""What has been laid so far, as an immutable value, and the growing candidate that adds to it."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field, replace

from layoutgen.circuit import End
from layoutgen.geometry import Point
from layoutgen.placement.clearance import Kind, Obstacle, Obstacles
from layoutgen.placement.frame import Box, Pose, box_around, hull, slices_to_world, unit
from layoutgen.placement.records import Choice
from layoutgen.placement.tour import Headings
from layoutgen.placement.words import Route

__all__ = [
    "BOARD_STEP",
    "EDGES",
    "Bounds",
    "Device",
    "Growth",
    "LaidLine",
    "LaidPair",
    "LaidPort",
    "LaidRadial",
    "LaidStrip",
    "Pending",
    "State",
    "corridor_box",
    "edge_of_heading",
    "leg_boxes",
    "leg_slices",
    "nothing_laid",
]

EDGES: Mapping[str, float] = {"east": 0.0, "north": 90.0, "west": 180.0, "south": 270.0}
"""Board edges with the heading [deg] out of the board."""

BOARD_STEP = 500_000
"""Boards without a given size come in steps of 0.5 mm; so much may copper of given length end short [nm]."""

FAR = 1_000_000_000  # a corridor's length [nm]: longer than any board


def edge_of_heading(heading: float) -> str | None:
    """Return the edge that a heading [deg] leaves by, None for one that is no quarter turn."""
    return next((edge for edge, out in EDGES.items() if out == heading % 360.0), None)


@dataclass(frozen=True, slots=True)
class Bounds:
    """Where the profile is known to be [nm] (infinite: not yet), and the largest width and height."""

    x0: float = -math.inf
    y0: float = -math.inf
    x1: float = math.inf
    y1: float = math.inf
    width: float = math.inf
    height: float = math.inf

    def at(self, edge: str) -> float:
        """Return the coordinate of one edge."""
        return {"east": self.x1, "west": self.x0, "north": self.y1, "south": self.y0}[edge]

    def known(self, edge: str) -> bool:
        """True when the place of an edge is settled."""
        return math.isfinite(self.at(edge))

    def fixed(self, edge: str, value: float) -> Bounds:
        """Return the bounds with one edge settled, and the opposite one where the size is given."""
        new = replace(self, **{{"east": "x1", "west": "x0", "north": "y1", "south": "y0"}[edge]: value})
        if edge in ("east", "west") and math.isfinite(self.width):
            return (
                replace(new, x0=value, x1=value + self.width)
                if edge == "west"
                else replace(new, x0=value - self.width, x1=value)
            )
        if edge in ("north", "south") and math.isfinite(self.height):
            return (
                replace(new, y0=value, y1=value + self.height)
                if edge == "south"
                else replace(new, y0=value - self.height, y1=value)
            )
        return new

    def holds(self, extent: tuple[float, float, float, float]) -> bool:
        """True when an extent (margins included) lies inside what is known."""
        x0, y0, x1, y1 = extent
        inside = x0 >= self.x0 and y0 >= self.y0 and x1 <= self.x1 and y1 <= self.y1
        return inside and x1 - x0 <= self.width and y1 - y0 <= self.height


@dataclass(frozen=True, slots=True)
class LaidLine:
    """A line with its route; ``start`` is the index of the net at the first vertex.

    ``open_edge`` names the edge to which the last vertex may still be moved (a free line to a port), and
    ``root_edge`` the same for the first vertex.
    """

    name: str
    start: int
    points: tuple[Point, ...]
    route: Route
    open_edge: str | None = None
    root_edge: str | None = None


@dataclass(frozen=True, slots=True)
class LaidPair:
    """A coupled pair: pose of a1 heading to a2, side of the second line (1 left, -1 right), length [nm]."""

    name: str
    pose: Pose
    side: int
    length: int


@dataclass(frozen=True, slots=True)
class LaidRadial:
    """A radial stub: apex and heading of its axis."""

    name: str
    pose: Pose


@dataclass(frozen=True, slots=True)
class LaidStrip:
    """A strip between pads or along a bank; edges as for lines, ``inset`` short of the profile [nm]."""

    net: str
    width: int
    points: tuple[Point, ...]
    open_edge: str | None = None
    root_edge: str | None = None
    inset: int = 0


@dataclass(frozen=True, slots=True)
class LaidPort:
    """A port: the end of its copper so far, its edge, the width there, and what carries it."""

    name: str
    point: Point
    edge: str
    width: int
    carrier: str
    movable: bool


@dataclass(frozen=True, slots=True)
class Device:
    """A transistor's plane: stages up to ``stage`` belong behind it, later ones beyond it."""

    stage: int
    axis: int
    sign: float
    coordinate: int

    def is_crossed(self, box: Box, stage: int) -> bool:
        """True when something of a stage reaches to the wrong side of the plane."""
        low, high = (
            (box[self.axis] - self.coordinate) * self.sign,
            (box[self.axis + 2] - self.coordinate) * self.sign,
        )
        return max(low, high) > 0 if stage <= self.stage else min(low, high) < 0


@dataclass(frozen=True, slots=True)
class Pending:
    """Something that leaves a placed point and is not laid yet; ``turns`` are the choices left [deg].

    ``offset`` is how far from the node a pad begins [nm]; ``cluster`` the number of the loop cluster that is
    entered here as a whole.
    """

    end: End
    at: Pose
    turns: tuple[float, ...]
    offset: int = 0
    cluster: int | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class State:
    """Everything laid so far; ``escapes`` are ways out that are known to be clear, by end and place."""

    obstacles: Obstacles
    lines: Mapping[str, LaidLine]
    pairs: Mapping[str, LaidPair]
    radials: Mapping[str, LaidRadial]
    parts: Mapping[str, Pose]
    ports: Mapping[str, LaidPort]
    strips: tuple[LaidStrip, ...]
    line_vias: tuple[tuple[str, Point], ...]
    line_grounds: tuple[tuple[str, Box], ...]
    pending: tuple[Pending, ...]
    used: Mapping[str, tuple[float, ...]]
    bounds: Bounds
    extent: tuple[float, float, float, float]
    bends: float
    devices: tuple[Device, ...] = ()
    crossings: int = 0
    cost: float = 0.0
    start: int = 0
    ways: Mapping[str, Choice] = field(default_factory=dict)
    roles: Mapping[str, Headings] = field(default_factory=dict)
    escapes: Mapping[tuple[End, Pose], Growth] = field(default_factory=dict, compare=False, repr=False)


def nothing_laid() -> State:
    """Return a state in which nothing is laid and nothing is known of the board."""
    return State(
        obstacles=Obstacles.empty(),
        lines={},
        pairs={},
        radials={},
        parts={},
        ports={},
        strips=(),
        line_vias=(),
        line_grounds=(),
        pending=(),
        used={},
        bounds=Bounds(),
        extent=(0, 0, 0, 0),
        bends=0.0,
    )


@dataclass(slots=True, kw_only=True)
class Growth:
    """A candidate while it is built: what it would add to a state."""

    state: State
    bank_side: int = 1
    obstacles: list[Obstacle] = field(default_factory=list)
    lines: dict[str, LaidLine] = field(default_factory=dict)
    pairs: dict[str, LaidPair] = field(default_factory=dict)
    radials: dict[str, LaidRadial] = field(default_factory=dict)
    parts: dict[str, Pose] = field(default_factory=dict)
    ports: dict[str, LaidPort] = field(default_factory=dict)
    strips: list[LaidStrip] = field(default_factory=list)
    line_vias: list[tuple[str, Point]] = field(default_factory=list)
    line_grounds: list[tuple[str, Box]] = field(default_factory=list)
    pending: list[Pending] = field(default_factory=list)
    used: dict[str, tuple[float, ...]] = field(default_factory=dict)
    bounds: Bounds = field(default_factory=Bounds)
    bends: float = 0.0
    devices: list[Device] = field(default_factory=list)
    roles: dict[str, Headings] = field(default_factory=dict)
    forecast: tuple[Box, ...] = ()

    def use(self, net: str, heading: float) -> None:
        """Note that an arm leaves a net's node with a heading [deg]."""
        before = self.used.get(net, self.state.used.get(net, ()))
        self.used[net] = (*before, heading % 360.0)

    def extent(self, margins: Mapping[Kind, int]) -> tuple[float, float, float, float]:
        """Return the state's extent [nm] with this candidate's boxes and their margins."""
        reaches = [item.reach(margins) for item in self.obstacles if not item.corridor]
        return hull((self.state.extent, *reaches, *self.forecast))

    def applied(
        self,
        extent: tuple[float, float, float, float],
        cost: float,
        crossings: int = 0,
        way: tuple[str, Choice] | None = None,
    ) -> State:
        """Return the state with this candidate laid."""
        state = self.state
        return State(
            obstacles=state.obstacles.plus(self.obstacles),
            lines={**state.lines, **self.lines},
            pairs={**state.pairs, **self.pairs},
            radials={**state.radials, **self.radials},
            parts={**state.parts, **self.parts},
            ports={**state.ports, **self.ports},
            strips=state.strips + tuple(self.strips),
            line_vias=state.line_vias + tuple(self.line_vias),
            line_grounds=state.line_grounds + tuple(self.line_grounds),
            pending=(*state.pending, *self.pending),
            used={**state.used, **self.used},
            bounds=self.bounds,
            extent=extent,
            bends=state.bends + self.bends,
            devices=state.devices + tuple(self.devices),
            crossings=crossings,
            cost=cost,
            start=state.start,
            ways=state.ways if way is None else {**state.ways, way[0]: way[1]},
            roles={**state.roles, **self.roles} if self.roles else state.roles,
        )


def leg_boxes(points: tuple[Point, ...], width: int) -> list[Box]:
    """Return a box [nm] for each leg of a line, corners of bends included (exact for quarter turns)."""
    last = len(points) - 2
    return [
        _leg_box(points[i], points[i + 1], width, bend_before=i > 0, bend_after=i < last)
        for i in range(len(points) - 1)
    ]


def leg_slices(points: tuple[Point, ...], width: int) -> list[list[Box]]:
    """Return boxes [nm] that cover each leg of a line: one for a quarter turn, several for a slanted leg."""
    out, last = [], len(points) - 2
    for i, box in enumerate(leg_boxes(points, width)):
        (ax, ay), (bx, by) = points[i], points[i + 1]
        if ax == bx or ay == by:
            out.append([box])
            continue
        before, after = width // 2 if i else 0, width // 2 if i < last else 0
        pose = Pose(ax, ay, math.degrees(math.atan2(by - ay, bx - ax)) % 360.0)
        length = math.ceil(math.dist((ax, ay), (bx, by)))
        out.append(slices_to_world(pose, (-before, -(width // 2) - 1, length + after, width // 2 + 1)))
    return out


def _leg_box(a: Point, b: Point, width: int, *, bend_before: bool, bend_after: bool) -> Box:
    """Return the box of one leg, half a width longer where it ends in a bend."""
    half = width / 2.0
    before, after = half if bend_before else 0.0, half if bend_after else 0.0
    (ax, ay), (bx, by) = a, b
    if ay == by:
        x0, x1 = (ax - before, bx + after) if bx >= ax else (bx - after, ax + before)
        y0, y1 = ay - half, ay + half
    elif ax == bx:
        y0, y1 = (ay - before, by + after) if by >= ay else (by - after, ay + before)
        x0, x1 = ax - half, ax + half
    else:
        x0, y0, x1, y1 = _slanted_box(a, b, half, before, after)
    return math.floor(x0), math.floor(y0), math.ceil(x1), math.ceil(y1)


def _slanted_box(
    a: Point, b: Point, half: float, before: float, after: float
) -> tuple[float, float, float, float]:
    """Return the box around a leg at an angle."""
    length = math.dist(a, b)
    ux, uy = (b[0] - a[0]) / length, (b[1] - a[1]) / length
    corners = [
        (p[0] + s * ux * e + t * uy * half, p[1] + s * uy * e - t * ux * half)
        for p, s, e in ((a, -1.0, before), (b, 1.0, after))
        for t in (-1.0, 1.0)
    ]
    xs, ys = [c[0] for c in corners], [c[1] for c in corners]
    return min(xs), min(ys), max(xs), max(ys)


def corridor_box(point: Point, heading: float, width: int) -> Box:
    """Return the box from a point far out of the board along a quarter-turn heading."""
    ux, uy = unit(heading)
    half = width // 2
    far = (round(point[0] + ux * FAR), round(point[1] + uy * FAR))
    box = box_around([point, far])
    return (
        (box[0] - half, box[1], box[2] + half, box[3])
        if ux == 0.0
        else (box[0], box[1] - half, box[2], box[3] + half)
    )
