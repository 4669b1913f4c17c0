"""The stage's one function: from poses and centre-lines to everything that is made."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass

import shapely
from shapely.geometry.base import BaseGeometry

from layoutgen.artwork.attitude import Attitude
from layoutgen.artwork.board import GND, cutouts_of, hole_lands, holes_of, profile_shapes
from layoutgen.artwork.conductors import Conductor, conductors_of, copper_shapes
from layoutgen.artwork.drills import Drills, legal_area, symmetries_of
from layoutgen.artwork.labels import reference_labels
from layoutgen.artwork.legend import draw_legend
from layoutgen.artwork.limits import Limits, limits_of
from layoutgen.artwork.lying import attitude_of, moved
from layoutgen.artwork.mask import bottom_openings, paste_shapes, soldered_pads, top_openings
from layoutgen.artwork.measure import measured_gaps
from layoutgen.artwork.pad_vias import with_pad_vias
from layoutgen.artwork.plane import plane_shapes
from layoutgen.artwork.pour import ground_pieces, own_ground, pour_of
from layoutgen.artwork.records import LAYERS, Artwork, Shape, Via
from layoutgen.artwork.slits import with_bridges
from layoutgen.artwork.stitching import fence, stitch_cutouts, stitch_rest, stitchable, well_held
from layoutgen.geometry import Point, Ring, joined, offset_ring, offset_rings, pieces
from layoutgen.origin import Origin
from layoutgen.placement import Placement

__all__ = ["Sketch", "complete", "draw", "sketch"]


@dataclass(frozen=True, slots=True, eq=False)
class Sketch:
    """A placed board with its copper and its pour, before vias decide which pieces of pour stay.

    All but ``placement`` lies as ``laid`` does: the same board, moved by ``attitude`` to how it is drawn.
    """

    placement: Placement
    attitude: Attitude
    laid: Placement
    limits: Limits
    conductors: Sequence[Conductor]
    openings: Sequence[Shape]
    area: BaseGeometry
    pour: Sequence[shapely.Polygon]

    @property
    def artwork(self) -> Artwork:
        """The copper and the pour alone, with the pour's distances."""
        back = self.attitude.back
        shapes = (*copper_shapes(self.conductors), *_pour_shapes(self.limits, self.pour))
        return Artwork(
            placement=self.placement,
            shapes=tuple(back.shape(shape) for shape in shapes),
            vias=tuple(_placed_vias(self.placement)),
            holes=holes_of(self.placement),
            labels=(),
            line_copper=back.line_copper(measured_gaps(self.laid, self.limits, self.pour)),
            title_anchor=(0, 0),
        )


def draw(placement: Placement) -> Artwork:
    """Return the artwork of a placed board: copper, vias, mask, paste, legend, profile, names.

    The signal copper is drawn as placed, cut back only at cut-outs and the profile; the ground pour, its vias
    and all that is printed follow from it and from the rule file. The same placement gives the same artwork,
    shape by shape; a turned or mirrored one gives it turned or mirrored to the nanometre, but for the legend,
    which is set to be read on the board as it lies.

    Args:
        placement: The placed board.
    """
    return complete(sketch(placement))


def sketch(placement: Placement) -> Sketch:
    """Return a placed board drawn as far as the pour: enough to see what the pour does to the lines.

    Args:
        placement: The placed board.
    """
    limits = limits_of(placement.sized)
    attitude = attitude_of(placement)
    plain = moved(placement, attitude)
    conductors = conductors_of(plain, limits)
    laid, pour = _poured(with_pad_vias(plain, limits, conductors), limits, conductors)
    bare = [pad.outline for _, pad in soldered_pads(laid)]
    bare += [ring for ring, _ in hole_lands(laid, limits)]
    area = legal_area(laid, limits, pour, conductors, bare)
    return Sketch(
        placement=placement if laid is plain else moved(laid, attitude.back),
        attitude=attitude,
        laid=laid,
        limits=limits,
        conductors=conductors,
        openings=top_openings(laid, limits, conductors),
        area=area,
        pour=stitchable(pour, area, limits, laid),
    )


def _poured(
    placement: Placement, limits: Limits, conductors: Sequence[Conductor]
) -> tuple[Placement, list[shapely.Polygon]]:
    """Return a placed board with its slits between lands bridged, and its pour."""
    pour = pour_of(placement, limits, conductors) if limits.pour else []
    ground = joined([*pour, *pieces(own_ground(placement, limits))])
    bridged = with_bridges(placement, limits, conductors, ground)
    if bridged is placement or not limits.pour:
        return bridged, pour
    return bridged, pour_of(bridged, limits, conductors)


def complete(drawn: Sketch) -> Artwork:
    """Return the artwork that a sketch becomes: with the pour's vias, and with all that is printed.

    Args:
        drawn: The sketch.
    """
    placement, limits, back = drawn.placement, drawn.limits, drawn.attitude.back
    pour, added = _stitched(drawn)
    vias = (*_placed_vias(placement), *_pour_vias(limits, ((back.point(at), why) for at, why in added)))
    holes = holes_of(placement)
    openings = [back.shape(opening) for opening in drawn.openings]
    conductors = [back.conductor(piece) for piece in drawn.conductors]
    drills = [(via.x, via.y, via.drill) for via in vias] + [(h.x, h.y, h.diameter) for h in holes]
    legend = draw_legend(placement, limits, openings, conductors, drills)
    shapes = [
        *copper_shapes(conductors),
        *_ground_shapes(placement, limits, vias),
        *(back.shape(shape) for shape in _pour_shapes(limits, pour)),
        *(back.shape(shape) for shape in plane_shapes(drawn.laid, limits)),
        *openings,
        *(back.shape(shape) for shape in bottom_openings(drawn.laid, limits)),
        *(back.shape(shape) for shape in paste_shapes(drawn.laid)),
        *legend.shapes,
        *profile_shapes(placement),
    ]
    order = {layer: i for i, layer in enumerate(LAYERS)}
    return Artwork(
        placement=placement,
        shapes=tuple(sorted(shapes, key=lambda shape: order[shape.layer])),
        vias=vias,
        holes=holes,
        labels=tuple(reference_labels(placement)),
        line_copper=back.line_copper(measured_gaps(drawn.laid, limits, pour)),
        title_anchor=legend.title_anchor,
        notes=(*_cutout_notes(placement, limits, conductors), *legend.notes),
    )


def _stitched(drawn: Sketch) -> tuple[list[shapely.Polygon], list[tuple[Point, str]]]:
    """Return the pieces of pour that vias hold, and these vias with their purposes."""
    laid, limits, pour = drawn.laid, drawn.limits, drawn.pour
    placed = [(via.x, via.y, via.drill) for via in laid.vias]
    symmetries = symmetries_of(drawn.area, placed, (laid.width, laid.height))
    drills = Drills(drawn.area, limits, placed, symmetries)
    sides = fence(laid, pour, drawn.conductors, limits, drills)
    count = len(drills.added)
    stitch_cutouts(laid, sides, limits, drills)
    stitch_rest(laid, pour, sides, limits, drills)
    return well_held(pour, drills, count)


def _placed_vias(placement: Placement) -> Iterator[Via]:
    """Yield the vias of parts and lines, in the placement's order."""
    for via in placement.vias:
        yield Via(
            x=via.x,
            y=via.y,
            drill=via.drill,
            land=via.land,
            net=via.net,
            purpose=via.purpose,
            origin=via.origin,
        )


def _pour_vias(limits: Limits, added: Iterable[tuple[Point, str]]) -> Iterator[Via]:
    """Yield the vias of fence and pour."""
    for (x, y), purpose in added:
        yield Via(
            x=x,
            y=y,
            drill=limits.via_drill,
            land=limits.via_land,
            net=GND,
            purpose=purpose,
            origin=Origin(purpose),
        )


def _ground_shapes(placement: Placement, limits: Limits, vias: Sequence[Via]) -> Iterator[Shape]:
    """Yield pads on ground, the copper between them and their vias, and the lands of all vias."""
    for role, ring, origin in ground_pieces(placement, limits):
        drawn = offset_ring(ring, limits.undercut)
        yield Shape(layer="copper_top", outline=drawn, net=GND, role=role, origin=origin)
    for via in vias:
        land = Ring.circle(via.x, via.y, via.land // 2 + limits.undercut)
        yield Shape(layer="copper_top", outline=land, net=via.net, role="land", origin=via.origin)


def _pour_shapes(limits: Limits, pour: Sequence[shapely.Polygon]) -> Iterator[Shape]:
    """Yield the artwork of the pour, grown by the undercut."""
    for piece in pour:
        for outline, holes in offset_rings(piece, limits.undercut):
            yield Shape(
                layer="copper_top", outline=outline, holes=holes, net=GND, role="pour", origin=Origin("pour")
            )


def _cutout_notes(
    placement: Placement, limits: Limits, conductors: Sequence[Conductor]
) -> Iterator[tuple[str, str, str]]:
    """Yield a note for each part with pads nearer to its own cut-out than the edge rule allows."""
    for part, ring in cutouts_of(placement):
        cutout = ring.polygon()
        for pad in part.pads:
            distance = pad.outline.polygon().distance(cutout)
            if pad.net != GND and distance < limits.edge:
                text = f"pad {pad.pin} faces its part's own cut-out at {distance / 1e6:.3f} mm and is exempt"
                yield "copper.min_edge_distance", part.name, text
