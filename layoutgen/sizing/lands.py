"""Lands of every part in its own frame: chips by IPC-7351, others by their footprint."""

from __future__ import annotations

import math
from collections.abc import Iterable

from layoutgen.reading import CircuitFile, Footprint, Pad, Part, RuleFile
from layoutgen.sizing.chips import (
    BODIES,
    FABRICATION,
    FILLETS,
    PLACEMENT,
    courtyard_excess,
    is_large,
    land_pattern,
)
from layoutgen.sizing.records import Land, Lands

__all__ = ["chip_notes", "part_lands"]

Box = tuple[float, float, float, float]


def part_lands(file: CircuitFile, rules: RuleFile) -> dict[str, Lands]:
    """Return the lands of every part."""
    density = _density(rules)
    return {
        name: _chip(name, part, density)
        if part.case is not None
        else _from_footprint(name, part, file.footprints[part.footprint or ""], density)
        for name, part in file.parts.items()
    }


def _density(rules: RuleFile) -> str:
    """Return the density level of the land patterns, nominal where the rule file does not say."""
    rule = rules.land_pattern
    return rule.density if rule is not None and rule.density is not None else "nominal"


def _chip(name: str, part: Part, density: str) -> Lands:
    """Return a chip's lands: pad 1 (``nets[0]``) at negative x, pad 2 at positive x."""
    assert part.case is not None and part.nets is not None
    pattern, body = land_pattern(part.case, density), BODIES[part.case]
    pads = tuple(
        Land(
            pin=pin,
            net=net,
            x=side * pattern.centre,
            y=0.0,
            width=pattern.pad_length,
            height=pattern.x,
            heading=heading,
        )
        for pin, net, side, heading in zip("12", part.nets, (-1.0, 1.0), (180.0, 0.0), strict=True)
    )
    half_length, half_width = 0.5 * body.length[1], 0.5 * body.width[1]
    outline = (-half_length, -half_width, half_length, half_width)
    boxes = [outline, *(_pad_box(pad) for pad in pads)]
    return Lands(
        part=name,
        pads=pads,
        outline=outline,
        courtyard=_grown(_union(boxes), courtyard_excess(part.case, density)),
    )


def _from_footprint(name: str, part: Part, footprint: Footprint, density: str) -> Lands:
    """Return the lands of a part with a footprint.

    The outline is the smallest box round pads and cut-out, the courtyard that and the holes, grown.
    """
    nets = _pad_nets(part, footprint)
    pads = [_land(pin, footprint.pads[pin], net) for pin, net in nets.items()]
    cutout = _box(footprint.cutout.at, footprint.cutout.size) if footprint.cutout is not None else None
    outline = _union([*(_pad_box(pad) for pad in pads if pad.width > 0.0), *([cutout] if cutout else [])])
    holes = tuple((*hole.at, hole.diameter, hole.plated) for hole in footprint.holes)
    hole_boxes = [_box((x, y), (d, d)) for x, y, d, _ in holes]
    return Lands(
        part=name,
        pads=tuple(pads),
        outline=outline,
        courtyard=_grown(_union([outline, *hole_boxes]), courtyard_excess(None, density)),
        cutout=cutout,
        holes=holes,
    )


def _land(pin: str, pad: Pad, net: str) -> Land:
    """Return one pad of a footprint; a pad without heading points away from the origin."""
    x, y = pad.at or (0.0, 0.0)
    width, height = pad.size or (0.0, 0.0)
    return Land(
        pin=pin,
        net=net,
        x=x,
        y=y,
        width=width,
        height=height,
        heading=pad.heading if pad.heading is not None else _outward(x, y),
        ground=pad.ground,
        thermal=pad.thermal,
    )


def _pad_nets(part: Part, footprint: Footprint) -> dict[str, str]:
    """Return pin -> net: of a part with pins as written, of one with two nets in the pads' file order."""
    if part.pins is not None:
        return dict(part.pins)
    assert part.nets is not None
    return dict(zip(footprint.pads, part.nets, strict=True))


def chip_notes(file: CircuitFile, rules: RuleFile) -> list[str]:
    """Return which fillet goals and tolerances the chips' lands come from; empty without chips."""
    density = _density(rules)
    cases = sorted({part.case for part in file.parts.values() if part.case is not None})
    notes = []
    for large in sorted({is_large(case) for case in cases}):
        goal = FILLETS[large, density]
        notes.append(
            f"lands of {', '.join(case for case in cases if is_large(case) == large)}: IPC-7351 equations, "
            f"{density} density, toe {goal.toe * 1e3:g}, heel {goal.heel * 1e3:g}, "
            f"side {goal.side * 1e3:g} mm, F = {FABRICATION * 1e3:g}, P = {PLACEMENT * 1e3:g} mm"
        )
    return notes


def _outward(x: float, y: float) -> float:
    """Return the compass heading [deg] that points from the origin towards a place, east for the origin."""
    if x == 0.0 and y == 0.0:
        return 0.0
    return 90.0 * (round(math.degrees(math.atan2(y, x)) / 90.0) % 4)


def _pad_box(pad: Land) -> Box:
    """Return a pad's box."""
    return _box((pad.x, pad.y), (pad.width, pad.height))


def _box(at: tuple[float, float], size: tuple[float, float]) -> Box:
    """Return the box of a middle and a size [m]."""
    return (
        at[0] - 0.5 * size[0],
        at[1] - 0.5 * size[1],
        at[0] + 0.5 * size[0],
        at[1] + 0.5 * size[1],
    )


def _union(boxes: Iterable[Box]) -> Box:
    """Return the smallest box round boxes."""
    x0, y0, x1, y1 = zip(*boxes, strict=True)
    return (min(x0), min(y0), max(x1), max(y1))


def _grown(box: Box, by: float) -> Box:
    """Return a box grown on all sides."""
    return (box[0] - by, box[1] - by, box[2] + by, box[3] + by)
