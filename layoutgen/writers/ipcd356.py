"""IPC-D-356A netlist for the bare-board tester: every conductor with all its points.

Columns as in the format's printed tables (from memory; they agree with an outside reader). Units are whole
micrometres, the format's finest. A record's net is the conductor: the nets at both ends of a line are one
piece of copper, and a tester that was told otherwise would report a short for each line. Which nets of the
circuit a conductor holds stands in a comment before the records.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
import shapely

from layoutgen.circuit import OPEN
from layoutgen.errors import WrongInputError
from layoutgen.geometry import Point, Ring
from layoutgen.origin import Fault, Location
from layoutgen.placement import PlacedPad, PlacedPort
from layoutgen.writers.copper_nets import copper_nets
from layoutgen.writers.records import Job, Result

__all__ = ["TestPoint", "short_names", "test_points", "write_ipcd356"]

_LINE, _NET, _REFERENCE, _PIN = 80, 14, 6, 4
_LARGEST_UM, _LARGEST_SIZE_UM = 999_999, 9_999
_UNCONNECTED = "N/C"
_NM_PER_UM = 1000


@dataclass(frozen=True, slots=True, kw_only=True)
class TestPoint:
    """One place where a conductor can be met.

    ``kind`` is 317 (through hole), 327 (surface) or 367 (hole without plating); ``net`` is that of the
    circuit, None for none; ``hole`` is the finished diameter, ``size`` the copper's extents before its turn
    [nm], the second 0 for round copper; ``turn`` [deg] counter-clockwise; ``middle`` marks a point along a
    conductor that ends nowhere there.
    """

    __test__ = False  # its name begins like a test's

    kind: int
    net: str | None
    reference: str
    pin: str
    x: int
    y: int
    size: tuple[int, int]
    turn: float = 0.0
    hole: int = 0
    middle: bool = False


def write_ipcd356(result: Result, job: Job) -> bytes:
    """Return the netlist.

    Raises:
        WrongInputError: A coordinate beyond the format's 999.999 mm.
    """
    nets = tuple(result.circuit.nets)
    conductors = copper_nets(result.circuit.file, nets)
    points = list(test_points(result))
    _refuse_large(points, result)
    names = _Names(conductors, points)
    lines = [
        *_head(result, job),
        *names.lines(nets),
        *_records(result, points, names),
        *_outlines(result),
        "999",
    ]
    return ("\n".join(lines) + "\n").encode("ascii")


def test_points(result: Result) -> Iterator[TestPoint]:
    """Yield pads, ports, vias, holes, then one point for each net that none of these is on."""
    placement = result.placement
    found = [
        *(_pad(part.name, pad) for part in placement.parts.values() for pad in part.pads if _has_copper(pad)),
        *(_port(port) for port in placement.ports.values()),
        *_drilled(result),
    ]
    yield from found
    met = {point.net for point in found}
    for net, name, (x, y), width in _line_ends(result):
        if net not in met:
            met.add(net)
            yield TestPoint(
                kind=327, net=net, reference=name, pin="", x=x, y=y, size=(width, width), middle=True
            )


test_points.__test__ = False  # type: ignore[attr-defined]


def _has_copper(pad: PlacedPad) -> bool:
    return pad.outline.polygon().area > 0.0


def _pad(part: str, pad: PlacedPad) -> TestPoint:
    """Return a pad: middle and extents along and across its first edge."""
    first, second, *rest = pad.outline.chords()
    turn = math.atan2(second[1] - first[1], second[0] - first[0])
    along = [x * math.cos(turn) + y * math.sin(turn) for x, y in (first, second, *rest)]
    across = [y * math.cos(turn) - x * math.sin(turn) for x, y in (first, second, *rest)]
    size = (round(max(along) - min(along)), round(max(across) - min(across)))
    degrees = math.degrees(turn) % 180.0
    if round(degrees) in (90, 180):
        size, degrees = (size if round(degrees) == 180 else size[::-1]), 0.0
    return TestPoint(
        kind=327, net=pad.net, reference=part, pin=pad.pin, x=pad.x, y=pad.y, size=size, turn=degrees
    )


def _port(port: PlacedPort) -> TestPoint:
    """Return a port: the middle of the square of copper at its end."""
    angle, half = math.radians(port.heading), port.width / 2.0
    x, y = round(port.x + half * math.cos(angle)), round(port.y + half * math.sin(angle))
    turn = port.heading % 90.0
    return TestPoint(
        kind=327, net=port.net, reference=port.name, pin="1", x=x, y=y, size=(port.width,) * 2, turn=turn
    )


def _drilled(result: Result) -> Iterator[TestPoint]:
    """Yield vias and holes."""
    for via in result.artwork.vias:
        yield TestPoint(
            kind=317,
            net=via.net,
            reference="VIA",
            pin="",
            x=via.x,
            y=via.y,
            size=(via.land, 0),
            hole=via.drill,
        )
    for hole in result.artwork.holes:
        kind = 317 if hole.plated else 367
        yield TestPoint(
            kind=kind,
            net=hole.net,
            reference="HOLE",
            pin="",
            x=hole.x,
            y=hole.y,
            size=(hole.diameter, 0),
            hole=hole.diameter,
        )


def _line_ends(result: Result) -> Iterator[tuple[str, str, Point, int]]:
    """Yield net, element, place and width [nm] of every end of a line, pair or radial stub."""
    placement = result.placement
    for line in placement.lines.values():
        for net, at in zip(line.nets, (line.path[0], line.path[-1]), strict=False):
            yield net, line.name, at, line.width
    for pair in placement.pairs.values():
        ends = (pair.paths[0][0], pair.paths[0][-1], pair.paths[1][0], pair.paths[1][-1])
        for net, at in zip(pair.nets, ends, strict=True):
            if net != OPEN:
                yield net, pair.name, at, pair.width
    for radial in placement.radials.values():
        yield radial.nets[0], radial.name, radial.apex, radial.inner_radius


def short_names(names: Iterable[str], width: int) -> dict[str, str]:
    """Return each name in so many characters: itself where it fits, else its beginning and a number."""
    given = list(dict.fromkeys(names))
    short = {name: name for name in given if len(name) <= width}
    used = set(short)
    for name in given:
        if name not in short:
            tries = (f"{name[: width - len(str(k))]}{k}" for k in itertools.count(1))
            short[name] = next(text for text in tries if text not in used)
            used.add(short[name])
    return short


class _Names:
    """Names that fit the columns, and the lines that tell what they stand for."""

    def __init__(self, conductors: Mapping[str, str], points: Sequence[TestPoint]) -> None:
        self.conductors = conductors
        self.long = [name for name in dict.fromkeys(conductors.values()) if len(name) > _NET]
        self.aliases = {name: f"NNAME{k}" for k, name in enumerate(self.long, start=1)}
        self.references = short_names((point.reference for point in points), _REFERENCE)
        self.pins = short_names((point.pin for point in points), _PIN)

    def net(self, name: str | None) -> str:
        """Return the conductor's name as it stands in a record."""
        if name is None:
            return _UNCONNECTED
        conductor = self.conductors.get(name, name)
        return self.aliases.get(conductor, conductor)

    def lines(self, nets: Sequence[str]) -> Iterator[str]:
        """Yield the aliases of long nets, which nets each conductor holds, and names that were shortened."""
        yield from (f"P  {alias}  {name}" for name, alias in self.aliases.items())
        for conductor in dict.fromkeys(self.conductors[net] for net in nets):
            held = [net for net in nets if self.conductors[net] == conductor]
            yield from _wrapped(f"C  CONDUCTOR {conductor} HOLDS", held)
        for what, names in (("REFERENCE", self.references), ("PIN", self.pins)):
            yield from (
                f"C  {what} {short} IS {name}" for name, short in names.items() if name and short != name
            )


def _wrapped(head: str, words: Sequence[str]) -> Iterator[str]:
    """Yield words after a head, in as many lines as they need."""
    line = head
    for word in words:
        if len(line) + 1 + len(word) > _LINE and line != head:
            yield line
            line = head
        line = f"{line} {word}"
    yield line


def _head(result: Result, job: Job) -> Iterator[str]:
    design = result.circuit.file.design
    yield f"P  JOB {_plain(job.stem)}"[:_LINE]
    yield "P  CODE 00"
    yield "P  UNITS CUST 1"
    yield f"P  TITLE {_plain(design.title)}"[:_LINE]
    yield f"P  REV {_plain(design.revision or 'none')}"[:_LINE]
    yield "P  VER IPC-D-356A"
    yield "P  IMAGE PRIMARY"
    yield "C  UNIT 0.001 MM; ORIGIN AT THE SOUTH-WEST CORNER, SEEN FROM THE PRIMARY SIDE"
    yield "C  LAYER 01 IS THE PRIMARY SIDE; M MARKS POINTS WHERE LINES MEET AND NO PAD IS"
    yield "C  FEATURE SIZES ABOVE 9.999 MM ARE WRITTEN AS 9.999 MM"


def _plain(text: str) -> str:
    return text.encode("ascii", "replace").decode()


def _records(result: Result, points: Sequence[TestPoint], names: _Names) -> Iterator[str]:
    """Yield the points' records, conductor by conductor."""
    order = {name: k for k, name in enumerate(dict.fromkeys(names.conductors.values()))}
    masks = _mask_codes(result, points)
    numbered = sorted(range(len(points)), key=lambda k: order.get(_conductor(names, points[k]), len(order)))
    yield from (_record(points[k], masks[k], names) for k in numbered)


def _conductor(names: _Names, point: TestPoint) -> str:
    return "" if point.net is None else names.conductors.get(point.net, "")


def _mask_codes(result: Result, points: Sequence[TestPoint]) -> list[int]:
    """Return for each point where solder mask covers it: 0 nowhere, 1 primary, 2 secondary side, 3 both."""
    xs, ys = np.array([p.x for p in points], dtype=float), np.array([p.y for p in points], dtype=float)
    codes = np.zeros(len(points), dtype=int)
    for layer, code in (("soldermask_top", 1), ("soldermask_bottom", 2)):
        openings = shapely.union_all(
            [
                shapely.Polygon(shape.outline.chords(), [hole.chords() for hole in shape.holes])
                for shape in result.artwork.on(layer)
            ]
        )
        shapely.prepare(openings)
        codes += np.where(shapely.intersects_xy(openings, xs, ys), 0, code)
    both = [3 if point.kind == 327 else 0 for point in points]
    return [int(code & 1 if surface else code) for code, surface in zip(codes, both, strict=True)]


def _record(point: TestPoint, mask: int, names: _Names) -> str:
    """Return one record of fixed columns."""
    hole = f"D{_size(point.hole):04d}" if point.hole else " " * 5
    plating = " " if not point.hole else "U" if point.kind == 367 else "P"
    access = "A01" if point.kind == 327 else "A00"
    width, height = (_size(value) for value in point.size)
    return (
        f"{point.kind}{names.net(point.net):<{_NET}}   {names.references[point.reference]:<{_REFERENCE}}"
        f"-{names.pins[point.pin]:<{_PIN}}{'M' if point.middle else ' '}{hole}{plating}{access}"
        f"X{_um(point.x):+07d}Y{_um(point.y):+07d}X{width:04d}Y{height:04d}R{round(point.turn):03d} S{mask}"
    )


def _um(nm: int) -> int:
    """Return whole micrometres, halves rounded up."""
    return (nm + _NM_PER_UM // 2) // _NM_PER_UM


def _size(nm: int) -> int:
    return min(_um(nm), _LARGEST_SIZE_UM)


def _outlines(result: Result) -> Iterator[str]:
    """Yield the board's edge and its cut-outs, arcs as chords."""
    for shape in result.artwork.on("profile"):
        kind = "BOARD_EDGE" if shape.role == "profile" else "OTHER_FAB"
        yield from _chain(f"389{kind:<14}     ", shape.outline)


def _chain(head: str, ring: Ring) -> Iterator[str]:
    """Yield an outline's vertices, its first one repeated, in lines of 80 columns."""
    points = ring.chords()
    line = head
    for x, y in (*points, points[0]):
        vertex = f"X{_um(x):+07d}Y{_um(y):+07d} "
        if len(line) + len(vertex) > _LINE:
            yield line.rstrip()
            line = "089 "
        line += vertex
    yield line.rstrip()


def _refuse_large(points: Sequence[TestPoint], result: Result) -> None:
    """Refuse coordinates that do not fit six digits."""
    values = [abs(value) for point in points for value in (point.x, point.y)]
    reach = _um(max([*values, result.placement.width, result.placement.height]))
    if reach > _LARGEST_UM:
        fault = Fault(
            Location("artwork", 0), "", f"a coordinate of {reach / 1000:.3f} mm", "up to 999.999 mm"
        )
        raise WrongInputError([fault])
