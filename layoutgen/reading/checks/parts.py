"""Checks within one part: pads, value, case, data file, currents and terminations."""

from __future__ import annotations

import re
from collections.abc import Mapping
from pathlib import Path

from layoutgen.reading.checks.exclusive import forbid, one_of, require
from layoutgen.reading.checks.names import unknown_name
from layoutgen.reading.circuit_records import Part
from layoutgen.reading.draft import Draft, Table, given
from layoutgen.reading.wording import quote

__all__ = ["check_parts"]

_EXAMPLES = {"resistor": "50 ohm", "capacitor": "8.2 pF", "inductor": "10 nH"}
_TOUCHSTONE = re.compile(r".*\.(?:s([1-9][0-9]*)p|ts)", re.IGNORECASE | re.DOTALL)


def check_parts(draft: Draft, folder: Path) -> None:
    """Check each part of a circuit file.

    Args:
        draft: The file half read.
        folder: Where the paths of data files start.
    """
    for name, table in draft.tables("parts", Part):
        _check_kind(draft, table)
        _check_pads(draft, table)
        _check_pins(draft, table)
        if name in draft.parts:
            _check_nets(draft, table, draft.parts[name])
        if isinstance(table.raw.get("data"), str) and not draft.faults.about(table.at("data")):
            _check_data(draft, table, folder)


def _check_kind(draft: Draft, table: Table) -> None:
    """Check the keys that a part's kind asks for or excludes."""
    faults, kind = draft.faults, str(table.raw.get("kind"))
    if kind in _EXAMPLES:
        require(faults, table, "value", f'the {kind}\'s value, such as "{_EXAMPLES[kind]}"')
    elif kind in ("transistor", "other"):
        forbid(faults, table, ("value",), "belongs to a resistor, capacitor or inductor")
    if kind == "transistor":
        reason = "belongs to a part of two pads"
        forbid(faults, table, ("nets", "case", "series_resistance", "series_inductance"), reason)
        if not table.has("nets"):
            require(faults, table, "pins", "a net for each pin of the transistor")
        if not table.has("case"):
            require(faults, table, "footprint", "a table of [footprints]")
    else:
        one_of(faults, table, "nets", "pins")
        one_of(faults, table, "case", "footprint")


def _check_pads(draft: Draft, table: Table) -> None:
    """Check what goes with nets (two pads) and what with pins (a footprint)."""
    faults = draft.faults
    if table.has("pins") and table.has("nets"):
        return
    if table.has("pins"):
        if table.raw.get("kind") != "transistor":
            forbid(faults, table, ("case",), "a chip's case goes with nets; a part with pins has a footprint")
        forbid(
            faults,
            table,
            ("series_resistance", "series_inductance"),
            "belongs to a part of two pads with nets",
        )
        pins = table.raw.get("pins")
        kind = str(table.raw.get("kind"))
        if kind in _EXAMPLES and isinstance(pins, Mapping) and len(pins) != 2:
            faults.add(table.at("pins"), f"{len(pins)} pins", f"two pins on a {kind}")
    elif table.has("nets") and table.raw.get("kind") != "transistor":
        forbid(faults, table, ("dc", "terminations", "data_ports"), "belongs to a part with pins")


def _check_nets(draft: Draft, table: Table, part: Part) -> None:
    """Check that the two pads of a chip lie on two nets."""
    if part.nets is not None and part.nets[0] == part.nets[1]:
        draft.faults.add_value(
            (*table.at("nets"), 1), part.nets[1], "another net than at the part's first pad"
        )


def _check_pins(draft: Draft, table: Table) -> None:
    """Check the keys that name pins of the part."""
    pins, faults = table.raw.get("pins"), draft.faults
    if "terminations" in table.raw and "data" in table.raw:
        found = f"terminations beside data ({faults.line_of(table.at('data'))})"
        faults.add(table.at("terminations"), found, "terminations or data, not both")
    if "data_ports" in table.raw and not table.has("data"):
        faults.add(table.at("data_ports"), "data_ports without data", "data_ports beside a data file")
    if not isinstance(pins, Mapping):
        return
    terminations = table.raw.get("terminations")
    for pin in terminations if isinstance(terminations, Mapping) else ():
        _check_pin(draft, table, ("terminations", pin), pin)
        if pins.get(pin) == "gnd":
            text = f"a termination of the pin {quote(str(pin))}, which is on gnd"
            faults.add((*table.at("terminations"), pin), text, "terminations of pins on other nets")
    _check_data_ports(draft, table)
    _check_currents(draft, table)


def _check_data_ports(draft: Draft, table: Table) -> None:
    """Check that the data's ports are pins of the part, each once."""
    seen: set[str] = set()
    for number, pin in enumerate(_listed(table.raw.get("data_ports"))):
        _check_pin(draft, table, ("data_ports", number), pin)
        if isinstance(pin, str) and pin in seen:
            draft.faults.add_value((*table.at("data_ports"), number), pin, "each pin once")
        seen.add(str(pin))


def _listed(value: object) -> list[object]:
    """Return the items of a list, none for anything else."""
    return list(value) if isinstance(value, list | tuple) else []


def _check_currents(draft: Draft, table: Table) -> None:
    """Check the pins of a part's direct currents."""
    for number, row in enumerate(_listed(table.raw.get("dc"))):
        if not isinstance(row, Mapping):
            continue
        for key in ("from", "to"):
            _check_pin(draft, table, ("dc", number, key), row.get(key))
        if isinstance(row.get("from"), str) and row.get("from") == row.get("to"):
            draft.faults.add_value((*table.at("dc"), number, "to"), row["to"], "another pin than from")


def _check_pin(draft: Draft, table: Table, path: tuple[str | int, ...], pin: object) -> None:
    """Add a fault when a pin is named that neither the part nor its footprint has."""
    pins = table.raw["pins"]
    pads = given(draft.data, "footprints", str(table.raw.get("footprint")), "pads")
    if not isinstance(pin, str) or (isinstance(pads, Mapping) and pin in pads):
        return
    if pin not in pins and not draft.faults.about((*table.path, *path)):
        unknown_name(draft, (*table.path, *path), pin, pins, "a pin of the part")


def _check_data(draft: Draft, table: Table, folder: Path) -> None:
    """Check a part's data file: its name, its number of ports, that it is there; its contents come later."""
    name, path, faults = table.raw["data"], table.at("data"), draft.faults
    if isinstance(table.raw.get("pins"), Mapping):
        require(faults, table, "data_ports", "the pins of the data's ports in order")
    match = _TOUCHSTONE.fullmatch(name)
    if match is None:
        faults.add_value(path, name, "a Touchstone file named .s1p, .s2p, ... or .ts")
        return
    if not _is_file(folder / name):
        faults.add_value(path, name, "an existing file; the path starts at the circuit file", "no such file")
    elif match[1]:
        _check_port_count(draft, table, int(match[1]))


def _is_file(path: Path) -> bool:
    """Tell whether a regular file is there; a path that the system refuses is none."""
    try:
        return path.is_file()
    except (OSError, ValueError):
        return False


def _check_port_count(draft: Draft, table: Table, ports: int) -> None:
    """Check the number of ports that a data file's name tells against the part's nets or pins."""
    faults, path, name = draft.faults, table.at("data"), table.raw["data"]
    listed, nets = table.raw.get("data_ports"), table.raw.get("nets")
    if isinstance(listed, list | tuple) and len(listed) != ports:
        why = f"a file of {ports} ports"
        faults.add_value(path, name, f"as many ports as data_ports, {len(listed)}", why)
    elif isinstance(nets, list | tuple) and ports > 2:
        faults.add_value(path, name, "one or two ports for a part of two pads", f"a file of {ports} ports")
    elif isinstance(nets, list | tuple) and ports == 1 and "gnd" not in nets:
        faults.add_value(path, name, "two ports, or an end of the part on gnd", "a file of one port")
