"""Shapes in whole nanometres: outlines with true arcs, mitred strokes, booleans on the nanometre grid.

In: vertices, widths, mitres [nm, %]. Out: outlines (:class:`Ring`) and shapely polygons. Knows nothing of
circuits, nets or layers.
"""

from layoutgen.geometry.band import band
from layoutgen.geometry.booleans import (
    circumscribed,
    closed,
    cut,
    grow,
    joined,
    opened,
    overlap,
    pieces,
    rings_of,
)
from layoutgen.geometry.lettering import lettering, lettering_size, printable
from layoutgen.geometry.offsets import offset_ring, offset_rings, sharpened
from layoutgen.geometry.ring import CHORD_TOLERANCE_NM, Point, Ring
from layoutgen.geometry.sector import sector_cover, sector_ring
from layoutgen.geometry.stroke import mitre_for_turn, mitre_reach, path_length, stroke, turn_degrees

__all__ = [
    "CHORD_TOLERANCE_NM",
    "Point",
    "Ring",
    "band",
    "circumscribed",
    "closed",
    "cut",
    "grow",
    "joined",
    "lettering",
    "lettering_size",
    "mitre_for_turn",
    "mitre_reach",
    "offset_ring",
    "offset_rings",
    "opened",
    "overlap",
    "path_length",
    "pieces",
    "printable",
    "rings_of",
    "sector_cover",
    "sector_ring",
    "sharpened",
    "stroke",
    "turn_degrees",
]
