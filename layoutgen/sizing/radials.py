"""Radial stubs: inner radius from the host line, outer radius where the stub looks short."""

from __future__ import annotations

import math
from collections.abc import Mapping

from layoutgen.circuit import Circuit, EndKind
from layoutgen.formulas.radial import radial_stub_radius
from layoutgen.origin import Fault
from layoutgen.reading import Line
from layoutgen.sizing.pours import pour_distances_of_widths
from layoutgen.sizing.records import SizedRadial
from layoutgen.sizing.stackup import Stackup, rounded_up, to_nm

__all__ = ["radial_fault", "sized_radial"]


def radial_fault(circuit: Circuit, stackup: Stackup, name: str, widths: Mapping[str, float]) -> Fault | None:
    """Return the fault of a stub whose outer radius does not exceed the inner one, or None."""
    line = circuit.file.lines[name]
    inner = _inner_radius(circuit, stackup, name, widths)
    if line.radius is None or line.radius > inner:
        return None
    key = f"lines.{name}.radius"
    return Fault(
        circuit.file.location(key),
        key,
        f"{line.radius * 1e3:g} mm",
        f"more than the inner radius, {inner * 1e3:g} mm",
    )


def host_width(circuit: Circuit, name: str, widths: Mapping[str, float]) -> float | None:
    """Return the width [m] of the widest line or strip that meets a radial stub; None where there is none."""
    net = circuit.nets[circuit.file.lines[name].nets[0]]
    hosts = [widths[end.element] for end in net.ends if end.element in widths and end.kind is not EndKind.PAD]
    return max(hosts, default=None)


def _sector(line: Line) -> float:
    """Return a stub's opening angle [rad], which reading has made sure is given."""
    assert line.sector is not None
    return line.sector


def _inner_radius(circuit: Circuit, stackup: Stackup, name: str, widths: Mapping[str, float]) -> float:
    """Return the inner radius [m]: given, or half the host's width over cos(sector/2), at least min_width."""
    line = circuit.file.lines[name]
    if line.inner_radius is not None:
        return line.inner_radius
    host = host_width(circuit, name, widths)
    inner = 0.5 * host / math.cos(0.5 * _sector(line)) if host is not None else 0.0
    return rounded_up(max(inner, stackup.min_width))


def sized_radial(circuit: Circuit, stackup: Stackup, name: str, widths: Mapping[str, float]) -> SizedRadial:
    """Return one radial stub's record.

    Args:
        circuit: The circuit.
        stackup: Substrate and copper.
        name: The stub.
        widths: Widths of all lines and pairs by name [m].
    """
    line = circuit.file.lines[name]
    sector = _sector(line)
    inner = _inner_radius(circuit, stackup, name, widths)
    outer = line.radius
    if outer is None:
        f, h, er = stackup.frequency, stackup.height, stackup.er
        outer = to_nm(float(radial_stub_radius(f, h, er, sector, inner, stackup.t)))
    chord = (inner + outer) * math.sin(0.5 * sector)
    u = chord / stackup.height
    flags = (
        ()
        if 0.3 <= u <= 6.0
        else (f"radial stub's open end: chord over height {u:.3g} (fitted for 0.3 to 6)",)
    )
    return SizedRadial(
        name=name,
        nets=line.nets,
        sector=sector,
        inner_radius=inner,
        outer_radius=outer,
        pour_gap=pour_distances_of_widths(circuit, stackup, [u], [line.nets])[0],
        flags=flags,
    )
