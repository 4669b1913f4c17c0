"""What is drawn on each layer: the artwork's shapes, the drilled holes as circles, the marks of findings.

Every writer takes its layers from here, so that no format can show what another leaves out.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field

from layoutgen.artwork import LAYERS, Artwork, Label, Shape
from layoutgen.checks import Finding
from layoutgen.geometry import Ring
from layoutgen.origin import Origin
from layoutgen.writers.outlines import as_circle
from layoutgen.writers.records import Result

__all__ = ["MARK_NM", "Drawn", "drawn_layers", "labels_of", "layers_of", "marked_findings"]

MARK_NM = 600_000
"""Half the diagonal of a finding's mark, a diamond with a hole in it [nm]."""


def layers_of(result: Result) -> dict[str, tuple[Shape, ...]]:
    """Return the shapes of every layer of the contract, in drawing order; empty layers are there too."""
    shapes: dict[str, list[Shape]] = {name: [] for name in LAYERS}
    for shape in (*result.artwork.shapes, *_drills(result.artwork), *_marks(result.findings)):
        shapes[shape.layer].append(shape)
    return {name: tuple(items) for name, items in shapes.items()}


@dataclass(frozen=True, slots=True, eq=False)
class Drawn:
    """What one layer holds: whole circles as middle and radius [nm], drills last, and all other shapes."""

    circles: list[tuple[int, int, int]] = field(default_factory=list)
    shapes: list[Shape] = field(default_factory=list)


def drawn_layers(result: Result) -> dict[str, Drawn]:
    """Return what :func:`layers_of` does, whole circles apart: there may be many, and they need no shapes.

    Round cut-outs of the profile stay shapes, since a circle has no direction.
    """
    layers = {name: Drawn() for name in LAYERS}
    for shape in (*result.artwork.shapes, *_marks(result.findings)):
        circle = None if shape.holes or shape.role == "cutout" else as_circle(shape.outline)
        if circle:
            layers[shape.layer].circles.append(circle)
        else:
            layers[shape.layer].shapes.append(shape)
    plated = layers["drill_plated"].circles
    plated.extend((via.x, via.y, via.drill // 2) for via in result.artwork.vias)
    for hole in result.artwork.holes:
        name = "drill_plated" if hole.plated else "drill_nonplated"
        layers[name].circles.append((hole.x, hole.y, hole.diameter // 2))
    return layers


def labels_of(result: Result) -> tuple[Label, ...]:
    """Return the artwork's texts, and one text beside each finding's mark: its number and rule."""
    texts = tuple(
        Label(
            layer="findings",
            text=f"{number} {finding.rule}",
            x=at[0],
            y=at[1] + 2 * MARK_NM,
            height=MARK_NM,
            rotation=0.0,
            origin=Origin(finding.rule),
        )
        for number, finding in marked_findings(result.findings)
        if (at := finding.at) is not None
    )
    return (*result.artwork.labels, *texts)


def marked_findings(findings: Sequence[Finding]) -> list[tuple[int, Finding]]:
    """Return the findings that get a mark, numbered as in the report: errors and warnings with a place."""
    return [
        (number, finding)
        for number, finding in enumerate(findings, start=1)
        if finding.at is not None and finding.severity != "note" and finding.waived is None
    ]


def _drills(artwork: Artwork) -> Iterator[Shape]:
    """Yield the finished hole circles of vias and holes."""
    for via in artwork.vias:
        circle = Ring.circle(via.x, via.y, via.drill // 2)
        yield Shape(layer="drill_plated", outline=circle, net=via.net, role="drill", origin=via.origin)
    for hole in artwork.holes:
        layer = "drill_plated" if hole.plated else "drill_nonplated"
        circle = Ring.circle(hole.x, hole.y, hole.diameter // 2)
        yield Shape(layer=layer, outline=circle, net=hole.net, role="drill", origin=hole.origin)


def _marks(findings: Sequence[Finding]) -> Iterator[Shape]:
    """Yield one diamond with a hole for each finding that gets a mark."""
    for _, finding in marked_findings(findings):
        if finding.at is not None:
            outer, inner = _diamond(*finding.at, MARK_NM), _diamond(*finding.at, MARK_NM * 3 // 4)
            hole = Ring(inner.points[::-1])
            yield Shape(
                layer="findings", outline=outer, holes=(hole,), role="finding", origin=Origin(finding.rule)
            )


def _diamond(x: int, y: int, half: int) -> Ring:
    return Ring(((x - half, y), (x, y - half), (x + half, y), (x, y + half)))
