"""report.json: every result as numbers, exactly the contract's keys.

Lengths are millimetres with six decimals made from whole nanometres; all other numbers have fixed decimals,
so equal results give equal bytes.
"""

from __future__ import annotations

import hashlib
import math
from collections.abc import Mapping, Sequence

import numpy as np
import numpy.typing as npt

from layoutgen.artwork import LAYERS, LineCopper
from layoutgen.checks import Finding, NotChecked
from layoutgen.geometry import Point
from layoutgen.numbers import Fixed, fixed, json_text, mm
from layoutgen.placement import PlacedLine, PlacedPad, PlacedPair, PlacedPart, PlacedRadial
from layoutgen.response import Response
from layoutgen.sizing import BudgetEntry
from layoutgen.writers.records import Job, Result

__all__ = ["findings_report", "write_report_json"]

FORMAT = 1
"""Version of the report's shape; a key that changes its meaning raises it."""

Entry = dict[str, object]
Matrix = npt.NDArray[np.complex128]


def write_report_json(result: Result, job: Job) -> bytes:
    """Return the file; ``job.files`` are listed with their hashes."""
    report: Entry = {
        "format": FORMAT,
        "design": _design(result),
        "board": {"width_mm": mm(result.placement.width), "height_mm": mm(result.placement.height)},
        "layers": [{"name": name, "gds": list(numbers)} for name, numbers in LAYERS.items()],
        "lines": [_line(result, name) for name in result.circuit.file.lines],
        "coupled": [_pair(result, result.placement.pairs[name]) for name in result.circuit.file.coupled],
        "strips": _strips(result),
        "parts": [_part(result, result.placement.parts[name]) for name in result.circuit.file.parts],
        "ports": _ports(result),
        "vias": _vias(result),
        "holes": _holes(result),
        "findings": [_finding(finding) for finding in result.findings],
        "not_checked": [_not_checked(item) for item in result.checks.not_checked],
        "response_ports": list(result.response.ports) if result.response else [],
        "response": _response(result.response),
        "files": [
            {"path": name, "sha256": hashlib.sha256(data).hexdigest()} for name, data in job.files.items()
        ],
    }
    if not job.repeatable:
        report["seconds"] = {stage: fixed(value) for stage, value in result.seconds.items()}
    return (json_text(report) + "\n").encode("utf-8")


def findings_report(result: Result) -> str:
    """Return a result's findings alone in the report's shape, as JSON text."""
    return findings_json(result.findings, result.checks.not_checked)


def findings_json(findings: Sequence[Finding], not_checked: Sequence[NotChecked]) -> str:
    """Return findings alone in the report's shape, as JSON text: for artwork of any origin."""
    return json_text(
        {
            "format": FORMAT,
            "findings": [_finding(finding) for finding in findings],
            "not_checked": [_not_checked(item) for item in not_checked],
        }
    )


def _design(result: Result) -> Entry:
    design = result.circuit.file.design
    return {
        "title": design.title,
        "revision": design.revision,
        "frequency_hz": fixed(design.frequency, 3),
        "band_hz": [fixed(f, 3) for f in design.band],
    }


def _line(result: Result, name: str) -> Entry:
    """Return a line, or a radial stub, which has three keys more and no impedance or angle."""
    placement = result.placement
    if name in placement.radials:
        return _radial(result, placement.radials[name])
    line, sized = placement.lines[name], result.sized.lines[name]
    return {
        "name": name,
        "nets": list(line.nets),
        "impedance_ohm": fixed(sized.impedance),
        "angle_deg": _degrees(line.angle),
        "width_mm": mm(line.width),
        "pour_gap_mm": _gaps(result.artwork.line_copper.get(name)),
        "effective_permittivity": fixed(sized.effective_permittivity),
        "centre_line_mm": mm(round(line.centre_line)),
        "path_mm": _path(line.path),
        "bends": _mitres(line),
        "current_a": fixed(abs(sized.current)),
        "loss_db": fixed(sized.loss * line.centre_line * 1e-9),
        "budget": _budget(line.budget),
    }


def _radial(result: Result, radial: PlacedRadial) -> Entry:
    """Return a radial stub: its path is its apex and the middle of its outer arc."""
    turn = math.radians(radial.heading)
    x, y = radial.apex
    far = (round(x + radial.outer_radius * math.cos(turn)), round(y + radial.outer_radius * math.sin(turn)))
    return {
        "name": radial.name,
        "nets": list(radial.nets),
        "impedance_ohm": None,
        "angle_deg": None,
        "width_mm": None,
        "pour_gap_mm": _gaps(result.artwork.line_copper.get(radial.name)),
        "effective_permittivity": None,
        "centre_line_mm": mm(radial.outer_radius),
        "path_mm": _path((radial.apex, far)),
        "bends": [],
        "current_a": fixed(0.0),
        "loss_db": None,
        "budget": [],
        "sector_deg": fixed(radial.sector_deg),
        "inner_radius_mm": mm(radial.inner_radius),
        "outer_radius_mm": mm(radial.outer_radius),
    }


def _pair(result: Result, pair: PlacedPair) -> Entry:
    sized = result.sized.pairs[pair.name]
    return {
        "name": pair.name,
        "nets": list(pair.nets),
        "even_impedance_ohm": fixed(sized.even_impedance),
        "odd_impedance_ohm": fixed(sized.odd_impedance),
        "angle_deg": _degrees(pair.angle),
        "width_mm": mm(pair.width),
        "gap_mm": mm(pair.gap),
        "centre_line_mm": mm(round(pair.centre_line)),
        "path_mm": [_path(path) for path in pair.paths],
        "effective_permittivity": [fixed(sized.permittivity_even), fixed(sized.permittivity_odd)],
        "current_a": [fixed(abs(current)) for current in sized.currents],
        "budget": _budget(pair.budget),
    }


def _strips(result: Result) -> list[Entry]:
    return [
        {
            "net": strip.net,
            "width_mm": mm(strip.width),
            "path_mm": _path(strip.path),
            "current_a": fixed(abs(strip.current)),
        }
        for strip in result.placement.strips
    ]


def _part(result: Result, part: PlacedPart) -> Entry:
    """Return a part: ``nets`` is a list for one with two pads, a pin map (also as ``pins``) for others."""
    given = result.circuit.file.parts[part.name]
    ends: Entry = {"nets": list(given.nets)} if given.nets else _pin_map(given.pins)
    return {
        "name": part.name,
        "x_mm": mm(part.x),
        "y_mm": mm(part.y),
        "heading_deg": _heading(part.heading),
        **ends,
        "pads": [_pad(pad) for pad in part.pads],
    }


def _pin_map(pins: Mapping[str, str] | None) -> Entry:
    return {"nets": dict(pins or {}), "pins": dict(pins or {})}


def _pad(pad: PlacedPad) -> Entry:
    return {
        "pin": pad.pin,
        "net": pad.net,
        "x_mm": mm(pad.x),
        "y_mm": mm(pad.y),
        "polygon_mm": _path(pad.outline.chords()),
    }


def _ports(result: Result) -> list[Entry]:
    return [
        {
            "name": port.name,
            "net": port.net,
            "x_mm": mm(port.x),
            "y_mm": mm(port.y),
            "heading_deg": _heading(port.heading),
        }
        for port in (result.placement.ports[name] for name in result.circuit.file.ports)
    ]


def _vias(result: Result) -> list[Entry]:
    return [
        {
            "x_mm": mm(via.x),
            "y_mm": mm(via.y),
            "drill_mm": mm(via.drill),
            "pad_mm": mm(via.land),
            "net": via.net,
            "for": via.purpose,
        }
        for via in result.artwork.vias
    ]


def _holes(result: Result) -> list[Entry]:
    return [
        {
            "x_mm": mm(hole.x),
            "y_mm": mm(hole.y),
            "diameter_mm": mm(hole.diameter),
            "plated": hole.plated,
            "net": hole.net,
        }
        for hole in result.artwork.holes
    ]


def _finding(finding: Finding) -> Entry:
    return {
        "rule": finding.rule,
        "severity": finding.severity,
        "measured": _number(finding.measured),
        "limit": _number(finding.limit),
        "unit": finding.unit,
        "at_mm": None if finding.at is None else [mm(finding.at[0]), mm(finding.at[1])],
        "layer": finding.layer,
        "items": list(finding.items),
        "nets": list(finding.nets),
        "text": finding.text,
        "waived": finding.waived,
    }


def _not_checked(item: NotChecked) -> Entry:
    return {"rule": item.rule, "reason": item.reason}


def _response(response: Response | None) -> list[Entry]:
    """Return the S-parameters at the band's edges and the design frequency, to the ports' own impedances."""
    if response is None:
        return []
    spots = zip(response.spots.tolist(), response.wanted_at_spots, response.as_drawn_at_spots, strict=True)
    return [
        {"frequency_hz": fixed(frequency, 3), "wanted": _matrix(wanted), "as_drawn": _matrix(drawn)}
        for frequency, wanted, drawn in spots
    ]


def _matrix(s: Matrix) -> list[list[list[Fixed]]]:
    return [[[fixed(v.real, 9), fixed(v.imag, 9)] for v in row] for row in s.tolist()]


def _gaps(copper: LineCopper | None) -> list[Fixed | None]:
    """Return the pour's distance left and right; null where there is none within six heights."""
    gaps = (copper.gap_left, copper.gap_right) if copper else (None, None)
    return [None if gap is None else mm(gap) for gap in gaps]


def _budget(entries: Sequence[BudgetEntry]) -> list[Entry]:
    return [{"cause": e.cause, "angle_deg": _degrees(e.angle), "at": e.at} for e in entries]


def _mitres(line: PlacedLine) -> list[Fixed]:
    return [fixed(bend.mitre_percent, 3) for bend in line.bends]


def _path(points: Sequence[Point]) -> list[list[Fixed]]:
    return [[mm(x), mm(y)] for x, y in points]


def _degrees(angle: float) -> Fixed:
    return fixed(math.degrees(angle))


def _heading(degrees: float) -> Fixed:
    return fixed(degrees % 360.0, 3)


def _number(value: float | None) -> Fixed | None:
    return None if value is None or not math.isfinite(value) else fixed(value)
