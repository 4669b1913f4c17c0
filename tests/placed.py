"""Placed things told in millimetres, for boards built by hand in the tests of several stages."""

from __future__ import annotations

import copy
from typing import Any

from layoutgen.geometry import path_length
from layoutgen.origin import Origin
from layoutgen.placement import Bend, PlacedLine, PlacedPair, PlacedPort, PlacedRadial
from layoutgen.sizing import SizedLine

__all__ = ["changed", "nm", "placed_line", "placed_pair", "placed_port", "placed_radial", "sized_line"]

XY = tuple[float, float]


def nm(mm: float) -> int:
    """Millimetres in whole nanometres."""
    return round(mm * 1e6)


def changed(base: dict[str, Any], changes: dict[str, Any]) -> dict[str, Any]:
    """Return nested tables with changes; a value None takes a key out."""
    out = copy.deepcopy(base)
    for key, value in changes.items():
        if value is None:
            out.pop(key, None)
        elif isinstance(value, dict) and isinstance(out.get(key), dict):
            out[key] = changed(out[key], value)
        else:
            out[key] = value
    return out


def placed_line(
    name: str, nets: tuple[str, ...], path: list[XY], width: float, bends: tuple[Bend, ...] = ()
) -> PlacedLine:
    """Return a line along a path."""
    points = tuple((nm(x), nm(y)) for x, y in path)
    return PlacedLine(
        name=name,
        nets=nets,
        width=nm(width),
        path=points,
        bends=bends,
        centre_line=path_length(points),
        budget=(),
        angle=1.0,
        origin=Origin(name),
    )


def sized_line(
    name: str,
    nets: tuple[str, ...],
    width: float,
    pour_gap: float,
    *,
    rf: bool = True,
    mitre: float = 60.0,
    assumed_gap: float | None = None,
) -> SizedLine:
    """Return a line of 50 ohm; the pour's distance as drawn, and as the sizing took it if that differs."""
    assumed = pour_gap if assumed_gap is None else assumed_gap
    return SizedLine(
        name=name,
        nets=nets,
        width=width * 1e-3,
        impedance=50.0,
        asked_impedance=50.0,
        angle=1.0,
        length=None,
        free=False,
        rf=rf,
        effective_permittivity=2.8,
        beta=80.0,
        pour_gap=pour_gap * 1e-3,
        gap_left=assumed * 1e-3,
        gap_right=assumed * 1e-3,
        mitre_percent=mitre,
        bend_length=0.0,
        current=0.0,
        temperature_rise=0.0,
        loss=0.0,
        spread=0.0,
        flags=(),
    )


def placed_pair(
    name: str, nets: tuple[str, ...], x0: float, x1: float, y: float, width: float, gap: float
) -> PlacedPair:
    """Return a coupled pair heading east, its second strip north of the first."""
    paths = [((nm(x0), nm(row)), (nm(x1), nm(row))) for row in (y, y + width + gap)]
    return PlacedPair(
        name=name,
        nets=nets,
        width=nm(width),
        gap=nm(gap),
        paths=(paths[0], paths[1]),
        centre_line=float(nm(x1 - x0)),
        budget=(),
        angle=1.0,
        origin=Origin(name),
    )


def placed_radial(
    name: str, nets: tuple[str, ...], apex: XY, heading: float, sector: float, inner: float, outer: float
) -> PlacedRadial:
    """Return a radial stub."""
    return PlacedRadial(
        name=name,
        nets=nets,
        apex=(nm(apex[0]), nm(apex[1])),
        heading=heading,
        sector_deg=sector,
        inner_radius=nm(inner),
        outer_radius=nm(outer),
        origin=Origin(name),
    )


def placed_port(
    name: str, net: str, x: float, y: float, heading: float, width: float, *, to_edge: bool = False
) -> PlacedPort:
    """Return a port; it points into the board from the edge behind it."""
    return PlacedPort(
        name=name,
        net=net,
        x=nm(x),
        y=nm(y),
        heading=heading,
        edge={0: "west", 90: "south", 180: "east", 270: "north"}[round(heading / 90.0) % 4 * 90],
        width=nm(width),
        to_edge=to_edge,
        origin=Origin(name),
    )
