"""Checks within one port, line or coupled pair."""

from __future__ import annotations

from layoutgen.reading.checks.exclusive import forbid, one_of, require
from layoutgen.reading.checks.nets import possible_supplies
from layoutgen.reading.circuit_records import CoupledPair, Line, Port
from layoutgen.reading.draft import Draft, Table
from layoutgen.reading.faults import Faults
from layoutgen.reading.wording import Path

__all__ = ["check_coupled", "check_lines", "check_ports"]

_RADIAL_KEYS = ("sector", "radius", "inner_radius")


def check_ports(draft: Draft) -> None:
    """Check each port: dc needs a voltage and has no impedance, rf the reverse; a place needs an edge."""
    faults = draft.faults
    for _, table in draft.tables("ports", Port):
        kind = table.raw.get("kind", "rf")
        if kind == "dc":
            require(faults, table, "voltage", 'the supply\'s voltage, such as "-2.8 V"')
            forbid(faults, table, ("impedance",), 'impedance belongs to a port of kind "rf"')
        elif kind == "rf" and not table.has("kind"):
            forbid(faults, table, ("voltage",), 'voltage belongs to a port with kind = "dc"')
        elif kind == "rf":
            forbid(faults, table, ("voltage",), 'voltage belongs to a port of kind "dc"')
        if "at" in table.raw and not table.has("edge") and faults.complete:
            faults.add(table.at("at"), "at without edge", "edge beside it: at is counted along that edge")


def check_lines(draft: Draft) -> None:
    """Check each line: how cross-section and length are given, and the keys of its kind and shape."""
    without_width = possible_supplies(draft)
    for name, table in draft.tables("lines", Line):
        if table.has("shape"):
            _check_radial(draft.faults, table)
        else:
            _check_plain(draft.faults, table, name in without_width)
        if name in draft.lines:
            _check_radii(draft.faults, table, draft.lines[name])
            _check_line_nets(draft.faults, table, draft.lines[name])


def _check_radial(faults: Faults, table: Table) -> None:
    """Check the keys of a radial stub."""
    require(faults, table, "sector", 'the opening angle of the radial stub, such as "60 deg"')
    reason = 'a radial stub has sector, radius and inner_radius; leave out shape = "radial" for a line'
    forbid(faults, table, ("impedance", "width", "angle", "length", "gap"), reason)
    if table.raw.get("kind", "microstrip") != "microstrip":
        forbid(faults, table, ("kind",), reason)


def _check_radii(faults: Faults, table: Table, line: Line) -> None:
    """Check that a radial stub's inner radius is the smaller one."""
    inner, outer = line.inner_radius, line.radius
    if inner is not None and outer is not None and inner >= outer:
        place = faults.line_of(table.at("radius"))
        faults.add_value(table.at("inner_radius"), table.raw["inner_radius"], f"less than radius ({place})")


def _check_plain(faults: Faults, table: Table, is_supply: bool) -> None:
    """Check a line that is no radial stub."""
    radial = table.written(*_RADIAL_KEYS)
    if radial and not table.has("impedance", "width", "angle", "length"):
        faults.add(table.at(radial[0]), f"{radial[0]} without shape", 'shape = "radial" beside it')
        return
    forbid(faults, table, _RADIAL_KEYS, 'belongs to a stub with shape = "radial"')
    note = "; both may be left out only where a line joins DC nets alone"
    one_of(faults, table, "impedance", "width", not is_supply, note)
    one_of(faults, table, "angle", "length", True, ' (length = "free" lets the placer choose)')
    kind = table.raw.get("kind", "microstrip")
    if kind == "grounded_coplanar":
        require(faults, table, "gap", 'the distance from strip to pour, such as "0.3 mm"')
    elif kind == "microstrip":
        forbid(faults, table, ("gap",), 'belongs to a line with kind = "grounded_coplanar"')


def _check_line_nets(faults: Faults, table: Table, line: Line) -> None:
    """Check the nets of a line: two different ones, or one with an open far end."""
    nets, path = line.nets, table.at("nets")
    if len(nets) == 2 and nets[0] == nets[1]:
        faults.add_value((*path, 1), nets[1], "another net than at the line's first end")
    if nets == ("gnd",):
        faults.add_value((*path, 0), "gnd", "a second net: a line from gnd to an open end joins nothing")
    if line.shape == "radial" and len(nets) == 2:
        faults.add_value(path, nets, "one net: a radial stub ends open")
    if line.length == "free" and len(nets) == 1:
        faults.add_value(table.at("length"), "free", "angle or a length: an open stub's length is never free")


def check_coupled(draft: Draft) -> None:
    """Check each coupled pair: impedances or dimensions, angle or length, its four nets."""
    faults = draft.faults
    for name, table in draft.tables("coupled", CoupledPair):
        _check_pair_section(faults, table)
        one_of(faults, table, "angle", "length")
        pair = draft.coupled.get(name)
        if pair is not None:
            _check_pair(faults, table, pair)


def _check_pair_section(faults: Faults, table: Table) -> None:
    """Check that a pair has both impedances, or width and gap."""
    impedances, dimensions = ("even_impedance", "odd_impedance"), ("width", "gap")
    if table.has(*impedances) and table.has(*dimensions):
        keys = table.written(*dimensions)
        reason = "even_impedance and odd_impedance, or width and gap, not both"
        if keys and table.written(*impedances):
            faults.add(table.at(keys[0]), f"{keys[0]} beside an impedance", reason)
    elif table.has(*impedances) or table.has(*dimensions):
        for key in impedances if table.has(*impedances) else dimensions:
            require(faults, table, key, "even_impedance and odd_impedance, or width and gap")
    elif faults.complete:
        found = "neither impedances nor dimensions"
        faults.add(table.at("even_impedance"), found, "even_impedance and odd_impedance, or width and gap")


def _check_pair(faults: Faults, table: Table, pair: CoupledPair) -> None:
    """Check the values of a pair against each other."""
    even, odd = pair.even_impedance, pair.odd_impedance
    if even is not None and odd is not None and even <= odd:
        path = table.at("even_impedance")
        faults.add_value(
            path, table.raw["even_impedance"], "more than odd_impedance: the even mode's is the higher"
        )
    for start, which in ((0, "first"), (2, "second")):
        if pair.nets[start] == pair.nets[start + 1]:
            place: Path = (*table.at("nets"), start + 1)
            faults.add_value(place, pair.nets[start], f"two different nets at the ends of the {which} line")
