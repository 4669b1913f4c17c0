"""What the board house must know, as rows and sentences: drills, stackup, critical widths, notes.

Everything comes from the model; what the circuit file does not say (finish, colours) is said to be open.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator
from dataclasses import dataclass

import shapely

from layoutgen.geometry import Point
from layoutgen.numbers import fixed, mm_short
from layoutgen.reading import CircuitFile
from layoutgen.units import quantity_text, to_nm
from layoutgen.writers.outlines import doubled_area
from layoutgen.writers.plain import many
from layoutgen.writers.records import Result
from layoutgen.writers.xnc import hits_of

__all__ = [
    "CRITICAL_HEADS",
    "DRILL_HEADS",
    "STACK_HEADS",
    "Critical",
    "criticals",
    "drill_rows",
    "notes",
    "open_points",
    "stack_rows",
]

DRILL_HEADS = ("Tool", "Finished diameter (mm)", "Holes", "Plated", "For")
STACK_HEADS = ("Layer", "Gerber function", "Material", "Thickness")
CRITICAL_HEADS = (
    "No",
    "Name",
    "Finished width (mm)",
    "Tolerance (mm)",
    "Gap (mm)",
    "Impedance (ohm)",
    "Rule",
)

_USES = {"ViaDrill": "vias", "ComponentDrill": "component leads", "MechanicalDrill": "screws, tooling"}
_SAME_NM = 1000
"""Distances that differ by less than a micrometre are the same [nm]."""
_HOLD = "do not change: sets the impedance"
_CURRENT = "not critical for RF; never narrower: carries current"


@dataclass(frozen=True, slots=True)
class Critical:
    """One line of the table of widths, and where its number stands on the drawing [nm]."""

    cells: tuple[str, ...]
    at: Point


def drill_rows(result: Result) -> list[tuple[str, ...]]:
    """Return one row for each tool, plated ones first, in the order of the drill files."""
    rows: list[tuple[str, ...]] = []
    for plated in (True, False):
        for (function, diameter), places in hits_of(result, plated).items():
            letter = _letter(len(rows))
            kind = "yes" if plated else "no"
            rows.append((letter, mm_short(diameter), str(len(places)), kind, _USES[function]))
    return rows


def _letter(number: int) -> str:
    """Return A, B, ... Z, AA, AB for 0, 1, ..."""
    text = ""
    number += 1
    while number:
        number, rest = divmod(number - 1, 26)
        text = chr(ord("A") + rest) + text
    return text


def stack_rows(result: Result) -> list[tuple[str, ...]]:
    """Return the layers from the top to the bottom."""
    substrate = result.circuit.file.substrate
    copper = f"{mm_short(to_nm(substrate.copper_thickness))} mm finished, with its plating"
    laminate = (
        f"laminate, design permittivity {fixed(substrate.relative_permittivity, 4).rstrip('0').rstrip('.')}, "
        f"loss tangent {fixed(substrate.loss_tangent, 6).rstrip('0').rstrip('.')}"
    )
    return [
        ("legend, top", "Legend,Top", "ink", ""),
        ("solder mask, top", "Soldermask,Top", _mask_material(result, "soldermask_top"), ""),
        ("copper 1", "Copper,L1,Top", "copper, lines and pour", copper),
        ("substrate", "", laminate, f"{mm_short(to_nm(substrate.height))} mm"),
        ("copper 2", "Copper,L2,Bot", "copper, ground plane", copper),
        ("solder mask, bottom", "Soldermask,Bot", _mask_material(result, "soldermask_bottom"), ""),
    ]


def _mask_material(result: Result, layer: str) -> str:
    """Return what a solder mask is of; one that is open wherever the board is, is none."""
    outlines = result.artwork.on("profile")
    board = sum(abs(doubled_area(s.outline)) for s in outlines if s.role == "profile")
    if any(abs(doubled_area(s.outline)) >= board > 0 for s in result.artwork.on(layer) if not s.holes):
        return "none: open all over"
    given = result.circuit.rules.mask is not None
    return "solder mask" if given else "solder mask, where the board house offers one"


def criticals(result: Result) -> list[Critical]:
    """Return lines, coupled pairs and radial stubs, numbered, with what must be held."""
    tolerance = _tolerance(result.circuit.file)
    found: list[tuple[tuple[str, ...], Point]] = []
    for line in result.placement.lines.values():
        sized = result.sized.lines[line.name]
        coplanar = result.circuit.file.lines[line.name].kind == "grounded_coplanar"
        gap = _width(to_nm(sized.pour_gap)) if coplanar else ""
        impedance = fixed(sized.impedance, 2) if sized.rf else ""
        rule = _HOLD if sized.rf else _CURRENT
        found.append(((line.name, _width(line.width), tolerance, gap, impedance, rule), _longest(line.path)))
    for pair in result.placement.pairs.values():
        modes = result.sized.pairs[pair.name]
        impedance = f"even {fixed(modes.even_impedance, 2)}, odd {fixed(modes.odd_impedance, 2)}"
        cells = (pair.name, _width(pair.width), tolerance, _width(pair.gap), impedance, _HOLD)
        found.append((cells, _longest(pair.paths[0])))
    for radial in result.placement.radials.values():
        size = f"radii {_width(radial.inner_radius)}, {_width(radial.outer_radius)}"
        sector = f"sector of {fixed(radial.sector_deg, 2)} deg: do not change"
        found.append(((radial.name, size, tolerance, "", "", sector), radial.apex))
    return [Critical((str(number), *cells), at) for number, (cells, at) in enumerate(found, start=1)]


def _tolerance(file: CircuitFile) -> str:
    """Return the width tolerance that the response was examined with, or that none is stated."""
    if file.tolerance is None or not file.tolerance.width:
        return "not stated"
    return f"+/-{_width(to_nm(file.tolerance.width))}"


def _width(nm: int) -> str:
    """Return a width [mm] to a tenth of a micrometre."""
    return fixed(nm / 1e6, 4)


def _longest(path: tuple[Point, ...]) -> Point:
    """Return the middle of the longest leg [nm]."""
    (x0, y0), (x1, y1) = max(itertools.pairwise(path), key=lambda leg: math.dist(*leg))
    return (x0 + x1) // 2, (y0 + y1) // 2


def notes(result: Result) -> Iterator[str]:
    """Yield what is to be made, and what must not be touched."""
    file, rules = result.circuit.file, result.circuit.rules
    if result.count("error"):
        yield f"NOT TO BE MADE: {many(result.count('error'), 'finding')} of severity error; see the report."
    copper, source = rules.copper, f" (source: {rules.source})" if rules.source else ""
    yield (
        f"Drawn for the rule file “{rules.name}”{source}: copper at least {_mm_or(copper.min_width)} wide, "
        f"gaps at least {_mm_or(copper.min_gap)}, copper to the profile at least "
        f"{_mm_or(copper.min_edge_distance)}."
    )
    yield from _width_notes(copper.undercut)
    yield (
        "Do not add copper for balance, teardrops or marks inside the profile, do not round or shave copper, "
        "do not remove open stubs: they are part of the circuit."
    )
    bare = "covered by solder mask" if file.board.mask_over_lines else "free of solder mask"
    yield f"RF lines are {bare}, as the mask files show. Mask files hold the openings (negative polarity)."
    yield _holes_note(result)
    yield (
        "All layers are seen from the top, nothing is mirrored; the origin is the board's south-west corner. "
        "The profile file is drawn along the finished edges, cut-outs included."
    )
    yield from _cutout_notes(result)
    yield (
        "Electrical test to the IPC-D-356A file. It names conductors: a line of the circuit joins the "
        "nets at its ends, and a stub shorted at its end joins its net to ground."
    )


def _cutout_notes(result: Result) -> Iterator[str]:
    """Yield what the inner corners of cut-outs may be, and where copper comes near to edges on purpose."""
    flanges = [part.name for part in result.placement.parts.values() if part.cutout is not None]
    cutouts = sum(shape.role == "cutout" for shape in result.artwork.on("profile"))
    if flanges:
        yield (
            f"The flange of {', '.join(flanges)} stands in a cut-out: say which radius its inner corners "
            "will have before routing, and do not widen it."
        )
    if cutouts > len(flanges):
        yield "Inner corners of other cut-outs may have the router's radius."
    for name, distance in _near_edges(result):
        yield f"Copper comes as near as {mm_short(distance)} mm to the edge of {name}: on purpose, leave it."


def _near_edges(result: Result) -> Iterator[tuple[str, int]]:
    """Yield edges that copper comes nearer to than the rules' distance, and how near it comes [nm]."""
    least = result.circuit.rules.copper.min_edge_distance
    copper = [*result.artwork.on("copper_top"), *result.artwork.on("copper_bottom")]
    if least is None or not copper:
        return
    pieces = [shapely.Polygon(s.outline.chords(), [h.chords() for h in s.holes]) for s in copper]
    for shape in result.artwork.on("profile"):
        edge = shapely.LinearRing(shape.outline.chords())
        distance = round(min(map(edge.distance, pieces)))
        if distance < to_nm(least) - _SAME_NM:
            cutout = f"the cut-out under {shape.origin.element}"
            yield cutout if shape.role == "cutout" else "the board", distance


def _width_notes(undercut: float) -> Iterator[str]:
    """Yield where widths are measured, and whether the artwork is compensated by an undercut [m]."""
    yield (
        "Widths and gaps are those of the finished copper, measured at its foot, where it meets the "
        "laminate: the impedances are computed for a rectangular section, and the field is strongest at "
        "the foot (common practice, no source)."
    )
    if undercut:
        yield (
            f"The artwork is drawn wider than the finished copper by {_mm_or(undercut)} on each edge, "
            "for the undercut of the rule file. Do not compensate again."
        )
    else:
        yield "The artwork has the finished widths. Compensate for your own etching, and for nothing else."


def _holes_note(result: Result) -> str:
    plating = result.circuit.rules.vias.plating
    copper = f", copper in the holes at least {_mm_or(plating)}" if plating else ""
    return f"Diameters are finished ones{copper}. Vias are not filled; the mask files show which are covered."


def open_points(result: Result) -> Iterator[str]:
    """Yield what the circuit file does not say and the board house has to agree on."""
    yield (
        "Finish: not stated in the circuit file. To be agreed; nickel under gold adds loss at microwave "
        "frequencies (common practice, no source)."
    )
    yield "Laminate: not stated by name. It must have the design permittivity, thickness and foil given here."
    if result.circuit.file.substrate.copper_roughness:
        roughness = quantity_text(result.circuit.file.substrate.copper_roughness, "length")
        yield f"Foil: roughness {roughness} rms towards the substrate was assumed."
    yield "Colours of solder mask and legend, panel, marking, tolerances of profile and holes: not stated."
    if _tolerance(result.circuit.file) == "not stated":
        yield "Width tolerance: not stated in the circuit file. To be agreed before etching."


def _mm_or(metres: float | None) -> str:
    return "the board house's own limit" if metres is None else f"{mm_short(to_nm(metres))} mm"
