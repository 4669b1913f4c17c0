"""What each piece of copper is, for the designer who takes it over: net, size, and what may be touched.

A width that the circuit file gives is to be kept; one that follows from an impedance may be adjusted by
whoever has a better model of the stackup, as long as the impedance stays.
"""

from __future__ import annotations

from layoutgen.numbers import fixed, mm
from layoutgen.units import to_nm
from layoutgen.writers.copper_nets import copper_nets
from layoutgen.writers.plain import comma_separated, many
from layoutgen.writers.records import Job, Result

__all__ = ["SHAPE_HEADS", "shape_rows", "write_shape_table"]

SHAPE_HEADS = (
    "Shape", "Kind", "Layer", "Net", "Conductor", "Width (mm)", "Gap (mm)", "Impedance (ohm)",
    "May be changed",
)  # fmt: skip
"""Headings of :func:`shape_rows`."""

KEEP = "do not change width"
ADJUST = "impedance, may be adjusted"
_WIDER = "may be wider, not narrower: carries current"
_POUR = "may be redrawn, its distance to lines kept"

Row = tuple[str, ...]


def write_shape_table(result: Result, job: Job) -> bytes:
    """Return the table as comma-separated values; it is the same for equal results."""
    return comma_separated(SHAPE_HEADS, shape_rows(result))


def shape_rows(result: Result) -> list[Row]:
    """Return lines, pairs, radial stubs, strips, pads, then ground copper."""
    conductors = copper_nets(result.circuit.file, tuple(result.circuit.nets))
    rows = [*_lines(result), *_pairs(result), *_others(result), *_pads(result), *_ground(result)]
    return [(*row[:4], conductors.get(row[3].split(" ")[0], row[3]), *row[4:]) for row in rows]


def _lines(result: Result) -> list[Row]:
    rows: list[Row] = []
    for line in result.placement.lines.values():
        sized, given = result.sized.lines[line.name], result.circuit.file.lines[line.name]
        rule = _WIDER if not sized.rf else KEEP if given.width is not None else ADJUST
        gap = mm(to_nm(sized.pour_gap)) if given.kind == "grounded_coplanar" else ""
        impedance = fixed(sized.impedance, 2) if sized.rf else ""
        rows.append(
            (line.name, "line", "copper_top", " ".join(line.nets), mm(line.width), gap, impedance, rule)
        )
    return rows


def _pairs(result: Result) -> list[Row]:
    rows: list[Row] = []
    for pair in result.placement.pairs.values():
        sized, given = result.sized.pairs[pair.name], result.circuit.file.coupled[pair.name]
        rule = KEEP if given.width is not None else ADJUST
        impedance = f"{fixed(sized.even_impedance, 2)} even, {fixed(sized.odd_impedance, 2)} odd"
        for strip, nets in (("a", pair.nets[:2]), ("b", pair.nets[2:])):
            net = " ".join(net for net in nets if net != "open")
            sizes = (mm(pair.width), mm(pair.gap), impedance)
            rows.append((f"{pair.name}:{strip}", "coupled pair", "copper_top", net, *sizes, rule))
    return rows


def _others(result: Result) -> list[Row]:
    """Return radial stubs and strips."""
    rows: list[Row] = [
        (r.name, "radial stub", "copper_top", r.nets[0], "", "", "", KEEP)
        for r in result.placement.radials.values()
    ]
    rows += [
        (s.name, "strip", "copper_top", s.net, mm(s.width), "", "", _WIDER) for s in result.placement.strips
    ]
    return rows


def _pads(result: Result) -> list[Row]:
    return [
        (f"{part.name}.{pad.pin}", "pad", "copper_top", pad.net, "", "", "", "fits the part: keep")
        for part in result.placement.parts.values()
        for pad in part.pads
        if pad.outline.polygon().area > 0.0
    ]


def _ground(result: Result) -> list[Row]:
    """Return ground copper: one row for each kind, with how many pieces there are."""
    rows: list[Row] = []
    for layer in ("copper_top", "copper_bottom"):
        for role in ("ground", "pour", "plane", "land"):
            shapes = [s for s in result.artwork.on(layer) if s.role == role]
            for net in dict.fromkeys(s.net or "" for s in shapes):
                count = sum((s.net or "") == net for s in shapes)
                name = f"{role} ({many(count, 'piece')})"
                rows.append((name, role, layer, net, "", "", "", _POUR))
    return rows
