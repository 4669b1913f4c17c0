"""Two artworks against each other: every change found once, at its place, and nothing else."""

from __future__ import annotations

import io
import random
from collections.abc import Callable
from pathlib import Path

import gdstk
import numpy as np
import pytest

from layoutgen.compare import Comparison, compare, overlay
from layoutgen.foreign import read_artwork

Box = tuple[float, float, float, float]
PADS: dict[str, Box] = {"line": (2, 2, 10, 3), "pad": (14, 2, 16, 4), "ground": (2, 6, 18, 10)}


def board(
    path: Path,
    pads: dict[str, Box] | None = None,
    drills: tuple[tuple[float, float, float], ...] = ((5, 8, 0.3), (9, 8, 0.3)),
    mask: Box = (14, 2, 16, 4),
) -> Path:
    """Write a board of boxes, drills and one mask opening as GDSII [mm]."""
    library = gdstk.Library(unit=1e-3, precision=1e-9)
    cell = library.new_cell("top")
    for x0, y0, x1, y1 in (PADS | (pads or {})).values():
        cell.add(gdstk.rectangle((x0, y0), (x1, y1), layer=1))
    cell.add(gdstk.rectangle((1, 1), (19, 11), layer=2))
    cell.add(gdstk.rectangle(mask[:2], mask[2:], layer=3))
    for x, y, diameter in drills:
        cell.add(gdstk.ellipse((x, y), diameter / 2, tolerance=1e-5, layer=8))
    library.write_gds(str(path))
    return path


def against(tmp_path: Path, **changes: object) -> Comparison:
    """Return what changed from the plain board to another one."""
    return compare(board(tmp_path / "a.gds"), board(tmp_path / "b.gds", **changes))  # type: ignore[arg-type]


def kinds(result: Comparison) -> list[tuple[str, str, str]]:
    return [(change.severity, change.layer, change.kind) for change in result.changes]


def test_equal_boards(tmp_path: Path) -> None:
    """Catches changes invented between equal boards."""
    result = against(tmp_path)
    assert result.equal
    assert result.rows() == []
    assert "equal" in result.summary()


@pytest.mark.parametrize(("more", "equal"), [(0.0009, True), (0.0011, False), (-0.0011, False)])
def test_a_micrometre_of_copper(more: float, equal: bool, tmp_path: Path) -> None:
    """Catches copper that changed by more than a micrometre passed, or less of it found."""
    result = against(tmp_path, pads={"line": (2, 2, 10, 3 + more)})
    assert result.equal is equal
    assert kinds(result) == ([] if equal else [("error", "copper_top", "added" if more > 0 else "removed")])


def test_added_and_removed_copper(tmp_path: Path) -> None:
    """Catches size, place or net of a change wrong."""
    result = against(tmp_path, pads={"line": (2, 2, 9, 3), "stray": (2, 4, 4, 4.5)})
    removed = next(change for change in result.changes if change.kind == "removed")
    added = next(change for change in result.changes if change.kind == "added")
    assert removed.size == pytest.approx(1e6)
    assert 9e6 < removed.at[0] < 10e6 and 2e6 < removed.at[1] < 3e6
    assert removed.net.startswith("net:")
    assert added.net.startswith("new:")
    assert len(result.changes) == 2


def test_moved_copper(tmp_path: Path) -> None:
    """Catches a moved pad reported as removed and added, or by the wrong way."""
    (change,) = against(tmp_path, pads={"pad": (14.05, 2, 16.05, 4)}).changes
    assert (change.kind, change.layer, change.severity) == ("moved", "copper_top", "error")
    assert change.size == pytest.approx(50_000)
    assert "50.0, 0.0 um" in change.text


def test_other_layers_are_notes(tmp_path: Path) -> None:
    """Catches a changed mask taken for an error, or passed."""
    result = against(tmp_path, mask=(14, 2, 16.2, 4))
    assert kinds(result) == [("note", "soldermask_top", "added")]
    assert not result.equal


@pytest.mark.parametrize(
    ("drills", "kind"),
    [
        (((5, 8, 0.3),), "removed"),
        (((5, 8, 0.3), (9, 8, 0.3), (13, 8, 0.3)), "added"),
        (((5, 8, 0.3), (9.1, 8, 0.3)), "moved"),
        (((5, 8, 0.3), (9, 8, 0.4)), "resized"),
    ],
)
def test_holes(drills: tuple[tuple[float, float, float], ...], kind: str, tmp_path: Path) -> None:
    """Catches a hole removed, added, moved or resized that is passed, or told twice."""
    assert kinds(against(tmp_path, drills=drills)) == [("note", "drill_plated", kind)]


def test_joined_and_parted_nets(tmp_path: Path) -> None:
    """Catches a bridge or a cut told as copper only: what it does to the nets is what matters."""
    bridged = against(tmp_path, pads={"bridge": (9.9, 2.4, 14.1, 2.6)})
    assert ("error", "copper_top", "joined") in kinds(bridged)
    (tmp_path / "c").mkdir()
    cut = against(tmp_path / "c", pads={"line": (2, 2, 6, 3), "rest": (6.01, 2, 10, 3)})
    assert ("error", "copper_top", "parted") in kinds(cut)


@pytest.mark.parametrize("seed", range(8))
def test_random_moves(seed: int, tmp_path: Path) -> None:
    """Catches changes lost among many: every pad that was moved is told once, no other is."""
    rng = random.Random(seed)
    pads: dict[str, Box] = {}
    for k in range(12):
        x, y, w = 3.0 * k + 30.0, rng.uniform(2, 5), rng.uniform(0.4, 1.6)
        pads[f"p{k}"] = (x, y, x + w, y + 0.07 * k + 0.5)
    shifted = dict(pads)
    moved = rng.sample(sorted(pads), 4)
    for name in moved:
        x0, y0, x1, y1 = pads[name]
        dx, dy = rng.choice((0.002, 0.02, 0.2)), rng.choice((-0.1, 0.0, 0.1))
        shifted[name] = (x0 + dx, y0 + dy, x1 + dx, y1 + dy)
    result = compare(board(tmp_path / "a.gds", pads), board(tmp_path / "b.gds", shifted))
    assert kinds(result) == [("error", "copper_top", "moved")] * 4
    middles = {(change.at[0] // 10_000) for change in result.changes}
    assert len(middles) == 4


def test_overlay(tmp_path: Path) -> None:
    """Catches a picture without its colours: both grey, removed red, added green."""
    from matplotlib.image import imread

    a, b = (
        read_artwork(board(tmp_path / f"{k}.gds", pads=p))
        for k, p in (("a", None), ("b", {"pad": (15, 2, 17, 4)}))
    )
    data = overlay(compare(a, b), a, b, dpi=50)
    assert data == overlay(compare(a, b), a, b, dpi=50)
    pixels = np.round(imread(io.BytesIO(data))[..., :3] * 255).astype(int)
    seen: Callable[[tuple[int, int, int]], bool] = lambda rgb: bool((pixels == rgb).all(axis=2).any())  # noqa: E731
    assert seen((0xC8, 0xC8, 0xC8)) and seen((0xD1, 0x24, 0x2F)) and seen((0x1A, 0x7F, 0x37))
