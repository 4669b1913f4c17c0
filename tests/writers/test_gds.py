"""The GDSII file, read back with the library."""

from __future__ import annotations

import itertools
import struct
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import gdstk
import pytest
import shapely

from layoutgen.artwork import LAYERS
from layoutgen.errors import WrongInputError
from layoutgen.geometry import Ring
from layoutgen.writers import Job, Result
from layoutgen.writers.gds import write_gds
from layoutgen.writers.scene import labels_of, layers_of

JOB = Job(stem="gauge-link, 2nd try of a board with a long name")


@pytest.fixture(scope="module")
def data(handmade: Result) -> bytes:
    return write_gds(handmade, JOB)


@pytest.fixture(scope="module")
def library(data: bytes, tmp_path_factory: pytest.TempPathFactory) -> gdstk.Library:
    path = tmp_path_factory.mktemp("gds") / "board.gds"
    path.write_bytes(data)
    return gdstk.read_gds(path)


def records(data: bytes) -> list[tuple[int, bytes]]:
    """Return the file's records: type and body, by the format's own rules."""
    found, at = [], 0
    while at < len(data):
        size, kind = struct.unpack(">HH", data[at : at + 4])
        assert size >= 4
        assert size % 2 == 0
        found.append((kind, data[at + 4 : at + size]))
        at += size
        if kind == 0x0400:
            break
    return found


def drawn(library: gdstk.Library, layer: str) -> shapely.Polygon:
    (top,) = library.top_level()
    polygons = top.get_polygons(layer=LAYERS[layer][0], datatype=LAYERS[layer][1])
    return shapely.union_all([shapely.Polygon(p.points * 1000.0).buffer(0) for p in polygons])


def wanted(result: Result, layer: str) -> shapely.Polygon:
    return shapely.union_all(
        [shapely.Polygon(s.outline.chords(), [h.chords() for h in s.holes]) for s in layers_of(result)[layer]]
    )


def test_units_are_a_micrometre_and_a_nanometre(library: gdstk.Library) -> None:
    """Another unit scales the whole board."""
    assert library.unit == pytest.approx(1e-6)
    assert library.precision == pytest.approx(1e-9)


@pytest.mark.parametrize("layer", [name for name in LAYERS if name not in ("reference", "profile")])
def test_every_layer_holds_its_shapes_and_no_more(
    handmade: Result, library: gdstk.Library, layer: str
) -> None:
    """A lost hole of the pour, a shape on another layer or a coarse circle would show as area [nm^2]."""
    difference = drawn(library, layer).symmetric_difference(wanted(handmade, layer)).area
    assert difference < 1e-6 * 1e12
    assert (drawn(library, layer).area > 0) == bool(layers_of(handmade)[layer])


def test_profile_has_outline_and_cutout_as_polygons(library: gdstk.Library) -> None:
    """The profile is even-odd: a cut-out merged away would not be routed."""
    (top,) = library.top_level()
    areas = sorted(p.area() for p in top.get_polygons(layer=LAYERS["profile"][0], datatype=0))
    assert areas[0] == pytest.approx(2000.0 * 2000.0)
    assert areas[1] == pytest.approx(20000.0 * 12000.0, rel=0.01)
    assert len(areas) == 2


def test_curves_are_inscribed_within_a_micrometre(library: gdstk.Library) -> None:
    """The library's default tolerance makes a via a decagon; a circumscribed one would be too large."""
    (top,) = library.top_level()
    circle = min(top.get_polygons(layer=LAYERS["drill_plated"][0], datatype=0), key=lambda p: p.points[0][0])
    points = circle.points * 1000.0 - (1_000_000.0, 1_000_000.0)
    radii = [(x**2 + y**2) ** 0.5 for x, y in points]
    middles = [((a[0] + b[0]) / 2, (a[1] + b[1]) / 2) for a, b in itertools.pairwise([*points, points[0]])]
    assert max(abs(radius - 150_000) for radius in radii) <= 0.71
    assert min((x**2 + y**2) ** 0.5 for x, y in middles) >= 149_000


def test_round_copper_and_drills_are_references(library: gdstk.Library) -> None:
    """Written out one by one, a hundred thousand vias make the file twenty times larger."""
    (top,) = library.top_level()
    origins = sorted(tuple(r.origin) for r in top.references if r.cell.name.startswith("round_300000"))
    assert origins == [(1000.0, 1000.0), (2000.0, 1000.0), (3500.0, 1000.0)]


def test_records_keep_the_limits_of_the_format(data: bytes) -> None:
    """Names with other characters, odd records or more than 8191 points are refused by strict readers."""
    found = records(data)
    assert found[-1][0] == 0x0400
    for kind, body in found:
        if kind == 0x0606:
            name = body.rstrip(b"\0").decode("ascii")
            assert len(name) <= 32
            assert all(c.isalnum() or c in "_?$" for c in name)
        if kind == 0x1003:
            assert len(body) // 8 <= 8191


def test_texts_are_on_their_layers(handmade: Result, library: gdstk.Library) -> None:
    """A text moved or lost would leave the designer without port and line names."""
    (top,) = library.top_level()
    found = {(t.text, round(t.origin[0] * 1000), round(t.origin[1] * 1000), t.layer) for t in top.labels}
    assert found == {(t.text, t.x, t.y, LAYERS[t.layer][0]) for t in labels_of(handmade)}


def test_two_results_alike_give_the_same_bytes(remake: Callable[[], Result], data: bytes) -> None:
    """A time stamp or an order taken from a hash would change the file."""
    assert write_gds(remake(), JOB) == data


def test_a_board_beyond_32_bits_is_refused(handmade: Result) -> None:
    """The library wraps such coordinates silently to the other side of the board."""
    shape = replace(handmade.artwork.shapes[0], outline=Ring.box(0, 0, 2_200_000_000, 1_000_000))
    artwork = replace(handmade.artwork, shapes=(*handmade.artwork.shapes, shape))
    with pytest.raises(WrongInputError, match=r"2\.200 m"):
        write_gds(replace(handmade, artwork=artwork), JOB)


def test_no_copper_of_another_tool_is_needed_to_read_it(data: bytes, tmp_path: Path) -> None:
    """The header tells version, units and one library; a file cut short has no end record."""
    kinds = [kind for kind, _ in records(data)]
    assert kinds[:3] == [0x0002, 0x0102, 0x0206]
    assert 0x0305 in kinds[:5]
    assert kinds.count(0x0502) == kinds.count(0x0700)
