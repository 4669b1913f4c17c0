"""IPC-D-356A netlists read back by gerbonara: every net of the circuit, every pad, via, hole and port."""

from __future__ import annotations

import cmath
import warnings
from collections import Counter
from collections.abc import Iterator
from typing import Any

from layoutgen.writers.copper_nets import copper_nets
from layoutgen.writers.readback.areas import count_check
from layoutgen.writers.readback.records import Evidence, NotProved, optional_library
from layoutgen.writers.records import Result

__all__ = ["read_netlist"]

_READER = "gerbonara"
_UM = 1000

Point = tuple[str, int, int, int]
"""Conductor, x and y [um], hole [um]."""


def read_netlist(file: str, data: bytes, result: Result) -> Evidence:
    """Yield what gerbonara finds in a netlist."""
    library = optional_library("gerbonara.ipc356")
    if library is None:
        yield NotProved(file, "no independent reader for IPC-D-356A is installed (gerbonara)")
        return
    text = data.decode("ascii")
    with warnings.catch_warnings(record=True) as told:
        warnings.simplefilter("always")
        read = library.Netlist.from_string(text, filename=file)
    yield count_check(file, _READER, "warnings of the reader", len(told), 0)
    ends = text.rstrip().splitlines()[-1:] == ["999"]
    yield count_check(file, "text", "end of file missing", int(not ends), 0)
    conductors = copper_nets(result.circuit.file, tuple(result.circuit.nets))
    found = Counter(_read_point(record) for record in read.test_records if not record.is_middle)
    wanted = Counter(_model_points(result, conductors))
    odd = sum(((found - wanted) + (wanted - found)).values())
    yield count_check(file, _READER, "pads, ports, vias and holes that differ", odd, 0)
    named = {record.net_name for record in read.test_records}
    missing = sum(conductors[net] not in named for net in result.circuit.nets)
    yield count_check(file, _READER, "nets of the circuit without a point", missing, 0)


def _read_point(record: Any) -> Point:
    hole = 0 if record.hole_dia is None else _um(record, record.hole_dia)
    return record.net_name or "", _um(record, record.x), _um(record, record.y), hole


def _um(record: Any, value: float) -> int:
    return round(float(record.unit.convert_to("mm", value)) * 1000.0)


def _model_points(result: Result, conductors: dict[str, str]) -> Iterator[Point]:
    """Yield what must be in the netlist, straight from placement and artwork."""
    for part in result.placement.parts.values():
        for pad in part.pads:
            if pad.outline.polygon().area > 0.0:
                yield conductors[pad.net], _rounded(pad.x), _rounded(pad.y), 0
    for port in result.placement.ports.values():
        x, y = _inside(port.x, port.y, port.heading, port.width)
        yield conductors[port.net], _rounded(x), _rounded(y), 0
    for via in result.artwork.vias:
        yield conductors.get(via.net, via.net), _rounded(via.x), _rounded(via.y), _rounded(via.drill)
    for hole in result.artwork.holes:
        net = "" if hole.net is None else conductors.get(hole.net, hole.net)
        yield net, _rounded(hole.x), _rounded(hole.y), _rounded(hole.diameter)


def _inside(x: int, y: int, heading: float, width: int) -> tuple[int, int]:
    """Return the point half a width inside a port's end [nm]."""
    step = cmath.rect(width / 2.0, heading * cmath.pi / 180.0)
    return round(x + step.real), round(y + step.imag)


def _rounded(nm: int) -> int:
    """Return whole micrometres, halves upwards."""
    return (2 * nm + _UM) // (2 * _UM)
