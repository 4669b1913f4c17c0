"""From a file to artwork on our layers: outlines closed, holes in copper found, drilled holes recognised."""

from __future__ import annotations

import stat
from collections import Counter
from collections.abc import Iterable, Mapping, Sequence
from pathlib import Path

import numpy as np
import shapely

from layoutgen.artwork import LAYERS
from layoutgen.checks.planar import array_of, farthest, merge
from layoutgen.foreign.chains import joined_lines
from layoutgen.foreign.curves import fitted_circle
from layoutgen.foreign.dxf import UNITS, read_dxf
from layoutgen.foreign.layer_map import LayerMap, default_map, read_layers, shown
from layoutgen.foreign.nesting import Loop, areas_of
from layoutgen.foreign.records import (
    Floats,
    ForeignArtwork,
    ForeignNote,
    LayerKey,
    Primitive,
    Raw,
    RoundHole,
    refused,
)
from layoutgen.foreign.streams import read_stream

__all__ = ["SUFFIXES", "read_artwork"]

SUFFIXES = (".gds", ".oas", ".dxf")

_MOST_BYTES = {".gds": 1_000_000_000, ".oas": 1_000_000_000, ".dxf": 200_000_000}
_DRILLS = {"drill_plated": True, "drill_nonplated": False}
_COPPER = ("copper_top", "copper_bottom")
_OURS_ONLY = ("reference", "findings")
_ROUND_NM = 1_000.0
_FARTHEST_NM = 1e10
_LARGEST_BOARD_NM = 1e9
_SAME_NM = 600.0


def read_artwork(
    path: str | Path, layers: str | Path | LayerMap | None = None, unit: str | None = None
) -> ForeignArtwork:
    """Read artwork of any origin.

    Args:
        path: A .gds, .oas or .dxf file.
        layers: A layers file, or our layer names with the foreign layers; None takes foreign layers that
            bear our own names (DXF, capitals alike) or our GDS numbers.
        unit: ``mm``, ``in`` or ``um`` for a DXF file that states no unit, or the wrong one.

    Raises:
        WrongInputError: The file or the layers file is faulty, states no unit, or has no copper.
    """
    file = Path(path)
    kind = file.suffix.lower()
    _refuse_unreadable(file, kind)
    mapping = read_layers(layers) if isinstance(layers, (str, Path)) else layers
    if kind == ".dxf":
        if unit is not None and unit not in UNITS:
            raise refused(str(file), f"the unit {unit[:20]}", ", ".join(UNITS))
        raw = read_dxf(file, unit)
    else:
        if unit is not None:
            raise refused(str(file), "a unit for a file that states its own", "--unit with DXF only")
        raw = read_stream(file)
    return _artwork(str(file), raw, mapping or default_map(numbered=kind != ".dxf"), given=layers is not None)


def _refuse_unreadable(file: Path, kind: str) -> None:
    """Refuse other formats, what is no regular file, and what is too large."""
    if kind not in SUFFIXES:
        raise refused(str(file), f"the suffix {kind[:20] or '(none)'}", ", ".join(SUFFIXES))
    try:
        status = file.stat()
        if not stat.S_ISREG(status.st_mode):
            raise refused(str(file), "no regular file", "a regular file")
        with file.open("rb"):
            pass
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or "a path that cannot be opened"
        raise refused(str(file), reason.lower(), "a readable file") from None
    if status.st_size > _MOST_BYTES[kind]:
        raise refused(str(file), f"{status.st_size} bytes", f"at most {_MOST_BYTES[kind]} bytes")


def _artwork(file: str, raw: Raw, mapping: LayerMap, given: bool) -> ForeignArtwork:
    """Return what was read on our layers."""
    by_layer = _by_layer(raw.primitives)
    notes = list(raw.notes)
    unread = Counter({f"{kind} on {layer}": n for (kind, layer), n in _told(raw.skipped, mapping).items()})
    read: dict[str, tuple[shapely.Polygon, ...]] = {}
    used: set[LayerKey] = set()
    for name in LAYERS:
        keys = [_plain(key) for key in mapping.get(name, ())]
        used.update(keys)
        primitives = [primitive for key in keys for primitive in by_layer.get(key, ())]
        if name not in _OURS_ONLY:
            read[name] = tuple(_polygons(name, primitives, notes))
        if given and keys and not primitives:
            text = f"nothing is drawn on {', '.join(shown(key) for key in mapping[name])}"
            notes.append(ForeignNote("foreign.layers", name, None, text))
    _refuse_empty(file, read, by_layer, mapping)
    for key, primitives in by_layer.items():
        if key not in used:
            unread[f"shapes on layer {shown(primitives[0].layer)}, which is none of ours"] += len(primitives)
    notes += _size_note(raw.unit, read)
    holes = tuple(_holes(read, notes, unread))
    profile = tuple(sorted(read["profile"], key=lambda polygon: -polygon.area))
    return ForeignArtwork(
        file=file,
        unit=raw.unit,
        layers=read,
        profile=profile,
        holes=holes,
        notes=tuple(notes),
        unread=unread,
        chord=raw.chord,
    )


def _told(skipped: Mapping[tuple[str, str], int], mapping: LayerMap) -> dict[tuple[str, str], int]:
    """Return what was not read, but for the layers that are for people only."""
    for_people = {_plain(key) for name in _OURS_ONLY for key in mapping.get(name, ())}
    return {what: count for what, count in skipped.items() if _plain(what[1]) not in for_people}


def _plain(key: LayerKey) -> LayerKey:
    """Return a layer's key as it is compared: names without capitals."""
    return key.casefold() if isinstance(key, str) else key


def _by_layer(primitives: Iterable[Primitive]) -> dict[LayerKey, list[Primitive]]:
    """Return primitives by their layer's key."""
    found: dict[LayerKey, list[Primitive]] = {}
    for primitive in primitives:
        found.setdefault(_plain(primitive.layer), []).append(primitive)
    return found


def _refuse_empty(
    file: str,
    read: Mapping[str, tuple[shapely.Polygon, ...]],
    by_layer: Mapping[LayerKey, Sequence[Primitive]],
    mapping: LayerMap,
) -> None:
    """Refuse a file with no copper on the layers asked for, or with coordinates beyond any board."""
    if not any(read[name] for name in _COPPER):
        wanted = ", ".join(shown(key) for name in _COPPER for key in mapping.get(name, ()))
        there = ", ".join(shown(group[0].layer) for group in list(by_layer.values())[:8]) or "none"
        raise refused(
            file, f"no copper on {wanted or 'any layer'}; layers: {there}", "a layers file (--layers)"
        )
    for polygons in read.values():
        if (
            polygons
            and float(np.abs(shapely.total_bounds(np.array(polygons, dtype=object))).max()) > _FARTHEST_NM
        ):
            raise refused(file, "coordinates beyond 10 m", "a board; is the unit right?")


def _polygons(name: str, primitives: Sequence[Primitive], notes: list[ForeignNote]) -> list[shapely.Polygon]:
    """Return the polygons of one layer [nm]: areas as they are, outlines with the holes in them."""
    areas = [part for p in primitives if p.kind == "area" for part in _valid(p.rings)]
    chains = joined_lines([np.rint(p.rings[0]) for p in primitives if p.kind == "path"])
    for at, width in chains.gaps:
        text = f"an outline left open by {width / 1e3:.1f} um was closed"
        notes.append(ForeignNote("foreign.gap_closed", name, at, text))
    for line in chains.left:
        x, y = line[0].tolist()
        text = (
            f"a line without width that ends at {x / 1e6:.4f}, {y / 1e6:.4f} mm is left open and not judged"
        )
        notes.append(ForeignNote("foreign.left_open", name, (round(x), round(y)), text))
    loops = [
        Loop(part, primitive.turn)
        for primitive in primitives
        if primitive.kind == "loop"
        for part in _valid(primitive.rings)
    ]
    loops += [Loop(part, 0) for ring in chains.loops for part in _valid((ring,))]
    if name == "profile":  # the outline and each cut-out, every second one a hole, filled or not
        return areas_of([*(Loop(area, 0) for area in areas), *loops], directed=False)
    return areas + areas_of(_without_edges_of(areas, loops))


def _valid(rings: tuple[Floats, ...]) -> list[shapely.Polygon]:
    """Return outline and holes as valid polygons in whole nanometres."""
    whole = [np.rint(ring) for ring in rings if len(ring) >= 3]
    if not whole or len(rings[0]) < 3:
        return []
    polygon = shapely.Polygon(whole[0], whole[1:])
    if polygon.is_valid:
        return [polygon] if polygon.area > 0.0 else []
    parts = shapely.get_parts(shapely.get_parts(shapely.make_valid(polygon)))
    return [part for part in parts if part.geom_type == "Polygon" and part.area > 0.0]


def _without_edges_of(areas: Sequence[shapely.Polygon], loops: Sequence[Loop]) -> list[Loop]:
    """Return outlines without those that only repeat the edge of a filled area, or of a hole in one."""
    if not areas or not loops:
        return list(loops)
    rings = shapely.get_rings(np.array(areas, dtype=object))
    tree = shapely.STRtree(rings)
    edges = np.array([loop.polygon.exterior for loop in loops], dtype=object)
    i, j = tree.query(edges)
    like = (np.abs(shapely.bounds(edges[i]) - shapely.bounds(rings[j])) < _SAME_NM).all(axis=1)
    same = {
        k
        for k, m in zip(i[like].tolist(), j[like].tolist(), strict=True)
        if farthest(edges[k], rings[m]) < _SAME_NM
    }
    return [loop for k, loop in enumerate(loops) if k not in same]


def _size_note(unit: str, read: Mapping[str, tuple[shapely.Polygon, ...]]) -> list[ForeignNote]:
    """Return a note where the drawing is larger than a board can be."""
    copper = [polygon for name in _COPPER for polygon in read[name]]
    x0, y0, x1, y1 = shapely.total_bounds(np.array(copper, dtype=object)).tolist()
    size = max(x1 - x0, y1 - y0)
    if size <= _LARGEST_BOARD_NM:
        return []
    text = f"the copper is {size / 1e9:.2f} m wide in the file's unit ({unit}); is that right?"
    return [ForeignNote("foreign.unit", "", None, text)]


def _holes(
    read: Mapping[str, tuple[shapely.Polygon, ...]], notes: list[ForeignNote], unread: Counter[str]
) -> Iterable[RoundHole]:
    """Yield the drilled holes: outlines on the drill layers whose vertices lie on one circle."""
    for name, plated in _DRILLS.items():
        whole = [polygon for polygon in read[name] if _circle(polygon)]
        pieces = array_of([polygon for polygon in read[name] if not _circle(polygon)])
        i, j = shapely.STRtree(pieces).query(pieces, predicate="intersects")
        joined = merge(pieces, np.stack((i[i < j], j[i < j]), axis=1)) if len(pieces) else pieces
        for polygon in (*whole, *joined):  # some programs cut circles of many corners in pieces
            circle = _circle(polygon)
            if circle is None:
                x, y = polygon.centroid.x, polygon.centroid.y
                text = "a hole that is not round is not judged"
                notes.append(ForeignNote("foreign.slot", name, (round(x), round(y)), text))
                unread[f"holes on {name} that are not round"] += 1
            else:
                yield RoundHole(round(circle[0]), round(circle[1]), float(round(circle[2])), plated)


def _circle(polygon: shapely.Polygon) -> tuple[float, float, float] | None:
    """Return middle and diameter [nm] of a round outline, None for others."""
    points = shapely.get_coordinates(polygon.exterior)[:-1]
    return None if polygon.interiors else fitted_circle(points, _ROUND_NM)
