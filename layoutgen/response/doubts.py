"""Where the circuit model is not to be believed, and a field solution is worth its time.

In: an artwork and its traced copper. Out: :class:`Doubt` values, each with place, elements and reason: lines
side by side that couple, formulas out of range, discontinuities closer than one substrate height, parts tall
enough to couple, pour that resonates between its vias. What of it breaks a rule is the checks' business.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Sequence

import numpy as np

from layoutgen.artwork import Artwork
from layoutgen.circuit import GROUND
from layoutgen.formulas.constants import C0
from layoutgen.geometry import Point
from layoutgen.placement import PlacedLine, PlacedPart, Placement
from layoutgen.response.chain import FloatArray
from layoutgen.response.copper import Copper, Joint
from layoutgen.response.parts import terminals
from layoutgen.response.paths import SNAP
from layoutgen.response.records import Doubt
from layoutgen.response.runs import parallel_runs
from layoutgen.sizing import Arm, junction_flags

__all__ = ["find_doubts"]

DEFAULT_COUPLING = -30.0
"""Coupling of neighbouring lines that is worth a look, without a rule [dB]: common practice, no source."""

_NM = 1e-9
_POUR_POINTS = 200_000  # of a pour's outline that are measured


def find_doubts(artwork: Artwork, copper: Copper) -> tuple[Doubt, ...]:
    """Return the places where the model is doubtful, by kind, then in file order."""
    placement = artwork.placement
    return (
        *_runs(placement),
        *_line_formulas(placement),
        *_junction_formulas(placement, copper),
        *_too_close(placement, copper),
        *_tall_parts(placement),
        *_open_pour(artwork),
    )


def _runs(placement: Placement) -> Iterator[Doubt]:
    """Yield the parallel runs whose coupling is above the rule's limit, or -30 dB without a rule."""
    rule = placement.sized.circuit.rules.spacing
    limit = rule.max_coupling if rule is not None and rule.max_coupling is not None else DEFAULT_COUPLING
    for run in parallel_runs(placement):
        if run.coupling > limit:
            where = f"{run.gap * 1e3:.2f} mm apart over {run.length * 1e3:.2f} mm"
            reason = f"side by side, {where}: about {run.coupling:.0f} dB of coupling is not in the network"
            yield Doubt(at=run.at, items=run.items, reason=reason)


def _line_formulas(placement: Placement) -> Iterator[Doubt]:
    """Yield what of lines, pairs and radial stubs is outside the range of its formulas."""
    sized = placement.sized
    places = {name: _middle(line.path) for name, line in placement.lines.items()}
    places |= {name: _middle(pair.paths[0]) for name, pair in placement.pairs.items()}
    places |= {name: stub.apex for name, stub in placement.radials.items()}
    straight = {name for name, line in placement.lines.items() if not line.bends}
    flags = {name: line.flags for name, line in sized.lines.items() if line.rf}
    flags |= {name: pair.flags for name, pair in sized.pairs.items()}
    flags |= {name: stub.flags for name, stub in sized.radials.items()}
    for name, texts in flags.items():
        for flag in texts:
            if not (flag.startswith("bend") and name in straight):
                yield Doubt(at=places[name], items=(name,), reason=f"out of range: {flag}")


def _junction_formulas(placement: Placement, copper: Copper) -> Iterator[Doubt]:
    """Yield the junctions outside the range of their models, and those with too many arms for one."""
    lines = placement.sized.lines
    for joint in copper.joints:
        at = round(joint.x), round(joint.y)
        names = tuple(dict.fromkeys(copper.pieces[arm.piece].line for arm in joint.arms))
        items = tuple(name for name in names if name) or (joint.net,)
        if not any(name not in lines or lines[name].rf for name in items):
            continue
        arms = [Arm(str(i), i, arm.heading, arm.width, arm.is_line) for i, arm in enumerate(joint.arms)]
        for flag in junction_flags(placement.sized, joint.net, arms):
            yield Doubt(at=at, items=items, reason=f"out of range: {flag}")
        if len(arms) > 4:
            reason = f"{len(arms)} pieces of copper meet; the network joins them in a point"
            yield Doubt(at=at, items=items, reason=reason)


def _too_close(placement: Placement, copper: Copper) -> Iterator[Doubt]:
    """Yield the straight legs of RF lines with less than one substrate height between discontinuities."""
    height = placement.sized.circuit.file.substrate.height
    for line in placement.lines.values():
        if not placement.sized.lines[line.name].rf:
            continue
        reaches = _reaches(line, copper)
        for k, (a, b) in enumerate(itertools.pairwise(line.path)):
            first, second = reaches[k], reaches[k + 1]
            if first is None or second is None:
                continue
            clear = math.dist(a, b) * _NM - first[1] - second[1]
            if clear < height:
                apart = f"{max(clear, 0.0) * 1e3:.2f} mm" if clear > 0.0 else "no line"
                reason = f"{apart} between {first[0]} and {second[0]}, less than one substrate height"
                yield Doubt(at=_middle((a, b)), items=(line.name,), reason=reason)


def _reaches(line: PlacedLine, copper: Copper) -> list[tuple[str, float] | None]:
    """Return for each vertex of a line what is there and how far it reaches along the line [m]."""
    last = len(line.path) - 1
    found: list[tuple[str, float] | None] = []
    for k, point in enumerate(line.path):
        if 0 < k < last:
            found.append(("a bend", 0.5 * line.width * _NM))
            continue
        net = line.nets[k > 0] if k == 0 or len(line.nets) > 1 else ""
        joint = next(
            (j for j in copper.joints if j.net == net and math.dist((j.x, j.y), point) <= SNAP), None
        )
        if net in ("", GROUND):
            found.append(("an open end" if not net else "its ground vias", 0.0))
        else:
            found.append(None if joint is None else _junction(line, joint))
    return found


def _junction(line: PlacedLine, joint: Joint) -> tuple[str, float] | None:
    """Return what a joint is and how far it reaches along a line [m]; None where nothing changes there."""
    arms = joint.arms
    if len(arms) < 2 or (len(arms) == 2 and arms[0].width == arms[1].width):
        return None
    if len(arms) == 2:
        return "a step", 0.0
    others = sorted(arm.width for arm in arms)
    others.remove(min(others, key=lambda width: abs(width - line.width * _NM)))
    return "a junction", 0.5 * others[-1]


def _tall_parts(placement: Placement) -> Iterator[Doubt]:
    """Yield chips whose bodies are nearer to each other than they may be tall, unless they share a net.

    The file does not know heights; a chip is at most as tall as it is wide.
    """
    parts = placement.sized.circuit.file.parts
    chips = [part for name, part in placement.parts.items() if parts[name].case is not None]
    for one, other in itertools.combinations(chips, 2):
        nets = [{net for _, net in terminals(parts[chip.name])} - {GROUND} for chip in (one, other)]
        if nets[0] & nets[1]:
            continue
        apart = _apart(one, other) * _NM
        tall = max(_least_side(one), _least_side(other)) * _NM
        if apart < tall:
            at = round(0.5 * (one.x + other.x)), round(0.5 * (one.y + other.y))
            reason = f"{apart * 1e3:.2f} mm apart and up to {tall * 1e3:.2f} mm tall: they may couple"
            yield Doubt(at=at, items=(one.name, other.name), reason=reason)


def _box(part: PlacedPart) -> tuple[int, int, int, int]:
    """Return a part's body as a box [nm]."""
    xs, ys = zip(*part.outline.points, strict=True)
    return min(xs), min(ys), max(xs), max(ys)


def _least_side(part: PlacedPart) -> float:
    """Return the smaller side of a part's body [nm]."""
    x0, y0, x1, y1 = _box(part)
    return min(x1 - x0, y1 - y0)


def _apart(one: PlacedPart, other: PlacedPart) -> float:
    """Return the distance of two bodies' boxes [nm]."""
    a, b = _box(one), _box(other)
    dx = max(a[0] - b[2], b[0] - a[2], 0)
    dy = max(a[1] - b[3], b[1] - a[3], 0)
    return math.hypot(dx, dy)


def _open_pour(artwork: Artwork) -> Iterator[Doubt]:
    """Yield each pour with an edge so far from its nearest via that it resonates within the sweep.

    Copper that is open at one end and grounded at the other resonates where it is a quarter wave long; the
    straight distance is taken, in the full permittivity of the substrate.
    """
    file = artwork.placement.sized.circuit.file
    low, high = file.design.band
    top = (file.design.sweep or (low, 2.0 * high - low))[1]
    quarter = 0.25 * C0 / math.sqrt(file.substrate.relative_permittivity)
    vias = np.array([(via.x, via.y) for via in artwork.vias if via.net == GROUND], dtype=float).reshape(-1, 2)
    for shape in artwork.on("copper_top"):
        if shape.role != "pour":
            continue
        outline = shape.outline.chords()
        distance, at = _farthest(outline[:_POUR_POINTS], vias)
        if quarter / (distance * _NM) < top:
            if math.isinf(distance):
                reason = "no via joins this pour to the ground plane"
            else:
                at_ghz = quarter / (distance * _NM) / 1e9
                reason = (
                    f"its edge is {distance * 1e-6:.1f} mm from the nearest via: resonant at {at_ghz:.2g} GHz"
                )
            yield Doubt(at=at, items=("pour",), reason=reason)


def _farthest(outline: Sequence[Point], vias: FloatArray) -> tuple[float, Point]:
    """Return the largest distance [nm] of an outline's points from the nearest via, and where."""
    if not len(vias):
        return math.inf, outline[0]
    from shapely import Point as Mark
    from shapely import STRtree, points

    corners = np.asarray(outline, dtype=float)
    tree = STRtree([Mark(*via) for via in vias])
    _, distances = tree.query_nearest(points(corners), return_distance=True, all_matches=False)
    worst = int(np.argmax(distances))
    return float(distances[worst]), outline[worst]


def _middle(path: Sequence[Point]) -> tuple[int, int]:
    """Return the point [nm] half-way along a path."""
    legs = [math.dist(a, b) for a, b in itertools.pairwise(path)]
    left = 0.5 * sum(legs)
    for (a, b), length in zip(itertools.pairwise(path), legs, strict=True):
        if left <= length and length > 0.0:
            share = left / length
            return round(a[0] + share * (b[0] - a[0])), round(a[1] + share * (b[1] - a[1]))
        left -= length
    return path[-1]
