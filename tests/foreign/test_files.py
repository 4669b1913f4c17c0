"""Files that are faulty, cut off, huge or of the wrong kind: one clear line, never a traceback."""

from __future__ import annotations

import os
import random
from pathlib import Path

import ezdxf
import gdstk
import pytest

from layoutgen.errors import WrongInputError
from layoutgen.foreign import read_artwork
from tests.foreign.drawings import SLOT, Pen, document, save


def refusal(path: Path, **options: str) -> str:
    """Return the one line with which a file is refused."""
    with pytest.raises(WrongInputError) as caught:
        read_artwork(path, **options)
    text = str(caught.value)
    assert len(caught.value.faults) >= 1
    assert "\n" not in str(caught.value.faults[0])
    assert len(text) < 500
    return text


def gds(path: Path) -> Path:
    """Write a GDSII file with one square of 1 mm on (1, 0), and a cell used twice."""
    library = gdstk.Library(unit=1e-6, precision=1e-9)
    child, top = library.new_cell("pad"), library.new_cell("top")
    child.add(gdstk.rectangle((0, 0), (1000, 1000), layer=1))
    top.add(gdstk.Reference(child, (0, 0)), gdstk.Reference(child, (5000, 0), rotation=0.5))
    (library.write_oas if path.suffix == ".oas" else library.write_gds)(str(path))
    return path


@pytest.mark.parametrize("suffix", [".gds", ".oas"])
def test_references_and_units(suffix: str, tmp_path: Path) -> None:
    """Catches cells left unresolved, or a unit other than the file's."""
    artwork = read_artwork(gds(tmp_path / f"a{suffix}"))
    assert [p.area / 1e12 for p in artwork.layers["copper_top"]] == pytest.approx([1.0, 1.0], rel=1e-5)


@pytest.mark.parametrize("suffix", [".gds", ".oas", ".dxf"])
@pytest.mark.parametrize("share", [0.0, 0.03, 0.3, 0.7, 0.99])
def test_cut_off_files(suffix: str, share: float, tmp_path: Path) -> None:
    """Catches half a board judged as a whole one."""
    path = tmp_path / f"a{suffix}"
    if suffix == ".dxf":
        doc = document()
        Pen(doc).polyline(SLOT)
        save(doc, path)
    else:
        gds(path)
    data = path.read_bytes()
    path.write_bytes(data[: int(share * len(data))])
    refusal(path)


@pytest.mark.parametrize("suffix", [".gds", ".oas", ".dxf"])
@pytest.mark.parametrize("seed", range(4))
def test_corrupt_files(suffix: str, seed: int, tmp_path: Path) -> None:
    """Catches a traceback, or a reader that ends the program, on files with random bytes changed."""
    rng = random.Random(seed)
    path = tmp_path / f"a{suffix}"
    if suffix == ".dxf":
        doc = document()
        Pen(doc).polyline(SLOT)
        save(doc, path)
    else:
        gds(path)
    data = bytearray(path.read_bytes())
    for _ in range(1 + len(data) // 100):
        data[rng.randrange(30, len(data) - 20)] = rng.randrange(256)
    path.write_bytes(bytes(data))
    try:
        read_artwork(path)
    except WrongInputError as error:
        assert all("\n" not in str(fault) for fault in error.faults)


def test_cells_in_a_circle(tmp_path: Path) -> None:
    """Catches cells that refer to each other, which never end."""
    library = gdstk.Library()
    a, b, top = library.new_cell("a"), library.new_cell("b"), library.new_cell("top")
    a.add(gdstk.Reference(b))
    b.add(gdstk.Reference(a))
    top.add(gdstk.Reference(a))
    library.write_gds(str(tmp_path / "a.gds"))
    assert "circle" in refusal(tmp_path / "a.gds")


def test_cells_that_multiply(tmp_path: Path) -> None:
    """Catches a small file that stands for more polygons than any memory holds."""
    library = gdstk.Library()
    cell = library.new_cell("c0")
    cell.add(gdstk.rectangle((0, 0), (1, 1), layer=1))
    for k in range(1, 8):
        outer = library.new_cell(f"c{k}")
        outer.add(gdstk.Reference(cell, columns=30, rows=30, spacing=(2, 2)))
        cell = outer
    library.write_gds(str(tmp_path / "a.gds"))
    assert "polygons" in refusal(tmp_path / "a.gds")


def test_blocks_that_multiply(tmp_path: Path) -> None:
    """Catches a small drawing that stands for more shapes than any memory holds."""
    doc = document()
    Pen(doc, layer="copper_top", space=doc.blocks.new("B0")).circle(0, 0, 1)
    for k in range(1, 6):
        doc.blocks.new(f"B{k}").add_blockref(
            f"B{k - 1}",
            (0, 0),
            dxfattribs={"row_count": 300, "column_count": 300, "row_spacing": 1, "column_spacing": 1},
        )
    doc.modelspace().add_blockref("B5", (0, 0), dxfattribs={"row_count": 30_000, "column_count": 30_000})
    assert "with all blocks resolved" in refusal(save(doc, tmp_path / "a.dxf"))


def test_blocks_in_a_circle(tmp_path: Path) -> None:
    """Catches a block that holds itself."""
    doc = document()
    block = doc.blocks.new("SELF")
    block.add_blockref("SELF", (1, 0))
    doc.modelspace().add_blockref("SELF", (0, 0), dxfattribs={"layer": "copper_top"})
    assert "deep" in refusal(save(doc, tmp_path / "a.dxf"))


def test_a_block_that_is_not_there(tmp_path: Path) -> None:
    """Catches copper left out because its block is missing."""
    doc = document()
    Pen(doc).polyline(SLOT)
    doc.modelspace().add_blockref("NOWHERE", (0, 0))
    assert "not there" in refusal(save(doc, tmp_path / "a.dxf"))


def test_no_file_no_regular_file_no_artwork(tmp_path: Path) -> None:
    """Catches a pipe waited for for ever, and suffixes guessed."""
    assert "no such file" in refusal(tmp_path / "a.gds")
    (tmp_path / "b.dxf").mkdir()
    assert "regular" in refusal(tmp_path / "b.dxf")
    os.mkfifo(tmp_path / "c.gds")
    assert "regular" in refusal(tmp_path / "c.gds")
    assert ".gds, .oas, .dxf" in refusal(tmp_path / "d.pdf")
    (tmp_path / "e.dxf").write_bytes(b"\x89PNG\r\n" + bytes(100))
    assert "another format" in refusal(tmp_path / "e.dxf")


def test_unit_for_a_file_that_states_its_own(tmp_path: Path) -> None:
    """Catches a unit ignored in silence."""
    assert "states its own" in refusal(gds(tmp_path / "a.gds"), unit="mm")
    doc = document(unit=None)
    Pen(doc).polyline(SLOT)
    assert "cubit" in refusal(save(doc, tmp_path / "a.dxf"), unit="cubit")


def test_no_copper_names_the_layers_there(tmp_path: Path) -> None:
    """Catches an empty board judged as clean."""
    doc = document()
    Pen(doc, layer="TOP").polyline(SLOT)
    text = refusal(save(doc, tmp_path / "a.dxf"))
    assert "layers: TOP" in text
    assert "--layers" in text


def layers(tmp_path: Path, text: str) -> Path:
    """Write a layers file."""
    path = tmp_path / "layers.toml"
    path.write_text(text, "utf-8")
    return path


def test_layers_file(tmp_path: Path) -> None:
    """Catches foreign names, numbers or lists of them not taken."""
    doc = ezdxf.new(units=4)
    Pen(doc, layer="TOP").polyline(SLOT)
    Pen(doc, layer="Top pads").polyline([(12, 2), (13, 2), (13, 3), (12, 3)])
    path = save(doc, tmp_path / "a.dxf")
    file = layers(tmp_path, 'format = 1\n[layers]\ncopper_top = ["top", "TOP PADS"]\nprofile = "outline"\n')
    artwork = read_artwork(path, file)
    assert sum(p.area for p in artwork.layers["copper_top"]) / 1e12 == pytest.approx(13.0)
    assert [note.text for note in artwork.notes] == ["nothing is drawn on outline"]
    numbered = layers(tmp_path, "format = 1\n[layers]\ncopper_bottom = [1, 0]\n")
    assert len(read_artwork(gds(tmp_path / "a.gds"), numbered).layers["copper_bottom"]) == 2


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("format = 2\n[layers]\ncopper_top = 'A'\n", "format = 1"),
        ("format = 1\n", "[layers]"),
        ("format = 1\nextra = 2\n[layers]\ncopper_top = 'A'\n", "unknown key"),
        ("format = 1\n[layers]\ncoper_top = 'A'\n", "copper_top"),
        ("format = 1\n[layers]\ncopper_top = 3\n", "datatype"),
        ("format = 1\n[layers]\ncopper_top = [1, -2]\n", "datatype"),
        ("format = 1\n[layers]\ncopper_top = 'A'\ncopper_bottom = 'a'\n", "each layer once"),
        ("format = 1\n[layers\n", "TOML"),
    ],
)
def test_faulty_layers_files(text: str, words: str, tmp_path: Path) -> None:
    """Catches a layers file taken in part, or refused without saying where."""
    doc = document()
    Pen(doc).polyline(SLOT)
    path = save(doc, tmp_path / "a.dxf")
    with pytest.raises(WrongInputError) as caught:
        read_artwork(path, layers(tmp_path, text))
    assert words in str(caught.value)
    assert "layers.toml:" in str(caught.value)
