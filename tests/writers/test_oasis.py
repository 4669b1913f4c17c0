"""The OASIS file holds what the GDSII file holds."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import gdstk
import pytest
import shapely

from layoutgen.artwork import LAYERS
from layoutgen.geometry import Ring
from layoutgen.writers import Job, Result
from layoutgen.writers.gds import write_gds
from layoutgen.writers.oasis import write_oasis
from layoutgen.writers.scene import labels_of, layers_of

JOB = Job(stem="gauge-link")


@pytest.fixture(scope="module")
def library(handmade: Result, tmp_path_factory: pytest.TempPathFactory) -> gdstk.Library:
    path = tmp_path_factory.mktemp("oasis") / "board.oas"
    path.write_bytes(write_oasis(handmade, JOB))
    return gdstk.read_oas(path)


def test_begins_and_validates_as_the_format_says(handmade: Result, tmp_path: Path) -> None:
    """The magic bytes tell the format; the checksum at the end tells whether the file is whole."""
    data = write_oasis(handmade, JOB)
    assert data.startswith(b"%SEMI-OASIS\r\n")
    path = tmp_path / "board.oas"
    path.write_bytes(data)
    assert gdstk.oas_validate(str(path))[0]
    broken = bytearray(data)
    broken[len(data) // 2] ^= 1
    path.write_bytes(bytes(broken))
    assert not gdstk.oas_validate(str(path))[0]


@pytest.mark.parametrize("layer", [name for name in LAYERS if name not in ("reference", "profile")])
def test_every_layer_has_the_models_area(handmade: Result, library: gdstk.Library, layer: str) -> None:
    """Rounded coordinates, lost references or another layer number would change areas [nm^2]."""
    (top,) = library.top_level()
    found = top.get_polygons(layer=LAYERS[layer][0], datatype=LAYERS[layer][1])
    scale = library.unit * 1e9
    drawn = shapely.union_all([shapely.Polygon(p.points * scale) for p in found])
    wanted = shapely.union_all(
        [
            shapely.Polygon(s.outline.chords(), [hole.chords() for hole in s.holes])
            for s in layers_of(handmade)[layer]
        ]
    )
    assert drawn.symmetric_difference(wanted).area < 1e-6 * 1e12
    assert drawn.is_empty == wanted.is_empty


def test_texts_are_there(handmade: Result, library: gdstk.Library) -> None:
    """Port names lost on the way from one format to the other."""
    (top,) = library.top_level()
    assert sorted(label.text for label in top.labels) == sorted(t.text for t in labels_of(handmade))


def test_a_gdsii_file_that_is_there_already_is_used(handmade: Result) -> None:
    """Writing it twice takes twice as long; another one than the package's must not slip in."""
    shape = replace(handmade.artwork.shapes[0], outline=Ring.box(0, 0, 1_000_000, 1_000_000))
    other = replace(handmade, artwork=replace(handmade.artwork, shapes=(shape,)))
    given = replace(JOB, files={"gauge-link.gds": write_gds(other, JOB)})
    assert write_oasis(handmade, given) == write_oasis(other, JOB)
    assert write_oasis(handmade, given) != write_oasis(handmade, JOB)


def test_equal_results_give_equal_bytes(remake: Callable[[], Result], handmade: Result) -> None:
    """A time stamp or a compressed stream would differ between machines or runs."""
    assert write_oasis(remake(), JOB) == write_oasis(handmade, JOB)
