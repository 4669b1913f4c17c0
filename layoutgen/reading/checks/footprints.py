"""Checks within one footprint: what a pad needs, what its kind of ground excludes."""

from __future__ import annotations

from collections.abc import Mapping

from layoutgen.reading.checks.exclusive import forbid, require
from layoutgen.reading.circuit_records import Footprint, Pad, Part
from layoutgen.reading.draft import Draft, Table
from layoutgen.reading.validate import misspelt
from layoutgen.reading.wording import Path, quote

__all__ = ["check_footprints"]


def check_footprints(draft: Draft) -> None:
    """Check each footprint, and that ground pads are on gnd wherever a part uses them."""
    for _, table in draft.tables("footprints", Footprint):
        for pad in _pads(table):
            _check_pad(draft, table, pad)
    _check_ground_pins(draft)


def _pads(table: Table) -> list[Table]:
    """Return the pads of a footprint as tables."""
    pads = table.raw.get("pads")
    return [
        Table((*table.path, "pads", str(name)), raw, frozenset(misspelt(raw, Pad)))
        for name, raw in (pads.items() if isinstance(pads, Mapping) else ())
        if isinstance(raw, Mapping)
    ]


def _check_pad(draft: Draft, footprint: Table, pad: Table) -> None:
    """Check one pad."""
    faults, ground = draft.faults, pad.raw.get("ground")
    if ground not in (None, "flange", "vias"):
        return
    if ground == "flange":
        forbid(faults, pad, ("at", "size", "heading"), "a flange pin has no pad; it meets the carrier")
        if not footprint.has("cutout") and faults.complete:
            faults.add(
                pad.at("ground"), "a flange without a cut-out", "cutout beside pads: the flange lies under it"
            )
    else:
        require(faults, pad, "at", 'the pad\'s middle, such as ["3.6 mm", "0 mm"]')
        require(faults, pad, "size", 'the pad\'s size, such as ["2.4 mm", "2 mm"]')
        if not pad.has("ground"):
            require(faults, pad, "heading", "the heading in which a line leaves the pad")
    if ground != "vias":
        forbid(faults, pad, ("thermal",), 'belongs to a pad with ground = "vias"')


def _check_ground_pins(draft: Draft) -> None:
    """Check that pins whose pads are ground pads are on gnd."""
    for _, table in draft.tables("parts", Part):
        footprint = draft.footprints.get(str(table.raw.get("footprint")))
        for pad, key, net in _pad_nets(table, footprint) if footprint else ():
            ground = footprint.pads[pad].ground if footprint and pad in footprint.pads else None
            if ground is not None and isinstance(net, str) and net != "gnd":
                text = f"the net {quote(net)} on a pad with ground = {quote(ground)}"
                draft.faults.add((*table.path, *key), text, '"gnd"')


def _pad_nets(part: Table, footprint: Footprint) -> list[tuple[str, Path, object]]:
    """Return pad, key and net of a part's pins, or of its nets in the order of the footprint's pads."""
    pins, nets = part.raw.get("pins"), part.raw.get("nets")
    if isinstance(pins, Mapping):
        return [(str(pin), ("pins", pin), net) for pin, net in pins.items()]
    listed = nets if isinstance(nets, list | tuple) else ()
    return [
        (pad, ("nets", number), net)
        for number, (pad, net) in enumerate(zip(footprint.pads, listed, strict=False))
    ]
