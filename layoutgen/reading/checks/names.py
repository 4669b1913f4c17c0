"""Checks of names: one name space for ports, lines, pairs and parts; every reference leads somewhere."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

from layoutgen.reading.circuit_records import Footprint, Part
from layoutgen.reading.draft import ELEMENT_TABLES, Draft, Table, given
from layoutgen.reading.validate import misspelt
from layoutgen.reading.wording import Path, a_or_b, nearest, quote

__all__ = ["check_names", "element_sections", "unknown_name"]

_WHAT = {"ports": "a port", "lines": "a line", "coupled": "a coupled pair", "parts": "a part"}
_FEW = 8


def element_sections(draft: Draft) -> dict[str, str]:
    """Return name -> section of every element, faulty ones included."""
    return {name: section for section in ELEMENT_TABLES for name in draft.names(section)}


def check_names(draft: Draft) -> None:
    """Check the shared name space, and the footprints and pins that parts refer to."""
    _check_shared_names(draft)
    for _, table in draft.tables("parts", Part):
        if "footprint" in table.raw and not draft.faults.about(table.at("footprint")):
            _check_footprint(draft, table)


def _check_shared_names(draft: Draft) -> None:
    """Add a fault for each name that two elements bear, naming both lines."""
    sections: dict[str, list[str]] = {}
    for section in ELEMENT_TABLES:
        for name in draft.names(section):
            sections.setdefault(name, []).append(section)
    for name, found in sections.items():
        if len(found) > 1:
            _add_duplicates(draft, name, found)


def _add_duplicates(draft: Draft, name: str, sections: list[str]) -> None:
    """Add a fault for each element but the first in the file that bears a name."""
    first, *rest = sorted(sections, key=lambda section: draft.faults.source.location((section, name)).line)
    place = draft.faults.line_of((first, name))
    for section in rest:
        text = f"{quote(name)}, already the name of {_WHAT[first]} at {place}"
        draft.faults.add((section, name), text, "each name once among ports, lines, coupled pairs and parts")


def unknown_name(draft: Draft, path: Path, name: str, known: Iterable[str], what: str) -> None:
    """Add a fault for a name that nothing bears, with the nearest one or the few there are."""
    names = list(known)
    guess = nearest(name, names)
    if guess:
        allowed = f"{what}; the nearest is {quote(guess)}"
    else:
        allowed = f"{what}: {a_or_b(names)}" if 0 < len(names) <= _FEW else what
    draft.faults.add(path, f"the unknown name {quote(name)}", allowed)


def _check_footprint(draft: Draft, table: Table) -> None:
    """Check that a part's footprint is there and that its pins are the footprint's pads."""
    name = table.raw["footprint"]
    known = draft.names("footprints")
    if name not in known:
        if "footprints" not in draft.misspelt_tables and draft.faults.complete:
            unknown_name(draft, table.at("footprint"), name, known, "a table of [footprints]")
        return
    footprint = draft.data["footprints"][name]
    pads = given(footprint, "pads")
    if isinstance(pads, Mapping) and "pads" not in misspelt(footprint, Footprint):
        _check_pins(draft, table, name, pads)


def _check_pins(draft: Draft, table: Table, name: str, pads: Mapping[str, Any]) -> None:
    """Check a part's nets or pins against the pads of its footprint."""
    pins, place = table.raw.get("pins"), draft.faults.line_of(("footprints", name, "pads"))
    if isinstance(pins, Mapping):
        unknown = [pin for pin in pins if pin not in pads]
        for pin in unknown:
            unknown_name(draft, (*table.at("pins"), pin), str(pin), pads, f"a pad of footprint {quote(name)}")
        guessed = {nearest(str(pin), pads) for pin in unknown}
        for pad in pads:
            if pad not in pins and pad not in guessed and draft.faults.complete:
                text = f"no net for the pad {quote(pad)} of footprint {quote(name)} ({place})"
                draft.faults.add(table.at("pins"), text, "a net for each pad of the footprint")
    elif "nets" in table.raw and len(pads) != 2:
        text = f"a footprint of {len(pads)} pads ({place}) beside nets"
        draft.faults.add(table.at("footprint"), text, "two pads, or pins instead of nets")
